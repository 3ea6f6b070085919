#include "windctl_board.h"

void windctl_start(struct windctl_core *core, const struct windctl_config *config, uint16_t boot_number)
{
    unsigned char *byte = (unsigned char *)core;
    uint16_t left = sizeof *core;

    while (left--) {
        *byte++ = 0;
    }
    core->config = *config;
    core->boot = boot_number;
    core->state = WINDCTL_STATE_DRIVES_OFF;
    core->cause = WINDCTL_CAUSE_BOOT;
    core->pins = WINDCTL_PINS_ALL_OK;
    core->status_due = 1;
    core->status_at = WINDCTL_STATUS_EVERY;
    core->check_at = WINDCTL_CHECK_EVERY;
    core->stop_point = WINDCTL_NO_STOP_POINT;
    core->still_ticks = WINDCTL_STILL;
    core->standing = 1;
    windctl_spindle_configure(&core->spindle, 1, 1, 1000, 1000);
    windctl_turns_configure(&core->turns, 1, 0);
    windctl_line_datum(&core->line, 0, 0, 0, 0);
}

/* Steps that may be issued: none if they would leave the limits. */
static int32_t guide_moved(struct windctl_core *core, int32_t steps)
{
    int32_t guide = core->guide;
    const struct windctl_setup *setup = &core->setup;
    uint8_t leaves;

    if (steps > 0) {
        leaves = guide > setup->guide_max || (uint32_t)setup->guide_max - (uint32_t)guide < (uint32_t)steps;
    } else {
        leaves = guide < setup->guide_min ||
                 (uint32_t)guide - (uint32_t)setup->guide_min < 0u - (uint32_t)steps;
    }
    if (leaves) {
        core->away = windctl_minus(core->away, steps);
        windctl_stop_for(core, WINDCTL_TRIP_GUIDE_LIMIT);
        return 0;
    }
    core->guide = windctl_plus(guide, steps);
    return steps;
}

/* The spindle's motion in this tick, and the guide's. Returns guide steps. */
static int32_t move(struct windctl_core *core, int16_t counted, uint16_t issued)
{
    uint8_t guided = counted && core->setup.fitted & WINDCTL_CAPABILITY_GUIDE_STEP;

    if (core->spindle.mode == WINDCTL_RUN) {
        windctl_spindle_step(&core->spindle, issued, core->count);
        if (core->spindle.mode != WINDCTL_RUN) {
            windctl_arrived(core);
        }
        return guided ? windctl_line_follow(&core->line, counted) : 0;
    }
    if (core->spindle.mode == WINDCTL_BRAKE) {
        windctl_spindle_step(&core->spindle, issued, core->count);
        if (core->spindle.mode == WINDCTL_REST) {
            windctl_rests(core);
        }
        if (core->ticks == core->pedal_at) {
            windctl_pedal_pressed(core);
        }
        if (guided && core->trip == WINDCTL_TRIP_GUIDE_LIMIT) {
            windctl_line_wait(&core->line, counted);
            return 0;
        }
        return guided ? windctl_line_follow(&core->line, counted) : 0;
    }
    return windctl_at_rest(core, counted);
}

void windctl_tick(struct windctl_core *core, const struct windctl_inputs *inputs, struct windctl_outputs *outputs)
{
    int16_t counted = inputs->count_delta;
    uint16_t place;
    int32_t guide_steps;

    core->outputs = outputs;
    core->dialogue.sent = 0;
    core->ticks++;

    if (counted) {
        core->count = windctl_plus(core->count, counted);
        if (counted < 0 || core->count >= core->turns.end || core->went_back ||
            core->spindle.mode != WINDCTL_RUN) {
            windctl_counted(core, counted);
        }
    }
    if (inputs->pins != core->pins) {
        windctl_pins_changed(core, inputs->pins);
    }
    if (inputs->index) {
        windctl_index_seen(core, counted);
    }
    for (place = 0; place < inputs->received_size; place++) {
        windctl_hear(core, inputs->received[place]);
    }

    guide_steps = move(core, counted, inputs->steps_issued);
    if (guide_steps) {
        guide_steps = guide_moved(core, guide_steps);
    }

    core->turns.tension_sum += inputs->tension;
    if (core->ticks == core->check_at) {
        windctl_check(core);
    }
    if (core->ticks == core->silent_at) {
        windctl_silence(core);
    }

    if (core->ticks == core->status_at) {
        core->status_at += WINDCTL_STATUS_EVERY;
        core->status_due = 1;
    }
    if (core->status_due) {
        core->status_due = 0;
        if (!core->boot_told) {
            core->boot_told = 1;
            windctl_notice(core, WINDCTL_NOTICE_KIND_BOOTED, core->boot, 0);
        }
        windctl_tell_status(core, inputs->celsius_centi);
    }
    if (core->mean.active && windctl_mean_sample(&core->mean, inputs->contact, core->ticks, core->count,
                                                 core->spindle_moves, core->turns.counts_per_turn)) {
        windctl_tell_reading(core, inputs->celsius_centi);
    }

    outputs->rate = core->spindle.v;
    outputs->guide_steps = guide_steps;
    outputs->rotation = core->setup.rotation;
    outputs->drive_enable = core->powered && core->setup.fitted & WINDCTL_CAPABILITY_DRIVE_STEP;
    outputs->guide_enable = core->powered && core->setup.fitted & WINDCTL_CAPABILITY_GUIDE_STEP;
}
