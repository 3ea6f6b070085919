/* play TRACE: plays a recorded trace on the core this program was built with. Exit code 0: not one output differs;
 * 1: says in which tick the first does; 2: no trace. */
#include <stdio.h>
#include <stdlib.h>

#include "play.h"

int main(int count, char **arguments)
{
    FILE *file = count == 2 ? fopen(arguments[1], "rb") : NULL;
    uint8_t *trace;
    long size;
    uint32_t ticks = 0;
    int64_t differs;

    if (!file || fseek(file, 0, SEEK_END) || (size = ftell(file)) <= 0) {
        return 2;
    }
    rewind(file);
    trace = malloc((size_t)size);
    if (!trace || fread(trace, 1, (size_t)size, file) != (size_t)size) {
        return 2;
    }
    fclose(file);
    differs = windctl_play(trace, (size_t)size, &ticks);
    free(trace);
    if (differs == WINDCTL_PLAY_NO_TRACE) {
        return 2;
    }
    printf("%lld of %lu\n", (long long)differs, (unsigned long)ticks);
    return differs == WINDCTL_PLAY_EQUAL ? 0 : 1;
}
