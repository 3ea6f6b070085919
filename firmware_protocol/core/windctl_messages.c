/* The codec of the board protocol. Generated from messages.toml by generate.py; do not edit. */
#include "windctl_messages.h"

#include "windctl_seams.h"

uint16_t windctl_get_u16(const uint8_t *at)
{
    return (uint16_t)(at[0] | (uint16_t)at[1] << 8);
}

uint32_t windctl_get_u32(const uint8_t *at)
{
    return windctl_get_u16(at) | (uint32_t)windctl_get_u16(at + 2) << 16;
}

void windctl_put_u16(uint8_t *at, uint16_t value)
{
    at[0] = (uint8_t)value;
    at[1] = (uint8_t)(value >> 8);
}

void windctl_put_u32(uint8_t *at, uint32_t value)
{
    windctl_put_u16(at, (uint16_t)value);
    windctl_put_u16(at + 2, (uint16_t)(value >> 16));
}

/* by code */
static const uint8_t sizes_to_board[] WINDCTL_ROM = {255, 8, 36, 4, 0, 57, 6, 8, 4, 0, 10, 22, 4, 4, 0};

/* by code less 0x80 */
static const uint8_t sizes_to_host[] WINDCTL_ROM = {255, 54, 7, 8, 43, 17, 13};

/* by code */
static const uint8_t moving[] WINDCTL_ROM = {0, 0, 0, 1, 0, 0, 1, 1, 1, 0, 1, 1, 0, 1, 0};

/* by trip */
static const uint8_t categories[] WINDCTL_ROM = {1, 0, 1, 1, 1, 1, 1, 1, 1, 1, 1};

/* by trip */
static const uint8_t trust[] WINDCTL_ROM = {0, 3, 3, 3, 3, 2, 3, 3, 3, 1, 0};

uint8_t windctl_body_size(uint8_t code)
{
    if (code & 0x80) {
        code = (uint8_t)(code - 0x80);
        return code < sizeof sizes_to_host ? WINDCTL_ROM_U8(&sizes_to_host[code]) : WINDCTL_NO_SUCH_CODE;
    }
    return code < sizeof sizes_to_board ? WINDCTL_ROM_U8(&sizes_to_board[code]) : WINDCTL_NO_SUCH_CODE;
}

uint8_t windctl_moves_something(uint8_t code)
{
    return code < sizeof moving ? WINDCTL_ROM_U8(&moving[code]) : 0;
}

uint8_t windctl_trip_category(uint8_t trip)
{
    return trip < sizeof categories ? WINDCTL_ROM_U8(&categories[trip]) : 1;
}

uint8_t windctl_trip_trust(uint8_t trip)
{
    return trip < sizeof trust ? WINDCTL_ROM_U8(&trust[trip]) : 0;
}

void windctl_decode_greet(const uint8_t *body, struct windctl_greet *message)
{
    message->nonce = windctl_get_u32(body);
    message->schema = windctl_get_u32(body + 4);
}

void windctl_encode_greet(const struct windctl_greet *message, uint8_t *body)
{
    windctl_put_u32(body, message->nonce);
    windctl_put_u32(body + 4, message->schema);
}

void windctl_decode_setup(const uint8_t *body, struct windctl_setup *message)
{
    message->coil_token = windctl_get_u32(body);
    message->counts_per_turn = windctl_get_u16(body + 4);
    message->steps_per_turn = windctl_get_u16(body + 6);
    message->max_count = windctl_get_u32(body + 8);
    message->max_pace = windctl_get_u16(body + 12);
    message->accel = windctl_get_u16(body + 14);
    message->decel = windctl_get_u16(body + 16);
    message->guide_min = (int32_t)windctl_get_u32(body + 18);
    message->guide_max = (int32_t)windctl_get_u32(body + 22);
    message->slip_counts = windctl_get_u16(body + 26);
    message->reverse_counts = windctl_get_u16(body + 28);
    message->tension_low = windctl_get_u16(body + 30);
    message->tension_high = windctl_get_u16(body + 32);
    message->fitted = body[34];
    message->rotation = body[35];
}

