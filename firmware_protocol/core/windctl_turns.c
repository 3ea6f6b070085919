#include "windctl_turns.h"

#include "windctl_seams.h"

void windctl_turns_configure(struct windctl_turns *turns, uint16_t counts_per_turn, int32_t count)
{
    turns->counts_per_turn = counts_per_turn;
    turns->end = windctl_plus(count, counts_per_turn);
    turns->tension = 0;
    turns->whole = 0;
    turns->began = 0;
    turns->index_known = 0;
    turns->index_place = 0;
}

void windctl_turns_start(struct windctl_turns *turns, uint32_t ticks, int32_t count)
{
    turns->whole = 0;
    turns->began = ticks;
    turns->tension_sum = 0;
    turns->index_at = count;
}

void windctl_turns_move(struct windctl_turns *turns, int32_t by)
{
    turns->end = windctl_plus(turns->end, by);
    turns->index_known = 0;
}

void windctl_turns_back(struct windctl_turns *turns, int32_t count)
{
    while (count < windctl_minus(turns->end, turns->counts_per_turn)) {
        turns->end = windctl_minus(turns->end, turns->counts_per_turn);
    }
}

uint8_t windctl_turns_passed(struct windctl_turns *turns, uint32_t ticks, int32_t count)
{
    uint32_t n = ticks - turns->began;
    uint8_t fresh = turns->whole && n > 0 && n <= WINDCTL_TURN_LONGEST;

    while (count >= turns->end) {
        turns->end = windctl_plus(turns->end, turns->counts_per_turn);
    }
    if (fresh) {
        turns->tension = (uint16_t)(turns->tension_sum / n);
    }
    turns->whole = 1;
    turns->began = ticks;
    turns->tension_sum = 0;
    return fresh;
}

int32_t windctl_turns_index(struct windctl_turns *turns, int32_t count, int16_t counted)
{
    int32_t began = windctl_minus(turns->end, turns->counts_per_turn);
    int32_t place = windctl_minus(windctl_minus(count, counted > 0 ? counted >> 1 : 0), began);
    int32_t half = turns->counts_per_turn / 2;
    int32_t off;

    turns->index_at = count;
    if (!turns->index_known) {
        turns->index_known = 1;
        turns->index_place = place;
        return 0;
    }
    off = windctl_minus(place, turns->index_place);
    if (off > half) {
        off = windctl_minus(off, turns->counts_per_turn);
    } else if (off < -half) {
        off = windctl_plus(off, turns->counts_per_turn);
    }
    return off >= 0 ? off : windctl_minus(0, off);
}

int32_t windctl_turns_since_index(const struct windctl_turns *turns, int32_t count)
{
    return windctl_minus(count, turns->index_at);
}
