#include "windctl_frames.h"

WINDCTL_ASSERT(lengths_fit_a_byte, WINDCTL_ENCODED_LIMIT + 1 < 254);

#ifdef WINDCTL_CRC_BYTE
#define next_crc WINDCTL_CRC_BYTE
#else

/* The polynomial 0x1021 for a whole byte at once: what eight single shifts come to. */
static inline uint16_t next_crc(uint16_t crc, uint8_t byte)
{
    uint8_t x = (uint8_t)((crc >> 8) ^ byte);
    uint16_t y;

    x = (uint8_t)(x ^ (x >> 4));
    y = x;
    return (uint16_t)((crc << 8) ^ (y << 12) ^ (y << 5) ^ y);
}

#endif

uint16_t windctl_crc_over(uint16_t crc, const uint8_t *bytes, uint8_t size)
{
    while (size--) {
        crc = next_crc(crc, *bytes++);
    }
    return crc;
}

static void keep(struct windctl_reader *reader, uint8_t byte)
{
    reader->inside[reader->length++] = byte;
    reader->crc = next_crc(reader->crc, byte);
}

static uint8_t is_good(const struct windctl_reader *reader)
{
    uint8_t wants;

    if (reader->taken > WINDCTL_ENCODED_LIMIT || reader->left || reader->length < WINDCTL_FRAME_OVERHEAD ||
        reader->crc) {
        return 0;
    }
    wants = windctl_body_size(reader->inside[0]);
    return wants == WINDCTL_NO_SUCH_CODE || reader->length == wants + WINDCTL_FRAME_OVERHEAD;
}

uint8_t windctl_read(struct windctl_reader *reader, uint8_t byte)
{
    uint8_t good = 0;

    if (byte == 0) {
        if (reader->taken) {
            good = is_good(reader);
            if (good) {
                reader->size = (uint8_t)(reader->length - WINDCTL_FRAME_OVERHEAD);
            } else {
                reader->bad++;
            }
        }
        reader->taken = reader->length = reader->left = 0;
        return good;
    }
    if (reader->taken >= WINDCTL_ENCODED_LIMIT) {
        reader->taken = WINDCTL_ENCODED_LIMIT + 1;
        return 0;
    }
    if (reader->taken++ == 0) {
        reader->crc = WINDCTL_CRC_START;
        reader->left = (uint8_t)(byte - 1);
    } else if (reader->left) {
        reader->left--;
        keep(reader, byte);
    } else {
        /* A block ends with a zero of its own, unless it is 254 bytes long: too long to get here. */
        keep(reader, 0);
        reader->left = (uint8_t)(byte - 1);
    }
    return 0;
}

uint16_t windctl_read_crc(const struct windctl_reader *reader)
{
    const uint8_t *crc = reader->inside + 2 + reader->size;

    return (uint16_t)((uint16_t)crc[0] << 8 | crc[1]);
}

static inline uint8_t after(uint8_t at)
{
    return (uint8_t)((at + 1) & (WINDCTL_SENT_RING - 1));
}

uint8_t windctl_write(uint8_t *ring, uint8_t at, uint8_t code, uint8_t sequence, const uint8_t *body, uint8_t size)
{
    uint8_t block_at = at; /* where the present block's length goes */
    uint8_t block = 1;     /* what that will be */
    uint8_t left = (uint8_t)(size + WINDCTL_FRAME_OVERHEAD);
    uint8_t byte = code;
    uint16_t crc = WINDCTL_CRC_START;

    at = after(at);
    for (;;) {
        if (byte) {
            ring[at] = byte;
            block++;
        } else { /* a zero ends the block, and the next one's length takes its place */
            ring[block_at] = block;
            block_at = at;
            block = 1;
        }
        at = after(at);
        if (--left == 0) {
            break;
        }
        if (left >= 2) {
            crc = next_crc(crc, byte);
        }
        if (left == size + 2 + 1) {
            byte = sequence;
        } else if (left > 2) {
            byte = *body++;
        } else {
            byte = (uint8_t)(left == 2 ? crc >> 8 : crc);
        }
    }
    ring[block_at] = block;
    ring[at] = 0;
    return after(at);
}
