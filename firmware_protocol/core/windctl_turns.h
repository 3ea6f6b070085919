/* Whole turns of the spindle: the mean tension of each, and whether the index pulse comes where it should. */
#ifndef WINDCTL_TURNS_H
#define WINDCTL_TURNS_H

#include "windctl_figures.h"

/* Where the present turn ends, and what is known of the last one. Boundaries lie where they lie: a datum moves
 * them along with the count, so that the index keeps its place in the turn. */
struct windctl_turns {
    uint32_t tension_sum; /* of the ticks of this turn; only used for turns of at most 65535 ticks */
    uint32_t began;       /* tick */
    int32_t end;          /* count */
    int32_t index_at;     /* count at the last index, or at the start */
    int32_t index_place;  /* counts from where a turn begins */
    uint16_t counts_per_turn;
    uint16_t tension; /* mean of the last whole turn, sensor units */
    uint8_t whole;    /* the present turn was seen from its beginning */
    uint8_t index_known;
};

/* Begin to count turns of another length, at least 1. */
void windctl_turns_configure(struct windctl_turns *turns, uint16_t counts_per_turn, int32_t count);

/* Winding begins: the turn that is under way now is not a whole one. */
void windctl_turns_start(struct windctl_turns *turns, uint32_t ticks, int32_t count);

/* The count was set anew, `by` counts away; where the index stands in it must be learnt again. */
void windctl_turns_move(struct windctl_turns *turns, int32_t by);

/* The count went back. */
void windctl_turns_back(struct windctl_turns *turns, int32_t count);

/* The count reached `end`. 1 if the turn that ends was whole, so that `tension` is new. */
uint8_t windctl_turns_passed(struct windctl_turns *turns, uint32_t ticks, int32_t count);

/* The index pulse came within the last `counted` counts. Returns counts away from its place, at least 0. */
int32_t windctl_turns_index(struct windctl_turns *turns, int32_t count, int16_t counted);

/* Counts since the last index, or since the start. */
int32_t windctl_turns_since_index(const struct windctl_turns *turns, int32_t count);

#endif
