/* The core on an ATmega328P at 16 MHz: once a millisecond, the world in, the outputs obeyed. */
#include <avr/interrupt.h>
#include <avr/io.h>
#include <avr/wdt.h>

#include "analog.h"
#include "clock.h"
#include "encoder.h"
#include "guide.h"
#include "line.h"
#include "memory.h"
#include "pins.h"
#include "windctl_core.h"

/* Set only where the chip itself is emulated: a host then needs nobody's consent to turn it. */
#ifdef WINDCTL_EMULATED
#define EMULATED WINDCTL_CAPABILITY_VIRTUAL
#else
#define EMULATED 0
#endif

static struct windctl_core core;
static struct windctl_inputs inputs;
static struct windctl_outputs outputs;

/* The watchdog stays on after it has bitten; nothing here is fast enough for its shortest time. */
static void quiet_watchdog(void) __attribute__((naked, used, section(".init3")));
static void quiet_watchdog(void)
{
    MCUSR = 0;
    wdt_disable();
}

/* All outputs low: enables off. Inputs pulled up: what is not connected reads as open, or as not pressed. */
static void pins_start(void)
{
    DDRB = _BV(PIN_WAY) | _BV(PIN_STEP) | _BV(PIN_GUIDE_ENABLE) | _BV(PIN_BUSY);
    PORTB = _BV(PIN_GUIDE_LOW) | _BV(PIN_GUIDE_HIGH);
    PORTC = _BV(PIN_STOP) | _BV(PIN_GUARD) | _BV(PIN_PEDAL);
    DDRD = _BV(PIN_DRIVE_ENABLE) | _BV(PIN_GUIDE_STEP) | _BV(PIN_GUIDE_WAY);
    PORTD = 0;
}

static uint8_t pins_now(void)
{
    uint8_t b = PINB, c = PINC;
    uint8_t pins = 0;

    if (!(c & _BV(PIN_STOP))) {
        pins |= WINDCTL_INPUT_BIT_STOP_OK;
    }
    if (!(c & _BV(PIN_GUARD))) {
        pins |= WINDCTL_INPUT_BIT_GUARD_OK;
    }
    if (!(c & _BV(PIN_PEDAL))) {
        pins |= WINDCTL_INPUT_BIT_PEDAL_DOWN;
    }
    if (!(b & _BV(PIN_GUIDE_LOW))) {
        pins |= WINDCTL_INPUT_BIT_GUIDE_LOW_OK;
    }
    if (!(b & _BV(PIN_GUIDE_HIGH))) {
        pins |= WINDCTL_INPUT_BIT_GUIDE_HIGH_OK;
    }
    return pins;
}

static void set_pin(volatile uint8_t *port, uint8_t pin, uint8_t on)
{
    uint8_t interrupts = SREG;

    cli(); /* interrupts write other pins of the same port */
    if (on) {
        *port |= (uint8_t)_BV(pin);
    } else {
        *port &= (uint8_t)~_BV(pin);
    }
    SREG = interrupts;
}

static void obey(void)
{
    set_pin(&PORTD, PIN_DRIVE_ENABLE, outputs.drive_enable);
    set_pin(&PORTB, PIN_GUIDE_ENABLE, outputs.guide_enable);
    set_pin(&PORTB, PIN_WAY, outputs.rotation);
    clock_rate(outputs.rate);
    if (outputs.guide_steps) {
        guide_move((int16_t)outputs.guide_steps);
    }
    line_send(outputs.sent_end);
}

static void take(const struct tick *tick)
{
    static struct analog analog;

#ifdef WINDCTL_COUNTER
    inputs.count_delta = tick->counts;
    inputs.index = 0;
#else
    inputs.count_delta = outputs.rotation ? -tick->counts : tick->counts;
    inputs.index = outputs.rotation ? tick->index < 0 : tick->index > 0;
#endif
    inputs.steps_issued = tick->issued;
    inputs.pins = pins_now();
    inputs.received_size = line_received(&inputs.received);
    analog_round(&analog);
    inputs.contact = analog.contact;
    inputs.tension = analog.tension;
    inputs.celsius_centi = analog.celsius_centi;
}

int main(void)
{
    static const struct windctl_config config = {CONTACT_SCALE, TENSION_SCALE, CAPABILITIES | EMULATED};
    struct tick tick;

    pins_start();
    windctl_start(&core, &config, memory_boot_number());
    outputs.sent = line_sent;
    line_start();
    encoder_start();
    guide_start();
    analog_start();
    clock_start();
    wdt_enable(WDTO_15MS);
    sei();
    for (;;) {
        if (!clock_tick(&tick)) {
            analog_poll();
            continue;
        }
        set_pin(&PORTB, PIN_BUSY, 1);
        wdt_reset();
        take(&tick);
        outputs.sent_begin = line_begin();
        windctl_tick(&core, &inputs, &outputs);
        obey();
        memory_keep(core.setup.coil_token, core.count, core.guide);
        set_pin(&PORTB, PIN_BUSY, 0);
    }
}
