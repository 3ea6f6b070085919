/* The core on a computer, as a shared library for tests.
 *
 * Nothing here allocates; the caller gives a board's memory, windctl_host_size() bytes. */
#ifndef WINDCTL_HOST_H
#define WINDCTL_HOST_H

#include <stddef.h>

#include "windctl_core.h"

/* A board with a line of its own. */
struct windctl_host {
    struct windctl_core core;
    struct windctl_outputs outputs;
    uint8_t ring[WINDCTL_SENT_RING];
    uint8_t sent[WINDCTL_SENT_RING]; /* what the last tick sent, in one piece */
    uint16_t sent_size;
};

size_t windctl_host_size(void);

/* Places in the queue this library was built with. */
uint16_t windctl_host_queue(void);

/* Power on. */
void windctl_host_start(struct windctl_host *host, uint8_t capabilities, uint16_t boot_number,
                        uint16_t contact_scale, uint16_t tension_scale);

/* As if it had run for so long and lost so many permissions: clocks that are about to wrap. */
void windctl_host_age(struct windctl_host *host, uint32_t ticks, uint16_t epoch);

/* One millisecond; the outputs then stand in `outputs`, `sent` and `sent_size`. */
void windctl_host_tick(struct windctl_host *host, const struct windctl_inputs *inputs);

const struct windctl_outputs *windctl_host_outputs(const struct windctl_host *host);
const uint8_t *windctl_host_sent(const struct windctl_host *host);
uint16_t windctl_host_sent_size(const struct windctl_host *host);

/* A figure of the core by the name of its field, e.g. "count" or "line.next". INT64_MIN if there is none. */
int64_t windctl_host_get(const struct windctl_host *host, const char *name);

/* Break a byte on purpose: the state, to see it noticed. */
void windctl_host_set_state(struct windctl_host *host, uint8_t state);

/* One frame, as the core writes it, into `frame` (at least 66 bytes). Returns its length. */
uint8_t windctl_host_frame(uint8_t code, uint8_t sequence, const uint8_t *body, uint8_t size, uint8_t *frame);

#endif
