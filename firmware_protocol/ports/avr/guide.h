/* The guide's steps of a tick, spread over the most of a millisecond by Timer2. */
#ifndef WINDCTL_GUIDE_H
#define WINDCTL_GUIDE_H

#include <stdint.h>

void guide_start(void);

/* So many more steps; positive is away from the start flange. */
void guide_move(int16_t steps);

#endif
