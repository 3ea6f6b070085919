/* Plays traces that trace.py records: inputs of every tick, and the outputs that have to come of them. */
#ifndef WINDCTL_PLAY_H
#define WINDCTL_PLAY_H

#include <stddef.h>
#include <stdint.h>

enum {
    WINDCTL_PLAY_EQUAL = -1,   /* every output of every tick was the recorded one */
    WINDCTL_PLAY_NO_TRACE = -2 /* the bytes are no trace */
};

/* Play a trace on a board of its own. Returns the tick, counted from 0 over the whole trace, whose outputs differ
 * first, or one of the above. `ticks` takes the number of ticks played. */
int64_t windctl_play(const uint8_t *trace, size_t size, uint32_t *ticks);

#endif
