"""What must not work: files and options of every kind of wrong, with what is said of each, and where.

`{file}` stands for the file's path in what is said. A recipe is given whole or as changes of a good one.
"""

from __future__ import annotations

from dataclasses import dataclass

from tests.recipe.samples import GOOD, replaced, without

PROFILE = """\
format = 1
name = "north"
bench = "n1"
[spindle]
drive = "step"
counts_per_turn = 400
index = true
[guide]
kind = "step"
"""
READINGS = "turn,ohm,celsius\n500,342.1,22.5\n"
OHMS = replaced(GOOD, "turns", "dcr_20c_ohm = 5900\nmin_turns = 7300\nmax_turns = 8700")
EVEN = GOOD
for _key, _line in (("style", 'style = "even"'), ("pattern", ""), ("amount", ""), ("seed", "")):
    EVEN = replaced(EVEN, _key, _line)


@dataclass(frozen=True)
class Bad:
    """A file's content (None: there is no file), and all lines that are said of it."""

    name: str
    content: str | bytes | None
    said: tuple[str, ...]


def bad(name: str, content: str | bytes | None, *said: str) -> Bad:
    return Bad(name, content, said)


def line(key: str, value: str, *said: str, base: str = GOOD) -> Bad:
    """A recipe (or `base`) in which the line of one key is another one."""
    return Bad(f"{key}: {value}"[:60], replaced(base, key, value), said)


NO_FILES = (
    bad("no file", None, "{file}: there is no such file"),
    bad("empty", b"", "{file}: is empty"),
    bad("blank", b" \n\t\n", "{file}: is empty"),
    bad("a program", b"\x7fELF\x02\x01\x01\x00", "{file}:1:8: is not a text file"),
    bad("a zero in the middle", b"format = 1\nname = \x00\n", "{file}:2:8: is not a text file"),
    bad("UTF-16", GOOD.encode("utf-16"), "{file}:1:1: is text in UTF-16 or UTF-32; save it as UTF-8"),
    bad("UTF-32", GOOD.encode("utf-32"), "{file}:1:1: is text in UTF-16 or UTF-32; save it as UTF-8"),
    bad(
        "Latin 1",
        "format = 1\nname = 'Gr\xfcn'\n".encode("latin-1"),
        "{file}:2:11: is not UTF-8 text: byte 0xfc; save it as UTF-8",
    ),
    bad("too large", b"#" * 65_537, "{file}: is larger than 64 KiB, which no such file is"),
)
BROKEN = (
    bad(
        "a byte order mark",
        "\ufeffformat = 1\n",
        "{file}:1:1: begins with a byte order mark; save it as plain UTF-8 without one",
    ),
    bad("no value", "format = 1\nname =\n", "{file}:2:7: is not valid TOML: Invalid value"),
    bad(
        "no sign of equality",
        "format 1\n",
        "{file}:1:8: is not valid TOML: Expected '=' after a key in a key/value pair",
    ),
    bad("an open text", 'format = 1\nname = "x\n', "{file}:2:10: is not valid TOML: Illegal character '\\n'"),
    bad(
        "an open bracket",
        "format = 1\n[bobbin\n",
        "{file}:2:8: is not valid TOML: Expected ']' at the end of a table declaration",
    ),
    bad(
        "a decimal comma",
        "format = 1\npitch = 0,22\n",
        "{file}:2:10: is not valid TOML: the decimal sign is a point: 0.22",
    ),
    bad(
        "a key twice", "format = 1\nformat = 1\n", "{file}:2:11: is not valid TOML: Cannot overwrite a value"
    ),
    bad("a table twice", "[lay]\n[lay]\n", "{file}:2:5: is not valid TOML: Cannot declare ('lay',) twice"),
    bad(
        "a unit in a number",
        "gap = 11 mm\n",
        "{file}:1:10: is not valid TOML: a number stands alone, its unit is in the key's name: 11, without mm",
    ),
    bad("another format", '{"format": 1}\n', "{file}:1:1: is not valid TOML: Invalid statement"),
    bad(
        "a control character",
        "a = '\x07'\n",
        "{file}:1:6: is not valid TOML: Found invalid character '\\x07'",
    ),
    bad("a very deep key", "x = 1\na" + ".a" * 50 + " = 1\n", "{file}:2:1: is a key of more than 40 parts"),
    bad("a very long number", "format = " + "1" * 5000, "{file}:1:10: is a number with far too many digits"),
    bad("a thousand brackets", "x = " + "[" * 50_000, "{file}: has tables or arrays nested too deeply"),
)

