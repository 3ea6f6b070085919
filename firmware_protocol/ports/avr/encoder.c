#include "encoder.h"

#include <avr/interrupt.h>
#include <avr/io.h>

#include "pins.h"

volatile int16_t encoder_count;
volatile int8_t encoder_index;

#ifdef WINDCTL_COUNTER

ISR(INT0_vect)
{
    encoder_count++;
}

void encoder_start(void)
{
    PORTD |= _BV(PIN_A);
    EICRA = _BV(ISC01) | _BV(ISC00);
    EIFR = _BV(INTF0);
    EIMSK = _BV(INT0);
}

#else

/* By the channels before << 2 | now; both at once is an error and counts as none. In RAM, where it is read faster. */
static int8_t moves[16] = {0, 1, -1, 0, -1, 0, 0, 1, 1, 0, 0, -1, 0, -1, 1, 0};
static uint8_t channels; /* as last seen, in bits 0 and 1 */
static int8_t way;

#define CHANNELS ((uint8_t)((PIND >> PIN_A) & 3))

ISR(INT0_vect)
{
    uint8_t seen = CHANNELS;
    int8_t move = moves[(uint8_t)(channels << 2) | seen];

    channels = seen;
    if (move) {
        encoder_count += move;
        way = move;
    }
}

ISR(INT1_vect, ISR_ALIASOF(INT0_vect));

ISR(PCINT2_vect)
{
    if (PIND & _BV(PIN_INDEX)) {
        encoder_index = way;
    }
}

void encoder_start(void)
{
    PORTD |= _BV(PIN_A) | _BV(PIN_B); /* pull-ups, for open collectors; the index is pulled low outside */
    channels = CHANNELS;
    EICRA = _BV(ISC00) | _BV(ISC10);
    EIFR = _BV(INTF0) | _BV(INTF1);
    EIMSK = _BV(INT0) | _BV(INT1);
    PCMSK2 = _BV(PIN_INDEX);
    PCIFR = _BV(PCIF2);
    PCICR = _BV(PCIE2);
}

#endif
