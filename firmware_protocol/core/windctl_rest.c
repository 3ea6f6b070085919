#include "windctl_board.h"

/* One tick of a GuideTo; returns guide steps. */
static int32_t guide_on(struct windctl_core *core)
{
    uint16_t ramp = (uint16_t)(core->guide_ramp + core->guide_pace);
    int32_t at = core->guide;
    int32_t steps;

    while (ramp >= 1000) {
        ramp = (uint16_t)(ramp - 1000);
        if (at < core->guide_target) {
            at++;
        } else if (at > core->guide_target) {
            at--;
        }
    }
    core->guide_ramp = ramp;
    steps = windctl_minus(at, core->guide);
    core->away = windctl_plus(core->away, steps);
    if (at == core->guide_target) {
        core->guide_pace = 0;
    }
    windctl_not_standing(core);
    return steps;
}

static void came_to_rest(struct windctl_core *core)
{
    if (core->spindle.mode == WINDCTL_SETTLE && windctl_spindle_creep(&core->spindle, core->count)) {
        return;
    }
    core->spindle.mode = WINDCTL_REST;
    core->standing = 1;
    core->spindle_moves = 0;
    core->status_due = 1;
    if (core->state == WINDCTL_STATE_TURNING) {
        if (core->setup.fitted & WINDCTL_CAPABILITY_DRIVE_STEP) {
            windctl_enter(core, WINDCTL_STATE_HELD, core->settled_cause);
        } else if (core->hand_stop_told) {
            uint8_t at_stop_point = core->count >= 0 && core->stop_point <= (uint32_t)core->count;

            windctl_enter(core, WINDCTL_STATE_HELD,
                          at_stop_point ? WINDCTL_CAUSE_STOP_POINT : WINDCTL_CAUSE_MAX_COUNT);
        }
    }
    windctl_notice(core, WINDCTL_NOTICE_KIND_STANDING, core->count, core->guide);
}

int32_t windctl_at_rest(struct windctl_core *core, int16_t counted)
{
    int32_t steps = 0;
    uint8_t guided = core->setup.fitted & WINDCTL_CAPABILITY_GUIDE_STEP;

    if (counted && guided) {
        windctl_line_wait(&core->line, counted);
    }
    if (core->powered && guided) {
        if (core->guide_pace) {
            steps = guide_on(core);
        } else if (core->trip != WINDCTL_TRIP_GUIDE_LIMIT && windctl_line_lagging(&core->line)) {
            steps = windctl_line_catch_up(&core->line);
            windctl_not_standing(core);
        }
    }
    if (!core->standing && core->ticks == core->still_at) {
        came_to_rest(core);
    }
    if (core->state == WINDCTL_STATE_TRIPPED && core->powered && core->ticks == core->off_at) {
        core->powered = 0;
        core->status_due = 1;
    }
    if (core->ticks == core->pedal_at) {
        windctl_pedal_pressed(core);
    }
    if (core->state == WINDCTL_STATE_TURNING && !(core->setup.fitted & WINDCTL_CAPABILITY_DRIVE_STEP) &&
        !core->hand_stop_told && core->count >= windctl_target(core)) {
        core->hand_stop_told = 1;
        windctl_notice(core, WINDCTL_NOTICE_KIND_HAND_STOP_DUE, core->count, 0);
    }
    return steps;
}
