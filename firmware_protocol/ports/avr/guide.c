#include "guide.h"

#include <avr/interrupt.h>
#include <avr/io.h>
#include <avr/pgmspace.h>
#include <util/atomic.h>
#include <util/delay.h>

#include "pins.h"

#define PULSE_US 2
#define SOON 5        /* of 4 us */
#define SHORTEST 8    /* of 4 us: 32 us between two steps */
#define MANY 22       /* so many steps and more come at that distance */

static volatile int16_t owed; /* steps */
static volatile uint8_t interval;

/* 0.7 ms over 1 to 21 steps, in 4 us. */
static const uint8_t intervals[MANY - 1] PROGMEM = {175, 87, 58, 43, 35, 29, 25, 21, 19, 17, 15,
                                                    14,  13, 12, 11, 10, 10, 9,  9,  8,  8};

ISR(TIMER2_COMPA_vect)
{
    uint8_t back = PORTD & _BV(PIN_GUIDE_WAY);
    int16_t left = owed;

    if (left == 0) {
        TIMSK2 = 0;
        return;
    }
    if ((left < 0) != (back != 0)) { /* the drive sees the way well before the step */
        PORTD ^= _BV(PIN_GUIDE_WAY);
        OCR2A += SOON;
        return;
    }
    PORTD |= _BV(PIN_GUIDE_STEP);
    OCR2A += interval;
    owed = left < 0 ? left + 1 : left - 1;
    _delay_us(PULSE_US);
    PORTD &= (uint8_t)~_BV(PIN_GUIDE_STEP);
}

void guide_start(void)
{
    TCCR2A = 0;
    TCCR2B = _BV(CS22); /* 16 MHz / 64 */
}

void guide_move(int16_t steps)
{
    uint16_t left;

    ATOMIC_BLOCK(ATOMIC_FORCEON)
    {
        owed += steps;
        left = (uint16_t)(owed < 0 ? -owed : owed);
    }
    if (left == 0) {
        return;
    }
    interval = left < MANY ? pgm_read_byte(&intervals[left - 1]) : SHORTEST;
    ATOMIC_BLOCK(ATOMIC_FORCEON)
    {
        if (!(TIMSK2 & _BV(OCIE2A))) {
            OCR2A = (uint8_t)(TCNT2 + SOON);
            TIFR2 = _BV(OCF2A);
            TIMSK2 = _BV(OCIE2A);
        }
    }
}