RECIPES = (
    line("format", "format = 2", "{file}:1:10: format is 2, must be 1"),
    line("format", "", "{file}:1:1: format is missing: version of this form; 1 is the only one so far"),
    line("format", 'format = "1"', '{file}:1:10: format is "1", where a whole number is needed; write it without quotes'),
    line("name", 'name = ""', "{file}:2:8: name is empty"),
    line("name", 'name = "a\\u001b[31m"', "{file}:2:8: name holds the unprintable character \\x1b"),
    line("name", f'name = "{"n" * 81}"', "{file}:2:8: name has 81 characters, at most 80 are allowed"),
    line("core_length_mm", "core_length_mm = nan", "{file}:4:18: bobbin.core_length_mm is nan, which is not a finite number"),
    line("core_length_mm", "core_length_mm = 5600", "{file}:4:18: bobbin.core_length_mm is 5600 mm, must be at most 500 mm"),
    line("core_length_mm", 'core_length_mm = "56 mm"', '{file}:4:18: bobbin.core_length_mm is "56 mm", where a number in mm is needed; write it without quotes'),
    line("core_width_mm", "core_width_mm = 57", "{file}:5:17: bobbin.core_width_mm is 57 mm, more than the core's length of 56 mm"),
    line("corner_radius_mm", "corner_radius_mm = 4", "{file}:6:20: bobbin.corner_radius_mm is 4 mm, more than half the core's width, 3 mm"),
    line("flange_gap_mm", "flange_gap_mm = 0", "{file}:7:17: bobbin.flange_gap_mm is 0 mm, must be more than 0 mm"),
    line("flange_gap_mm", "flange_gap_mm = -inf", "{file}:7:17: bobbin.flange_gap_mm is -inf, which is not a finite number"),
    line("flange_depth_mm", "flange_depth_mm = true", "{file}:8:19: bobbin.flange_depth_mm is true, where a number in mm is needed"),
    line(
        "flange_depth_mm",
        "flange_depth_mm = 8.5\ncore_perimeter_mm = 2384",
        "{file}:9:21: bobbin.core_perimeter_mm is 2384 mm, which a core of 56 by 6 mm cannot have: 100.8 to "
        "136.4 mm; give the length of one turn, not of all that were wrapped",
    ),
    line("direction_from_face", 'direction_from_face = "left"', '{file}:10:23: coil.direction_from_face is "left", must be "cw" or "ccw"'),
    line("mounted", 'mounted = "face ou"', '{file}:11:11: coil.mounted is "face ou", must be "face out" or "face in"; did you mean "face out"?'),
    line("gauge", 'gauge = "AWG42.5"', '{file}:14:9: wire.gauge is "AWG42.5", not a gauge; write it like "AWG 42"'),
    line("gauge", 'gauge = "AWG 60"', '{file}:14:9: wire.gauge is "AWG 60", outside AWG 1 to AWG 56'),
    line("gauge", "gauge = 42", "{file}:14:9: wire.gauge is 42, where a text in quotes is needed"),
    line("gauge", "", "{file}:13:2: wire.gauge is missing, and so is diameter_mm; exactly one of them is needed"),
    line("gauge", 'gauge = "AWG 42"\ndiameter_mm = 0.063', "{file}:15:1: wire.diameter_mm is given as well as gauge; exactly one of them may be"),
    line("overall_mm", "overall_mm = 0.06", "{file}:15:14: wire.overall_mm is 0.06 mm, less than the bare wire's diameter of 0.06334 mm"),
    line("overall_mm", 'enamel = "grade 3"', '{file}:15:10: wire.enamel is "grade 3", must be "grade 1" or "grade 2"; did you mean "grade 2"?'),
    line("style", 'style = "loose"', '{file}:17:9: lay.style is "loose", must be "even" or "scatter"'),
    line("pitch_mm", "pitch_mm = 0.22\nturns_per_pass = 47", "{file}:19:1: lay.turns_per_pass is given as well as pitch_mm; exactly one of them may be"),
    line("pitch_mm", "pitch_mm = 12", "{file}:18:12: lay.pitch_mm is 12 mm, more than the guide's whole stroke of 10.4 mm"),
    line("pitch_mm", "pitch_mm = 0.02", "{file}:18:12: lay.pitch_mm is 0.02 mm, less than the wire's overall diameter of 0.072 mm", base=EVEN),
    line(
        "margin_mm",
        "margin_mm = 6",
        "{file}:19:13: lay.margin_mm is 6 mm at each flange, which leaves the guide no stroke in the gap of 11 "
        "mm; must be less than 5.5 mm",
    ),
    line("pattern", 'pattern = "random"', '{file}:20:11: lay.pattern is "random", must be "wander" or "stagger" or "ripple"'),
    line("amount", "amount = 40", "{file}:21:10: lay.amount is 40, must be at most 1"),
    line("seed", "seed = 1.5", "{file}:22:8: lay.seed is 1.5, where a whole number is needed"),
    line("seed", "seed = 7\nreversal_spread_mm = 6", "{file}:23:22: lay.reversal_spread_mm is 6 mm, not less than half the guide's stroke, 5.2 mm"),
    line("seed", "seed = 7\npacking = 0.95", "{file}:23:11: lay.packing is 0.95, must be at most 0.91"),
    line("seed", "seed = 7\npacking_sd = 0.05", "{file}:23:14: lay.packing_sd stands alone; give lay.packing, whose uncertainty it is"),
    line("start_rpm", "start_rpm = 1200", "{file}:24:13: spindle.start_rpm is 1200 rpm, more than spindle.cruise_rpm of 1000 rpm"),
    line("start_turns", "start_turns = 0", "{file}:25:15: spindle.start_turns is 0 turns, must be at least 1 turns"),
    line("ramp_rpm_per_s", "ramp_rpm_per_s = 1e6", "{file}:29:18: spindle.ramp_rpm_per_s is 1000000 rpm/s, must be at most 100000 rpm/s"),
    line("turns", "turns = 8000\ndcr_20c_ohm = 5900\nmin_turns = 7000\nmax_turns = 9000", "{file}:32:1: stop.dcr_20c_ohm is given as well as turns; exactly one of them may be"),
    line("turns", "", "{file}:30:2: stop.turns is missing, and so is dcr_20c_ohm; exactly one of them is needed"),
    line(
        "turns",
        "dcr_20c_ohm = 5900",
        "{file}:30:2: stop.max_turns is missing; a resistance target (stop.dcr_20c_ohm) needs it",
        "{file}:30:2: stop.min_turns is missing; a resistance target (stop.dcr_20c_ohm) needs it",
    ),
    line("min_turns", "min_turns = 8800", "{file}:32:13: stop.min_turns is 8800 turns, more than stop.max_turns of 8700 turns", base=OHMS),
    line("tolerance_pct", "tolerance_pct = -1", "{file}:32:17: stop.tolerance_pct is -1 %, must be more than 0 %"),
    line("tolerance_pct", "tolerance_pct = 2\n[tension]\nband_cn = 5", "{file}:34:11: tension.band_cn stands alone; give tension.set_cn, around which it lies"),
    line("tolerance_pct", "tolerance_pct = 2\ntolerence_pct = 3", "{file}:33:1: stop.tolerence_pct is not a key of [stop]; did you mean tolerance_pct?"),
    line("tolerance_pct", "tolerance_pct = 2\npitch_mm = 3", "{file}:33:1: stop.pitch_mm is not a key of [stop]; it belongs at lay.pitch_mm"),
    line("tolerance_pct", "tolerance_pct = 2\n[tensoin]\nset_cn = 5", "{file}:33:2: tensoin is not a key or table of this form; did you mean tension?"),
    bad("no bobbin", GOOD[: GOOD.index("[bobbin]")] + GOOD[GOOD.index("[coil]") :], "{file}:1:1: bobbin is missing; the table [bobbin] is needed"),
    bad("a number for a table", "lay = 3\n" + GOOD[: GOOD.index("[lay]")] + GOOD[GOOD.index("[spindle]") :], "{file}:1:7: lay is 3, where a table is needed"),
    bad("an array of tables", GOOD.replace("[stop]", "[[stop]]"), "{file}:30:3: stop is an array, where a table is needed"),
    bad(
        "everything at once",
        replaced(replaced(replaced(without(GOOD, "seed"), "core_width_mm", "core_width_mm = 60"), "mounted", "mounted = 1"), "tolerance_pct", "tolerance = 2"),
        "{file}:5:17: bobbin.core_width_mm is 60 mm, more than the core's length of 56 mm",
        '{file}:11:11: coil.mounted is 1, must be "face out" or "face in"',
        '{file}:16:2: lay.seed is missing; a lay of style "scatter" needs it',
        "{file}:29:2: stop.tolerance_pct is missing: what counts as a good coil, of whichever quantity is the target [%]",
        "{file}:31:1: stop.tolerance is not a key of [stop]; did you mean tolerance_pct?",
    ),
)  # fmt: skip