void windctl_encode_setup(const struct windctl_setup *message, uint8_t *body)
{
    windctl_put_u32(body, message->coil_token);
    windctl_put_u16(body + 4, message->counts_per_turn);
    windctl_put_u16(body + 6, message->steps_per_turn);
    windctl_put_u32(body + 8, message->max_count);
    windctl_put_u16(body + 12, message->max_pace);
    windctl_put_u16(body + 14, message->accel);
    windctl_put_u16(body + 16, message->decel);
    windctl_put_u32(body + 18, (uint32_t)message->guide_min);
    windctl_put_u32(body + 22, (uint32_t)message->guide_max);
    windctl_put_u16(body + 26, message->slip_counts);
    windctl_put_u16(body + 28, message->reverse_counts);
    windctl_put_u16(body + 30, message->tension_low);
    windctl_put_u16(body + 32, message->tension_high);
    body[34] = message->fitted;
    body[35] = message->rotation;
}

void windctl_decode_arm(const uint8_t *body, struct windctl_arm *message)
{
    message->boot = windctl_get_u16(body);
    message->epoch = windctl_get_u16(body + 2);
}

void windctl_encode_arm(const struct windctl_arm *message, uint8_t *body)
{
    windctl_put_u16(body, message->boot);
    windctl_put_u16(body + 2, message->epoch);
}

void windctl_decode_lay(const uint8_t *body, struct windctl_lay *message)
{
    message->program = windctl_get_u32(body);
    message->first = windctl_get_u32(body + 4);
    message->n = body[8];
    message->segments = body + 9;
}

void windctl_encode_lay(const struct windctl_lay *message, uint8_t *body)
{
    uint8_t place;

    windctl_put_u32(body, message->program);
    windctl_put_u32(body + 4, message->first);
    body[8] = message->n;
    for (place = 0; place < 48; place++) {
        body[9 + place] = message->segments[place];
    }
}

void windctl_decode_pace(const uint8_t *body, struct windctl_pace *message)
{
    message->boot = windctl_get_u16(body);
    message->epoch = windctl_get_u16(body + 2);
    message->pace = windctl_get_u16(body + 4);
}

void windctl_encode_pace(const struct windctl_pace *message, uint8_t *body)
{
    windctl_put_u16(body, message->boot);
    windctl_put_u16(body + 2, message->epoch);
    windctl_put_u16(body + 4, message->pace);
}

void windctl_decode_stop_at(const uint8_t *body, struct windctl_stop_at *message)
{
    message->boot = windctl_get_u16(body);
    message->epoch = windctl_get_u16(body + 2);
    message->count = windctl_get_u32(body + 4);
}

void windctl_encode_stop_at(const struct windctl_stop_at *message, uint8_t *body)
{
    windctl_put_u16(body, message->boot);
    windctl_put_u16(body + 2, message->epoch);
    windctl_put_u32(body + 4, message->count);
}

void windctl_decode_go(const uint8_t *body, struct windctl_go *message)
{
    message->boot = windctl_get_u16(body);
    message->epoch = windctl_get_u16(body + 2);
}

void windctl_encode_go(const struct windctl_go *message, uint8_t *body)
{
    windctl_put_u16(body, message->boot);
    windctl_put_u16(body + 2, message->epoch);
}

void windctl_decode_guide_to(const uint8_t *body, struct windctl_guide_to *message)
{
    message->boot = windctl_get_u16(body);
    message->epoch = windctl_get_u16(body + 2);
    message->guide = (int32_t)windctl_get_u32(body + 4);
    message->pace = windctl_get_u16(body + 8);
}

void windctl_encode_guide_to(const struct windctl_guide_to *message, uint8_t *body)
{
    windctl_put_u16(body, message->boot);
    windctl_put_u16(body + 2, message->epoch);
    windctl_put_u32(body + 4, (uint32_t)message->guide);
    windctl_put_u16(body + 8, message->pace);
}

