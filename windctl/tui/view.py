"""What is shown of a run: texts and numbers made from its snapshot. Pure; the widgets only place them."""

from __future__ import annotations

import re
from dataclasses import dataclass, replace
from enum import Enum
from math import floor
from typing import TYPE_CHECKING

from windctl.desk.numbers import duration, grouped, ohm
from windctl.plan.pace import OWN_MOTOR_SLOW_TURNS
from windctl.run.zero_seen import now_words
from windctl.tui.looks import Look, look_of
from windctl.tui.pictures.curve import Band, Scale

if TYPE_CHECKING:
    from windctl.run.outlook import Ahead
    from windctl.run.snapshot import Snapshot
    from windctl.run.zero_seen import ZeroSeen

_TRIPPED = re.compile(r"^the board is tripped \(([^)]*)\): ")
_HEADROOM = 1.08  # of an axis over the most that is foreseen


@dataclass(frozen=True, slots=True)
class Card:
    """What does not change while a coil is wound. Resistances in ohm at 20 °C."""

    number: str
    recipe: str
    machine: str
    target_kind: str  # "turns" or "dcr_20c_ohm"
    target_value: float
    tolerance_pct: float
    most_turns: float
    planned_turns: float
    planned_ohm: float
    planned_u95: float
    depth_mm: float
    batch: str = ""
    of: int = 0
    place: int = 0  # of this coil in its batch; 0: not known
    pass_turns: float = 0.0  # from flange to flange, where a hand guides and nobody counts; else 0

    @property
    def title(self) -> str:
        """The coil in one line."""
        parts = [self.recipe, self.number]
        if self.batch:
            count = f" {self.place} of {self.of}" if self.place and self.of else ""
            parts.append(f"{self.batch}{count}")
        return " · ".join(part for part in parts if part)

    @property
    def scale(self) -> Scale:
        """The axes: fixed from the plan, so that the eye can rest on them."""
        resistance = self.target_kind == "dcr_20c_ohm"
        middle = self.target_value if resistance else self.planned_ohm
        return Scale(
            turns=max(self.most_turns, self.planned_turns) * 1.02,
            ohm=max(middle, self.planned_ohm + self.planned_u95) * _HEADROOM,
            finish_ohm=middle,
            finish_span=max(1.6 * self.planned_u95 / middle, 2.0 * self.tolerance_pct / 100.0, 0.01),
            target_ohm=middle if resistance else None,
            target_turns=None if resistance else self.target_value,
            tolerance=self.tolerance_pct / 100.0 if resistance else 0.0,
        )


@dataclass(frozen=True, slots=True)
class Next:
    """What happens next: a few words, and the one figure to look at, which may be empty."""

    words: str
    figure: str = ""
    when: str = ""


@dataclass(frozen=True, slots=True)
class Glance:
    """Everything on the run screen that is text."""

    look: Look
    next: Next
    digits: str
    under_digits: str
    part: float  # of the way to the stop, 0 to 1
    slow_part: float | None  # where the slow turns begin, as such a part
    rows: tuple[tuple[str, str], ...]  # what is measured, named
    virtual: bool
    alarm: str  # what is wrong and what to do; empty when nothing is


def glance(snapshot: Snapshot, card: Card, link_lost: str = "") -> Glance:
    """The texts for one snapshot. `link_lost`: how the run failed, if it did."""
    goal = snapshot.stop_turn or snapshot.turns_planned or card.planned_turns
    look = look_of("no link") if link_lost else _look(snapshot)
    return Glance(
        look=look,
        next=Next("see below") if link_lost else next_of(snapshot),
        digits=grouped(floor(snapshot.turns + 1e-6)),
        under_digits=_under(snapshot, goal),
        part=min(1.0, snapshot.turns / goal) if goal > 0 else 0.0,
        slow_part=min(1.0, snapshot.slow_turn / goal) if snapshot.slow_turn and goal > 0 else None,
        rows=_rows(snapshot, card),
        virtual=snapshot.virtual,
        alarm=link_lost or _alarm(snapshot),
    )


