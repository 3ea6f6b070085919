/* Frames: bytes off the line into one message, one message into bytes for it.
 *
 * Inside a frame: code u8, sequence u8, body (at most 60 bytes), CRC-16/IBM-3740 big endian over all that.
 * On the line: the same, COBS-encoded (Cheshire and Baker 1999), and a closing 0x00. */
#ifndef WINDCTL_FRAMES_H
#define WINDCTL_FRAMES_H

#include "windctl_messages.h"
#include "windctl_seams.h"

#define WINDCTL_CRC_START 0xFFFF
#define WINDCTL_FRAME_OVERHEAD 4                                         /* code, sequence, CRC */
#define WINDCTL_INSIDE_LIMIT (WINDCTL_BODY_LIMIT + WINDCTL_FRAME_OVERHEAD) /* bytes */
#define WINDCTL_ENCODED_LIMIT (WINDCTL_INSIDE_LIMIT + 1)                 /* bytes, without the delimiter */

/* One frame on its way in, decoded as its bytes come. Zeroed: ready to read. */
struct windctl_reader {
    uint16_t crc;   /* over what is decoded so far */
    uint16_t bad;   /* stretches between delimiters that were no good frame; wraps */
    uint8_t taken;  /* encoded bytes since the last delimiter; beyond the limit: WINDCTL_ENCODED_LIMIT + 1 */
    uint8_t length; /* decoded bytes of them */
    uint8_t left;   /* encoded bytes until the next code byte of COBS */
    uint8_t size;   /* of the body of the frame that was completed last, bytes */
    uint8_t inside[WINDCTL_INSIDE_LIMIT]; /* code, sequence, body, CRC */
};

/* CRC-16/IBM-3740 of `size` more bytes. */
uint16_t windctl_crc_over(uint16_t crc, const uint8_t *bytes, uint8_t size);

/* Take one byte off the line. 1 when it completes a good frame: code, sequence and body then stand in
 * `inside`, until the next call; the body has the right length if the code is known. Else 0. */
uint8_t windctl_read(struct windctl_reader *reader, uint8_t byte);

/* CRC that the frame just completed carries: over its code, sequence and body. */
uint16_t windctl_read_crc(const struct windctl_reader *reader);

/* Bytes of a frame with a body of `size` bytes, delimiter included. */
#define WINDCTL_FRAME_BYTES(size) ((uint8_t)((size) + WINDCTL_FRAME_OVERHEAD + 2))

/* Write one frame into a ring of WINDCTL_SENT_RING bytes, from place `at` on. There is room for it.
 * Returns the place behind it. */
uint8_t windctl_write(uint8_t *ring, uint8_t at, uint8_t code, uint8_t sequence, const uint8_t *body, uint8_t size);

#endif
