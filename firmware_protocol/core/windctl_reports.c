#include "windctl_board.h"

/* What the board says of itself. */

void windctl_notice(struct windctl_core *core, uint8_t kind, int32_t a, int32_t b)
{
    uint8_t body[WINDCTL_NOTICE_SIZE];
    struct windctl_notice notice;

    notice.ticks = core->ticks;
    notice.kind = kind;
    notice.a = a;
    notice.b = b;
    windctl_encode_notice(&notice, body);
    windctl_tell(core, WINDCTL_NOTICE_CODE, body, sizeof body);
}

void windctl_tell_status(struct windctl_core *core, int16_t celsius_centi)
{
    uint8_t body[WINDCTL_STATUS_SIZE];
    struct windctl_status status;

    status.ticks = core->ticks;
    status.boot = core->boot;
    status.epoch = core->epoch;
    status.state = core->state;
    status.cause = core->cause;
    status.trip = core->trip;
    status.trust = core->trust;
    status.inputs = (uint8_t)(core->pins | (core->standing ? WINDCTL_INPUT_BIT_STANDING : 0));
    status.count = core->count;
    status.guide = core->guide;
    status.stop_point = core->stop_point;
    status.next = core->line.next;
    status.executing = core->line.executing;
    status.program_crc = core->line.crc;
    status.speed = core->setup.fitted & WINDCTL_CAPABILITY_DRIVE_STEP ? core->spindle.v : core->speed;
    status.tension = core->turns.tension;
    status.celsius = celsius_centi;
    status.bad_frames = core->dialogue.reader.bad;
    windctl_encode_status(&status, body);
    windctl_tell(core, WINDCTL_STATUS_CODE, body, sizeof body);
}

void windctl_tell_reading(struct windctl_core *core, int16_t celsius_centi)
{
    uint8_t body[WINDCTL_READING_SIZE];
    struct windctl_reading reading;

    reading.ticks = core->ticks;
    reading.count = core->mean.middle;
    reading.value = windctl_mean_value(&core->mean);
    reading.window = core->mean.window_ticks;
    reading.celsius = celsius_centi;
    reading.flags = (uint8_t)((core->mean.turned ? WINDCTL_READING_FLAG_TURNING : 0) |
                              (core->mean.open ? WINDCTL_READING_FLAG_OPEN : 0));
    windctl_encode_reading(&reading, body);
    windctl_tell(core, WINDCTL_READING_CODE, body, sizeof body);
}

void windctl_send_identity(struct windctl_core *core, uint8_t sequence, uint32_t nonce)
{
    uint8_t body[WINDCTL_IDENTITY_SIZE];
    struct windctl_identity identity;

    identity.nonce = nonce;
    identity.schema = WINDCTL_SCHEMA;
    identity.boot = core->boot;
    identity.epoch = core->epoch;
    identity.state = core->state;
    identity.trip = core->trip;
    identity.trust = core->trust;
    identity.capabilities = core->config.capabilities;
    identity.queue = WINDCTL_QUEUE;
    identity.coil_token = core->setup.coil_token;
    identity.setup_crc = core->setup_crc;
    identity.program = core->line.program;
    identity.base = core->line.base;
    identity.next = core->line.next;
    identity.executing = core->line.executing;
    identity.program_crc = core->line.crc;
    identity.count = core->count;
    identity.guide = core->guide;
    identity.contact_scale = core->config.contact_scale;
    identity.tension_scale = core->config.tension_scale;
    windctl_encode_identity(&identity, body);
    windctl_send(core, sequence, WINDCTL_IDENTITY_CODE, body, sizeof body);
}
