#include "clock.h"

#include <avr/interrupt.h>
#include <avr/io.h>
#include <util/atomic.h>
#include <util/delay.h>

#include "encoder.h"
#include "pins.h"

/* A tick's steps are set up this long before it begins, so that even the first is never missed. */
#define EARLY 400u /* cycles */
#define PULSE_US 2

/* Steps at equal distances. */
struct train {
    uint16_t first;    /* cycles after the tick's beginning, then the timer's own count */
    uint16_t interval; /* cycles */
    uint8_t left;
};

static volatile struct train planned; /* from the next tick on; the main loop's until then */
static struct train now, next;        /* the interrupts' */
static volatile uint8_t ticks;        /* not taken yet */
static volatile struct tick found;
static uint16_t tick_at;
static int16_t counted;

static uint16_t rate_now;
static uint16_t owed;   /* thousandths of a step */
static uint32_t period; /* cycles per step */

static void begin(const struct train *train)
{
    now = *train;
    OCR1A = now.first;
    TIFR1 = _BV(OCF1A);
    TIMSK1 |= _BV(OCIE1A);
}

static void set_up(void)
{
    struct train train;

    found.issued += planned.left;
    if (planned.left == 0) {
        return;
    }
    train.first = tick_at + planned.first;
    train.interval = planned.interval;
    train.left = planned.left;
    planned.left = 0;
    if (now.left) {
        next = train;
    } else {
        begin(&train);
    }
}

/* Twice a tick: steps are set up, and then it begins. */
ISR(TIMER1_COMPB_vect)
{
    if (OCR1B != tick_at) {
        OCR1B = tick_at;
        set_up();
        return;
    }
    found.counts += encoder_count - counted;
    counted = encoder_count;
    if (encoder_index) {
        found.index = encoder_index;
        encoder_index = 0;
    }
    tick_at += CYCLES_PER_TICK;
    OCR1B = tick_at - EARLY;
    ticks++;
}

ISR(TIMER1_COMPA_vect)
{
    PORTB |= _BV(PIN_STEP);
    OCR1A += now.interval;
    _delay_us(PULSE_US);
    PORTB &= (uint8_t)~_BV(PIN_STEP);
    if (--now.left == 0) {
        if (next.left) {
            begin(&next);
            next.left = 0;
        } else {
            TIMSK1 &= (uint8_t)~_BV(OCIE1A);
        }
    }
}

void clock_start(void)
{
    TCCR1A = 0;
    TCCR1B = _BV(CS10);
    tick_at = TCNT1 + CYCLES_PER_TICK;
    OCR1B = tick_at - EARLY;
    TIFR1 = _BV(OCF1B);
    TIMSK1 = _BV(OCIE1B);
}

uint8_t clock_tick(struct tick *tick)
{
    if (!ticks) {
        return 0;
    }
    ATOMIC_BLOCK(ATOMIC_FORCEON)
    {
        ticks--;
        tick->counts = found.counts;
        tick->issued = found.issued;
        tick->index = found.index;
        found.counts = 0;
        found.issued = 0;
        found.index = 0;
    }
    return 1;
}

void clock_rate(uint16_t rate)
{
    uint16_t missing = 1000 - owed; /* thousandths until the first step */
    uint8_t steps = 0;

    if (rate == 0) {
        return;
    }
    if (rate != rate_now) {
        rate_now = rate;
        period = F_CPU / rate;
    }
    owed += rate;
    while (owed >= 1000) {
        owed -= 1000;
        steps++;
    }
    if (steps) {
        /* missing <= rate, so the product is at most F_CPU; 4194 / 2^22 is 1/1000 less 7e-5. */
        uint16_t first = (uint16_t)((((missing * period) >> 4) * 4194u) >> 18);

        ATOMIC_BLOCK(ATOMIC_FORCEON)
        {
            planned.first = first;
            planned.interval = (uint16_t)period;
            planned.left = steps;
        }
    }
}
