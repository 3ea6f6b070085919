/* Every message of the board protocol. Generated from messages.toml by generate.py; do not edit.
 *
 * A body is fixed in length, little endian. Units and meanings stand beside the fields. */
#ifndef WINDCTL_MESSAGES_H
#define WINDCTL_MESSAGES_H

#include <stdint.h>

#define WINDCTL_PROTOCOL 1
/* CRC-32 of what both sides must agree on; Greet and Identity compare it. */
#define WINDCTL_SCHEMA UINT32_C(0x98CFA975)
#define WINDCTL_SEGMENTS_PER_LAY 12
#define WINDCTL_BODY_LIMIT 60 /* bytes */

enum { /* State */
    WINDCTL_STATE_DRIVES_OFF = 0,
    WINDCTL_STATE_READY = 1,
    WINDCTL_STATE_TURNING = 2,
    WINDCTL_STATE_HELD = 3,
    WINDCTL_STATE_TRIPPED = 4
};

enum { /* Cause */
    WINDCTL_CAUSE_NONE = 0,
    WINDCTL_CAUSE_BOOT = 1,
    WINDCTL_CAUSE_GREET = 2,
    WINDCTL_CAUSE_HOLD = 3,
    WINDCTL_CAUSE_PEDAL = 4,
    WINDCTL_CAUSE_SILENCE = 5,
    WINDCTL_CAUSE_STOP_POINT = 6,
    WINDCTL_CAUSE_QUEUE_END = 7,
    WINDCTL_CAUSE_MAX_COUNT = 8,
    WINDCTL_CAUSE_TRIP = 9,
    WINDCTL_CAUSE_DISARM = 10,
    WINDCTL_CAUSE_ARM = 11
};

enum { /* Refusal */
    WINDCTL_REFUSAL_SEQUENCE = 1,
    WINDCTL_REFUSAL_UNKNOWN_TYPE = 2,
    WINDCTL_REFUSAL_NOT_GREETED = 4,
    WINDCTL_REFUSAL_STALE = 5,
    WINDCTL_REFUSAL_STATE = 6,
    WINDCTL_REFUSAL_MOVING = 7,
    WINDCTL_REFUSAL_NO_SETUP = 8,
    WINDCTL_REFUSAL_RANGE = 9,
    WINDCTL_REFUSAL_QUEUE_FULL = 10,
    WINDCTL_REFUSAL_GAP = 11,
    WINDCTL_REFUSAL_PROGRAM = 12,
    WINDCTL_REFUSAL_SEGMENT = 13,
    WINDCTL_REFUSAL_PEDAL_DOWN = 14,
    WINDCTL_REFUSAL_PEDAL_UP = 15,
    WINDCTL_REFUSAL_INPUT_OPEN = 16,
    WINDCTL_REFUSAL_NOT_FITTED = 17,
    WINDCTL_REFUSAL_NO_DATUM = 18
};

enum { /* NoticeKind */
    WINDCTL_NOTICE_KIND_BOOTED = 1,
    WINDCTL_NOTICE_KIND_STANDING = 2,
    WINDCTL_NOTICE_KIND_TRIPPED = 3,
    WINDCTL_NOTICE_KIND_PEDAL_ASKS = 4,
    WINDCTL_NOTICE_KIND_HAND_STOP_DUE = 5
};

enum { /* Trust */
    WINDCTL_TRUST_COUNT = 1,
    WINDCTL_TRUST_GUIDE = 2
};

enum { /* InputBit */
    WINDCTL_INPUT_BIT_STOP_OK = 1,
    WINDCTL_INPUT_BIT_GUARD_OK = 2,
    WINDCTL_INPUT_BIT_PEDAL_DOWN = 4,
    WINDCTL_INPUT_BIT_GUIDE_LOW_OK = 8,
    WINDCTL_INPUT_BIT_GUIDE_HIGH_OK = 16,
    WINDCTL_INPUT_BIT_STANDING = 32
};

enum { /* Capability */
    WINDCTL_CAPABILITY_DRIVE_STEP = 1,
    WINDCTL_CAPABILITY_GUIDE_STEP = 2,
    WINDCTL_CAPABILITY_INDEX = 4,
    WINDCTL_CAPABILITY_CONTACT = 8,
    WINDCTL_CAPABILITY_TENSION = 16,
    WINDCTL_CAPABILITY_PEDAL = 32,
    WINDCTL_CAPABILITY_THERMOMETER = 64,
    WINDCTL_CAPABILITY_VIRTUAL = 128
};

