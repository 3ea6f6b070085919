/* The board's firmware without the board: everything it decides, once a millisecond.
 *
 *     struct windctl_config   what this board is             the port fills it once; constant
 *     struct windctl_core     everything it remembers        the port gives the memory, the core owns what is in it
 *     struct windctl_inputs   the world in this millisecond  the port writes it before every tick
 *     struct windctl_outputs  what to do until the next      the core writes it in every tick
 *
 *     windctl_start(&core, &config, boot_number);     after every reset, with another number each time
 *     every millisecond:
 *         fill inputs
 *         windctl_tick(&core, &inputs, &outputs);
 *         obey outputs
 *
 * What the board does is specified in firmware_protocol/README.md. The core is freestanding C99: it includes
 * nothing but <stdint.h>, calls nothing outside itself, uses no heap, no floating point, no recursion, and divides
 * only when a Setup comes, a turn or a reading ends, or a stop is aimed at, never in a quiet tick. All integers
 * wrap; none is trusted to be in range because a host or a sensor ought to keep it so.
 *
 * What the port must do, and the core cannot:
 *   - keep drive_enable and guide_enable off from reset until the first tick, by hardware;
 *   - issue spindle steps at `rate`, exactly one at a time, and count those it has issued;
 *   - issue the guide's steps of one tick before the next tick ends;
 *   - call the tick 1000 times a second, and reset the board by a watchdog when that stops;
 *   - never filter, delay or decide anything: pins are handed over as they stand, counts as they came.
 * The hardware stop removes drive power without asking any program; see the specification. */
#ifndef WINDCTL_CORE_H
#define WINDCTL_CORE_H

#include "windctl_contact_mean.h"
#include "windctl_figures.h"
#include "windctl_frames.h"
#include "windctl_guide_line.h"
#include "windctl_messages.h"
#include "windctl_seams.h"
#include "windctl_spindle.h"
#include "windctl_turns.h"

/* What this board is. Copied by windctl_start. */
struct windctl_config {
    uint16_t contact_scale; /* milliohm per unit of `contact` */
    uint16_t tension_scale; /* 0.0001 cN per unit of `tension` */
    uint8_t capabilities;   /* bits WINDCTL_CAPABILITY_...; a real board never sets VIRTUAL */
};

/* One tick's worth of the world. The port's; the core only reads it. */
struct windctl_inputs {
    const uint8_t *received; /* bytes from the host since the last tick, in order; may be 0 if there are none */
    uint16_t received_size;  /* bytes of them */
    int16_t count_delta;     /* encoder counts since the last tick, winding counts up; at most 2000 either way */
    uint16_t steps_issued;   /* spindle steps put out since the last tick, at most 2000 */
    uint16_t contact;        /* oversampled contact reading; 0xFFFF is open */
    uint16_t tension;        /* oversampled tension sensor */
    int16_t celsius_centi;   /* thermometer, 0.01 degree C */
    uint8_t index;           /* 1: the index pulse was seen since the last tick, in the direction of winding */
    uint8_t pins;            /* bits WINDCTL_INPUT_BIT_..., without STANDING: 1 is closed, or pressed */
};

/* What the port does until the next tick. The core's, but for the ring's memory and `sent_begin`. */
struct windctl_outputs {
    uint8_t *sent;       /* ring of WINDCTL_SENT_RING bytes for the host; the port's memory, never 0 */
    uint8_t sent_begin;  /* first byte of it that is not on the line yet; the port writes it before the tick */
    uint8_t sent_end;    /* place behind the last; the core moves it on, at most WINDCTL_SENT_MAX a tick */
    uint16_t rate;       /* spindle steps per second, at most 15000; 0 stands */
    int32_t guide_steps; /* to issue within this tick, signed; positive is away from the start flange */
    uint8_t rotation;    /* Setup.rotation: the way to drive the spindle, and to count up */
    uint8_t drive_enable; /* 1: spindle drive powered */
    uint8_t guide_enable; /* 1: guide drive powered */
};

/* The host's side of the conversation, as far as the board must remember it. */
struct windctl_dialogue {
    struct windctl_reader reader;
    uint32_t nonce;      /* of the greeting */
    uint16_t heard_crc;  /* of the last numbered command: what tells an exact repeat from another command */
    uint8_t heard;       /* there was one since the greeting */
    uint8_t greeted;
    uint8_t sequence;    /* of the last numbered command, or of the Greet */
    uint8_t unasked;     /* sequence of what is sent unasked */
    uint8_t sent;        /* bytes put out in this tick */
    uint8_t answer_code; /* the stored answer to the last numbered command */
    uint8_t answer_size;
    uint8_t answer[WINDCTL_REFUSED_SIZE];
};

/* Everything the core remembers. Its fields are for reading, in tests and on instruments; nobody writes them. */
struct windctl_core {
    struct windctl_outputs *outputs; /* of the tick under way */
    struct windctl_config config;

    uint32_t ticks; /* ms since start; wraps */
    uint16_t boot;
    uint16_t epoch; /* wraps */
    uint8_t state;  /* WINDCTL_STATE_... */
    uint8_t cause;  /* WINDCTL_CAUSE_... */
    uint8_t trip;   /* WINDCTL_TRIP_..., NONE if not tripped */
    uint8_t trust;  /* bits WINDCTL_TRUST_... */
    uint8_t pins;   /* as of the last tick */

    uint8_t boot_told;
    uint8_t status_due;
    uint32_t status_at; /* tick */
    uint32_t check_at;  /* tick */
    uint32_t silent_at; /* tick at which a Beat has been missing too long */
    struct windctl_dialogue dialogue;

    struct windctl_setup setup; /* the coil's limits; all 0 before the first Setup */
    uint8_t has_setup;
    uint16_t setup_crc;
    uint16_t still_ticks; /* without a count until the spindle stands */
    uint32_t stop_point;  /* count, or WINDCTL_NO_STOP_POINT */
    uint32_t slip_limit;  /* in 1/steps_per_turn count */
    uint32_t over_counts; /* counts in 64 ticks that are too fast by now */

    struct windctl_spindle spindle;
    struct windctl_turns turns;
    int32_t count;
    int32_t seen_count;    /* at the last check */
    uint32_t went_back;    /* counts below the furthest since Go */
    uint32_t off_at;       /* tick at which a tripped board's drives go off */
    uint32_t still_at;     /* tick at which everything stands, if nothing moves until then */
    uint16_t speed;        /* counts/s over the last 64 ticks */
    uint8_t powered;       /* drives */
    uint8_t standing;      /* spindle and guide are at rest */
    uint8_t spindle_moves; /* or may be about to; else at most the guide does */
    uint8_t settled_cause; /* why the spindle arrives */
    uint8_t hand_stop_told;

    struct windctl_guide_line line;
    int32_t guide;        /* steps from the datum */
    int32_t away;         /* steps that GuideTo brought it from its line */
    int32_t guide_target; /* of GuideTo */
    uint16_t guide_pace;  /* steps/s of GuideTo; 0: none */
    uint16_t guide_ramp;  /* thousandths of a step owed */

    uint32_t pedal_at;   /* tick at which a press counts */
    uint8_t pedal_fresh; /* pressed since the last stop, and not let go */

    struct windctl_contact_mean mean;
};

/* Forget everything and begin: drives off, nothing trusted. Needs no zeroed memory. */
void windctl_start(struct windctl_core *core, const struct windctl_config *config, uint16_t boot_number);

/* One millisecond. */
void windctl_tick(struct windctl_core *core, const struct windctl_inputs *inputs, struct windctl_outputs *outputs);

#endif
