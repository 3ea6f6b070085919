/* The contact's reading: a boxcar of 100 ticks, averaged over a window.
 *
 * 100 ms are whole cycles of 50 and of 60 Hz, so the boxcar leaves nothing of the mains hum that thousands of
 * turns pick up. A window taken while the spindle turns is made longer until it covers whole revolutions, so
 * that nothing is left of what a wobbling axis generates once a turn either. Readings do not share samples. */
#ifndef WINDCTL_CONTACT_MEAN_H
#define WINDCTL_CONTACT_MEAN_H

#include "windctl_figures.h"

struct windctl_contact_mean {
    uint64_t sum;          /* of the boxcar over the window */
    uint32_t box;          /* sum over the ring */
    uint32_t started;      /* tick of the first sample */
    int32_t count_first;   /* count at that tick */
    int32_t turn_end;      /* count that completes a revolution */
    int32_t middle;        /* result: count at the middle of the window */
    uint16_t window;       /* ticks asked for */
    uint16_t every;        /* ticks from one reading's start to the next one's; 0: only one */
    uint16_t window_ticks; /* result: ticks of the window */
    uint8_t active;        /* readings are wanted */
    uint8_t waiting;       /* for the next reading's time */
    uint8_t turning;       /* this reading is taken while the spindle turns */
    uint8_t turned;        /* result: it was */
    uint8_t open;          /* result: at least one sample was at the end of the scale */
    uint8_t filled;        /* samples in the ring */
    uint8_t at;            /* place of the next one */
    uint16_t ring[WINDCTL_CONTACT_BOX];
};

/* Readings over `window` ticks, a new one every `every` ticks at the earliest; window 0 ends them. */
void windctl_mean_start(struct windctl_contact_mean *mean, uint16_t window, uint16_t every, uint32_t ticks,
                        int32_t count, uint8_t turning);

/* Take one tick's sample. 1 when it completes a reading, whose results then stand in the fields. */
uint8_t windctl_mean_sample(struct windctl_contact_mean *mean, uint16_t contact, uint32_t ticks, int32_t count,
                            uint8_t turning, uint16_t counts_per_turn);

/* The mean just completed, in 1/16 of the contact's unit, rounded to nearest. The one division of a reading. */
uint32_t windctl_mean_value(const struct windctl_contact_mean *mean);

#endif