void windctl_decode_set_datum(const uint8_t *body, struct windctl_set_datum *message)
{
    message->boot = windctl_get_u16(body);
    message->epoch = windctl_get_u16(body + 2);
    message->program = windctl_get_u32(body + 4);
    message->count = (int32_t)windctl_get_u32(body + 8);
    message->guide = (int32_t)windctl_get_u32(body + 12);
    message->next = windctl_get_u32(body + 16);
    message->into = windctl_get_u16(body + 20);
}

void windctl_encode_set_datum(const struct windctl_set_datum *message, uint8_t *body)
{
    windctl_put_u16(body, message->boot);
    windctl_put_u16(body + 2, message->epoch);
    windctl_put_u32(body + 4, message->program);
    windctl_put_u32(body + 8, (uint32_t)message->count);
    windctl_put_u32(body + 12, (uint32_t)message->guide);
    windctl_put_u32(body + 16, message->next);
    windctl_put_u16(body + 20, message->into);
}

void windctl_decode_measure(const uint8_t *body, struct windctl_measure *message)
{
    message->window = windctl_get_u16(body);
    message->every = windctl_get_u16(body + 2);
}

void windctl_encode_measure(const struct windctl_measure *message, uint8_t *body)
{
    windctl_put_u16(body, message->window);
    windctl_put_u16(body + 2, message->every);
}

void windctl_decode_clear_trip(const uint8_t *body, struct windctl_clear_trip *message)
{
    message->boot = windctl_get_u16(body);
    message->epoch = windctl_get_u16(body + 2);
}

void windctl_encode_clear_trip(const struct windctl_clear_trip *message, uint8_t *body)
{
    windctl_put_u16(body, message->boot);
    windctl_put_u16(body + 2, message->epoch);
}

void windctl_decode_identity(const uint8_t *body, struct windctl_identity *message)
{
    message->nonce = windctl_get_u32(body);
    message->schema = windctl_get_u32(body + 4);
    message->boot = windctl_get_u16(body + 8);
    message->epoch = windctl_get_u16(body + 10);
    message->state = body[12];
    message->trip = body[13];
    message->trust = body[14];
    message->capabilities = body[15];
    message->queue = windctl_get_u16(body + 16);
    message->coil_token = windctl_get_u32(body + 18);
    message->setup_crc = windctl_get_u16(body + 22);
    message->program = windctl_get_u32(body + 24);
    message->base = windctl_get_u32(body + 28);
    message->next = windctl_get_u32(body + 32);
    message->executing = windctl_get_u32(body + 36);
    message->program_crc = windctl_get_u16(body + 40);
    message->count = (int32_t)windctl_get_u32(body + 42);
    message->guide = (int32_t)windctl_get_u32(body + 46);
    message->contact_scale = windctl_get_u16(body + 50);
    message->tension_scale = windctl_get_u16(body + 52);
}

void windctl_encode_identity(const struct windctl_identity *message, uint8_t *body)
{
    windctl_put_u32(body, message->nonce);
    windctl_put_u32(body + 4, message->schema);
    windctl_put_u16(body + 8, message->boot);
    windctl_put_u16(body + 10, message->epoch);
    body[12] = message->state;
    body[13] = message->trip;
    body[14] = message->trust;
    body[15] = message->capabilities;
    windctl_put_u16(body + 16, message->queue);
    windctl_put_u32(body + 18, message->coil_token);
    windctl_put_u16(body + 22, message->setup_crc);
    windctl_put_u32(body + 24, message->program);
    windctl_put_u32(body + 28, message->base);
    windctl_put_u32(body + 32, message->next);
    windctl_put_u32(body + 36, message->executing);
    windctl_put_u16(body + 40, message->program_crc);
    windctl_put_u32(body + 42, (uint32_t)message->count);
    windctl_put_u32(body + 46, (uint32_t)message->guide);
    windctl_put_u16(body + 50, message->contact_scale);
    windctl_put_u16(body + 52, message->tension_scale);
}

void windctl_decode_accepted(const uint8_t *body, struct windctl_accepted *message)
{
    message->command = body[0];
    message->epoch = windctl_get_u16(body + 1);
    message->value = (int32_t)windctl_get_u32(body + 3);
}

