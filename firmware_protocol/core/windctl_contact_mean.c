#include "windctl_contact_mean.h"

#include "windctl_seams.h"

#define OPEN 0xFFFFu /* a sample at the end of the scale */

static void begin(struct windctl_contact_mean *mean, uint32_t ticks, int32_t count, uint8_t turning)
{
    mean->waiting = 0;
    mean->started = ticks;
    mean->turning = turning;
    mean->count_first = count;
    mean->filled = 0;
    mean->at = 0;
    mean->box = 0;
    mean->turn_end = 0;
    mean->window_ticks = 0;
    mean->sum = 0;
    mean->open = 0;
}

void windctl_mean_start(struct windctl_contact_mean *mean, uint16_t window, uint16_t every, uint32_t ticks,
                        int32_t count, uint8_t turning)
{
    mean->active = window != 0;
    mean->window = window;
    mean->every = every;
    begin(mean, ticks, count, turning);
}

/* Half of it, towards zero. */
static int32_t half(int32_t span)
{
    return span >= 0 ? span >> 1 : -(int32_t)((0 - (uint32_t)span) >> 1);
}

static void finish(struct windctl_contact_mean *mean, int32_t count)
{
    int32_t span = windctl_minus(count, mean->count_first);

    mean->turned = mean->turning;
    mean->middle = windctl_plus(mean->count_first, half(span));
    if (mean->every) {
        mean->waiting = 1;
    } else {
        mean->active = 0;
    }
}

uint8_t windctl_mean_sample(struct windctl_contact_mean *mean, uint16_t contact, uint32_t ticks, int32_t count,
                            uint8_t turning, uint16_t counts_per_turn)
{
    uint8_t at, whole = 1;

    if (mean->waiting) {
        if (ticks - mean->started < mean->every) {
            return 0;
        }
        begin(mean, ticks, count, turning);
    } else if (turning != mean->turning || mean->window_ticks == WINDCTL_WINDOW_LONGEST) {
        begin(mean, ticks, count, turning);
    }
    if (contact == OPEN) {
        mean->open = 1;
    }
    at = mean->at;
    mean->box += contact;
    if (mean->filled == WINDCTL_CONTACT_BOX) {
        mean->box -= mean->ring[at];
    }
    mean->ring[at] = contact;
    mean->at = (uint8_t)(at < WINDCTL_CONTACT_BOX - 1 ? at + 1 : 0);
    if (mean->filled < WINDCTL_CONTACT_BOX) {
        mean->filled++;
        if (mean->filled < WINDCTL_CONTACT_BOX) {
            return 0;
        }
        mean->turn_end = windctl_plus(count, counts_per_turn);
    }
    if (turning) {
        if (count < mean->turn_end) {
            whole = 0;
        } else {
            mean->turn_end = windctl_plus(mean->turn_end, counts_per_turn);
        }
    }
    if (whole && mean->window_ticks >= mean->window) {
        finish(mean, count);
        return 1;
    }
    mean->window_ticks++;
    mean->sum += mean->box;
    return 0;
}

uint32_t windctl_mean_value(const struct windctl_contact_mean *mean)
{
    uint32_t divisor = (uint32_t)WINDCTL_CONTACT_BOX * mean->window_ticks;

    return (uint32_t)((16 * mean->sum + divisor / 2) / divisor);
}