def profile(key: str, value: str, *said: str) -> Bad:
    return line(key, value, *said, base=PROFILE)


PROFILES = (
    profile("format", "format = 0", "{file}:1:10: format is 0, must be 1"),
    profile("bench", 'bench = "Bench One"', '{file}:3:9: bench is "Bench One", which does not fit: Prefix of coil numbers: 1 to 8 of a-z, 0-9.'),
    profile("bench", 'bench = ""', '{file}:3:9: bench is "", which does not fit: Prefix of coil numbers: 1 to 8 of a-z, 0-9.'),
    profile("drive", 'drive = "servo"', '{file}:5:9: spindle.drive is "servo", must be "step" or "none"'),
    profile("counts_per_turn", "counts_per_turn = 4000", "{file}:6:19: spindle.counts_per_turn is 4000 counts, must be at most 400 counts"),
    profile(
        "counts_per_turn",
        "counts_per_turn = 1",
        '{file}:9:8: guide.kind is "step", and the guide follows the spindle\'s counts, one step per count at most: '
        "1 counts per turn and 200 steps/mm allow a pitch of 0.005 mm, less than the 0.05 mm of the finest wire; "
        "spindle.counts_per_turn of at least 10 is needed",
    ),
    profile("index", "index = 1", "{file}:7:9: spindle.index is 1, where true or false is needed"),
    profile(
        "index",
        "max_rpm = 3000",
        "{file}:7:11: spindle.max_rpm is 3000 rpm, which at 400 steps per turn is 20000 steps/s, more than the "
        "board's 15000 steps/s; at most 2250 rpm",
    ),
    profile(
        "index",
        "decel_rpm_per_s = 20000",
        "{file}:7:19: spindle.decel_rpm_per_s is 20000 rpm/s, more than the board's 65535 steps/s2; at most 9830.25 "
        "rpm/s at 400 steps per turn",
    ),
    profile(
        "kind",
        'kind = "step"\nsteps_per_mm = 640',
        "{file}:8:2: guide.max_mm_per_s is 40 mm/s, which at 640 steps/mm is 25600 steps/s, more than the board's "
        "15000 steps/s; at most 23.4375 mm/s",
    ),
    profile("kind", 'kind = "step"\nstart_stop_mm_per_s = 50', "{file}:10:23: guide.start_stop_mm_per_s is 50 mm/s, more than guide.max_mm_per_s of 40 mm/s"),
    profile("kind", 'kind = "step"\nbacklash_mm = 60', "{file}:10:15: guide.backlash_mm is 60 mm, not less than guide.travel_mm of 60 mm"),
    profile("kind", 'kind = "step"\n[readings]\nmode = "always"', '{file}:11:8: readings.mode is "always", must be "live" or "checks" or "none"'),
    profile("kind", 'kind = "step"\n[readings]\ngain_sd_pct = -0.3', "{file}:11:15: readings.gain_sd_pct is -0.3 %, must be at least 0 %"),
    profile("kind", 'kind = "step"\n[port]\nbaud = 9', "{file}:11:8: port.baud is 9 bit/s, must be at least 1200 bit/s"),
    profile("kind", 'kind = "step"\n[port]\nurl = ""', "{file}:11:7: port.url is empty"),
    profile("kind", 'kind = "step"\n[readings]\nmode = "live"\nled_ohm = 1', "{file}:12:1: readings.led_ohm is not a key of [readings]; did you mean lead_ohm?"),
)  # fmt: skip


