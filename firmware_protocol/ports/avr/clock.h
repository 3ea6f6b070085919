/* Timer1: the tick, and the spindle's steps between two ticks. It runs free at the processor's 16 MHz; the tick is
 * compare match B, each 16000 further; a step is compare match A.
 *
 * A rate of r gives r steps in a second, whatever the ticks' phase: each tick adds the rate to an accumulator, each
 * full 1000 is a step, and a step comes when the accumulator would pass 1000 if it grew steadily. The steps of a
 * rate come in the millisecond that begins with the next tick, so that the core's own time never moves a step;
 * the core is told of them at that tick's beginning, when they can no more be taken back. */
#ifndef WINDCTL_CLOCK_H
#define WINDCTL_CLOCK_H

#include <stdint.h>

#define CYCLES_PER_TICK 16000u

/* What the beginning of a tick found. */
struct tick {
    int16_t counts;  /* since the tick before, as the encoder turns */
    uint16_t issued; /* spindle steps, those of the millisecond that begins now included */
    int8_t index;    /* 0: no index pulse; else the way the encoder turned at it, +1 or -1 */
};

void clock_start(void);

/* 1 if a tick began that was not taken yet; then `tick` is what it found. */
uint8_t clock_tick(struct tick *tick);

/* Steps per second from the next tick on. */
void clock_rate(uint16_t rate);

#endif
