#include "windctl_board.h"

/* The order of the checks is part of the protocol: type, boot and epoch, state, then the rest as written below.
 * Each function does its command and returns WINDCTL_ACCEPTED, or changes nothing and returns a refusal. */

#define OFF (1 << WINDCTL_STATE_DRIVES_OFF)
#define READY (1 << WINDCTL_STATE_READY)
#define TURNING (1 << WINDCTL_STATE_TURNING)
#define HELD (1 << WINDCTL_STATE_HELD)
#define TRIPPED (1 << WINDCTL_STATE_TRIPPED)

/* By code: bit n set, legal in state n; 0: no numbered command. */
static const uint8_t legal[] WINDCTL_ROM = {
    0, /* no message */
    0, /* Greet: heard in every state */
    OFF, /* Setup */
    OFF, /* Arm */
    READY | HELD, /* Disarm */
    OFF | READY | TURNING | HELD, /* Lay */
    READY | TURNING | HELD, /* Pace */
    READY | TURNING | HELD, /* StopAt */
    READY | HELD, /* Go */
    0, /* Hold: heard in every state */
    READY | HELD, /* GuideTo */
    OFF | READY | HELD | TRIPPED, /* SetDatum */
    OFF | READY | TURNING | HELD | TRIPPED, /* Measure */
    TRIPPED, /* ClearTrip */
};

WINDCTL_ASSERT(table_of_states_follows_the_codes, WINDCTL_SETUP_CODE == 2 && WINDCTL_ARM_CODE == 3 &&
               WINDCTL_DISARM_CODE == 4 && WINDCTL_LAY_CODE == 5 && WINDCTL_PACE_CODE == 6 &&
               WINDCTL_STOP_AT_CODE == 7 && WINDCTL_GO_CODE == 8 && WINDCTL_GUIDE_TO_CODE == 10 &&
               WINDCTL_SET_DATUM_CODE == 11 && WINDCTL_MEASURE_CODE == 12 && WINDCTL_CLEAR_TRIP_CODE == 13);

static uint8_t within(uint32_t value, uint32_t low, uint32_t high, int32_t *limit)
{
    if (value < low) {
        *limit = (int32_t)low;
        return 0;
    }
    if (value > high) {
        *limit = (int32_t)high;
        return 0;
    }
    return 1;
}

static uint8_t inputs_open(const struct windctl_core *core)
{
    uint8_t needed = WINDCTL_INPUT_BIT_STOP_OK | WINDCTL_INPUT_BIT_GUARD_OK;

    if (core->setup.fitted & WINDCTL_CAPABILITY_GUIDE_STEP) {
        needed |= WINDCTL_PINS_GUIDE;
    }
    return (core->pins & needed) != needed;
}

static uint8_t is_present_setup(const struct windctl_core *core, const uint8_t *body)
{
    uint8_t present[WINDCTL_SETUP_SIZE];
    uint8_t place;

    windctl_encode_setup(&core->setup, present);
    for (place = 0; place < WINDCTL_SETUP_SIZE; place++) {
        if (present[place] != body[place]) {
            return 0;
        }
    }
    return core->has_setup;
}

static uint8_t setup(struct windctl_core *core, const uint8_t *body, int32_t *value)
{
    struct windctl_setup next;
    uint8_t fittable = core->config.capabilities & WINDCTL_FITTABLE;

    if (is_present_setup(core, body)) {
        return WINDCTL_ACCEPTED; /* place and program stay */
    }
    windctl_decode_setup(body, &next);
    if (next.fitted & ~fittable) {
        *value = fittable;
        return WINDCTL_REFUSAL_NOT_FITTED;
    }
    if (!within(next.counts_per_turn, 1, WINDCTL_COUNTS_PER_TURN_LIMIT, value) ||
        !within(next.steps_per_turn, 1, WINDCTL_STEPS_PER_TURN_LIMIT, value) ||
        !within(next.max_count, 1, (uint32_t)WINDCTL_COUNT_LIMIT, value) ||
        !within(next.max_pace, 1, WINDCTL_PACE_LIMIT, value) ||
        !within(next.accel, WINDCTL_RATE_MIN, UINT16_MAX, value) ||
        !within(next.decel, WINDCTL_RATE_MIN, UINT16_MAX, value) ||
        !within(next.max_pace, 1, (uint32_t)WINDCTL_STANDS_WITHIN * next.decel, value)) {
        return WINDCTL_REFUSAL_RANGE;
    }
    if (next.guide_max < next.guide_min) {
        *value = next.guide_min;
        return WINDCTL_REFUSAL_RANGE;
    }
    if (!within(next.tension_high, next.tension_low, UINT16_MAX, value) || !within(next.rotation, 0, 1, value)) {
        return WINDCTL_REFUSAL_RANGE;
    }
    windctl_set_up(core, &next, windctl_crc_over(WINDCTL_CRC_START, body, WINDCTL_SETUP_SIZE));
    return WINDCTL_ACCEPTED;
}

