#include "memory.h"

#include <avr/eeprom.h>

#define NOINIT __attribute__((section(".noinit")))
#define CHECK 0x5A3Cu

/* Two places in turn: power that fails while one is written leaves the other. A place holds a number and its
 * complement; an erased one does not. */
struct place {
    uint16_t number;
    uint16_t complement;
};

static struct place EEMEM places[2];

static uint8_t read(uint8_t which, uint16_t *number)
{
    *number = eeprom_read_word(&places[which].number);
    return eeprom_read_word(&places[which].complement) == (uint16_t)~*number;
}

uint16_t memory_boot_number(void)
{
    uint16_t a, b, number = 1;
    uint8_t has_a = read(0, &a);
    uint8_t has_b = read(1, &b);

    if (has_a && (!has_b || (int16_t)(a - b) > 0)) {
        number = a + 1;
    } else if (has_b) {
        number = b + 1;
    }
    eeprom_update_word(&places[number & 1].number, number);
    eeprom_update_word(&places[number & 1].complement, (uint16_t)~number);
    return number;
}

static struct kept kept NOINIT;
static uint16_t check NOINIT;

static uint16_t check_of(const struct kept *of)
{
    uint32_t sum = of->coil_token ^ (uint32_t)of->count ^ ((uint32_t)of->guide << 1);

    return (uint16_t)((uint16_t)sum + (uint16_t)(sum >> 16) + CHECK);
}

uint8_t memory_recall(struct kept *recalled)
{
    *recalled = kept;
    return check_of(&kept) == check;
}

void memory_keep(uint32_t coil_token, int32_t count, int32_t guide)
{
    kept.coil_token = coil_token;
    kept.count = count;
    kept.guide = guide;
    check = check_of(&kept);
}