def csv(name: str, text: str | bytes | None, *said: str) -> Bad:
    return bad(name, text, *said)


CSVS = (
    csv("no file", None, "{file}: there is no such file"),
    csv("empty", "", "{file}: is empty: it needs the header turn,ohm,celsius"),
    csv("comments alone", "# nothing\n\n", "{file}: is empty: it needs the header turn,ohm,celsius"),
    csv("a picture", b"\x89PNG\r\n\x1a\n\x00\x00", "{file}:3:1: is not a text file"),
    csv("UTF-16", READINGS.encode("utf-16"), "{file}:1:1: is text in UTF-16 or UTF-32; save it as UTF-8"),
    csv("Latin 1", "turn,ohm,celsius\n500,342,22 # f\xfcr\n".encode("latin-1"), "{file}:2:15: is not UTF-8 text: byte 0xfc; save it as UTF-8"),
    csv("no header", "500,342.1,22.5\n",
        "{file}:1:1: there is no column '500'; the columns are turn, ohm, celsius, sd_ohm, state, seconds, event",
        "{file}:1:5: there is no column '342.1'; the columns are turn, ohm, celsius, sd_ohm, state, seconds, event",
        "{file}:1:11: there is no column '22.5'; the columns are turn, ohm, celsius, sd_ohm, state, seconds, event",
        "{file}:1:1: the header lacks turn and ohm and celsius; it starts turn,ohm,celsius"),
    csv("a column too few", "turn,ohm\n1,2\n", "{file}:1:1: the header lacks celsius; it starts turn,ohm,celsius"),
    csv("a column twice", "turn,ohm,celsius,ohm\n", "{file}:1:18: the column ohm stands twice"),
    csv("an unknown column", "turn,ohm,celsius,humidity\n",
        "{file}:1:18: there is no column 'humidity'; the columns are turn, ohm, celsius, sd_ohm, state, seconds, event"),
    csv("parted by tabs", "turn\tohm\tcelsius\n",
        "{file}:1:1: there is no column 'turn\\tohm\\tcelsius'; the columns are turn, ohm, celsius, sd_ohm, state, "
        "seconds, event",
        "{file}:1:1: the header lacks turn and ohm and celsius; it starts turn,ohm,celsius"),
    csv("a field too few", READINGS + "600,400\n", "{file}:3:1: 2 fields, and the header has 3"),
    csv("a field too many", READINGS + "600,400,22,\n",
        "{file}:3:1: 4 fields, and the header has 3; a decimal comma needs semicolons between the fields"),
    csv("decimal commas between commas", READINGS + "600,400,5,22,5\n",
        "{file}:3:1: 5 fields, and the header has 3; a decimal comma needs semicolons between the fields"),
    csv("a word", READINGS + "six hundred,400,22\n", "{file}:3:1: turn is 'six hundred', not a number"),
    csv("an empty field", READINGS + "600,,22\n", "{file}:3:5: ohm is '', not a number"),
    csv("nan", READINGS + "600,nan,22\n", "{file}:3:5: ohm is 'nan', not a number"),
    csv("infinite turns", READINGS + "inf,400,22\n", "{file}:3:1: turn is 'inf', not a number"),
    csv("a unit", READINGS + "600,400 ohm,22\n", "{file}:3:5: ohm is '400 ohm', not a number"),
    csv("a thousands sign", READINGS + "1_600,400,22\n", "{file}:3:1: turn is '1_600', not a number"),
    csv("another script's digits", READINGS + "\u0663,400,22\n", "{file}:3:1: turn is '\u0663', not a number"),
    csv("too large a number", READINGS + "600,1e999,22\n", "{file}:3:5: ohm is '1e999', not a number"),
    csv("a negative turn", READINGS + "-1,400,22\n", "{file}:3:1: turn is -1, outside 0 to 1000000 turns"),
    csv("an absurd turn", READINGS + "1e7,400,22\n", "{file}:3:1: turn is 1e+07, outside 0 to 1000000 turns"),
    csv("a negative resistance", READINGS + "600,-400,22\n", "{file}:3:5: ohm is -400 ohm, below 0 ohm"),
    csv("a red-hot coil", READINGS + "600,400,700\n", "{file}:3:9: celsius is 700 degrees C, outside -40 to 150 degrees C"),
    csv("no temperature", READINGS + "600,400,\n", "{file}:3:9: celsius is '', not a number"),
    csv("no spread at all", "turn,ohm,celsius,sd_ohm\n600,400,22,0\n",
        "{file}:2:12: sd_ohm is 0 ohm; a standard deviation is above 0 ohm and finite"),
    csv("an unknown state", "turn,ohm,celsius,state\n600,400,22,spinning\n",
        "{file}:2:12: state is 'spinning'; it can be rest or turning"),
    csv("an unknown event", "turn,ohm,celsius,event\n600,400,22,knot\n",
        "{file}:2:12: event is 'knot'; it can be splice or new wire"),
    csv("a text that steers the screen", READINGS + "\x1b[2J,400,22\n", "{file}:3:1: turn is '\\x1b[2J', not a number"),
    csv("everything at once", "turn;ohm;celsius\n1;2\nx;-5;22,5\n2;1k;2000\n",
        "{file}:2:1: 2 fields, and the header has 3",
        "{file}:3:1: turn is 'x', not a number",
        "{file}:3:3: ohm is -5 ohm, below 0 ohm",
        "{file}:4:6: celsius is 2000 degrees C, outside -40 to 150 degrees C"),
)  # fmt: skip

