#include "windctl_host.h"

#include <string.h>

#include "windctl_board.h"

size_t windctl_host_size(void)
{
    return sizeof(struct windctl_host);
}

uint16_t windctl_host_queue(void)
{
    return WINDCTL_QUEUE;
}

void windctl_host_start(struct windctl_host *host, uint8_t capabilities, uint16_t boot_number,
                        uint16_t contact_scale, uint16_t tension_scale)
{
    struct windctl_config config;

    config.capabilities = capabilities;
    config.contact_scale = contact_scale;
    config.tension_scale = tension_scale;
    memset(host, 0, sizeof *host);
    memset(&host->core, 0xA5, sizeof host->core); /* the core promises not to need zeroed memory */
    host->outputs.sent = host->ring;
    windctl_start(&host->core, &config, boot_number);
}

void windctl_host_age(struct windctl_host *host, uint32_t ticks, uint16_t epoch)
{
    host->core.ticks = ticks;
    host->core.status_at = ticks + WINDCTL_STATUS_EVERY;
    host->core.check_at = ticks + WINDCTL_CHECK_EVERY;
    host->core.epoch = epoch;
}

void windctl_host_tick(struct windctl_host *host, const struct windctl_inputs *inputs)
{
    struct windctl_outputs *outputs = &host->outputs;
    uint16_t size = 0;

    outputs->sent_begin = outputs->sent_end;
    windctl_tick(&host->core, inputs, outputs);
    while (outputs->sent_begin != outputs->sent_end) {
        host->sent[size++] = host->ring[outputs->sent_begin];
        outputs->sent_begin = (uint8_t)((outputs->sent_begin + 1) & (WINDCTL_SENT_RING - 1));
    }
    host->sent_size = size;
}

const struct windctl_outputs *windctl_host_outputs(const struct windctl_host *host)
{
    return &host->outputs;
}

const uint8_t *windctl_host_sent(const struct windctl_host *host)
{
    return host->sent;
}

uint16_t windctl_host_sent_size(const struct windctl_host *host)
{
    return host->sent_size;
}

int64_t windctl_host_get(const struct windctl_host *host, const char *name)
{
    const struct windctl_core *core = &host->core;
    const struct {
        const char *name;
        int64_t value;
    } figures[] = {
        {"ticks", core->ticks},
        {"boot", core->boot},
        {"epoch", core->epoch},
        {"state", core->state},
        {"cause", core->cause},
        {"trip", core->trip},
        {"trust", core->trust},
        {"pins", core->pins},
        {"count", core->count},
        {"guide", core->guide},
        {"away", core->away},
        {"standing", core->standing},
        {"powered", core->powered},
        {"speed", core->speed},
        {"fitted", core->setup.fitted},
        {"rotation", core->setup.rotation},
        {"stop_point", core->stop_point},
        {"setup_crc", core->setup_crc},
        {"pedal_fresh", core->pedal_fresh},
        {"went_back", core->went_back},
        {"line.program", core->line.program},
        {"line.base", core->line.base},
        {"line.next", core->line.next},
        {"line.executing", core->line.executing},
        {"line.end", core->line.end},
        {"line.crc", core->line.crc},
        {"line.behind", core->line.behind},
        {"line.pending", core->line.pending},
        {"spindle.v", core->spindle.v},
        {"spindle.mode", core->spindle.mode},
        {"spindle.goal", core->spindle.goal},
        {"mean.active", core->mean.active},
        {"dialogue.greeted", core->dialogue.greeted},
        {"dialogue.reader.bad", core->dialogue.reader.bad},
    };
    size_t place;

    if (strcmp(name, "target") == 0) {
        return core->has_setup ? windctl_target(core) : INT64_MIN;
    }
    for (place = 0; place < sizeof figures / sizeof figures[0]; place++) {
        if (strcmp(name, figures[place].name) == 0) {
            return figures[place].value;
        }
    }
    return INT64_MIN;
}

void windctl_host_set_state(struct windctl_host *host, uint8_t state)
{
    host->core.state = state;
}

uint8_t windctl_host_frame(uint8_t code, uint8_t sequence, const uint8_t *body, uint8_t size, uint8_t *frame)
{
    uint8_t ring[WINDCTL_SENT_RING];
    const uint8_t begin = WINDCTL_SENT_RING - 7; /* so that it runs over the ring's end */
    uint8_t at = windctl_write(ring, begin, code, sequence, body, size);
    uint8_t length = 0;
    uint8_t from = begin;

    while (from != at) {
        frame[length++] = ring[from];
        from = (uint8_t)((from + 1) & (WINDCTL_SENT_RING - 1));
    }
    return length;
}
