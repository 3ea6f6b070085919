/* Three bytes come. The first waits while another is sent; two wait together. What was read stands in `seen`. */
#include <avr/io.h>
#include <util/delay.h>

volatile uint8_t seen[3];
volatile uint8_t done;

int main(void)
{
    UBRR0 = 16;
    UCSR0A = _BV(U2X0);
    UCSR0B = _BV(RXEN0) | _BV(TXEN0);
    while (!(UCSR0A & _BV(RXC0))) {
    }
    UDR0 = 0x55;
    seen[0] = UDR0;
    _delay_us(300);
    seen[1] = UDR0;
    seen[2] = UDR0;
    done = 1;
    for (;;) {
        PORTB ^= 1; /* the emulator stops at a loop that does nothing */
    }
}
