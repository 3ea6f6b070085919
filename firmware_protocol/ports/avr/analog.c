#include "analog.h"

#include <avr/interrupt.h>
#include <avr/io.h>

#include "pins.h"

/* 125 kHz conversion clock, 13 cycles each: the seven conversions of a round take three quarters of a tick. */
#define OF_CONTACT 4
#define OF_TENSION 2
#define LAST 1023
#define ROUND (OF_CONTACT + OF_TENSION + 1)
#define ROUNDS_OF_CELSIUS 64

static volatile uint8_t at; /* conversion under way; ROUND: none */
static volatile uint16_t contact, tension, celsius;
static uint16_t celsius_sum;
static uint8_t celsius_rounds;

static void convert(uint8_t channel)
{
    ADMUX = (uint8_t)(_BV(REFS0) | channel);
    ADCSRA = _BV(ADEN) | _BV(ADSC) | _BV(ADIE) | _BV(ADPS2) | _BV(ADPS1) | _BV(ADPS0);
}

ISR(ADC_vect)
{
    uint16_t sample = ADC;
    uint8_t done = at;

    if (done < OF_CONTACT) {
        contact += sample;
    } else if (done < OF_CONTACT + OF_TENSION) {
        tension += sample;
    } else {
        celsius = sample;
    }
    done++;
    at = done;
    if (done < OF_CONTACT) {
        convert(ADC_CONTACT);
    } else if (done < OF_CONTACT + OF_TENSION) {
        convert(ADC_TENSION);
    } else if (done < ROUND) {
        convert(ADC_CELSIUS);
    }
}

static void take_celsius(struct analog *analog)
{
    celsius_sum += celsius;
    if (++celsius_rounds == ROUNDS_OF_CELSIUS) {
        /* 5 V are 500 degrees, and 0 degrees are 0.5 V; centre of the converter's step */
        analog->celsius_centi = (int16_t)((int32_t)(((uint32_t)celsius_sum + 32) * 50000u >> 16) - 5000);
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
