"""Ways to break the core, one line each. Every one of them has to show in the twin test."""

from __future__ import annotations

from dataclasses import dataclass


@dataclass(frozen=True)
class Mutant:
    """In `module`, `old` stands exactly once and becomes `new`."""

    what: str
    module: str
    old: str
    new: str


MUTANTS = (
    # the line
    Mutant("CRC started at 0", "frames", "reader->crc = WINDCTL_CRC_START;", "reader->crc = 0;"),
    Mutant("CRC not looked at", "frames", "        reader->crc) {", "        0) {"),
    Mutant(
        "length of a known code not looked at",
        "frames",
        "return wants == WINDCTL_NO_SUCH_CODE ||",
        "return 1 ||",
    ),
    Mutant(
        "a stretch one byte too long taken",
        "frames",
        "reader->taken >= WINDCTL_ENCODED_LIMIT)",
        "reader->taken > WINDCTL_ENCODED_LIMIT)",
    ),
    Mutant(
        "COBS block that runs off the end taken",
        "frames",
        "|| reader->left || reader->length",
        "|| reader->length",
    ),
    Mutant("bad frame counted twice", "frames", "reader->bad++;", "reader->bad += 2;"),
    # the conversation
    Mutant(
        "exact repeat executed again",
        "dialogue",
        "if (dialogue->heard && sequence == dialogue->sequence",
        "if (0 && sequence == dialogue->sequence",
    ),
    Mutant("repeat known by its number alone", "dialogue", " && crc == dialogue->heard_crc) {", ") {"),
    Mutant("any number taken", "dialogue", "if (sequence != due) {", "if (0 && sequence != due) {"),
    Mutant(
        "another schema greeted",
        "dialogue",
        "dialogue->greeted = greet.schema == WINDCTL_SCHEMA;",
        "dialogue->greeted = 1;",
    ),
    Mutant(
        "a repeated Greet holds",
        "dialogue",
        "if (!dialogue->greeted || greet.nonce != dialogue->nonce) {",
        "if (1) {",
    ),
    Mutant("stored answer outlives the greeting", "dialogue", "        dialogue->heard = 0;\n", ""),
    Mutant(
        "more bytes than a tick may carry",
        "dialogue",
        "if (bytes > WINDCTL_SENT_MAX - core->dialogue.sent ||",
        "if (",
    ),
    Mutant("sequence of unasked messages stands still", "dialogue", "    core->dialogue.unasked++;\n", ""),
    # permissions
    Mutant("stale epoch taken", "commands", "windctl_get_u16(body + 2) != core->epoch)", "0)"),
    Mutant("stale boot number taken", "commands", "(windctl_get_u16(body) != core->boot ||", "("),
    Mutant(
        "hold leaves the epoch",
        "motion",
        "    raise_epoch(core);\n    core->guide_pace = 0;\n    core->pedal_fresh = 0;\n    if",
        "    core->guide_pace = 0;\n    core->pedal_fresh = 0;\n    if",
    ),
    Mutant(
        "go while moving",
        "commands",
        "    int32_t target;\n\n    if (!core->standing) {",
        "    int32_t target;\n\n    if (0) {",
    ),
    Mutant(
        "go without a datum", "commands", "if (core->trust != WINDCTL_KNOWN) {", "if (core->trust == 0) {"
    ),
    Mutant("go with the pedal held down from before", "commands", "if (!core->pedal_fresh) {", "if (0) {"),
    Mutant(
        "armed with an input open",
        "commands",
        "return (core->pins & needed) != needed;",
        "return (core->pins & needed) == 0;",
    ),
    # the spindle
    Mutant(
        "decel half as strong",
        "spindle",
        "2 * (uint32_t)spindle->decel * (uint32_t)left;",
        "(uint32_t)spindle->decel * (uint32_t)left;",
    ),
    Mutant(
        "one step beyond the stop point",
        "spindle",
        "if (left <= 0 || count >= spindle->goal) {",
        "if (left < 0 || count > spindle->goal) {",
    ),
    Mutant(
        "lead with the wrong sign",
        "spindle",
        "(units - ahead) / spindle->counts_per_turn",
        "(units + ahead) / spindle->counts_per_turn",
    ),
    Mutant(
        "ramp begins with the old remainder", "spindle", "spindle->v = spindle->ramp = 0;", "spindle->v = 0;"
    ),
    Mutant("never creeps", "spindle", "    spindle->creeping = 1;\n    choose_pace(spindle);\n", ""),
    Mutant(
        "place of a coarse count taken as known",
        "spindle",
        "spindle->placed = !spindle->coarse;",
        "spindle->placed = 1;",
    ),
    Mutant(
        "the stop point does not bound the target",
        "motion",
        "if (core->stop_point < nearest) {",
        "if (core->stop_point == nearest) {",
    ),
    Mutant(
        "the queue's end does not bound the target", "motion", "core->line.end < (int32_t)nearest) {", "0) {"
    ),
    Mutant("trust outlives another Setup", "motion", "    core->trust = 0;\n", ""),
    # the guide
    Mutant("line begins at 0 instead of half", "guide_line", "line->acc = n >> 1;", "line->acc = 0;"),
    Mutant(
        "guide goes the other way",
        "guide_line",
        "line->sign = steps < 0 ? -1 : 1;",
        "line->sign = steps < 0 ? 1 : -1;",
    ),
    Mutant(
        "going back counts as going on",
        "guide_line",
        "        line->behind -= (uint32_t)counts;\n",
        "        line->behind += (uint32_t)counts;\n",
    ),
    Mutant(
        "entering a segment forgets what is wound",
        "guide_line",
        "line->left = (uint16_t)(n - line->into);",
        "line->left = n;",
    ),
    Mutant(
        "as many steps as counts refused",
        "guide_line",
        "windctl_get_u16(segment + 2)) > counts) {",
        "windctl_get_u16(segment + 2)) >= counts) {",
    ),
    Mutant(
        "catches up one count a tick",
        "guide_line",
        "uint8_t most = WINDCTL_CATCH_UP_COUNTS;",
        "uint8_t most = 1;",
    ),
    Mutant(
        "a step beyond the guide's limit",
        "core",
        "(uint32_t)guide < (uint32_t)steps;",
        "(uint32_t)guide + 1 < (uint32_t)steps;",
    ),
    # watching
    Mutant(
        "silence a tick late",
        "motion",
        "core->silent_at = core->ticks + WINDCTL_SILENCE;",
        "core->silent_at = core->ticks + WINDCTL_SILENCE + 1;",
    ),
    Mutant("silence leaves it greeted", "watch", "        core->dialogue.greeted = 0;\n", ""),
    Mutant(
        "reverse allowed one count more",
        "watch",
        "core->went_back > core->setup.reverse_counts",
        "core->went_back > core->setup.reverse_counts + 1u",
    ),
    Mutant(
        "slip counted from one side only",
        "watch",
        "(error < 0 ? -error : error) > core->slip_limit",
        "(error < 0 ? 0 : error) > core->slip_limit",
    ),
    Mutant("a category 0 stop brakes softly", "motion", "        brake(core, 1);", "        brake(core, 0);"),
    Mutant(
        "a later trip replaces the first",
        "motion",
        "if (core->state == WINDCTL_STATE_TRIPPED && (category",
        "if (0 && (category",
    ),
    Mutant("trust survives every trip", "motion", "    core->trust &= windctl_trip_trust(trip);\n", ""),
    Mutant("tension taken of a turn that was not whole", "turns", "turns->whole && n > 0", "n > 0"),
    Mutant("index marked anew at each pulse", "turns", "    if (!turns->index_known) {", "    if (1) {"),
    # readings
    Mutant(
        "window a tick short",
        "contact_mean",
        "mean->window_ticks >= mean->window)",
        "mean->window_ticks + 1 >= mean->window)",
    ),
    Mutant("mean not rounded", "contact_mean", "16 * mean->sum + divisor / 2)", "16 * mean->sum)"),
    Mutant("open sample forgotten", "contact_mean", "        mean->open = 1;\n", "        mean->open = 0;\n"),
    Mutant(
        "revolutions not waited for", "contact_mean", "            whole = 0;\n", "            whole = 1;\n"
    ),
)
