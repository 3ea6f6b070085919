#include "play.h"

#include <string.h>

#include "windctl_host.h"

/* Records: a letter, then fields, little endian.
 *   S capabilities u8, boot u16, contact_scale u16, tension_scale u16        power on
 *   A ticks u32, epoch u16                                                   old clocks
 *   X state u8                                                               a state on purpose
 *   T inputs: count_delta i16, steps_issued u16, contact u16, tension u16, celsius i16, index u8, pins u8,
 *             received_size u16, received
 *     outputs: rate u16, guide_steps i32, flags u8 (rotation, drive, guide), sent_size u8, sent
 */
#define START_BYTES 7
#define AGE_BYTES 6
#define INPUT_BYTES 14
#define OUTPUT_BYTES 8

static uint8_t is_as_recorded(const struct windctl_host *host, const uint8_t *at, size_t sent)
{
    const struct windctl_outputs *outputs = &host->outputs;
    uint8_t flags = (uint8_t)(outputs->rotation | outputs->drive_enable << 1 | outputs->guide_enable << 2);

    return outputs->rate == windctl_get_u16(at) &&
           outputs->guide_steps == (int32_t)windctl_get_u32(at + 2) && flags == at[6] &&
           host->sent_size == sent && memcmp(host->sent, at + OUTPUT_BYTES, sent) == 0;
}

int64_t windctl_play(const uint8_t *trace, size_t size, uint32_t *ticks)
{
    static struct windctl_host host;
    const uint8_t *at = trace, *end = trace + size;

    *ticks = 0;
    while (at < end) {
        size_t left = (size_t)(end - at) - 1;
        uint8_t kind = *at++;

        if (kind == 'S' && left >= START_BYTES) {
            windctl_host_start(&host, at[0], windctl_get_u16(at + 1), windctl_get_u16(at + 3),
                               windctl_get_u16(at + 5));
            at += START_BYTES;
        } else if (kind == 'A' && left >= AGE_BYTES) {
            windctl_host_age(&host, windctl_get_u32(at), windctl_get_u16(at + 4));
            at += AGE_BYTES;
        } else if (kind == 'X' && left >= 1) {
            windctl_host_set_state(&host, *at++);
        } else if (kind == 'T' && left >= INPUT_BYTES + OUTPUT_BYTES) {
            struct windctl_inputs inputs;
            size_t received = windctl_get_u16(at + 12), sent;

            if (left < INPUT_BYTES + received + OUTPUT_BYTES) {
                return WINDCTL_PLAY_NO_TRACE;
            }
            inputs.count_delta = (int16_t)windctl_get_u16(at);
            inputs.steps_issued = windctl_get_u16(at + 2);
            inputs.contact = windctl_get_u16(at + 4);
            inputs.tension = windctl_get_u16(at + 6);
            inputs.celsius_centi = (int16_t)windctl_get_u16(at + 8);
            inputs.index = at[10];
            inputs.pins = at[11];
            inputs.received_size = (uint16_t)received;
            inputs.received = at + INPUT_BYTES;
            at += INPUT_BYTES + received;
            sent = at[7];
            if ((size_t)(end - at) < OUTPUT_BYTES + sent) {
                return WINDCTL_PLAY_NO_TRACE;
            }
            windctl_host_tick(&host, &inputs);
            if (!is_as_recorded(&host, at, sent)) {
                return (int64_t)*ticks;
            }
            at += OUTPUT_BYTES + sent;
            ++*ticks;
        } else {
            return WINDCTL_PLAY_NO_TRACE;
        }
    }
    return WINDCTL_PLAY_EQUAL;
}
