#include "windctl_board.h"

WINDCTL_ASSERT(answers_fit, WINDCTL_ACCEPTED_SIZE <= WINDCTL_REFUSED_SIZE);
WINDCTL_ASSERT(a_tick_fits_a_byte, WINDCTL_SENT_MAX <= 255);

void windctl_send(struct windctl_core *core, uint8_t sequence, uint8_t code, const uint8_t *body, uint8_t size)
{
    struct windctl_outputs *out = core->outputs;
    uint8_t bytes = WINDCTL_FRAME_BYTES(size);
    uint8_t held = (uint8_t)((out->sent_end - out->sent_begin) & (WINDCTL_SENT_RING - 1));

    if (bytes > WINDCTL_SENT_MAX - core->dialogue.sent || bytes > WINDCTL_SENT_RING - 1 - held) {
        return;
    }
    core->dialogue.sent = (uint8_t)(core->dialogue.sent + bytes);
    out->sent_end = windctl_write(out->sent, out->sent_end, code, sequence, body, size);
}

void windctl_tell(struct windctl_core *core, uint8_t code, const uint8_t *body, uint8_t size)
{
    core->dialogue.unasked++;
    windctl_send(core, core->dialogue.unasked, code, body, size);
}

static void greet(struct windctl_core *core, uint8_t sequence, const uint8_t *body)
{
    struct windctl_dialogue *dialogue = &core->dialogue;
    struct windctl_greet greet;

    windctl_decode_greet(body, &greet);
    if (!dialogue->greeted || greet.nonce != dialogue->nonce) { /* else a repeat: answered, nothing else */
        windctl_hold(core, WINDCTL_CAUSE_GREET);
        dialogue->greeted = greet.schema == WINDCTL_SCHEMA;
        dialogue->nonce = greet.nonce;
        dialogue->sequence = sequence;
        dialogue->heard = 0;
    }
    windctl_send_identity(core, sequence, greet.nonce);
}

static void encode_refused(const struct windctl_core *core, uint8_t code, uint8_t why, int32_t limit, uint8_t *body)
{
    struct windctl_refused refused;

    refused.command = code;
    refused.why = why;
    refused.epoch = core->epoch;
    refused.limit = limit;
    windctl_encode_refused(&refused, body);
}

/* Refuse without touching the sequence or the stored answer. */
static void refuse(struct windctl_core *core, uint8_t sequence, uint8_t code, uint8_t why, int32_t limit)
{
    uint8_t body[WINDCTL_REFUSED_SIZE];

    encode_refused(core, code, why, limit, body);
    windctl_send(core, sequence, WINDCTL_REFUSED_CODE, body, sizeof body);
}

static void answer(struct windctl_core *core)
{
    const struct windctl_dialogue *dialogue = &core->dialogue;

    windctl_send(core, dialogue->sequence, dialogue->answer_code, dialogue->answer, dialogue->answer_size);
}

static void numbered(struct windctl_core *core, uint8_t code, uint8_t sequence, const uint8_t *body)
{
    struct windctl_dialogue *dialogue = &core->dialogue;
    uint16_t crc = windctl_read_crc(&dialogue->reader);
    uint8_t due = (uint8_t)(dialogue->sequence + 1);
    uint8_t why;
    int32_t value;

    if (!dialogue->greeted) {
        refuse(core, sequence, code, WINDCTL_REFUSAL_NOT_GREETED, 0);
        return;
    }
    if (dialogue->heard && sequence == dialogue->sequence && crc == dialogue->heard_crc) {
        answer(core);
        return;
    }
    if (sequence != due) {
        refuse(core, sequence, code, WINDCTL_REFUSAL_SEQUENCE, due);
        return;
    }
    dialogue->sequence = sequence;
    dialogue->heard_crc = crc;
    dialogue->heard = 1;
    why = windctl_judge(core, code, body, &value);
    if (why == WINDCTL_ACCEPTED) {
        struct windctl_accepted accepted;

        accepted.command = code;
        accepted.epoch = core->epoch;
        accepted.value = value;
        windctl_encode_accepted(&accepted, dialogue->answer);
        dialogue->answer_code = WINDCTL_ACCEPTED_CODE;
        dialogue->answer_size = WINDCTL_ACCEPTED_SIZE;
    } else {
        encode_refused(core, code, why, value, dialogue->answer);
        dialogue->answer_code = WINDCTL_REFUSED_CODE;
        dialogue->answer_size = WINDCTL_REFUSED_SIZE;
    }
    answer(core);
}

void windctl_hear(struct windctl_core *core, uint8_t byte)
{
    struct windctl_reader *reader = &core->dialogue.reader;
    uint8_t code, sequence;
    const uint8_t *body;

    if (!windctl_read(reader, byte)) {
        return;
    }
    code = reader->inside[0];
    sequence = reader->inside[1];
    body = reader->inside + 2;
    switch (code) {
    case WINDCTL_HOLD_CODE:
        windctl_hold(core, WINDCTL_CAUSE_HOLD);
        break;
    case WINDCTL_BEAT_CODE:
        windctl_beat(core);
        break;
    case WINDCTL_GREET_CODE:
        greet(core, sequence, body);
        break;
    default:
        numbered(core, code, sequence, body);
    }
}