static uint8_t arm(struct windctl_core *core, int32_t *value)
{
    if (!core->has_setup) {
        return WINDCTL_REFUSAL_NO_SETUP;
    }
    if (!core->standing) {
        return WINDCTL_REFUSAL_MOVING;
    }
    if (inputs_open(core)) {
        *value = core->pins;
        return WINDCTL_REFUSAL_INPUT_OPEN;
    }
    if (core->setup.fitted & WINDCTL_CAPABILITY_PEDAL && core->pins & WINDCTL_INPUT_BIT_PEDAL_DOWN) {
        return WINDCTL_REFUSAL_PEDAL_DOWN;
    }
    windctl_enter(core, WINDCTL_STATE_READY, WINDCTL_CAUSE_ARM);
    return WINDCTL_ACCEPTED;
}

static uint8_t disarm(struct windctl_core *core)
{
    if (!core->standing) {
        return WINDCTL_REFUSAL_MOVING;
    }
    windctl_enter(core, WINDCTL_STATE_DRIVES_OFF, WINDCTL_CAUSE_DISARM);
    return WINDCTL_ACCEPTED;
}

static uint8_t lay(struct windctl_core *core, const uint8_t *body, int32_t *value)
{
    struct windctl_guide_line *line = &core->line;
    struct windctl_lay next;
    uint16_t free;
    uint8_t bad;

    windctl_decode_lay(body, &next);
    if (!(core->setup.fitted & WINDCTL_CAPABILITY_GUIDE_STEP)) {
        return WINDCTL_REFUSAL_NOT_FITTED;
    }
    if (next.program != line->program) {
        return WINDCTL_REFUSAL_PROGRAM;
    }
    if (next.first != line->next) {
        *value = (int32_t)line->next;
        return WINDCTL_REFUSAL_GAP;
    }
    if (next.n < 1 || next.n > WINDCTL_SEGMENTS_PER_LAY) {
        *value = WINDCTL_SEGMENTS_PER_LAY;
        return WINDCTL_REFUSAL_RANGE;
    }
    free = windctl_line_free(line);
    if (next.n > free) {
        *value = free;
        return WINDCTL_REFUSAL_QUEUE_FULL;
    }
    bad = windctl_line_bad_segment(line, next.n, next.segments);
    if (bad < next.n) {
        *value = bad;
        return WINDCTL_REFUSAL_SEGMENT;
    }
    if (line->end > WINDCTL_COUNT_LIMIT - (int32_t)windctl_line_length(line, next.n, next.segments)) {
        *value = WINDCTL_COUNT_LIMIT;
        return WINDCTL_REFUSAL_RANGE;
    }
    windctl_line_append(line, next.n, next.segments);
    windctl_aim(core);
    return WINDCTL_ACCEPTED;
}

static uint8_t pace(struct windctl_core *core, const uint8_t *body, int32_t *value)
{
    struct windctl_pace next;

    windctl_decode_pace(body, &next);
    if (!within(next.pace, 1, core->setup.max_pace, value)) {
        return WINDCTL_REFUSAL_RANGE;
    }
    windctl_spindle_set_pace(&core->spindle, next.pace);
    return WINDCTL_ACCEPTED;
}

/* A stop point inside the braking distance: the nearest count at which it can be made to stand, but not beyond
 * where it already had to stand, which is reachable by construction. */
