#include "analog.h"

#include <avr/io.h>

#include "pins.h"

/* 250 kHz conversion clock, 13 cycles each: the seven conversions of a round take 0.37 ms of what a tick leaves. */
#define OF_CONTACT 4
#define OF_TENSION 2
#define LAST 1023
#define ROUND (OF_CONTACT + OF_TENSION + 1)
#define ROUNDS_OF_CELSIUS 64

static uint8_t at; /* conversion under way; ROUND: none */
static uint16_t contact, tension, celsius;
static uint16_t celsius_sum;
static uint8_t celsius_rounds, celsius_known;

static void convert(uint8_t channel)
{
    ADMUX = (uint8_t)(_BV(REFS0) | channel);
    ADCSRA = _BV(ADEN) | _BV(ADSC) | _BV(ADPS2) | _BV(ADPS1);
}

void analog_poll(void)
{
    uint16_t sample;

    if (at == ROUND || ADCSRA & _BV(ADSC)) {
        return;
    }
    sample = ADC;
    if (at < OF_CONTACT) {
        contact += sample;
    } else if (at < OF_CONTACT + OF_TENSION) {
        tension += sample;
    } else {
        celsius = sample;
    }
    at++;
    if (at < OF_CONTACT) {
        convert(ADC_CONTACT);
    } else if (at < OF_CONTACT + OF_TENSION) {
        convert(ADC_TENSION);
    } else if (at < ROUND) {
        convert(ADC_CELSIUS);
    }
}

/* 65536 are 500 degrees, and 0 degrees are at 0.5 V; half a step of the converter more is the middle of it. */
static int16_t centi(uint16_t sum)
{
    return (int16_t)((int32_t)(((uint32_t)sum + ROUNDS_OF_CELSIUS / 2) * 50000u >> 16) - 5000);
}

static void take_celsius(struct analog *analog)
{
    if (!celsius_known) { /* better one sample than none */
        celsius_known = 1;
        analog->celsius_centi = centi((uint16_t)(celsius * ROUNDS_OF_CELSIUS));
    }
    celsius_sum += celsius;
    if (++celsius_rounds == ROUNDS_OF_CELSIUS) {
        analog->celsius_centi = centi(celsius_sum);
        celsius_sum = 0;
        celsius_rounds = 0;
    }
}

void analog_start(void)
{
    DIDR0 = _BV(ADC0D) | _BV(ADC1D) | _BV(ADC2D);
    at = 0;
    convert(ADC_CONTACT);
}

void analog_round(struct analog *analog)
{
    if (at != ROUND) {
        return;
    }
    analog->contact = contact == OF_CONTACT * LAST ? 0xFFFF : (uint16_t)(contact << 4);
    analog->tension = (uint16_t)(tension << 5);
    take_celsius(analog);
    contact = tension = 0;
    at = 0;
    convert(ADC_CONTACT);
}
