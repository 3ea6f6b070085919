#include "windctl_spindle.h"

#define MILLI 1000u

/* The highest pace with v*v <= 2*decel*4: one that four steps suffice to stand from. Bit by bit: it is below 1024. */
static uint16_t creep_pace(uint16_t decel)
{
    uint32_t bound = 8 * (uint32_t)decel;
    uint16_t creep = 0;
    uint16_t bit;

    for (bit = 512; bit; bit >>= 1) {
        uint32_t more = (uint32_t)creep + bit;

        if (more * more <= bound) {
            creep = (uint16_t)more;
        }
    }
    return creep;
}

void windctl_spindle_configure(struct windctl_spindle *spindle, uint16_t counts_per_turn, uint16_t steps_per_turn,
                               uint16_t accel, uint16_t decel)
{
    spindle->counts_per_turn = counts_per_turn;
    spindle->steps_per_turn = steps_per_turn;
    spindle->accel = accel;
    spindle->decel = decel;
    spindle->left_limit = UINT32_MAX / (2 * (uint32_t)decel);
    spindle->gap_limit = INT32_MAX / (int32_t)steps_per_turn;
    spindle->coarse = counts_per_turn < steps_per_turn;
    spindle->creep_pace = creep_pace(decel);
    spindle->pace = spindle->pace_now = 0;
}

static void choose_pace(struct windctl_spindle *spindle)
{
    spindle->pace_now =
        spindle->creeping && spindle->pace > spindle->creep_pace ? spindle->creep_pace : spindle->pace;
}

void windctl_spindle_set_pace(struct windctl_spindle *spindle, uint16_t pace)
{
    spindle->pace = pace;
    choose_pace(spindle);
}

/* Issued minus counted since it set out, in 1/steps_per_turn count. */
static int32_t error_at(const struct windctl_spindle *spindle, int32_t count)
{
    uint32_t steps = spindle->issued - spindle->seen_issued;
    uint32_t counted = (uint32_t)windctl_minus(count, spindle->seen_count);

    return (int32_t)((uint32_t)spindle->err + steps * spindle->counts_per_turn - counted * spindle->steps_per_turn);
}

/* How far the issued steps are ahead of the count, in 1/counts_per_turn step. */
static uint32_t lead(const struct windctl_spindle *spindle, int32_t count)
{
    int32_t ahead;

    if (spindle->mode == WINDCTL_REST) {
        return 0;
    }
    ahead = windctl_minus(error_at(spindle, count), spindle->taken);
    return ahead > 0 ? (uint32_t)ahead : 0;
}

void windctl_spindle_set_out(struct windctl_spindle *spindle, int32_t count, int32_t goal)
{
    spindle->mode = WINDCTL_RUN;
    spindle->v = spindle->ramp = 0;
    spindle->issued = spindle->seen_issued = 0;
    spindle->err = 0;
    spindle->placed = !spindle->coarse;
    spindle->taken = spindle->placed ? 0 : 1 - (int32_t)spindle->steps_per_turn; /* as if the next step counted */
    spindle->seen_count = spindle->edge_at = count;
    windctl_spindle_aim(spindle, count, goal);
    spindle->creeping = 0;
    choose_pace(spindle);
}

void windctl_spindle_aim(struct windctl_spindle *spindle, int32_t count, int32_t goal)
{
    if (goal != spindle->goal) {
        spindle->creeping = 0;
        choose_pace(spindle);
    }
    spindle->goal = goal;
    spindle->stand_at = spindle->issued + windctl_spindle_steps_to(spindle, count, goal);
}

uint32_t windctl_spindle_steps_to(const struct windctl_spindle *spindle, int32_t count, int32_t goal)
{
    uint32_t gap, units, ahead;

    if (goal <= count) {
        return 0;
    }
    gap = (uint32_t)goal - (uint32_t)count;
    if (gap > (uint32_t)spindle->gap_limit) {
        gap = (uint32_t)spindle->gap_limit;
    }
    units = gap * spindle->steps_per_turn;
    ahead = lead(spindle, count);
    return units > ahead ? (units - ahead) / spindle->counts_per_turn : 0;
}

int32_t windctl_spindle_nearest_stand(const struct windctl_spindle *spindle, int32_t count)
{
    uint32_t v = spindle->v;
    uint32_t two_decel = 2 * (uint32_t)spindle->decel;
    uint32_t steps = (v * v + two_decel - 1) / two_decel + v / MILLI + 2;
    uint32_t units = steps * spindle->counts_per_turn + lead(spindle, count);
    uint32_t counts = (units + spindle->steps_per_turn - 1) / spindle->steps_per_turn;

    return windctl_plus(count, (int32_t)counts);
}

