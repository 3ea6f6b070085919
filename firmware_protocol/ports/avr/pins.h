/* The ATmega328P's pins, what is wired to them, and the scale of what they measure. The table in README.md says the
 * same in words; another board or another sensor is another copy of this header.
 *
 * Two smaller machines are built from the same source:
 *     -DWINDCTL_BY_HAND   the guide is led by hand: no guide motor, no limit switches
 *     -DWINDCTL_COUNTER   nothing is driven: one pulse per turn on COUNTER, turning forward only */
#ifndef WINDCTL_PINS_H
#define WINDCTL_PINS_H

#include <avr/io.h>

#include "windctl_messages.h"

/* ---- port D */
#define PIN_A PD2             /* encoder, channel A; in the counter's build the pulse of each turn */
#define PIN_B PD3             /* encoder, channel B */
#define PIN_INDEX PD4         /* encoder, index: high once a turn */
#define PIN_DRIVE_ENABLE PD5  /* high: spindle drive powered; pulled low outside the chip */
#define PIN_GUIDE_STEP PD6    /* rising edge: one guide step */
#define PIN_GUIDE_WAY PD7     /* high: towards the start flange */

/* ---- port B */
#define PIN_WAY PB0           /* high: Setup.rotation 1, counter-clockwise */
#define PIN_STEP PB1          /* rising edge: one spindle step */
#define PIN_GUIDE_ENABLE PB2  /* high: guide drive powered; pulled low outside the chip */
#define PIN_GUIDE_LOW PB3     /* limit switch at the start flange, normally closed to ground */
#define PIN_GUIDE_HIGH PB4    /* limit switch at the far flange, normally closed to ground */
#define PIN_BUSY PB5          /* high while a tick is worked on: load at a glance, on an oscilloscope exactly */

/* ---- port C */
#define ADC_CONTACT 0         /* PC0: the coil's resistance, 0 V for 0 ohm */
#define ADC_TENSION 1         /* PC1 */
#define ADC_CELSIUS 2         /* PC2: 0.5 V at 0 degrees C, 10 mV per degree */
#define PIN_STOP PC3          /* hardware stop's monitoring contact, normally closed to ground */
#define PIN_GUARD PC4         /* guard, normally closed to ground */
#define PIN_PEDAL PC5         /* pedal: closed to ground while pressed */

/* ---- scale: 65536 units are the reference voltage of 5 V */
#define CONTACT_SCALE 305 /* milliohm per unit: 20 kohm at 5 V, 0.25 mA through the coil */
#define TENSION_SCALE 10  /* 0.0001 cN per unit: 65.5 cN at 5 V */

/* ---- what this board says it has */
#if defined(WINDCTL_COUNTER)
#define CAPABILITIES (WINDCTL_CAPABILITY_CONTACT | WINDCTL_CAPABILITY_TENSION | WINDCTL_CAPABILITY_THERMOMETER)
#elif defined(WINDCTL_BY_HAND)
#define CAPABILITIES                                                                                                \
    (WINDCTL_CAPABILITY_DRIVE_STEP | WINDCTL_CAPABILITY_INDEX | WINDCTL_CAPABILITY_CONTACT |                        \
     WINDCTL_CAPABILITY_TENSION | WINDCTL_CAPABILITY_PEDAL | WINDCTL_CAPABILITY_THERMOMETER)
#else
#define CAPABILITIES                                                                                                \
    (WINDCTL_CAPABILITY_DRIVE_STEP | WINDCTL_CAPABILITY_GUIDE_STEP | WINDCTL_CAPABILITY_INDEX |                     \
     WINDCTL_CAPABILITY_CONTACT | WINDCTL_CAPABILITY_TENSION | WINDCTL_CAPABILITY_PEDAL |                           \
     WINDCTL_CAPABILITY_THERMOMETER)
#endif

#endif
