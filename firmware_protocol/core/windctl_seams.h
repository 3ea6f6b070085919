/* What a port may set before the core is compiled, and what the core asks of C99: a condition checked by
 * the compiler, and sums that wrap.
 *
 * A port that wants other values names a header of its own:
 *     cc -DWINDCTL_SEAMS_HEADER='"my_seams.h"' ...
 */
#ifndef WINDCTL_SEAMS_H
#define WINDCTL_SEAMS_H

#include <stdint.h>

#ifdef WINDCTL_SEAMS_HEADER
#include WINDCTL_SEAMS_HEADER
#endif

/* Places in the segment queue: a power of two, 4 bytes each. The plan of a coil asks for a queue that holds the
 * braking distance; Identity tells the host this number. */
#ifndef WINDCTL_QUEUE
#define WINDCTL_QUEUE 128
#endif

/* Bytes of the ring that takes what goes to the host: a power of two, at most 256. With less than 256 the board
 * drops messages sooner when many come at once. */
#ifndef WINDCTL_SENT_RING
#define WINDCTL_SENT_RING 256
#endif

/* Constant tables. Where constants are not in the data's address space (AVR), a port defines WINDCTL_ROM as the
 * attribute that puts them into program memory, and WINDCTL_ROM_U8 as the way to read one byte of them. */
#ifndef WINDCTL_ROM
#define WINDCTL_ROM
#define WINDCTL_ROM_U8(address) (*(address))
#endif

/* A port whose C library has a faster CRC-16 (polynomial 0x1021, nothing reflected) defines WINDCTL_CRC_BYTE as it:
 *     uint16_t WINDCTL_CRC_BYTE(uint16_t crc, uint8_t byte); */

/* A condition that holds when the core is compiled, or it is not compiled. `name` is unique in its file. */
#define WINDCTL_ASSERT(name, condition) typedef char windctl_assert_##name[(condition) ? 1 : -1]

WINDCTL_ASSERT(queue_is_a_power_of_two, WINDCTL_QUEUE >= 16 && (WINDCTL_QUEUE & (WINDCTL_QUEUE - 1)) == 0);
WINDCTL_ASSERT(queue_fits_its_index, WINDCTL_QUEUE <= 16384);
WINDCTL_ASSERT(ring_is_a_power_of_two, (WINDCTL_SENT_RING & (WINDCTL_SENT_RING - 1)) == 0);
WINDCTL_ASSERT(ring_fits_its_index, WINDCTL_SENT_RING >= 128 && WINDCTL_SENT_RING <= 256);
WINDCTL_ASSERT(bytes_have_eight_bits, (unsigned char)-1 == 255);

/* Sums and differences of counts and guide steps that wrap instead of being undefined. */
static inline int32_t windctl_plus(int32_t a, int32_t b)
{
    return (int32_t)((uint32_t)a + (uint32_t)b);
}

static inline int32_t windctl_minus(int32_t a, int32_t b)
{
    return (int32_t)((uint32_t)a - (uint32_t)b);
}

#endif