/* A coarse counter has counted: at this very step the place is known better than in between. */
static void edge(struct windctl_spindle *spindle, int32_t count)
{
    int32_t error = error_at(spindle, count);

    spindle->edge_at = count;
    if (error < spindle->taken || !spindle->placed) {
        spindle->taken = error;
        spindle->placed = 1;
    }
    windctl_spindle_aim(spindle, count, spindle->goal);
}

/* Whole steps/s by which the pace may change in this tick, at `rate` steps/s2. */
static uint16_t change(struct windctl_spindle *spindle, uint16_t rate)
{
    uint32_t ramp = (uint32_t)spindle->ramp + rate;
    uint16_t whole = 0;

    while (ramp >= MILLI) {
        ramp -= MILLI;
        whole++;
    }
    spindle->ramp = (uint16_t)ramp;
    return whole;
}

static uint16_t slower(struct windctl_spindle *spindle, uint16_t v, uint16_t least)
{
    uint16_t by = change(spindle, spindle->decel);
    uint16_t most = v > least ? (uint16_t)(v - least) : 0;

    return (uint16_t)(v - (by < most ? by : most));
}

static uint16_t faster(struct windctl_spindle *spindle, uint16_t v, uint32_t bound)
{
    uint16_t by = change(spindle, spindle->accel);

    while (by && v < spindle->pace_now && ((uint32_t)v + 1) * ((uint32_t)v + 1) <= bound) {
        v++;
        by--;
    }
    return v;
}

void windctl_spindle_step(struct windctl_spindle *spindle, uint16_t issued, int32_t count)
{
    uint16_t v = spindle->v;
    uint32_t bound;
    int32_t left;

    spindle->issued += issued;
    if (spindle->coarse && count != spindle->edge_at) {
        edge(spindle, count);
    }
    left = (int32_t)(spindle->stand_at - spindle->issued);
    if (left <= 0 || count >= spindle->goal) {
        spindle->v = 0;
        spindle->mode = spindle->mode == WINDCTL_RUN ? WINDCTL_SETTLE : WINDCTL_REST;
        return;
    }
    bound = (uint32_t)left > spindle->left_limit ? UINT32_MAX : 2 * (uint32_t)spindle->decel * (uint32_t)left;
    if (spindle->mode == WINDCTL_BRAKE) {
        v = slower(spindle, v, 0);
        if (v == 0) {
            spindle->mode = WINDCTL_REST;
        }
    } else if ((uint32_t)v * v > bound) {
        v = slower(spindle, v, 1);
    } else if (v == spindle->pace_now) {
        return;
    } else if (v > spindle->pace_now) {
        v = slower(spindle, v, spindle->pace_now);
    } else {
        v = faster(spindle, v, bound);
    }
    spindle->v = v;
}

void windctl_spindle_brake(struct windctl_spindle *spindle)
{
    spindle->mode = spindle->v == 0 ? WINDCTL_REST : WINDCTL_BRAKE;
}

void windctl_spindle_cut(struct windctl_spindle *spindle)
{
    spindle->mode = WINDCTL_REST;
    spindle->v = 0;
}

int32_t windctl_spindle_check(struct windctl_spindle *spindle, int32_t count)
{
    int32_t error = error_at(spindle, count);

    /* Beyond any slip limit the figure means nothing more, but it must keep its sign. */
    if (error > WINDCTL_ERROR_LIMIT) {
        error = WINDCTL_ERROR_LIMIT;
    } else if (error < -WINDCTL_ERROR_LIMIT) {
        error = -WINDCTL_ERROR_LIMIT;
    }
    spindle->err = error;
    spindle->seen_issued = spindle->issued;
    spindle->seen_count = count;
    return error;
}

uint8_t windctl_spindle_creep(struct windctl_spindle *spindle, int32_t count)
{
    spindle->taken = error_at(spindle, count);
    if (windctl_spindle_steps_to(spindle, count, spindle->goal) == 0) {
        return 0;
    }
    windctl_spindle_aim(spindle, count, spindle->goal);
    spindle->mode = WINDCTL_RUN;
    spindle->creeping = 1;
    choose_pace(spindle);
    return 1;
}