enum { /* ReadingFlag */
    WINDCTL_READING_FLAG_TURNING = 1,
    WINDCTL_READING_FLAG_OPEN = 2
};

enum { /* Trip */
    WINDCTL_TRIP_NONE = 0,
    WINDCTL_TRIP_STOP_INPUT = 1,
    WINDCTL_TRIP_GUARD = 2,
    WINDCTL_TRIP_OVERSPEED = 3,
    WINDCTL_TRIP_SLIP = 4,
    WINDCTL_TRIP_INDEX = 5,
    WINDCTL_TRIP_REVERSE = 6,
    WINDCTL_TRIP_TENSION_LOW = 7,
    WINDCTL_TRIP_TENSION_HIGH = 8,
    WINDCTL_TRIP_GUIDE_LIMIT = 9,
    WINDCTL_TRIP_INTERNAL = 10
};

/* Unsigned integers in a body. */
uint16_t windctl_get_u16(const uint8_t *at);
uint32_t windctl_get_u32(const uint8_t *at);
void windctl_put_u16(uint8_t *at, uint16_t value);
void windctl_put_u32(uint8_t *at, uint32_t value);

/* Bytes in the body of a message of this code, or WINDCTL_NO_SUCH_CODE. */
#define WINDCTL_NO_SUCH_CODE 0xFF
uint8_t windctl_body_size(uint8_t code);

/* Whether a message to the board can move something or widen a limit: its body begins with boot and epoch. */
uint8_t windctl_moves_something(uint8_t code);

/* A trip's IEC 60204-1 stop category: 0, 1 or 2. A code that is no trip is category 1. */
uint8_t windctl_trip_category(uint8_t trip);

/* Bits of WINDCTL_TRUST_... that may still be trusted after a trip. After what is no trip: none. */
uint8_t windctl_trip_trust(uint8_t trip);

/* Greet, host to board. Opens a conversation and sets the sequence. Stops whatever moves. */
#define WINDCTL_GREET_CODE 0x01
#define WINDCTL_GREET_SIZE 8
struct windctl_greet {
    uint32_t nonce;
    uint32_t schema; /* CRC-32 of this file's canonical form */
};
void windctl_decode_greet(const uint8_t *body, struct windctl_greet *message);
void windctl_encode_greet(const struct windctl_greet *message, uint8_t *body);

/* Setup, host to board. Limits for one coil. Another one than the last voids place, program, pace and stop
 * point. Nothing in it disables the stop and guard inputs. */
#define WINDCTL_SETUP_CODE 0x02
#define WINDCTL_SETUP_SIZE 36
struct windctl_setup {
    uint32_t coil_token; /* names the coil across resets */
    uint16_t counts_per_turn; /* 1..400 */
    uint16_t steps_per_turn; /* spindle steps, 1..800 */
    uint32_t max_count; /* hard limit, never passed; at most 2^30 */
    uint16_t max_pace; /* steps/s: at most 15000 and 10 * decel */
    uint16_t accel; /* steps/s2: at least 100 */
    uint16_t decel; /* steps/s2: at least 100 */
    int32_t guide_min; /* guide steps */
    int32_t guide_max; /* guide steps */
    /* counts: allowed difference of issued and counted, and of the index from its place; at least 2 if a count
     * is more than a step */
    uint16_t slip_counts;
    uint16_t reverse_counts; /* counts: allowed way back while turning */
    uint16_t tension_low; /* sensor units: of the mean per turn; 0: no lower bound */
    uint16_t tension_high; /* sensor units: 65535: no upper bound */
    uint8_t fitted; /* capabilities this coil uses */
    /* seen by someone facing the spindle's nose: 0 clockwise, 1 counter-clockwise; winding always counts up */
    uint8_t rotation;
};
void windctl_decode_setup(const uint8_t *body, struct windctl_setup *message);
void windctl_encode_setup(const struct windctl_setup *message, uint8_t *body);

/* Arm, host to board. Powers the drives: drives_off to ready. */
#define WINDCTL_ARM_CODE 0x03
#define WINDCTL_ARM_SIZE 4
struct windctl_arm {
    uint16_t boot;
    uint16_t epoch;
};
void windctl_decode_arm(const uint8_t *body, struct windctl_arm *message);
void windctl_encode_arm(const struct windctl_arm *message, uint8_t *body);

/* Disarm, host to board. Takes the power off: ready or held to drives_off. */
#define WINDCTL_DISARM_CODE 0x04
#define WINDCTL_DISARM_SIZE 0

/* Lay, host to board. Appends segments to the queue: all or nothing, harmless when repeated. Only with a guide
 * fitted. */