static int32_t reachable(const struct windctl_core *core, int32_t count)
{
    int32_t nearest = windctl_spindle_nearest_stand(&core->spindle, core->count);

    if (nearest > core->spindle.goal) {
        nearest = core->spindle.goal;
    }
    return count < nearest ? nearest : count;
}

static uint8_t stop_at(struct windctl_core *core, const uint8_t *body, int32_t *value)
{
    struct windctl_stop_at next;
    int32_t count;

    windctl_decode_stop_at(body, &next);
    if (next.count == WINDCTL_NO_STOP_POINT) {
        core->stop_point = next.count;
        windctl_aim(core);
        *value = windctl_target(core);
        return WINDCTL_ACCEPTED;
    }
    if (next.count > core->setup.max_count) {
        *value = (int32_t)core->setup.max_count;
        return WINDCTL_REFUSAL_RANGE;
    }
    count = (int32_t)next.count;
    if (core->spindle.mode == WINDCTL_RUN || core->spindle.mode == WINDCTL_BRAKE) {
        count = reachable(core, count);
    } else if (count < core->count) {
        if (core->state != WINDCTL_STATE_TURNING) {
            *value = core->count;
            return WINDCTL_REFUSAL_RANGE;
        }
        count = core->count;
    }
    core->stop_point = (uint32_t)count;
    windctl_aim(core);
    *value = core->spindle.mode == WINDCTL_SETTLE ? core->spindle.goal : windctl_target(core);
    return WINDCTL_ACCEPTED;
}

static uint8_t go(struct windctl_core *core, int32_t *value)
{
    int32_t target;

    if (!core->standing) {
        return WINDCTL_REFUSAL_MOVING;
    }
    if (core->trust != WINDCTL_KNOWN) {
        *value = core->trust;
        return WINDCTL_REFUSAL_NO_DATUM;
    }
    if (inputs_open(core)) {
        *value = core->pins;
        return WINDCTL_REFUSAL_INPUT_OPEN;
    }
    if (core->setup.fitted & WINDCTL_CAPABILITY_PEDAL) {
        if (!(core->pins & WINDCTL_INPUT_BIT_PEDAL_DOWN)) {
            return WINDCTL_REFUSAL_PEDAL_UP;
        }
        if (!core->pedal_fresh) {
            return WINDCTL_REFUSAL_PEDAL_DOWN;
        }
    }
    if (core->away) {
        *value = windctl_minus(core->guide, core->away);
        return WINDCTL_REFUSAL_RANGE;
    }
    target = windctl_target(core);
    *value = target;
    if (core->setup.fitted & WINDCTL_CAPABILITY_DRIVE_STEP) {
        if (core->spindle.pace == 0) {
            *value = 1;
            return WINDCTL_REFUSAL_RANGE;
        }
        if (windctl_spindle_steps_to(&core->spindle, core->count, target) == 0) {
            return WINDCTL_REFUSAL_RANGE;
        }
    } else if (target <= core->count) {
        return WINDCTL_REFUSAL_RANGE;
    }
    *value = 0;
    windctl_go(core);
    return WINDCTL_ACCEPTED;
}

static uint8_t guide_within_limits(const struct windctl_setup *setup, int32_t guide, int32_t *value)
{
    if (guide < setup->guide_min) {
        *value = setup->guide_min;
        return 0;
    }
    if (guide > setup->guide_max) {
        *value = setup->guide_max;
        return 0;
    }
    return 1;
}

static uint8_t guide_to(struct windctl_core *core, const uint8_t *body, int32_t *value)
{
    struct windctl_guide_to next;

    windctl_decode_guide_to(body, &next);
    if (!(core->setup.fitted & WINDCTL_CAPABILITY_GUIDE_STEP)) {
        return WINDCTL_REFUSAL_NOT_FITTED;
    }
    if (!core->standing) {
        return WINDCTL_REFUSAL_MOVING;
    }
    if (!guide_within_limits(&core->setup, next.guide, value) ||
        !within(next.pace, 1, WINDCTL_GUIDE_PACE_LIMIT, value)) {
        return WINDCTL_REFUSAL_RANGE;
    }
    windctl_guide_to(core, next.guide, next.pace);
    return WINDCTL_ACCEPTED;
}

