/* The queue of segments, and the line the guide follows through them.
 *
 * Within a segment of N counts and G guide steps the guide stands, after k counts, at
 * sign(G) * floor((k*|G| + N/2) / N) steps from where the segment began: an accumulator that starts at N/2, to
 * which each count adds |G| and from which each N takes a step (Bresenham 1965). The line follows the
 * spindle's high-water count: going back takes no guide step back. */
#ifndef WINDCTL_GUIDE_LINE_H
#define WINDCTL_GUIDE_LINE_H

#include "windctl_figures.h"
#include "windctl_seams.h"

struct windctl_guide_line {
    uint32_t program;   /* named by the host: SetDatum, Lay */
    uint32_t base;      /* index of the first segment after the last SetDatum; indexes wrap */
    uint32_t next;      /* first segment not yet laid */
    uint32_t executing; /* segment being wound */
    uint32_t behind;    /* counts below high water */
    uint32_t pending;   /* counts above what the guide has followed */
    uint32_t acc;       /* at most 65535 + 65535 * 65535 */
    int32_t end;        /* the count at which the queue ends */
    uint16_t into;      /* counts of segment `base` that were wound before */
    uint16_t crc;       /* over segments base .. next - 1 as laid */
    uint16_t n;         /* counts of the executing segment */
    uint16_t left;      /* counts left of it; 0: out of segments */
    uint16_t slope;     /* its guide steps, without sign */
    int8_t sign;        /* their sign, +1 or -1 */
    uint16_t counts[WINDCTL_QUEUE]; /* a ring: segment i lives at i modulo WINDCTL_QUEUE */
    int16_t steps[WINDCTL_QUEUE];
};

/* Empty the queue and stand at `count`, `into` counts inside segment `first`. */
void windctl_line_datum(struct windctl_guide_line *line, uint32_t program, int32_t count, uint32_t first,
                        uint16_t into);

/* Free places in the queue. */
uint16_t windctl_line_free(const struct windctl_guide_line *line);

/* Place of the first of n packed segments (n >= 1) that cannot be followed, or n if all can. */
uint8_t windctl_line_bad_segment(const struct windctl_guide_line *line, uint8_t n, const uint8_t *packed);

/* Counts that n packed segments, checked before, would add to the queue. */
uint32_t windctl_line_length(const struct windctl_guide_line *line, uint8_t n, const uint8_t *packed);

/* Lay n segments that were checked before. */
void windctl_line_append(struct windctl_guide_line *line, uint8_t n, const uint8_t *packed);

/* Guide steps for this many counts, signed, with the spindle driven and the guide powered. What is pending from
 * before is caught up with besides, at 16 counts a call. */
int32_t windctl_line_follow(struct windctl_guide_line *line, int32_t counts);

/* Count without following: the guide is not powered, or follows later. */
void windctl_line_wait(struct windctl_guide_line *line, int32_t counts);

/* Whether the guide has a way to go that segments already tell. */
uint8_t windctl_line_lagging(const struct windctl_guide_line *line);

/* Follow what is pending, at rest: at most one step and 16 counts in a tick. */
int32_t windctl_line_catch_up(struct windctl_guide_line *line);

#endif