#define WINDCTL_LAY_CODE 0x05
#define WINDCTL_LAY_SIZE 57
struct windctl_lay {
    uint32_t program; /* first four bytes of the program's digest, big endian */
    uint32_t first; /* index of the first segment here */
    uint8_t n; /* 1..12 used */
    const uint8_t *segments; /* packed as in the body, which it points into */
};
void windctl_decode_lay(const uint8_t *body, struct windctl_lay *message);
void windctl_encode_lay(const struct windctl_lay *message, uint8_t *body);

/* Pace, host to board. The pace the spindle works towards. Kept until the next one, or another Setup. */
#define WINDCTL_PACE_CODE 0x06
#define WINDCTL_PACE_SIZE 6
struct windctl_pace {
    uint16_t boot;
    uint16_t epoch;
    uint16_t pace; /* steps/s */
};
void windctl_decode_pace(const uint8_t *body, struct windctl_pace *message);
void windctl_encode_pace(const struct windctl_pace *message, uint8_t *body);

/* StopAt, host to board. The stop point; 0xFFFFFFFF: none. Inside the braking distance it brakes now. Accepted
 * says where it will stand. */
#define WINDCTL_STOP_AT_CODE 0x07
#define WINDCTL_STOP_AT_SIZE 8
struct windctl_stop_at {
    uint16_t boot;
    uint16_t epoch;
    uint32_t count;
};
void windctl_decode_stop_at(const uint8_t *body, struct windctl_stop_at *message);
void windctl_encode_stop_at(const struct windctl_stop_at *message, uint8_t *body);

/* Go, host to board. Starts to wind: ready or held to turning. */
#define WINDCTL_GO_CODE 0x08
#define WINDCTL_GO_SIZE 4
struct windctl_go {
    uint16_t boot;
    uint16_t epoch;
};
void windctl_decode_go(const uint8_t *body, struct windctl_go *message);
void windctl_encode_go(const struct windctl_go *message, uint8_t *body);

/* Hold, host to board. Stop under control and stay powered. Always executed, whatever its number; the Status
 * of the same tick is its answer. */
#define WINDCTL_HOLD_CODE 0x09
#define WINDCTL_HOLD_SIZE 0

/* GuideTo, host to board. Moves the guide while the spindle stands. */
#define WINDCTL_GUIDE_TO_CODE 0x0A
#define WINDCTL_GUIDE_TO_SIZE 10
struct windctl_guide_to {
    uint16_t boot;
    uint16_t epoch;
    int32_t guide; /* guide steps */
    uint16_t pace; /* guide steps/s: 1..4000 */
};
void windctl_decode_guide_to(const uint8_t *body, struct windctl_guide_to *message);
void windctl_encode_guide_to(const struct windctl_guide_to *message, uint8_t *body);

/* SetDatum, host to board. Declares where the machine stands, and empties the queue. From then on count and
 * guide are trusted. */
#define WINDCTL_SET_DATUM_CODE 0x0B
#define WINDCTL_SET_DATUM_SIZE 22
struct windctl_set_datum {
    uint16_t boot;
    uint16_t epoch;
    uint32_t program;
    int32_t count;
    int32_t guide; /* guide steps */
    uint32_t next; /* first segment the host will lay */
    uint16_t into; /* counts of that segment already wound */
};
void windctl_decode_set_datum(const uint8_t *body, struct windctl_set_datum *message);
void windctl_encode_set_datum(const struct windctl_set_datum *message, uint8_t *body);

/* Measure, host to board. Readings of the contact, each a mean over `window` ticks, while turning extended to
 * whole revolutions. */
#define WINDCTL_MEASURE_CODE 0x0C
#define WINDCTL_MEASURE_SIZE 4
struct windctl_measure {
    uint16_t window; /* ticks: a multiple of 100, at most 6000; 0 ends the readings */
    uint16_t every; /* ticks: from the beginning of one to that of the next, if it is over; 0: one reading only */
};
void windctl_decode_measure(const uint8_t *body, struct windctl_measure *message);
void windctl_encode_measure(const struct windctl_measure *message, uint8_t *body);

/* ClearTrip, host to board. Tripped to drives_off, once the inputs are closed and the spindle stands. */
#define WINDCTL_CLEAR_TRIP_CODE 0x0D
#define WINDCTL_CLEAR_TRIP_SIZE 4
struct windctl_clear_trip {
    uint16_t boot;
    uint16_t epoch;
};
void windctl_decode_clear_trip(const uint8_t *body, struct windctl_clear_trip *message);
void windctl_encode_clear_trip(const struct windctl_clear_trip *message, uint8_t *body);

