/* The serial line: 115200 baud, 8 data bits, no parity, 1 stop bit. */
#ifndef WINDCTL_LINE_H
#define WINDCTL_LINE_H

#include <stdint.h>

/* Bytes that may come between two calls of line_received; a tick of 1 ms brings 12. */
#define LINE_RECEIVED_MOST 48

extern uint8_t line_sent[]; /* ring of WINDCTL_SENT_RING bytes */

/* Bytes that came too fast to be taken, by the chip or by the buffer. */
extern volatile uint8_t line_overruns;

void line_start(void);

/* What came since the last call; it stays until the next. Returns the number of bytes. */
uint8_t line_received(const uint8_t **bytes);

/* The first place of `line_sent` that is not on the line yet. */
uint8_t line_begin(void);

/* Bytes up to before this place may go. */
void line_send(uint8_t end);

#endif
