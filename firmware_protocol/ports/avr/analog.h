/* Contact, tension and thermometer: oversampled, 65536 units are the reference voltage. */
#ifndef WINDCTL_ANALOG_H
#define WINDCTL_ANALOG_H

#include <stdint.h>

/* The last whole round of conversions. */
struct analog {
    uint16_t contact; /* 4 samples; 0xFFFF if all were at the end of the scale: open */
    uint16_t tension; /* 2 samples */
    int16_t celsius_centi;
};

void analog_start(void);

/* Go on with the round, if a conversion is complete; for whenever there is nothing else to do. */
void analog_poll(void);

/* Take the round that was begun by the last call, if it is complete, and begin another. */
void analog_round(struct analog *analog);

#endif
