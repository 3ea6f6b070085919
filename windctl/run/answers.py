"""From a request to the facts that follow from it, or to why it cannot be met now. Pure."""

from __future__ import annotations

from dataclasses import replace

from windctl.numbers import at_turn, grouped
from windctl.record.decide import Decision
from windctl.record.dry_pass import may_pass
from windctl.record.events import (
    CheckTaken,
    ClearGiven,
    CountCorrected,
    CounterRead,
    EndRequested,
    Event,
    GoGiven,
    HandsAsked,
    HoldRequested,
    LeadsTogether,
    NoteMade,
    PassAgreed,
    PassWanted,
    ReadingTakenBack,
    Spliced,
    WireBroke,
    WireChanged,
    ZeroEnded,
    ZeroWanted,
)
from windctl.record.fold import fold
from windctl.record.state import State
from windctl.record.zeroing import NOBODY, may_zero, nobody_there
from windctl.run.counter import NO_POWER, counter_says
from windctl.run.nudging import nudged, seen
from windctl.run.pacing import paced
from windctl.run.requests import (
    Broke,
    Clear,
    CountIs,
    DrivesOff,
    DryPass,
    End,
    Faster,
    Go,
    Hold,
    NewWire,
    Note,
    Nudge,
    Read,
    Request,
    Seen,
    Skip,
    Slower,
    Splice,
    TakeBack,
    Together,
    Unwind,
    ZeroContact,
)
from windctl.run.said import OFF, Answer
from windctl.run.typed_readings import typed

# What a person may be asked for while the coil stands and hands may go in.
_AT_REST = ("go", "clear", "place", "reading", "count")


def answer(request: Request, state: State, decision: Decision, at_ms: int, *, leaving: bool) -> Answer:
    """What becomes of a request. `leaving`: the run is about to end, so nothing may start any more."""
    permission = state.permission
    if state.by_eye and not leaving and (by_eye := _by_eye(request, state, at_ms)) is not None:
        return by_eye
    match request:
        case Hold():
            return Answer((HoldRequested(at_ms, request.by, request.reason),))
        case End():
            return Answer((EndRequested(at_ms, request.by, request.reason),))
        case Note():
            return Answer((NoteMade(at_ms, request.text, request.by),), "noted")
        case Go():
            if permission is None or leaving or decision.asks not in ("go", "pass"):
                return Answer()  # a go that was not asked for starts nothing
            if decision.asks == "pass":
                return Answer((PassAgreed(at_ms, permission.boot, permission.epoch, request.by),))
            if state.broke is not None:
                where = f"the wire broke at turn {at_turn(state.broke.turn)}"
                return Answer(
                    says=f"{where}, and nothing says that it is joined: say splice, or new wire, and then go"
                )
            return Answer((GoGiven(at_ms, permission.boot, permission.epoch, request.by),))
        case Clear():
            if permission is None or leaving or decision.asks != "clear":
                return Answer()
            return Answer((ClearGiven(at_ms, permission.boot, permission.epoch, request.by),))
        case ZeroContact() | Together():
            return _zeroing(request, state, decision, at_ms, leaving)
        case Skip() if state.zero is not None:
            return Answer((ZeroEnded(at_ms, request.by, "passed over"),), "the contact is not zeroed")
        case DryPass():
            if leaving or not may_pass(state) or state.pass_wanted:
                return Answer(says="a dry pass comes before the first turn, where a motor guides")
            return Answer((PassWanted(at_ms, request.by),), "first a dry pass of the guide")
        case Seen():
            if leaving or decision.asks != "look":
                return Answer(says="the guide is not where it is to be looked at")
            return seen(request, state, at_ms)
        case Nudge():
            return Answer() if leaving else nudged(request, state, decision.asks, at_ms)
        case Slower() | Faster():
            return paced(request, state, at_ms)
        case TakeBack():
            if state.before_typed is None or leaving:
                return Answer(says="there is no typed reading that could still be taken back")
            back = Answer((ReadingTakenBack(at_ms, request.by),), "the reading typed last is taken back")
            if state.by_eye and state.before_typed.count != state.count:
                before = grouped(state.before_typed.count)
                return replace(back, says=f"the turn typed last is taken back: {before} turns, as before")
            return back
        case _:
            at_rest = decision.asks in _AT_REST or (state.check is not None and state.drives_off)
            at_rest = at_rest or state.by_eye  # nobody says anything of a coil that they are winding
            if leaving or not at_rest or not state.in_hand or not state.let_go:
                return Answer(says="that can be said once the coil has turns and stands")
            return _at_the_wire(request, state, at_ms)


def _zeroing(
    request: ZeroContact | Together, state: State, decision: Decision, at_ms: int, leaving: bool
) -> Answer:
    if isinstance(request, Together):
        if leaving or decision.asks != "leads":
            return Answer(says="nobody waits for the contact's leads to be together")
        return Answer((LeadsTogether(at_ms, request.by),), "hold the leads together: they are being read")
    if state.pass_agreed is not None:
        return Answer(says="the guide is being shown: first see that through")
    if leaving or not may_zero(state):
        return Answer(says="the contact is zeroed before the first turn, where the board has one")
    if nobody_there(state, request.simulated_hand):
        return Answer(says=NOBODY)
    if state.zero is not None:
        return Answer(says="the contact is being zeroed already")
    return Answer((ZeroWanted(at_ms, request.by, request.simulated_hand),), "the contact is zeroed first")


