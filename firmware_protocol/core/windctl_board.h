/* What the core's own modules do for each other. Not for ports. */
#ifndef WINDCTL_BOARD_H
#define WINDCTL_BOARD_H

#include "windctl_core.h"

/* ---- windctl_motion.c: what commands, inputs and checks do to the motion */

/* The nearest of stop point, queue end (if a guide is fitted) and hard limit; never passed. Needs a Setup. */
int32_t windctl_target(const struct windctl_core *core);

/* The target may have moved: a running spindle is told. */
void windctl_aim(struct windctl_core *core);

/* Take another Setup: place, program, pace and stop point are void. */
void windctl_set_up(struct windctl_core *core, const struct windctl_setup *setup, uint16_t crc);

/* The host declares where the machine stands. */
void windctl_set_datum(struct windctl_core *core, const struct windctl_set_datum *datum);

/* Ready or held to turning. */
void windctl_go(struct windctl_core *core);

/* Start to move the guide, the spindle standing. */
void windctl_guide_to(struct windctl_core *core, int32_t guide, uint16_t pace);

/* Stop under control and stay powered; also ends a GuideTo. Raises the epoch in every state. */
void windctl_hold(struct windctl_core *core, uint8_t cause);

/* Change to a state in which nothing is driven. */
void windctl_enter(struct windctl_core *core, uint8_t state, uint8_t cause);

/* Stop for a trip, by its category. A trip while tripped changes nothing, unless it removes power. */
void windctl_stop_for(struct windctl_core *core, uint8_t trip);

/* Spindle or guide moves: everything stands at the earliest `still_ticks` from now. */
void windctl_not_standing(struct windctl_core *core);

/* The spindle moves, or may be about to. */
void windctl_moves(struct windctl_core *core);

/* No more steps are issued; the spindle stands when counts have stayed away for a while. */
void windctl_rests(struct windctl_core *core);

/* The last step before the target is out. */
void windctl_arrived(struct windctl_core *core);

/* Silence is counted from now. */
void windctl_beat(struct windctl_core *core);

/* ---- windctl_rest.c: ticks in which the spindle is at rest, settling or turned by hand */

/* Returns the guide steps that the line or a GuideTo asks for. */
int32_t windctl_at_rest(struct windctl_core *core, int16_t counted);

/* ---- windctl_watch.c: what the board watches for; none is part of a quiet tick */

void windctl_counted(struct windctl_core *core, int16_t counted);
void windctl_index_seen(struct windctl_core *core, int16_t counted);
void windctl_pins_changed(struct windctl_core *core, uint8_t pins);
void windctl_pedal_pressed(struct windctl_core *core);
void windctl_silence(struct windctl_core *core);
void windctl_check(struct windctl_core *core);

/* ---- windctl_dialogue.c: the conversation */

/* Take one byte from the host. */
void windctl_hear(struct windctl_core *core, uint8_t byte);

/* Put a frame into the tick's output. What does not fit is dropped whole. */
void windctl_send(struct windctl_core *core, uint8_t sequence, uint8_t code, const uint8_t *body, uint8_t size);

/* The same for what is no answer, under a sequence of its own. */
void windctl_tell(struct windctl_core *core, uint8_t code, const uint8_t *body, uint8_t size);

/* ---- windctl_reports.c: what the board says of itself */

/* Say that something happened. */
void windctl_notice(struct windctl_core *core, uint8_t kind, int32_t a, int32_t b);

/* Say how the board stands. */
void windctl_tell_status(struct windctl_core *core, int16_t celsius_centi);

/* Say the reading that has just been completed. */
void windctl_tell_reading(struct windctl_core *core, int16_t celsius_centi);

/* Answer a Greet. */
void windctl_send_identity(struct windctl_core *core, uint8_t sequence, uint32_t nonce);

/* ---- windctl_commands.c */

#define WINDCTL_ACCEPTED 0

/* Do a numbered command that is due, or say why not. Returns WINDCTL_ACCEPTED or a refusal; `value` is that of
 * Accepted, or the limit of Refused. */
uint8_t windctl_judge(struct windctl_core *core, uint8_t code, const uint8_t *body, int32_t *value);

#endif
