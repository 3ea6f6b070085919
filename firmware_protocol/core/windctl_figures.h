/* The board's figures: times, bounds and what may be fitted, as the specification states them.
 * Times are ticks of 1 ms. */
#ifndef WINDCTL_FIGURES_H
#define WINDCTL_FIGURES_H

#include "windctl_messages.h"

#define WINDCTL_STATUS_EVERY 50
#define WINDCTL_CHECK_EVERY 64 /* speed, slip, missing index */
#define WINDCTL_SILENCE 2000   /* without a Beat while something moves */
#define WINDCTL_STILL 50       /* without movement until "standing"; longer where counts are coarse */
#define WINDCTL_STILL_COARSE 2000
#define WINDCTL_PEDAL_DEBOUNCE 20
#define WINDCTL_SENT_MAX 192 /* bytes put out in one tick at most */

#define WINDCTL_NO_STOP_POINT UINT32_C(0xFFFFFFFF)
#define WINDCTL_COUNT_LIMIT INT32_C(0x40000000) /* no count is ever set beyond this */
#define WINDCTL_PACE_LIMIT 15000                /* steps/s */
#define WINDCTL_RATE_MIN 100                    /* steps/s2, least accel and decel */
#define WINDCTL_STANDS_WITHIN 10                /* s from full pace */
#define WINDCTL_GUIDE_PACE_LIMIT 4000           /* guide steps/s of GuideTo */
#define WINDCTL_CATCH_UP_COUNTS 16              /* counts of the guide's line followed in one tick at rest */
#define WINDCTL_COUNTS_PER_TURN_LIMIT 400
#define WINDCTL_STEPS_PER_TURN_LIMIT 800
#define WINDCTL_ERROR_LIMIT INT32_C(0x20000000) /* |issued - counted|, in 1/steps_per_turn count */

#define WINDCTL_CONTACT_BOX 100       /* ticks of the contact's boxcar: whole cycles of 50 and of 60 Hz */
#define WINDCTL_WINDOW_LIMIT 6000     /* ticks of a reading that may be asked for */
#define WINDCTL_WINDOW_LONGEST 60000  /* ticks; a revolution slower than this is not waited for */
#define WINDCTL_TURN_LONGEST 0xFFFF   /* ticks; the mean tension of a slower turn is not taken */

#define WINDCTL_FITTABLE 0x3F /* the capabilities that Setup.fitted may name */
#define WINDCTL_KNOWN (WINDCTL_TRUST_COUNT | WINDCTL_TRUST_GUIDE)

/* Bits of windctl_inputs.pins, which are the first five of Status.inputs. */
#define WINDCTL_PINS_GUIDE (WINDCTL_INPUT_BIT_GUIDE_LOW_OK | WINDCTL_INPUT_BIT_GUIDE_HIGH_OK)
#define WINDCTL_PINS_ALL_OK (WINDCTL_INPUT_BIT_STOP_OK | WINDCTL_INPUT_BIT_GUARD_OK | WINDCTL_PINS_GUIDE)

#endif
