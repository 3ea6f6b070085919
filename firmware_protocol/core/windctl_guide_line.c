#include "windctl_guide_line.h"

#include "windctl_frames.h"

void windctl_line_datum(struct windctl_guide_line *line, uint32_t program, int32_t count, uint32_t first,
                        uint16_t into)
{
    line->program = program;
    line->base = line->next = line->executing = first;
    line->into = into;
    line->end = count;
    line->crc = WINDCTL_CRC_START;
    line->behind = line->pending = 0;
    line->n = line->left = line->slope = 0;
    line->sign = 1;
    line->acc = 0;
}

uint16_t windctl_line_free(const struct windctl_guide_line *line)
{
    return (uint16_t)(WINDCTL_QUEUE - (uint16_t)(line->next - line->executing));
}

static uint16_t counts_of(const uint8_t *segment)
{
    return windctl_get_u16(segment);
}

static uint16_t slope_of(int16_t steps)
{
    return (uint16_t)(steps < 0 ? 0u - (uint16_t)steps : (uint16_t)steps);
}

uint8_t windctl_line_bad_segment(const struct windctl_guide_line *line, uint8_t n, const uint8_t *packed)
{
    uint8_t place;

    for (place = 0; place < n; place++) {
        const uint8_t *segment = packed + 4 * place;
        uint16_t counts = counts_of(segment);

        if (counts == 0 || slope_of((int16_t)windctl_get_u16(segment + 2)) > counts) {
            return place;
        }
    }
    if (line->next == line->base && line->into >= counts_of(packed)) {
        return 0;
    }
    return n;
}

uint32_t windctl_line_length(const struct windctl_guide_line *line, uint8_t n, const uint8_t *packed)
{
    uint32_t total = 0;

    for (; n; n--, packed += 4) {
        total += counts_of(packed);
    }
    return line->next == line->base ? total - line->into : total;
}

static uint16_t place_of(uint32_t segment)
{
    return (uint16_t)(segment & (WINDCTL_QUEUE - 1));
}

/* Begin the executing segment. The only division is for the one segment that SetDatum began inside. */
static void begin(struct windctl_guide_line *line)
{
    uint16_t at = place_of(line->executing);
    uint16_t n = line->counts[at];
    int16_t steps = line->steps[at];

    line->n = line->left = n;
    line->slope = slope_of(steps);
    line->sign = steps < 0 ? -1 : 1;
    line->acc = n >> 1;
    if (line->executing == line->base && line->into) {
        line->left = (uint16_t)(n - line->into);
        line->acc = (line->acc + (uint32_t)line->into * line->slope) % n;
    }
}

void windctl_line_append(struct windctl_guide_line *line, uint8_t n, const uint8_t *packed)
{
    line->end = (int32_t)((uint32_t)line->end + windctl_line_length(line, n, packed));
    line->crc = windctl_crc_over(line->crc, packed, (uint8_t)(4 * n));
    for (; n; n--, packed += 4) {
        uint16_t at = place_of(line->next);

        line->counts[at] = counts_of(packed);
        line->steps[at] = (int16_t)windctl_get_u16(packed + 2);
        line->next++;
        if (line->left == 0) {
            begin(line);
        }
    }
}

/* Go `counts` counts on inside the executing segment; returns guide steps without sign. */
static uint16_t advance(struct windctl_guide_line *line, uint16_t counts)
{
    uint32_t acc = line->acc + (uint32_t)counts * line->slope;
    uint16_t n = line->n;
    uint16_t steps = 0;

    while (acc >= n) {
        acc -= n;
        steps++;
    }
    line->acc = acc;
    return steps;
}

/* Along the line over the ends of segments; counts beyond the last are pending. */
static int32_t walk(struct windctl_guide_line *line, uint32_t counts)
{
    int32_t steps = 0;

    while (counts >= line->left) {
        uint16_t rest = line->left;

        if (rest == 0) { /* out of segments */
            line->pending += counts;
            return steps;
        }
        steps += line->sign > 0 ? (int32_t)advance(line, rest) : -(int32_t)advance(line, rest);
        counts -= rest;
        line->executing++;
        line->left = 0;
        if (line->executing != line->next) {
            begin(line);
        }
    }
    line->left = (uint16_t)(line->left - counts);
    steps += line->sign > 0 ? (int32_t)advance(line, (uint16_t)counts) : -(int32_t)advance(line, (uint16_t)counts);
    return steps;
}

int32_t windctl_line_follow(struct windctl_guide_line *line, int32_t counts)
{
    uint32_t go;

    if (line->behind || line->pending || counts <= 0) {
        uint32_t before = line->pending;

        windctl_line_wait(line, counts);
        go = line->pending - before + (before < WINDCTL_CATCH_UP_COUNTS ? before : WINDCTL_CATCH_UP_COUNTS);
        line->pending -= go;
    } else {
        go = (uint32_t)counts;
    }
    return walk(line, go);
}

void windctl_line_wait(struct windctl_guide_line *line, int32_t counts)
{
    if (counts <= 0 || (uint32_t)counts <= line->behind) { /* also every way back */
        line->behind -= (uint32_t)counts;
    } else {
        line->pending += (uint32_t)counts - line->behind;
        line->behind = 0;
    }
}

uint8_t windctl_line_lagging(const struct windctl_guide_line *line)
{
    return line->pending != 0 && line->left != 0;
}

int32_t windctl_line_catch_up(struct windctl_guide_line *line)
{
    uint8_t most = WINDCTL_CATCH_UP_COUNTS;

    for (; most && windctl_line_lagging(line); most--) {
        int32_t step;

        line->pending--;
        step = walk(line, 1);
        if (step) {
            return step;
        }
    }
    return 0;
}