# (exit code, arguments, what is said)
OPTIONS: tuple[tuple[int, tuple[str, ...], str], ...] = (
    (2, ("plan", "{recipe}", "--turns", "9", "--dcr", "5k"), "--turns and --dcr each name the target: give one of them."),
    (2, ("plan", "{recipe}", "--turns", "0"), "Invalid value for '--turns': 0 is not in the range x>=1."),
    (2, ("plan", "{recipe}", "--turns", "many"), "Invalid value for '--turns': 'many' is not a valid whole number."),
    (2, ("plan", "{recipe}", "--turns", "2000000"), "2000000 turns are asked for; a coil has 1 to 1000000 turns"),
    (2, ("plan", "{recipe}", "--dcr", "5,9,1"), "'5,9,1' is not a resistance: write 7946, 7.946k or 7,946k"),
    (2, ("plan", "{recipe}", "--dcr", "0"), "a resistance is above 0 ohm, not 0"),
    (2, ("plan", "{recipe}", "--dcr", "nan"), "'nan' is not a resistance: write 7946, 7.946k or 7,946k"),
    (2, ("plan", "{recipe}", "--dcr", "5.9", "--no-input"), "a target of 5.9 ohm is about a thousand times off the expected"),
    (2, ("plan",), "Missing argument 'RECIPE'."),
    (2, ("plan", "{recipe}", "{recipe}"), "Got unexpected extra argument"),
    (2, ("plan", "{recipe}", "--colour"), "No such option '--colour'."),
    (2, ("plot", "{recipe}"), "No such command 'plot'."),
    (2, ("plan", "{recipe}", "--dry-run"), "No such option '--dry-run'."),
    (2, ("--dry-run", "plan", "{recipe}"), "--dry-run has no meaning here: this command moves no machine."),
    (2, ("wind", "{recipe}", "--book", "{book}", "--speed", "-1"), "-1.0 is not in the range x>=0."),
    (2, ("wind", "{recipe}", "--book", "{book}", "--plant-seed", "1.5"), "'1.5' is not a valid whole number."),
    (2, ("wind", "{recipe}", "--book", "{book}", "--readings", "sometimes"), "'sometimes' is not one of 'live', 'checks', 'none'."),
    (2, ("wind", "{recipe}", "--book", "{book}", "--of", "3"), "--of says how many coils a batch is to have: name the batch with --batch."),
    (2, ("wind", "{recipe}", "--book", "{book}", "--batch", "A", "--of", "0"), "0 is not in the range x>=1."),
    (2, ("resume", "--at-turn", "-5", "--book", "{book}"), "-5.0 is not in the range x>=0."),
    (2, ("recipe", "check"), "Missing argument 'FILE...'."),
    (2, ("machine", "serve", "--tcp", "here"), "'here' is not HOST:PORT, such as 127.0.0.1:7000"),
    (2, ("machine", "serve", "--tcp", "127.0.0.1:99999"), "'127.0.0.1:99999' is not HOST:PORT"),
    (2, ("forecast", "{recipe}", "{readings}", "--at-turn", "nan"), "nan is not a finite number."),
    (2, ("forecast", "{recipe}", "{readings}", "--at-turn", "inf"), "inf is not a finite number."),
    (2, ("wind", "{recipe}", "--book", "{book}", "--speed", "nan"), "nan is not a finite number."),
    (4, ("plan", "{recipe}", "--machine", "south"), "there is no machine 'south'; known: virtual. Profiles are kept as NAME.toml in"),
    (4, ("wind", "{recipe}", "--book", "{book}", "--machine", "{profile}"), "the profile 'north' names no port: give port.url"),
    (4, ("wind", "{recipe}", "--book", "{book}", "--port", "/dev/no-such-port", "--no-input"), "cannot open port /dev/no-such-port at 115200 baud"),
    (1, ("coils", "list", "--book", "{book}"), "coils.book"),
    (1, ("coils", "list", "--book", "{readings}"), "good.csv"),
)  # fmt: skip

# (a recipe's line, a profile's line, what plan says)
REFUSALS: tuple[tuple[str, str, str], ...] = (
    (
        "cruise_rpm = 1500",
        "",
        "the recipe turns at 1500 rpm, and the machine's spindle.max_rpm is 1000 rpm; lower",
    ),
    ("pitch_mm = 1.2", "", "the guide would make 404 steps in 400 counts, more than one step per count;"),
    (
        "pitch_mm = 1",
        "",
        "at 1000 rpm the guide changes its speed by 26.3 mm/s, and guide.start_stop_mm_per_s is 10",
    ),
    (
        "",
        "travel_mm = 9",
        "the guide travels 10.4 mm, its play included, and the machine's guide.travel_mm is 9 mm",
    ),
    (
        "",
        "steps_per_mm = 0.04",
        "between its turn-round points the guide would travel 10.4 mm, less than one",
    ),
    (
        "ramp_rpm_per_s = 1",
        "",
        "spindle.ramp_rpm_per_s of 1 rpm/s is 7 steps/s2 at 400 steps per turn, and a board",
    ),
)
