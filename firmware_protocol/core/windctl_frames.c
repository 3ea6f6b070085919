#include "windctl_frames.h"

WINDCTL_ASSERT(lengths_fit_a_byte, WINDCTL_ENCODED_LIMIT + 1 < 254);

/* The polynomial 0x1021 for a whole byte at once: what eight single shifts come to. */
uint16_t windctl_crc(uint16_t crc, uint8_t byte)
{
    uint8_t x = (uint8_t)((crc >> 8) ^ byte);
    uint16_t y;

    x = (uint8_t)(x ^ (x >> 4));
    y = x;
    return (uint16_t)((crc << 8) ^ (y << 12) ^ (y << 5) ^ y);
}

uint16_t windctl_crc_over(uint16_t crc, const uint8_t *bytes, uint8_t size)
{
    while (size--) {
        crc = windctl_crc(crc, *bytes++);
    }
    return crc;
}

static void keep(struct windctl_reader *reader, uint8_t byte)
{
    reader->inside[reader->length++] = byte;
    reader->crc = windctl_crc(reader->crc, byte);
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

/* A COBS block under way: where its code byte goes, and what that will be. */
struct block {
    uint8_t *ring;
    uint8_t at;
    uint8_t code_at;
    uint8_t code;
};

static uint8_t after(uint8_t at)
{
    return (uint8_t)((at + 1) & (WINDCTL_SENT_RING - 1));
}

static void begin_block(struct block *block)
{
    block->code_at = block->at;
    block->code = 1;
    block->at = after(block->at);
}

static void put(struct block *block, uint8_t byte)
{
    if (byte) {
        block->ring[block->at] = byte;
        block->at = after(block->at);
        block->code++;
    } else {
        block->ring[block->code_at] = block->code;
        begin_block(block);
    }
}

uint8_t windctl_write(uint8_t *ring, uint8_t at, uint8_t code, uint8_t sequence, const uint8_t *body, uint8_t size)
{
    struct block block;
    uint16_t crc = windctl_crc(windctl_crc(WINDCTL_CRC_START, code), sequence);

    block.ring = ring;
    block.at = at;
    begin_block(&block);
    put(&block, code);
    put(&block, sequence);
    while (size--) {
        crc = windctl_crc(crc, *body);
        put(&block, *body++);
    }
    put(&block, (uint8_t)(crc >> 8));
    put(&block, (uint8_t)crc);
    ring[block.code_at] = block.code;
    ring[block.at] = 0;
    return after(block.at);
}