def _look(snapshot: Snapshot) -> Look:
    """Where a person is waited for before the first turn, the word says so, too."""
    if snapshot.phase == "setting up" and snapshot.asks is not None:
        return look_of("ready" if snapshot.asks == "go" else "asking")
    return look_of(snapshot.phase)


def still(seen: Glance, before: Glance) -> Glance:
    """What is new of the digits and the state; the figures and the clock as they were."""
    next_ = seen.next
    if (next_.words, next_.figure) == (before.next.words, before.next.figure):
        next_ = before.next
    return replace(
        seen,
        next=next_,
        rows=before.rows,
        part=before.part,
        slow_part=before.slow_part,
        under_digits=before.under_digits,
    )


def next_of(snapshot: Snapshot) -> Next:
    """What happens next, from what is known."""
    if snapshot.by_eye and snapshot.phase != "ended":
        return _next_by_eye(snapshot)
    if snapshot.phase == "turning" and snapshot.stop_turn is not None:
        when = f"in {duration(snapshot.seconds_left)}" if snapshot.seconds_left is not None else ""
        slow = snapshot.slow_turn
        if not snapshot.driven:  # by somebody's own motor, and by their own hand
            near = snapshot.stop_turn - OWN_MOTOR_SLOW_TURNS
            if snapshot.turns < near:
                stop = f"stop at {grouped(snapshot.stop_turn)}, {when}".removesuffix(", ")
                return Next("slow down at", grouped(near), stop)
            return Next("stop at", grouped(snapshot.stop_turn), when)
        if slow is not None and snapshot.turns < slow:
            return Next("slows at", grouped(slow), f"stops near {grouped(snapshot.stop_turn)}, {when}")
        return Next("stops at", grouped(snapshot.stop_turn), when)
    if snapshot.check is not None and snapshot.phase in ("held", "settling"):
        how = "touch the contact, or R types it" if snapshot.drives_off else "the drives go off first"
        return Next("read at turn", grouped(snapshot.check.turn), how)
    if snapshot.can_take_back and snapshot.asks in (None, "go") and snapshot.phase == "held":
        goes_on = ", G goes on" if snapshot.asks == "go" else ""
        return Next(_sentence(snapshot.says), "", f"U takes the reading back{goes_on}")
    if snapshot.alarm and snapshot.phase == "held" and snapshot.asks == "go":
        return Next("see the alarm below, and look to it", "", "T tells what you did, G goes on")
    zero = snapshot.zero
    if zero is not None and zero.wanted and snapshot.phase != "connecting":
        return _next_of_zero(snapshot, zero)
    if snapshot.asks == "go":
        word = "goes on" if snapshot.turns > 0 else "starts"
        return Next(_sentence(snapshot.says), "", f"{word} when you press G")
    if snapshot.asks == "pass":
        return Next(_sentence(snapshot.says), "", "G lets the guide move")
    if shown_near(snapshot):
        return Next(_sentence(snapshot.says), "", "Y: it is right · ← → nudge it · F8 holds")
    if snapshot.asks == "clear":
        return Next(_sentence(snapshot.says), "", "put it right, then press C")
    if snapshot.asks == "place":
        return Next(_sentence(snapshot.says), "", "count the turns, T: turn and their number")
    if snapshot.asks == "reading":
        return Next(_sentence(snapshot.says), "", "R: type the reading")
    if snapshot.phase == "stopping":
        return Next("comes to rest" if snapshot.driven else "stop your own motor")
    return Next(_sentence(snapshot.says))


def _next_of_zero(snapshot: Snapshot, zero: ZeroSeen) -> Next:
    """What to do with the contact's leads."""
    if zero.together:
        return Next("hold the leads together", f"{zero.read}/{zero.enough}", "they are being read")
    if snapshot.asks != "leads":
        return Next(_sentence(snapshot.says))
    return Next("put contact and the meter's other lead together", "", "then Y · T: skip leaves it")