void windctl_encode_accepted(const struct windctl_accepted *message, uint8_t *body)
{
    body[0] = message->command;
    windctl_put_u16(body + 1, message->epoch);
    windctl_put_u32(body + 3, (uint32_t)message->value);
}

void windctl_decode_refused(const uint8_t *body, struct windctl_refused *message)
{
    message->command = body[0];
    message->why = body[1];
    message->epoch = windctl_get_u16(body + 2);
    message->limit = (int32_t)windctl_get_u32(body + 4);
}

void windctl_encode_refused(const struct windctl_refused *message, uint8_t *body)
{
    body[0] = message->command;
    body[1] = message->why;
    windctl_put_u16(body + 2, message->epoch);
    windctl_put_u32(body + 4, (uint32_t)message->limit);
}

void windctl_decode_status(const uint8_t *body, struct windctl_status *message)
{
    message->ticks = windctl_get_u32(body);
    message->boot = windctl_get_u16(body + 4);
    message->epoch = windctl_get_u16(body + 6);
    message->state = body[8];
    message->cause = body[9];
    message->trip = body[10];
    message->trust = body[11];
    message->inputs = body[12];
    message->count = (int32_t)windctl_get_u32(body + 13);
    message->guide = (int32_t)windctl_get_u32(body + 17);
    message->stop_point = windctl_get_u32(body + 21);
    message->next = windctl_get_u32(body + 25);
    message->executing = windctl_get_u32(body + 29);
    message->program_crc = windctl_get_u16(body + 33);
    message->speed = windctl_get_u16(body + 35);
    message->tension = windctl_get_u16(body + 37);
    message->celsius = (int16_t)windctl_get_u16(body + 39);
    message->bad_frames = windctl_get_u16(body + 41);
}

void windctl_encode_status(const struct windctl_status *message, uint8_t *body)
{
    windctl_put_u32(body, message->ticks);
    windctl_put_u16(body + 4, message->boot);
    windctl_put_u16(body + 6, message->epoch);
    body[8] = message->state;
    body[9] = message->cause;
    body[10] = message->trip;
    body[11] = message->trust;
    body[12] = message->inputs;
    windctl_put_u32(body + 13, (uint32_t)message->count);
    windctl_put_u32(body + 17, (uint32_t)message->guide);
    windctl_put_u32(body + 21, message->stop_point);
    windctl_put_u32(body + 25, message->next);
    windctl_put_u32(body + 29, message->executing);
    windctl_put_u16(body + 33, message->program_crc);
    windctl_put_u16(body + 35, message->speed);
    windctl_put_u16(body + 37, message->tension);
    windctl_put_u16(body + 39, (uint16_t)message->celsius);
    windctl_put_u16(body + 41, message->bad_frames);
}

void windctl_decode_reading(const uint8_t *body, struct windctl_reading *message)
{
    message->ticks = windctl_get_u32(body);
    message->count = (int32_t)windctl_get_u32(body + 4);
    message->value = windctl_get_u32(body + 8);
    message->window = windctl_get_u16(body + 12);
    message->celsius = (int16_t)windctl_get_u16(body + 14);
    message->flags = body[16];
}

void windctl_encode_reading(const struct windctl_reading *message, uint8_t *body)
{
    windctl_put_u32(body, message->ticks);
    windctl_put_u32(body + 4, (uint32_t)message->count);
    windctl_put_u32(body + 8, message->value);
    windctl_put_u16(body + 12, message->window);
    windctl_put_u16(body + 14, (uint16_t)message->celsius);
    body[16] = message->flags;
}

void windctl_decode_notice(const uint8_t *body, struct windctl_notice *message)
{
    message->ticks = windctl_get_u32(body);
    message->kind = body[4];
    message->a = (int32_t)windctl_get_u32(body + 5);
    message->b = (int32_t)windctl_get_u32(body + 9);
}

void windctl_encode_notice(const struct windctl_notice *message, uint8_t *body)
{
    windctl_put_u32(body, message->ticks);
    body[4] = message->kind;
    windctl_put_u32(body + 5, (uint32_t)message->a);
    windctl_put_u32(body + 9, (uint32_t)message->b);
}