def _by_eye(request: Request, state: State, at_ms: int) -> Answer | None:
    """What is different where there is no board: nothing is powered, and what was wound is told."""
    match request:
        case CountIs():
            return counter_says(request.turn, request.by, state, at_ms)
        case Broke() | Splice() | NewWire() if request.turn is not None and request.turn > state.turns:
            told = counter_says(request.turn, request.by, state, at_ms)
            if any(isinstance(fact, CounterRead) and fact.doubted for fact in told.facts) or not told.facts:
                return told
            after = _at_the_wire(request, fold(state, told.facts[0]), at_ms)
            return replace(after, facts=(*told.facts, *after.facts))
        case Hold(leave=False):
            held = HoldRequested(at_ms, request.by, request.reason)
            return Answer((held,), f"{NO_POWER}: stop it yourself")
        case Go():
            return Answer(says=f"{NO_POWER}: wind on yourself, then type turn and what the counter says")
        case DrivesOff():
            return Answer(says=f"{NO_POWER}: switch it off yourself")
        case _:
            return None


def _at_the_wire(
    request: DrivesOff | Broke | Splice | NewWire | CountIs | Unwind | Read | Skip, state: State, at_ms: int
) -> Answer:
    by = request.by
    match request:
        case DrivesOff():
            return Answer((HandsAsked(at_ms, by, request.reason),), OFF)
        case Unwind():
            words = "unwind"
            if request.turns is not None:
                if not 0.0 < request.turns <= state.turns:
                    return Answer(
                        says=f"{request.turns:g} turns cannot be taken off {at_turn(state.turns)} turns"
                    )
                words = f"unwind {request.turns:g} turns, to turn {at_turn(state.turns - request.turns)}"
            told = f"{OFF} Turn the spindle back by hand: the count follows. Type go when done."
            if state.by_eye:
                told = "Turn the spindle back by hand, then type turn and what the counter says."
            return Answer((HandsAsked(at_ms, by, words),), told)
        case Broke():
            turn = state.wire_ends_at if request.turn is None else request.turn
            if not 0.0 <= turn <= state.turns:
                return Answer(says=_outside(turn, state.turns))
            return Answer((WireBroke(at_ms, turn, by),), f"noted: the wire broke at turn {at_turn(turn)}")
        case Splice() | NewWire():
            return _joined(request, state, at_ms)
        case CountIs():
            return _counted(request, state, at_ms)
        case Read():
            return typed(request, state, at_ms)
        case Skip():
            if state.check is None:
                return Answer(says="there is no check to pass over")
            return Answer((CheckTaken(at_ms, state.turns, False, by),), "the check is passed over")


def _joined(request: Splice | NewWire, state: State, at_ms: int) -> Answer:
    by = request.by
    turn = state.wire_ends_at if request.turn is None else request.turn
    if not 0.0 <= turn <= state.turns:
        return Answer(says=_outside(turn, state.turns))
    if not state.drives_off:
        return Answer((HandsAsked(at_ms, by, "join the wire"),), f"{OFF} Then say it again.")
    facts: list[Event] = [] if state.by_eye else [HandsAsked(at_ms, by, "join the wire")]
    if state.broke is None and state.broke_near is not None:
        facts.append(WireBroke(at_ms, turn, by))
    if round(turn * state.counts_per_turn) != state.count:
        facts.append(CountCorrected(at_ms, turn, by, "what was counted beyond is without wire"))
    if isinstance(request, Splice):
        facts.append(Spliced(at_ms, turn, by))
        noted = f"noted: spliced at turn {at_turn(turn)}, winding goes on from there"
    else:
        facts.append(WireChanged(at_ms, turn, request.spool, by))
        noted = f"noted: another spool from turn {at_turn(turn)} on"
    if state.by_eye and turn < state.turns:
        noted += f"; turn the spindle back until the counter says {grouped(turn)}"
    return Answer(tuple(facts), noted)


def _counted(request: CountIs, state: State, at_ms: int) -> Answer:
    started = state.started
    most = started.total_counts / state.counts_per_turn if started is not None else 0.0
    if not 0.0 <= request.turn <= most:
        return Answer(says=_outside(request.turn, most))
    if not state.drives_off:
        return Answer(
            (HandsAsked(at_ms, request.by, "count the turns"),), f"{OFF} Count the turns, then say so again."
        )
    return Answer(
        (
            HandsAsked(at_ms, request.by, "count the turns"),
            CountCorrected(at_ms, request.turn, request.by, "counted by hand", miscounted=True),
        ),
        f"noted: {at_turn(request.turn)} turns lie on the bobbin",
    )


def _outside(turn: float, most: float) -> str:
    return f"turn {at_turn(turn)} is outside this coil's 0 to {at_turn(most)} turns"
