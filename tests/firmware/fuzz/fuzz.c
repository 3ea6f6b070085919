/* A libFuzzer target over the frame and message path and the tick behind it.
 *
 * The input is a sequence of small records, each a letter and its arguments; what is left over is sent as it is. A
 * command carries a right number, boot and epoch unless a record says otherwise, so that the fuzzer gets past the
 * door and the search is spent behind it. After every tick what must always hold is checked; sanitizers do the rest. */
#include <stddef.h>
#include <stdint.h>
#include <stdio.h>
#include <stdlib.h>

#include "windctl_board.h"
#include "windctl_host.h"

#define TICKS_MOST 4000

struct input {
    const uint8_t *at;
    size_t left;
};

struct bench {
    struct windctl_host host;
    struct windctl_inputs inputs;
    uint8_t wire[512];
    uint16_t wired;
    uint32_t owed;   /* thousandths of a step */
    uint32_t ticks;
    uint8_t follows; /* counts come with the steps */
};

static uint8_t take(struct input *input)
{
    if (!input->left) {
        return 0;
    }
    input->left--;
    return *input->at++;
}

static uint16_t take_u16(struct input *input)
{
    uint8_t low = take(input);

    return (uint16_t)(low | take(input) << 8);
}

static void must(int holds, const char *what)
{
    if (!holds) {
        fprintf(stderr, "does not hold: %s\n", what);
        abort();
    }
}

/* What holds in every tick, whatever came before. */
static void check(const struct bench *bench, const struct windctl_core *before)
{
    const struct windctl_core *core = &bench->host.core;
    const struct windctl_outputs *out = &bench->host.outputs;
    const struct windctl_setup *setup = &core->setup;

    must(out->rate <= WINDCTL_PACE_LIMIT && (!out->rate || out->rate <= setup->max_pace), "rate within Setup");
    must(!out->rate || out->drive_enable, "no steps without power");
    must(before->state == WINDCTL_STATE_TURNING || core->state == WINDCTL_STATE_TURNING ||
             out->rate <= before->spindle.v,
         "not faster unless turning");
    must(!out->guide_steps || out->guide_enable || before->powered, "no guide steps without power");
    must(core->line.next - core->line.executing <= WINDCTL_QUEUE, "queue within its places");
    must(core->line.left <= core->line.n && (!core->line.n || core->line.acc < core->line.n), "line in its segment");
    must(bench->host.sent_size <= WINDCTL_SENT_MAX, "bytes of a tick");
    must(core->dialogue.reader.length <= WINDCTL_INSIDE_LIMIT, "frame within its buffer");
    must(core->state <= WINDCTL_STATE_TRIPPED, "a state that is one");
    must(core->state != WINDCTL_STATE_TRIPPED || core->trip, "tripped by something");
    must(core->spindle.mode != WINDCTL_RUN || core->state == WINDCTL_STATE_TURNING, "driven only while turning");
    must(core->spindle.goal <= WINDCTL_COUNT_LIMIT, "goal within the limit of counts");
    must(core->mean.sum <= (UINT64_C(1) << 39), "sum of a reading");
}

static void tick(struct bench *bench)
{
    struct windctl_core before = bench->host.core;
    uint16_t steps;

    bench->owed += bench->host.outputs.rate;
    steps = (uint16_t)(bench->owed / 1000);
    bench->owed %= 1000;
    bench->inputs.steps_issued = steps;
    if (bench->follows) {
        bench->inputs.count_delta = (int16_t)(bench->inputs.count_delta + steps);
    }
    bench->inputs.received = bench->wire;
    bench->inputs.received_size = bench->wired;
    windctl_host_tick(&bench->host, &bench->inputs);
    bench->wired = 0;
    bench->inputs.count_delta = 0;
    bench->inputs.index = 0;
    bench->ticks++;
    check(bench, &before);
}

static void wire(struct bench *bench, uint8_t byte)
{
    if (bench->wired < sizeof bench->wire) {
        bench->wire[bench->wired++] = byte;
    }
}

/* A good frame around a body of the input's bytes; `honest` puts in the number, boot and epoch that are due. */
static void command(struct bench *bench, struct input *input, uint8_t code, uint8_t honest)
{
    const struct windctl_core *core = &bench->host.core;
    uint8_t size = windctl_body_size(code), sequence = (uint8_t)(core->dialogue.sequence + 1), place;
    uint8_t body[WINDCTL_BODY_LIMIT], frame[WINDCTL_SENT_RING];

    if (size == WINDCTL_NO_SUCH_CODE) {
        size = take(input) % (WINDCTL_BODY_LIMIT + 1);
    }
    for (place = 0; place < size; place++) {
        body[place] = take(input);
    }
    if (honest && windctl_moves_something(code)) {
        windctl_put_u16(body, core->boot);
        windctl_put_u16(body + 2, core->epoch);
    }
    if (honest && code == WINDCTL_GREET_CODE) {
        windctl_put_u32(body + 4, WINDCTL_SCHEMA);
    }
    if (honest && code == WINDCTL_LAY_CODE) {
        windctl_put_u32(body, core->line.program);
        windctl_put_u32(body + 4, core->line.next);
    }
    if (!honest && take(input) & 1) {
        sequence = take(input);
    }
    size = windctl_host_frame(code, sequence, body, size, frame);
    for (place = 0; place < size; place++) {
        wire(bench, frame[place]);
    }
}

