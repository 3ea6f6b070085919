#include "line.h"

#include <avr/interrupt.h>
#include <avr/io.h>
#include <util/atomic.h>

#include "windctl_seams.h"

#define U2X_115200 16 /* 16 MHz / 8 / 17: 117647 baud, 2.1 % fast */

uint8_t line_sent[WINDCTL_SENT_RING];
volatile uint8_t line_overruns;

static uint8_t received[2][LINE_RECEIVED_MOST]; /* one is filled while the other is read */
static volatile uint8_t filling;
static volatile uint8_t filled;
static volatile uint8_t begin, end;

ISR(USART_RX_vect)
{
    uint8_t status = UCSR0A;
    uint8_t byte = UDR0;
    uint8_t place = filled;

    if (status & _BV(DOR0)) {
        line_overruns++;
    }
    if (place < LINE_RECEIVED_MOST) {
        received[filling][place] = byte;
        filled = place + 1;
    } else {
        line_overruns++;
    }
}

ISR(USART_UDRE_vect)
{
    uint8_t at = begin;

    if (at == end) {
        UCSR0B &= (uint8_t)~_BV(UDRIE0);
        return;
    }
    UDR0 = line_sent[at];
    begin = (uint8_t)((at + 1) & (WINDCTL_SENT_RING - 1));
}

void line_start(void)
{
    UBRR0 = U2X_115200;
    UCSR0A = _BV(U2X0);
    UCSR0C = _BV(UCSZ01) | _BV(UCSZ00);
    UCSR0B = _BV(RXEN0) | _BV(TXEN0) | _BV(RXCIE0);
}

uint8_t line_received(const uint8_t **bytes)
{
    uint8_t size;

    ATOMIC_BLOCK(ATOMIC_FORCEON)
    {
        *bytes = received[filling];
        size = filled;
        filling ^= 1;
        filled = 0;
    }
    return size;
}

uint8_t line_begin(void)
{
    return begin;
}

void line_send(uint8_t to)
{
    if (to != end) {
        end = to;
        UCSR0B |= _BV(UDRIE0);
    }
}
