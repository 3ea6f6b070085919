#include "windctl_board.h"

/* Each turn's mean tension, once it is known. */
static void turn_passed(struct windctl_core *core)
{
    if (!windctl_turns_passed(&core->turns, core->ticks, core->count)) {
        return;
    }
    if (core->state == WINDCTL_STATE_TURNING && core->setup.fitted & WINDCTL_CAPABILITY_TENSION) {
        if (core->turns.tension < core->setup.tension_low) {
            windctl_stop_for(core, WINDCTL_TRIP_TENSION_LOW);
        } else if (core->turns.tension > core->setup.tension_high) {
            windctl_stop_for(core, WINDCTL_TRIP_TENSION_HIGH);
        }
    }
}

/* Counts that are not just one more bit of a forward turn. */
void windctl_counted(struct windctl_core *core, int16_t counted)
{
    if (counted < 0) {
        if (core->state == WINDCTL_STATE_TURNING) {
            core->went_back += (uint32_t)-(int32_t)counted;
            if (core->went_back > core->setup.reverse_counts) {
                windctl_stop_for(core, WINDCTL_TRIP_REVERSE);
            }
        }
        windctl_turns_back(&core->turns, core->count);
    } else {
        uint32_t forward = (uint32_t)(uint16_t)counted;

        core->went_back = core->went_back > forward ? core->went_back - forward : 0;
        if (core->count >= core->turns.end) {
            turn_passed(core);
        }
    }
    if (core->spindle.mode != WINDCTL_RUN) {
        windctl_moves(core);
    }
}

void windctl_index_seen(struct windctl_core *core, int16_t counted)
{
    int32_t off = windctl_turns_index(&core->turns, core->count, counted);
    int32_t allowed = (int32_t)core->setup.slip_counts + (counted < 0 ? -(int32_t)counted : counted);

    if (core->state == WINDCTL_STATE_TURNING && core->setup.fitted & WINDCTL_CAPABILITY_INDEX && off > allowed) {
        windctl_stop_for(core, WINDCTL_TRIP_INDEX);
    }
}

void windctl_pins_changed(struct windctl_core *core, uint8_t pins)
{
    uint8_t changed = pins ^ core->pins;

    core->pins = pins;
    if (core->powered) {
        if (!(pins & WINDCTL_INPUT_BIT_STOP_OK)) {
            windctl_stop_for(core, WINDCTL_TRIP_STOP_INPUT);
        } else if (!(pins & WINDCTL_INPUT_BIT_GUARD_OK)) {
            windctl_stop_for(core, WINDCTL_TRIP_GUARD);
        } else if (core->setup.fitted & WINDCTL_CAPABILITY_GUIDE_STEP &&
                   (pins & WINDCTL_PINS_GUIDE) != WINDCTL_PINS_GUIDE) {
            windctl_stop_for(core, WINDCTL_TRIP_GUIDE_LIMIT);
        }
    }
    if (changed & WINDCTL_INPUT_BIT_PEDAL_DOWN && core->setup.fitted & WINDCTL_CAPABILITY_PEDAL) {
        core->pedal_fresh = 0;
        if (pins & WINDCTL_INPUT_BIT_PEDAL_DOWN) {
            core->pedal_at = core->ticks + WINDCTL_PEDAL_DEBOUNCE;
        } else if (core->state == WINDCTL_STATE_TURNING) {
            windctl_hold(core, WINDCTL_CAUSE_PEDAL);
        }
    }
}

/* A press of the pedal has lasted: it asks, the host answers. */
void windctl_pedal_pressed(struct windctl_core *core)
{
    if (core->pins & WINDCTL_INPUT_BIT_PEDAL_DOWN && core->setup.fitted & WINDCTL_CAPABILITY_PEDAL &&
        (core->state == WINDCTL_STATE_READY || core->state == WINDCTL_STATE_HELD)) {
        core->pedal_fresh = 1;
        windctl_notice(core, WINDCTL_NOTICE_KIND_PEDAL_ASKS, 0, 0);
    }
}

/* Two seconds without a Beat: whatever moves stops, and the host must greet anew. */
void windctl_silence(struct windctl_core *core)
{
    if (core->state == WINDCTL_STATE_TURNING || core->guide_pace) {
        windctl_hold(core, WINDCTL_CAUSE_SILENCE);
        core->state = WINDCTL_STATE_HELD;
        core->cause = WINDCTL_CAUSE_SILENCE;
        core->dialogue.greeted = 0;
    }
}

/* Every 64 ticks: measured speed, slip, a missing index, and whether this is a state at all. */
void windctl_check(struct windctl_core *core)
{
    const struct windctl_setup *setup = &core->setup;
    int32_t counts = windctl_minus(core->count, core->seen_count);
    uint32_t speed = counts > 0 ? (uint32_t)counts * 125 / 8 : 0;

    core->check_at += WINDCTL_CHECK_EVERY;
    core->seen_count = core->count;
    core->speed = speed < 0xFFFF ? (uint16_t)speed : 0xFFFF;
    if (core->state > WINDCTL_STATE_TRIPPED) {
        windctl_stop_for(core, WINDCTL_TRIP_INTERNAL);
    }
    if (!core->has_setup) {
        return;
    }
    if (core->spindle.mode != WINDCTL_REST) {
        int32_t error = windctl_spindle_check(&core->spindle, core->count);

        if ((uint32_t)(error < 0 ? -error : error) > core->slip_limit) {
            windctl_stop_for(core, WINDCTL_TRIP_SLIP);
        }
        if (counts > 0 && (uint32_t)counts > core->over_counts + 1) {
            windctl_stop_for(core, WINDCTL_TRIP_OVERSPEED);
        }
        windctl_aim(core);
    }
    if (core->state == WINDCTL_STATE_TURNING && setup->fitted & WINDCTL_CAPABILITY_INDEX) {
        int32_t longest = (int32_t)setup->counts_per_turn + setup->counts_per_turn / 2 + setup->slip_counts;

        if (windctl_turns_since_index(&core->turns, core->count) > longest) {
            windctl_stop_for(core, WINDCTL_TRIP_INDEX);
        }
    }
}