/* Beat, host to board. The host is alive, and its record is healthy. */
#define WINDCTL_BEAT_CODE 0x0E
#define WINDCTL_BEAT_SIZE 0

/* Identity, board to host. Answer to Greet. */
#define WINDCTL_IDENTITY_CODE 0x81
#define WINDCTL_IDENTITY_SIZE 54
struct windctl_identity {
    uint32_t nonce;
    uint32_t schema;
    uint16_t boot;
    uint16_t epoch;
    uint8_t state;
    uint8_t trip;
    uint8_t trust;
    uint8_t capabilities;
    uint16_t queue; /* places in the segment queue */
    uint32_t coil_token;
    uint16_t setup_crc; /* CRC-16 of the last Setup body, 0: none */
    uint32_t program;
    uint32_t base; /* `next` of the last SetDatum */
    uint32_t next; /* first segment not yet laid */
    uint32_t executing; /* segment being wound */
    uint16_t program_crc; /* CRC-16 over the segments base..next-1 as laid */
    int32_t count;
    int32_t guide;
    uint16_t contact_scale; /* milliohm per unit */
    uint16_t tension_scale; /* 0.0001 cN per unit */
};
void windctl_decode_identity(const uint8_t *body, struct windctl_identity *message);
void windctl_encode_identity(const struct windctl_identity *message, uint8_t *body);

/* Accepted, board to host. The command of the same sequence number was executed. */
#define WINDCTL_ACCEPTED_CODE 0x82
#define WINDCTL_ACCEPTED_SIZE 7
struct windctl_accepted {
    uint8_t command;
    uint16_t epoch;
    int32_t value; /* StopAt: the count at which it will stand */
};
void windctl_decode_accepted(const uint8_t *body, struct windctl_accepted *message);
void windctl_encode_accepted(const struct windctl_accepted *message, uint8_t *body);

/* Refused, board to host. The command of the same sequence number changed nothing. */
#define WINDCTL_REFUSED_CODE 0x83
#define WINDCTL_REFUSED_SIZE 8
struct windctl_refused {
    uint8_t command;
    uint8_t why;
    uint16_t epoch;
    int32_t limit;
};
void windctl_decode_refused(const uint8_t *body, struct windctl_refused *message);
void windctl_encode_refused(const struct windctl_refused *message, uint8_t *body);

/* Status, board to host. Every 50 ticks, and at once on a change of state. */
#define WINDCTL_STATUS_CODE 0x84
#define WINDCTL_STATUS_SIZE 43
struct windctl_status {
    uint32_t ticks; /* ms */
    uint16_t boot;
    uint16_t epoch;
    uint8_t state;
    uint8_t cause;
    uint8_t trip;
    uint8_t trust;
    uint8_t inputs;
    int32_t count;
    int32_t guide;
    uint32_t stop_point; /* 0xFFFFFFFF: none */
    uint32_t next;
    uint32_t executing;
    uint16_t program_crc;
    uint16_t speed; /* steps/s: without a drive: counts/s as measured */
    uint16_t tension; /* sensor units: mean of the last whole turn */
    int16_t celsius; /* 0.01 degree C */
    uint16_t bad_frames;
};
void windctl_decode_status(const uint8_t *body, struct windctl_status *message);
void windctl_encode_status(const struct windctl_status *message, uint8_t *body);

/* Reading, board to host. The contact's mean over one window. */
#define WINDCTL_READING_CODE 0x85
#define WINDCTL_READING_SIZE 17
struct windctl_reading {
    uint32_t ticks; /* ms: when it was complete */
    int32_t count; /* at the middle of it */
    uint32_t value; /* 1/16 unit */
    uint16_t window; /* ticks: that were averaged; the boxcar reaches 99 further back */
    int16_t celsius; /* 0.01 degree C */
    uint8_t flags;
};
void windctl_decode_reading(const uint8_t *body, struct windctl_reading *message);
void windctl_encode_reading(const struct windctl_reading *message, uint8_t *body);

/* Notice, board to host. Something happened that must not wait for the next Status. May be lost; Status tells
 * the same. */
#define WINDCTL_NOTICE_CODE 0x86
#define WINDCTL_NOTICE_SIZE 13
struct windctl_notice {
    uint32_t ticks;
    uint8_t kind;
    int32_t a;
    int32_t b;
};
void windctl_decode_notice(const uint8_t *body, struct windctl_notice *message);
void windctl_encode_notice(const struct windctl_notice *message, uint8_t *body);

#endif
