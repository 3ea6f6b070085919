/* What outlives a reset: the number of starts in EEPROM, and in RAM, where the power stayed, what was being wound. */
#ifndef WINDCTL_MEMORY_H
#define WINDCTL_MEMORY_H

#include <stdint.h>

/* Count one more start, keep it, and return it. */
uint16_t memory_boot_number(void);

/* Where the last run stood. */
struct kept {
    uint32_t coil_token;
    int32_t count;
    int32_t guide;
};

/* 1 if the RAM still holds what was kept before the reset; then `kept` is it. */
uint8_t memory_recall(struct kept *kept);

/* Keep this for the next run. */
void memory_keep(uint32_t coil_token, int32_t count, int32_t guide);

#endif
