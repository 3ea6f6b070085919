/* The spindle's motion: a pace that rises and falls in whole steps per second and ends exactly where it must.
 *
 * Each tick the pace is held under v*v <= 2*decel*left, `left` being the steps to where the spindle must stand:
 * the constant-deceleration law v^2 = 2*a*s, without a division. Positions come from two sources: steps that
 * were issued (exact, ahead) and counts that were seen (the truth about the wire, late and perhaps coarse).
 * `left` believes whichever is nearer to the goal, so a late count is never an overshoot. Once everything
 * stands, what is still missing in counts is slip, not lag, and is made up at a creep. Where in its count a coarse
 * counter stands is not known at first: until it has counted once, the worst is assumed. */
#ifndef WINDCTL_SPINDLE_H
#define WINDCTL_SPINDLE_H

#include "windctl_figures.h"
#include "windctl_seams.h"

enum {
    WINDCTL_REST = 0,  /* not driven; it may still be turned by hand */
    WINDCTL_RUN = 1,   /* towards the goal at the pace asked for */
    WINDCTL_BRAKE = 2, /* to a stand, wherever that is */
    WINDCTL_SETTLE = 3 /* arrived; waiting until it stands */
};

struct windctl_spindle {
    uint32_t issued;      /* steps since the spindle set out; wraps */
    uint32_t stand_at;    /* step to stand at, in the same terms */
    uint32_t seen_issued; /* `issued` at the last check */
    uint32_t left_limit;  /* steps beyond which 2 * decel * left would leave u32 */
    int32_t goal;         /* count to stand at */
    int32_t err;          /* issued * counts_per_turn - counted * steps_per_turn since then, to the last check */
    int32_t taken;        /* the part of it that is slip or an unknown start, not lag */
    int32_t seen_count;   /* count at the last check */
    int32_t edge_at;      /* count at the last edge of a coarse counter */
    int32_t gap_limit;    /* counts beyond which gap * steps_per_turn would leave i32 */
    uint16_t counts_per_turn;
    uint16_t steps_per_turn;
    uint16_t accel; /* steps/s2 */
    uint16_t decel; /* steps/s2 */
    uint16_t v;     /* steps/s */
    uint16_t pace;  /* steps/s asked for */
    uint16_t pace_now;   /* the same, or less at a creep */
    uint16_t creep_pace; /* steps/s that four steps suffice to stand from */
    uint16_t ramp;  /* thousandths of a step/s owed to v */
    uint8_t mode;
    uint8_t coarse; /* a count is more than a step */
    uint8_t placed; /* the place within a count is known */
    uint8_t creeping;
};

/* Take a Setup's figures: all at least 1; rates in steps/s2. */
void windctl_spindle_configure(struct windctl_spindle *spindle, uint16_t counts_per_turn, uint16_t steps_per_turn,
                               uint16_t accel, uint16_t decel);

/* Work towards this pace, steps/s. */
void windctl_spindle_set_pace(struct windctl_spindle *spindle, uint16_t pace);

/* Start from a stand at `count` towards the count `goal`. */
void windctl_spindle_set_out(struct windctl_spindle *spindle, int32_t count, int32_t goal);

/* Stand at `goal`, as far as counts and issued steps now tell. */
void windctl_spindle_aim(struct windctl_spindle *spindle, int32_t count, int32_t goal);

/* Whole steps from where the issued steps have brought it to `goal`. */
uint32_t windctl_spindle_steps_to(const struct windctl_spindle *spindle, int32_t count, int32_t goal);

/* The nearest count at which it can be made to stand from its present pace. */
int32_t windctl_spindle_nearest_stand(const struct windctl_spindle *spindle, int32_t count);

/* One tick of RUN or BRAKE: so many steps were issued since the last, and the count is this. */
void windctl_spindle_step(struct windctl_spindle *spindle, uint16_t issued, int32_t count);

/* Begin to stand. */
void windctl_spindle_brake(struct windctl_spindle *spindle);

/* Stop issuing steps at once. */
void windctl_spindle_cut(struct windctl_spindle *spindle);

/* Account for the steps and counts since the last check. Returns issued minus counted since it set out, in
 * 1/steps_per_turn count. */
int32_t windctl_spindle_check(struct windctl_spindle *spindle, int32_t count);

/* Standing: if at least a step is missing, take the difference for slip and go on. 1 if it does. */
uint8_t windctl_spindle_creep(struct windctl_spindle *spindle, int32_t count);

#endif
