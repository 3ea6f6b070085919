"""The kit at a board on a port.

    python -m tests.firmware.conformance --list
    python -m tests.firmware.conformance --port URL --machine PROFILE.toml [--rpm 60] [--guide-mm 2]

Exit code 0: every clause that could be judged holds; 1: one fails; 2: usage; 4: no board.
"""

from __future__ import annotations

import argparse
import json
import sys
from collections.abc import Sequence
from pathlib import Path
from typing import TextIO

from tests.firmware.conformance.clause import NOT_ON_THE_LINE, Clause, NotAsWrittenError, NotJudgedError
from tests.firmware.conformance.hands import Hands, Nobody, Somebody
from tests.firmware.conformance.machine import machine_of
from tests.firmware.conformance.rig import Rig
from tests.firmware.conformance.run import Finding, Verdict, clauses, judge_all
from windctl.errors import WindctlError
from windctl.machine.serial_port import SerialPort
from windctl.profile.load import load_profile

CAUTIONS = """\
This turns the spindle (up to {rpm:g} rpm) and moves the guide ({mm:g} mm either way) on {url}.
- No wire and no bobbin on the machine; the guide in the middle of its way, clear of everything.
- Guard closed. Hands, hair, sleeves and tools away from spindle and guide, except when a hand is asked for.
- The hardware stop within reach, tried before: it must cut the drives' power with this computer off.
- Ctrl-C asks the board to hold. That is no emergency stop: use the hardware stop.
- Your local rules for machines and electricity come before anything written here."""


def arguments(argv: Sequence[str] | None = None) -> argparse.Namespace:
    """What was asked for."""
    parser = argparse.ArgumentParser(prog="python -m tests.firmware.conformance", description=__doc__)
    parser.add_argument("--list", action="store_true", help="the clauses, without any board")
    parser.add_argument("--port", metavar="URL", help="any pyserial URL")
    parser.add_argument("--machine", type=Path, metavar="PROFILE.toml", help="the machine's windctl profile")
    parser.add_argument("--rpm", type=float, default=60.0, help="the spindle's pace (default 60)")
    parser.add_argument(
        "--guide-mm", type=float, default=2.0, help="the guide's way, either side (default 2)"
    )
    parser.add_argument(
        "--still", action="store_true", help="only what moves nothing and powers no drive long"
    )
    parser.add_argument("--no-hands", action="store_true", help="leave out what needs a hand")
    parser.add_argument("--section", type=int, action="append", help="only this section; may be repeated")
    parser.add_argument("--json", action="store_true", help="the findings as JSON on standard output")
    parser.add_argument(
        "--simulated", action="store_true", help="a simulated machine: nothing is asked first"
    )
    return parser.parse_args(argv)


def chosen(options: argparse.Namespace) -> list[Clause]:
    """The clauses to be judged."""
    return [
        one
        for one in clauses()
        if (not options.section or one.section in options.section)
        and not (options.still and one.moves)
        and not (options.no_hands and one.hand)
    ]


def consented(url: str, options: argparse.Namespace, out: TextIO) -> bool:
    """Whether somebody at the machine has read the cautions and typed so."""
    print(CAUTIONS.format(url=url, rpm=options.rpm, mm=options.guide_mm), file=out)
    if not sys.stdin.isatty():
        print("nobody at a terminal can say that this is so: refused", file=out)
        return False
    print("Type 'clear' and Enter if all of this is so: ", end="", file=out, flush=True)
    return sys.stdin.readline().strip() == "clear"


def told(finding: Finding) -> str:
    """A line."""
    of = finding.clause
    title = f"{of.section} {of.title}".strip()
    detail = f"  [{finding.detail}]" if finding.detail else ""
    return f"{finding.verdict.value:<10}  {title}: {of.says}{detail}"


def _interrupted(rig: Rig) -> int:
    """Held by the clause's end already: take the drives off as well, and say whether that was seen."""
    try:
        rig.fresh()
    except (NotAsWrittenError, NotJudgedError, WindctlError):
        print("THE STOP IS NOT CONFIRMED: use the hardware stop.", file=sys.stderr)
    else:
        print("interrupted: it stands, and its drives are off", file=sys.stderr)
    return 130


def main(argv: Sequence[str] | None = None) -> int:
    """Runs the kit."""
    options = arguments(argv)
    if options.list:
        for one in chosen(options):
            marks = ("moves " if one.moves else "") + ("hand" if one.hand else "")
            print(f"{one.section} {one.title}: {one.says}  ({marks.strip() or 'still'})")
        for (section, title), how in NOT_ON_THE_LINE.items():
            print(f"{section} {title}: not on the line; {how}")
        return 0
    if options.port is None or options.machine is None:
        print("--port URL and --machine PROFILE.toml are needed (or --list)", file=sys.stderr)
        return 2
    if not options.simulated and not consented(options.port, options, sys.stderr):
        return 2
    try:
        profile = load_profile(options.machine)
        machine = machine_of(profile, options.rpm, options.guide_mm, simulated=options.simulated)
        port = SerialPort(options.port, profile.port.baud)
    except WindctlError as error:
        print(error, file=sys.stderr)
        return 4
    hands: Hands = Nobody() if options.no_hands or options.simulated else Somebody()
    rig = Rig(port, machine, hands)
    findings: list[Finding] = []

    def seen(finding: Finding) -> None:
        findings.append(finding)
        print(told(finding), file=sys.stderr if options.json else sys.stdout, flush=True)

    try:
        judge_all(rig, chosen(options), seen)
    except KeyboardInterrupt:
        return _interrupted(rig)
    except WindctlError as error:
        print(error, file=sys.stderr)
        return 4
    finally:
        port.close()
    if options.json:
        print(json.dumps({"format": 1, "clauses": [one.as_json() for one in findings]}, indent=2))
    fails = sum(one.verdict is Verdict.FAILS for one in findings)
    holds = sum(one.verdict is Verdict.HOLDS for one in findings)
    print(f"{holds} clauses hold, {fails} fail, {len(findings) - holds - fails} not judged", file=sys.stderr)
    return 1 if fails else 0


if __name__ == "__main__":
    sys.exit(main())
