/* The core's seams on AVR: constant tables stay in program memory, and the queue and the line's ring fit 2 KB. */
#ifndef WINDCTL_AVR_SEAMS_H
#define WINDCTL_AVR_SEAMS_H

#include <avr/pgmspace.h>
#include <util/crc16.h>

#define WINDCTL_ROM PROGMEM
#define WINDCTL_ROM_U8(address) pgm_read_byte(address)
#define WINDCTL_CRC_BYTE _crc_xmodem_update
#define WINDCTL_QUEUE 128
#define WINDCTL_SENT_RING 256

#endif
