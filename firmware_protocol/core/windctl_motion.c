#include "windctl_board.h"

int32_t windctl_target(const struct windctl_core *core)
{
    uint32_t nearest = core->setup.max_count; /* at most COUNT_LIMIT, so it is a count */

    if (core->stop_point < nearest) {
        nearest = core->stop_point;
    }
    if (core->setup.fitted & WINDCTL_CAPABILITY_GUIDE_STEP && core->line.end < (int32_t)nearest) {
        return core->line.end;
    }
    return (int32_t)nearest;
}

void windctl_aim(struct windctl_core *core)
{
    if (core->spindle.mode == WINDCTL_RUN) {
        windctl_spindle_aim(&core->spindle, core->count, windctl_target(core));
    }
}

/* A driven spindle stands soon after its last step. One turned by hand is only known to stand when counts stay
 * away for longer than they would at 30 rpm. */
static uint16_t still_ticks(const struct windctl_setup *setup)
{
    uint16_t coarse = (uint16_t)(WINDCTL_STILL_COARSE / setup->counts_per_turn);

    if (setup->fitted & WINDCTL_CAPABILITY_DRIVE_STEP || coarse < WINDCTL_STILL) {
        return WINDCTL_STILL;
    }
    return coarse;
}

void windctl_set_up(struct windctl_core *core, const struct windctl_setup *setup, uint16_t crc)
{
    core->setup = *setup;
    core->has_setup = 1;
    core->setup_crc = crc;
    core->still_ticks = still_ticks(setup);
    core->slip_limit = (uint32_t)setup->slip_counts * setup->steps_per_turn;
    /* 64 ticks at 5/4 of max_pace: max_pace * counts_per_turn * (64 * 5 / 4) / (1000 * steps_per_turn) */
    core->over_counts =
        (uint32_t)setup->max_pace * setup->counts_per_turn * 80 / ((uint32_t)1000 * setup->steps_per_turn);
    windctl_spindle_configure(&core->spindle, setup->counts_per_turn, setup->steps_per_turn, setup->accel,
                              setup->decel);
    core->stop_point = WINDCTL_NO_STOP_POINT;
    core->trust = 0;
    windctl_line_datum(&core->line, 0, core->count, 0, 0);
    core->away = 0;
    core->pedal_fresh = 0;
    windctl_turns_configure(&core->turns, setup->counts_per_turn, core->count);
}

void windctl_set_datum(struct windctl_core *core, const struct windctl_set_datum *datum)
{
    int32_t moved = windctl_minus(datum->count, core->count);

    core->count = datum->count;
    windctl_turns_move(&core->turns, moved);
    core->seen_count = windctl_plus(core->seen_count, moved);
    core->guide = datum->guide;
    core->away = 0;
    windctl_line_datum(&core->line, datum->program, datum->count, datum->next, datum->into);
    core->trust = WINDCTL_KNOWN;
    core->stop_point = WINDCTL_NO_STOP_POINT;
}

void windctl_beat(struct windctl_core *core)
{
    core->silent_at = core->ticks + WINDCTL_SILENCE;
}

void windctl_not_standing(struct windctl_core *core)
{
    core->standing = 0;
    core->still_at = core->ticks + core->still_ticks;
}

void windctl_moves(struct windctl_core *core)
{
    core->spindle_moves = 1;
    windctl_not_standing(core);
}

void windctl_go(struct windctl_core *core)
{
    core->state = WINDCTL_STATE_TURNING;
    core->cause = WINDCTL_CAUSE_NONE;
    core->status_due = 1;
    windctl_moves(core);
    windctl_beat(core);
    core->pedal_fresh = 0;
    core->hand_stop_told = 0;
    core->went_back = 0;
    windctl_turns_start(&core->turns, core->ticks, core->count);
    core->seen_count = core->count;
    if (core->setup.fitted & WINDCTL_CAPABILITY_DRIVE_STEP) {
        windctl_spindle_set_out(&core->spindle, core->count, windctl_target(core));
    }
}

void windctl_guide_to(struct windctl_core *core, int32_t guide, uint16_t pace)
{
    core->guide_target = guide;
    core->guide_pace = pace;
    core->guide_ramp = 0;
    windctl_beat(core);
    windctl_not_standing(core);
}

/* Every permission given before is void; the host hears of it at once. */
static void raise_epoch(struct windctl_core *core)
{
    core->epoch++;
    core->status_due = 1;
}

void windctl_rests(struct windctl_core *core)
{
    windctl_moves(core);
    core->off_at = core->ticks + WINDCTL_STILL;
}

static void brake(struct windctl_core *core, uint8_t at_once)
{
    if (core->spindle.mode == WINDCTL_REST) {
        return;
    }
    if (at_once) {
        windctl_spindle_cut(&core->spindle);
    } else {
        windctl_spindle_brake(&core->spindle);
    }
    if (core->spindle.mode == WINDCTL_REST) {
        windctl_rests(core);
    }
}

void windctl_hold(struct windctl_core *core, uint8_t cause)
{
    raise_epoch(core);
    core->guide_pace = 0;
    core->pedal_fresh = 0;
    if (core->state == WINDCTL_STATE_TURNING) {
        core->state = WINDCTL_STATE_HELD;
        core->cause = cause;
        brake(core, 0);
    }
}

void windctl_enter(struct windctl_core *core, uint8_t state, uint8_t cause)
{
    core->state = state;
    core->cause = cause;
    core->powered = state == WINDCTL_STATE_READY || state == WINDCTL_STATE_HELD;
    raise_epoch(core);
}

void windctl_stop_for(struct windctl_core *core, uint8_t trip)
{
    uint8_t category = windctl_trip_category(trip);

    if (core->state == WINDCTL_STATE_TRIPPED && (category != 0 || windctl_trip_category(core->trip) == 0)) {
        return; /* already stopping; only removed power overrides that */
    }
    core->state = WINDCTL_STATE_TRIPPED;
    core->cause = WINDCTL_CAUSE_TRIP;
    core->trip = trip;
    core->trust &= windctl_trip_trust(trip);
    core->guide_pace = 0;
    core->pedal_fresh = 0;
    raise_epoch(core);
    windctl_notice(core, WINDCTL_NOTICE_KIND_TRIPPED, trip, core->count);
    if (category == 0) {
        core->powered = 0;
        brake(core, 1);
    } else if (core->spindle.mode == WINDCTL_REST) {
        core->powered = 0;
    } else {
        brake(core, 0);
    }
}

void windctl_arrived(struct windctl_core *core)
{
    int32_t goal = core->spindle.goal;

    if (goal >= 0 && (uint32_t)goal == core->stop_point) {
        core->settled_cause = WINDCTL_CAUSE_STOP_POINT;
    } else if (goal >= 0 && (uint32_t)goal == core->setup.max_count) {
        core->settled_cause = WINDCTL_CAUSE_MAX_COUNT;
    } else {
        core->settled_cause = WINDCTL_CAUSE_QUEUE_END;
    }
    windctl_rests(core);
}