def _leads(zero: ZeroSeen) -> str:
    """The contact as it reads, or what was zeroed."""
    if zero.wanted or zero.found is None:
        return now_words(zero.now).replace("ohm", "Ω")
    return f"{_ohm(zero.found, zero.found_u95 or 0.0)}, zeroed"


def _next_by_eye(snapshot: Snapshot) -> Next:
    """What somebody does next who winds on a motor of their own and reads the counter."""
    if snapshot.phase == "reading" and snapshot.check is not None:
        return Next("at turn", grouped(snapshot.check.turn), "R types it")
    if snapshot.phase == "settling":
        return Next("the coil ends in a moment", "", "R reads it, U undoes")
    if snapshot.phase == "held":
        return Next("stop your own motor", "", "windctl cannot; K: the counter")
    if snapshot.phase != "waiting" or snapshot.stop_turn is None:
        return Next(_sentence(snapshot.says))
    if (snapshot.hands or "").startswith("unwind"):
        return Next("turn it back by hand", "", "then K: the counter")
    slow = snapshot.slow_turn
    slows = slow is not None and snapshot.turns < slow
    when = f"slow from {grouped(slow or 0.0)}, then K" if slows else "and stop, then K"
    if snapshot.bared:
        when = "insulate the wire first"
    return Next("to", grouped(snapshot.stop_turn), when if snapshot.begun else "counter to 0 first, K")


def shown_near(snapshot: Snapshot) -> bool:
    """The guide stands to be looked at, or is being nudged there."""
    return snapshot.guide_look is not None and snapshot.guide_look.near


def _sentence(words: str) -> str:
    return _TRIPPED.sub(r"\1: ", words.removeprefix("held: "))


def _under(snapshot: Snapshot, goal: float) -> str:
    about = "about " if snapshot.stop_turn is None else ""
    part = f" · {min(100, floor(100 * snapshot.turns / goal))} %" if goal > 0 else ""
    if snapshot.by_eye and snapshot.turns > 0:  # what is typed next, in the same place
        back = " · U undoes" if snapshot.can_take_back else ""
        return f"of {grouped(goal)}{part} · R reads{back}"
    return f"of {about}{grouped(goal)} turns{part}"


def _rows(snapshot: Snapshot, card: Card) -> tuple[tuple[str, str], ...]:
    celsius = f" at {snapshot.celsius:.1f} °C" if snapshot.celsius is not None else ""
    rows = [
        ("now", "no reading yet" if snapshot.ohm_now is None else _fine_ohm(snapshot.ohm_now) + celsius),
        ("at 20 °C", "–" if snapshot.ohm_20c_now is None else _fine_ohm(snapshot.ohm_20c_now)),
        (
            "finish",
            "–"
            if snapshot.finish_ohm is None
            else f"{_ohm(snapshot.finish_ohm, snapshot.finish_u95 or 0.0)} at 20 °C",
        ),
        ("target", target_text(card)),
        *_pace_rows(snapshot, card),
    ]
    zero = snapshot.zero
    if zero is not None and (zero.wanted or zero.found is not None):
        rows[:2] = [("leads", _leads(zero)), ("profile", _ohm(zero.profile, zero.profile_u95))]
    if snapshot.tension_cn is not None:
        rows.append(("pull", f"{snapshot.tension_cn:.1f} cN"))
    if snapshot.guide_mm is not None:
        rows.append(("guide", f"{snapshot.guide_mm:.2f} mm"))
    used = grouped(snapshot.readings_used)
    rows.append(("readings", f"{used} used, {grouped(snapshot.readings_gated)} set aside"))
    return tuple(rows)


def _pace_rows(snapshot: Snapshot, card: Card) -> list[tuple[str, str]]:
    """Of a spindle that turns; where nobody sees it turn, where it is to stop and how a hand lays."""
    if not snapshot.by_eye:
        return [("pace", _pace(snapshot))]
    rows = []
    if snapshot.stop_turn is not None and snapshot.stop_u95:
        rows.append(("stop", f"{grouped(snapshot.stop_turn)} ± {grouped(snapshot.stop_u95)} turns"))
    if card.pass_turns:
        rows.append(("lay", f"{grouped(card.pass_turns)} turns each way"))
    return rows


