/* The spindle's counter: two channels in quadrature and an index, or one pulse per turn. */
#ifndef WINDCTL_ENCODER_H
#define WINDCTL_ENCODER_H

#include <stdint.h>

/* Written by interrupts; read with interrupts off. */
extern volatile int16_t encoder_count; /* wraps */
extern volatile int8_t encoder_index;  /* the way it turned at the last index pulse; whoever takes it clears it */

void encoder_start(void);

#endif