static uint8_t set_datum(struct windctl_core *core, const uint8_t *body, int32_t *value)
{
    struct windctl_set_datum next;

    windctl_decode_set_datum(body, &next);
    if (!core->has_setup) {
        return WINDCTL_REFUSAL_NO_SETUP;
    }
    if (!core->standing) {
        return WINDCTL_REFUSAL_MOVING;
    }
    if (next.count > WINDCTL_COUNT_LIMIT) {
        *value = WINDCTL_COUNT_LIMIT;
        return WINDCTL_REFUSAL_RANGE;
    }
    if (next.count < -WINDCTL_COUNT_LIMIT) {
        *value = -WINDCTL_COUNT_LIMIT;
        return WINDCTL_REFUSAL_RANGE;
    }
    if (core->setup.fitted & WINDCTL_CAPABILITY_GUIDE_STEP &&
        !guide_within_limits(&core->setup, next.guide, value)) {
        return WINDCTL_REFUSAL_RANGE;
    }
    windctl_set_datum(core, &next);
    return WINDCTL_ACCEPTED;
}

static uint8_t measure(struct windctl_core *core, const uint8_t *body, int32_t *value)
{
    struct windctl_measure next;

    windctl_decode_measure(body, &next);
    if (!(core->config.capabilities & WINDCTL_CAPABILITY_CONTACT)) {
        return WINDCTL_REFUSAL_NOT_FITTED;
    }
    if (next.window > WINDCTL_WINDOW_LIMIT || next.window % WINDCTL_CONTACT_BOX) {
        *value = WINDCTL_WINDOW_LIMIT;
        return WINDCTL_REFUSAL_RANGE;
    }
    windctl_mean_start(&core->mean, next.window, next.every, core->ticks, core->count,
                       core->spindle_moves);
    return WINDCTL_ACCEPTED;
}

static uint8_t clear_trip(struct windctl_core *core, int32_t *value)
{
    if (core->powered || !core->standing) {
        return WINDCTL_REFUSAL_MOVING;
    }
    if (inputs_open(core)) {
        *value = core->pins;
        return WINDCTL_REFUSAL_INPUT_OPEN;
    }
    core->trip = WINDCTL_TRIP_NONE;
    windctl_enter(core, WINDCTL_STATE_DRIVES_OFF, WINDCTL_CAUSE_TRIP);
    return WINDCTL_ACCEPTED;
}

uint8_t windctl_judge(struct windctl_core *core, uint8_t code, const uint8_t *body, int32_t *value)
{
    uint8_t states = code < sizeof legal ? WINDCTL_ROM_U8(&legal[code]) : 0;

    *value = 0;
    if (!states) {
        return WINDCTL_REFUSAL_UNKNOWN_TYPE;
    }
    if (windctl_moves_something(code) &&
        (windctl_get_u16(body) != core->boot || windctl_get_u16(body + 2) != core->epoch)) {
        *value = core->epoch;
        return WINDCTL_REFUSAL_STALE;
    }
    if (core->state > WINDCTL_STATE_TRIPPED || !(states >> core->state & 1)) {
        *value = core->state;
        return WINDCTL_REFUSAL_STATE;
    }
    switch (code) {
    case WINDCTL_SETUP_CODE:
        return setup(core, body, value);
    case WINDCTL_ARM_CODE:
        return arm(core, value);
    case WINDCTL_DISARM_CODE:
        return disarm(core);
    case WINDCTL_LAY_CODE:
        return lay(core, body, value);
    case WINDCTL_PACE_CODE:
        return pace(core, body, value);
    case WINDCTL_STOP_AT_CODE:
        return stop_at(core, body, value);
    case WINDCTL_GO_CODE:
        return go(core, value);
    case WINDCTL_GUIDE_TO_CODE:
        return guide_to(core, body, value);
    case WINDCTL_SET_DATUM_CODE:
        return set_datum(core, body, value);
    case WINDCTL_MEASURE_CODE:
        return measure(core, body, value);
    default: /* WINDCTL_CLEAR_TRIP_CODE: the table knows no other */
        return clear_trip(core, value);
    }
}