def _pace(snapshot: Snapshot) -> str:
    """The spindle's speed now, and whose it is where it is not the plan's."""
    if not snapshot.driven:
        return "your own motor's"
    slowed = f", slowed to {snapshot.pace_percent} %" if snapshot.pace_percent < 100 else ""
    return f"{snapshot.pace_rpm:.0f} rpm{slowed}"


def reading_steps(snapshot: Snapshot) -> str:
    """What to do so that the coil can be read, in order."""
    off = "✔ drives off: hands may go in" if snapshot.drives_off else "□ wait: the drives go off"
    off = "□ your own motor is off and stands" if snapshot.by_eye else off
    steps = [off, "□ bare the wire at the guide, never on the coil"]
    check = snapshot.check
    if check is not None and check.contact:
        steps.append("□ touch the contact to it until the bell; or measure it and type")
    else:
        steps.append("□ measure it, and type what the meter shows")
    warm = "" if check is not None and check.thermometer else ", and how warm it is beside the coil"
    steps.append(f"   such as 5930, 5.93k or 5,93k{warm}")
    steps.append("□ insulate the bared spot again before you wind on")
    if check is not None:
        without, with_it = (_ohm(half) for half in (check.without_ohm, check.with_ohm))
        steps.append(f"The finish is known to ± {without}; with a reading here to ± {with_it}.")
    return "\n".join(steps)


def target_text(card: Card) -> str:
    """The target in words."""
    if card.target_kind == "turns":
        return f"{grouped(card.target_value)} turns"
    return f"{_ohm(card.target_value)} ± {card.tolerance_pct:g} %"


def _alarm(snapshot: Snapshot) -> str:
    if snapshot.phase != "tripped":
        refused = "" if snapshot.zero is None else snapshot.zero.refused
        apart = "" if snapshot.guide_look is None else snapshot.guide_look.apart
        return snapshot.alarm or (f"Not zeroed: {refused}." if refused else apart)
    lost = ""
    if snapshot.wire_ends_at is not None:
        lost = f"What was counted beyond turn {grouped(snapshot.wire_ends_at, 1)} is without wire. "
    return f"{lost}When it is put right, C clears it; nothing turns by that. T tells what you did: splice ..."


def _ohm(value: float, half_width: float = 0.0) -> str:
    """With the sign that meters show."""
    return ohm(value, half_width).replace("kohm", "kΩ").replace("ohm", "Ω")


def _fine_ohm(value: float) -> str:
    """In ohm, to a tenth: the figure that a meter beside the machine would show."""
    return f"{grouped(value, 1)} Ω"


def bands(ahead: tuple[Ahead, ...]) -> list[Band]:
    """The fan, as it is drawn."""
    return [Band(point.turn, point.ohm - point.u95, point.ohm + point.u95) for point in ahead]


class Sound(Enum):
    """Why the bell rings."""

    SLOWS = "slows"
    STANDS = "stands"
    ALARM = "alarm"
    READ = "read"


def sound(before: Snapshot | None, now: Snapshot) -> Sound | None:
    """Whether the bell rings between two looks: eyes are on the wire."""
    if before is None:
        return None
    if now.phase == "tripped" and before.phase != "tripped":
        return Sound.ALARM
    if shown_near(before) and shown_near(now):
        return None  # nudged by the one who looks at it
    moving = ("turning", "stopping")
    if before.phase in moving and now.phase not in moving:
        return Sound.STANDS
    slow = now.slow_turn
    if not now.driven and now.stop_turn is not None:
        slow = now.stop_turn - OWN_MOTOR_SLOW_TURNS
    if now.phase == "turning" and slow is not None and before.turns < slow <= now.turns:
        return Sound.SLOWS
    if before.check is not None and now.check is None:
        return Sound.READ
    if before.zero is not None and before.zero.together and (now.zero is None or not now.zero.together):
        return Sound.READ
    return None