/* A Setup that is accepted, with the input's choice of figures. */
static void setup(struct bench *bench, struct input *input)
{
    uint8_t body[WINDCTL_SETUP_SIZE], frame[WINDCTL_SENT_RING], place, size;
    struct windctl_setup next;

    next.coil_token = take(input);
    next.counts_per_turn = (uint16_t)(1 + take_u16(input) % WINDCTL_COUNTS_PER_TURN_LIMIT);
    next.steps_per_turn = (uint16_t)(1 + take_u16(input) % WINDCTL_STEPS_PER_TURN_LIMIT);
    next.max_count = 1 + (uint32_t)take_u16(input) * (1 + take(input));
    next.max_pace = (uint16_t)(1 + take_u16(input) % WINDCTL_PACE_LIMIT);
    next.accel = (uint16_t)(100 + take_u16(input) % 65436);
    next.decel = (uint16_t)(1500 + take_u16(input) % 64036);
    next.guide_min = -(int32_t)take_u16(input);
    next.guide_max = (int32_t)take_u16(input);
    next.slip_counts = take_u16(input);
    next.reverse_counts = take_u16(input);
    next.tension_low = take_u16(input);
    next.tension_high = UINT16_MAX;
    next.fitted = take(input) & WINDCTL_FITTABLE;
    next.rotation = take(input) & 1;
    windctl_encode_setup(&next, body);
    size = windctl_host_frame(WINDCTL_SETUP_CODE, (uint8_t)(bench->host.core.dialogue.sequence + 1), body, sizeof body,
                              frame);
    for (place = 0; place < size; place++) {
        wire(bench, frame[place]);
    }
}

static void some_ticks(struct bench *bench, uint16_t ticks)
{
    while (ticks-- && bench->ticks < TICKS_MOST) {
        tick(bench);
    }
}

int LLVMFuzzerTestOneInput(const uint8_t *data, size_t size);

int LLVMFuzzerTestOneInput(const uint8_t *data, size_t size)
{
    static struct bench bench;
    struct input input;

    input.at = data;
    input.left = size;
    windctl_host_start(&bench.host, take(&input) | WINDCTL_CAPABILITY_CONTACT, 0xFFFF, 1, 1);
    windctl_host_age(&bench.host, take(&input) & 1 ? UINT32_MAX - 200 : 0, 0xFFFE);
    bench.inputs.pins = WINDCTL_PINS_ALL_OK;
    bench.inputs.count_delta = 0;
    bench.inputs.index = 0;
    bench.wired = 0;
    bench.owed = bench.ticks = 0;
    bench.follows = 1;
    while (input.left && bench.ticks < TICKS_MOST) {
        uint8_t letter = take(&input);

        switch (letter & 0x0F) {
        case 0:
            some_ticks(&bench, take(&input));
            break;
        case 1:
            command(&bench, &input, take(&input) % 16, 1);
            some_ticks(&bench, 1);
            break;
        case 2:
            command(&bench, &input, take(&input), letter >> 7);
            break;
        case 3:
            wire(&bench, take(&input));
            break;
        case 4:
            bench.inputs.pins = take(&input) & 0x1F;
            break;
        case 5:
            bench.inputs.count_delta = (int16_t)((int16_t)take_u16(&input) % 2001);
            some_ticks(&bench, 1);
            break;
        case 6:
            bench.inputs.contact = take_u16(&input);
            bench.inputs.tension = take_u16(&input);
            bench.inputs.celsius_centi = (int16_t)take_u16(&input);
            break;
        case 7:
            bench.inputs.index = 1;
            break;
        case 8:
            bench.follows = take(&input) & 1;
            break;
        case 9:
            setup(&bench, &input);
            some_ticks(&bench, 1);
            break;
        case 10: /* ready to go: greeted, placed, armed, paced */
            command(&bench, &input, WINDCTL_GREET_CODE, 1);
            some_ticks(&bench, 1);
            setup(&bench, &input);
            some_ticks(&bench, 1);
            command(&bench, &input, WINDCTL_SET_DATUM_CODE, 1);
            some_ticks(&bench, 1);
            command(&bench, &input, WINDCTL_ARM_CODE, 1);
            some_ticks(&bench, 1);
            command(&bench, &input, WINDCTL_PACE_CODE, 1);
            some_ticks(&bench, 1);
            break;
        case 11:
            command(&bench, &input, WINDCTL_LAY_CODE, !(letter & 0x80));
            some_ticks(&bench, 1);
            break;
        case 12:
            command(&bench, &input, WINDCTL_GO_CODE, 1);
            some_ticks(&bench, take(&input));
            break;
        case 13:
            wire(&bench, 0);
            command(&bench, &input, WINDCTL_BEAT_CODE, 1);
            break;
        case 14:
            some_ticks(&bench, take_u16(&input) % 2100);
            break;
        default: /* raw bytes for the frame reader */
            {
                uint8_t n = take(&input);

                while (n--) {
                    wire(&bench, take(&input));
                }
            }
            some_ticks(&bench, 1);
        }
    }
    some_ticks(&bench, 60);
    return 0;
}
