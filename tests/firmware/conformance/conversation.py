"""Section 4: who says what when."""

from __future__ import annotations

import itertools

from tests.firmware.conformance.clause import clause, must
from tests.firmware.conformance.hands import Act
from tests.firmware.conformance.rig import PROGRAM, Rig, named
from windctl.protocol import messages as m
from windctl.protocol.frames import encode
from windctl.protocol.messages import Capability, NoticeKind, Refusal, State

DRIVE = Capability.DRIVE_STEP


@clause(4, "Greeting", "Identity echoes the nonce and tells the schema")
def identity(rig: Rig) -> str:
    seen = rig.greet()
    must(seen.schema == m.SCHEMA, f"schema {seen.schema:#010x}; this page's: {m.SCHEMA:#010x}")
    must(seen.queue >= 1 or not seen.capabilities & Capability.GUIDE_STEP, "a guide with no queue")
    fitted = ", ".join(bit.name.lower() for bit in Capability if seen.capabilities & bit and bit.name)
    return f"boot {seen.boot}, queue {seen.queue}, {fitted}"


@clause(4, "Greeting", "forgets the stored answer: what was said before it is no repeat any more")
def greet_forgets(rig: Rig) -> None:
    rig.fresh()
    rig.accept(rig.same)
    frame, number = rig.last_frame, rig.sequence
    rig.greet(sequence=number)
    answer = rig.again(frame, number)
    must(
        isinstance(answer, m.Refused) and answer.why == Refusal.SEQUENCE,
        f"a command from before the Greet, under its number, is answered with {answer}",
    )


@clause(4, "Greeting", "a Greet raises the epoch; its repetition is answered again and changes nothing")
def greet_again(rig: Rig) -> None:
    rig.fresh()
    before = rig.fresh_status().epoch
    first = rig.greet()
    must(first.epoch == (before + 1) & 0xFFFF, f"epoch {first.epoch} after a Greet at {before}")
    again = rig.greet(nonce=rig.nonce)
    must(again.epoch == first.epoch, f"epoch {again.epoch} after the same Greet; expected: {first.epoch}")


@clause(4, "Greeting", "to another schema the board answers Identity, and stays ungreeted")
def other_schema(rig: Rig) -> None:
    rig.fresh()
    rig.greet(schema=m.SCHEMA ^ 1)
    rig.refuse(rig.same, Refusal.NOT_GREETED)
    epoch = rig.fresh_status().epoch
    rig.hold()
    rig.listen(0.1)
    must(rig.fresh_status().epoch == (epoch + 1) & 0xFFFF, "a Hold was not executed without a greeting")
    rig.greet()
    rig.accept(rig.same)


@clause(4, "Greeting", "Greet's sequence number becomes the last one, and the next is counted modulo 256")
def sequence_wraps(rig: Rig) -> None:
    rig.fresh()
    rig.greet(sequence=253)
    for _ in range(5):
        rig.accept(rig.same)
    must(rig.sequence == 2, "the kit miscounts")


@clause(4, "Greeting", "a Greet stops whatever moves, with the cause greet", needs=DRIVE, moves=True)
def greet_stops(rig: Rig) -> None:
    rig.turning()
    rig.greet()
    status = rig.settle()
    must(status.state == State.HELD, f"{named(State, status.state)} after a Greet while turning")
    must(status.cause == m.Cause.GREET, f"cause {named(m.Cause, status.cause)}; expected: greet")


@clause(4, "Numbered commands", "an exact repeat gets the stored answer, and nothing is done again")
def exact_repeat(rig: Rig) -> None:
    rig.fresh()
    rig.place()
    first = rig.accept(m.Arm(*rig.permission))
    frame, number = rig.last_frame, rig.sequence
    for _ in range(3):
        again = rig.again(frame, number)
        must(again == first, f"the repeated Arm is answered with {again}; before with {first}")
    status = rig.fresh_status()
    must(status.epoch == first.epoch, f"epoch {status.epoch} after repeats of an Arm that gave {first.epoch}")
    rig.accept(m.Disarm())
    refusal = rig.ask(m.Disarm())
    must(rig.again(rig.last_frame, rig.sequence) == refusal, "a repeated refusal is answered otherwise")


@clause(
    4,
    "Numbered commands",
    "any other number is refused with the due one, and changes neither number nor answer",
)
def other_number(rig: Rig) -> None:
    rig.fresh()
    stored = rig.accept(rig.same)
    frame, number = rig.last_frame, rig.sequence
    due = (number + 1) & 0xFF
    for wrong in ((number + 2) & 0xFF, (number - 1) & 0xFF, (number + 128) & 0xFF):
        answer = rig.say(m.Disarm.CODE, b"", wrong)
        must(
            isinstance(answer, m.Refused) and answer.why == Refusal.SEQUENCE and answer.limit == due,
            f"number {wrong} with {due} due is answered with {answer}",
        )
    other = rig.say(m.Measure.CODE, m.Measure(0, 5).encode_body(), number)
    must(
        isinstance(other, m.Refused) and other.why == Refusal.SEQUENCE,
        f"another command under the last number is answered with {other}",
    )
    must(rig.again(frame, number) == stored, "the stored answer changed with a refused number")
    rig.accept(rig.same)


@clause(4, "Numbered commands", "the board's own messages carry a number that rises by one with each")
def own_numbers(rig: Rig) -> str:
    rig.fresh()
    begun = rig.mark()
    rig.hold()
    rig.listen(1.0)
    own = [
        one.sequence for one in rig.heard[begun:] if isinstance(one.message, m.Status | m.Reading | m.Notice)
    ]
    must(len(own) >= 15, f"{len(own)} messages in a second")
    for before, after in itertools.pairwise(own):
        must(after == (before + 1) & 0xFF, f"number {after} after {before}")
    return f"{len(own)} messages"


@clause(4, "Beat", "Beat and Hold are not answered and do not touch the sequence, whatever their number")
def unnumbered(rig: Rig) -> None:
    rig.fresh()
    begun = rig.mark()
    for number in (0, rig.sequence, (rig.sequence + 1) & 0xFF, 200):
        rig.raw(encode(m.Beat.CODE, number, b""))
        rig.hold(number)
    rig.listen(0.15)
    answers = rig.since(begun, m.Accepted) + rig.since(begun, m.Refused)
    must(not answers, f"a Beat or Hold is answered: {answers}")
    rig.accept(rig.same)


@clause(4, "Beat", "each Hold is executed; the Status that goes out at once shows it")
def hold_at_once(rig: Rig) -> str:
    rig.fresh()
    worst = 0.0
    for part in range(4):
        rig.fresh_status()
        rig.listen(0.007 * part)
        epoch, begun, at = rig.epoch, rig.mark(), rig.port.now()
        rig.hold(77)
        heard = rig.wait_for(m.Status, 0.3, suits=lambda s, e=epoch: s.epoch != e)  # type: ignore[misc] # mypy sees no parameter type in a lambda's default
        must(heard.epoch == (epoch + 1) & 0xFFFF, f"epoch {heard.epoch} after one Hold at {epoch}")
        must(len(rig.since(begun, m.Status)) <= 2, "more than one Status between a Hold and its own")
        worst = max(worst, rig.port.now() - at)
    limit = 0.02 + rig.machine.late_s
    must(
        worst <= limit,
        f"a Hold shows after {worst * 1000:.0f} ms; expected: at once, at most {limit * 1000:.0f} ms",
    )
    return f"shows within {worst * 1000:.0f} ms"


@clause(4, "Epoch", "Hold, Greet, Arm and Disarm raise it by one each")
def epochs_at_rest(rig: Rig) -> None:
    rig.fresh()
    rig.place()
    epoch = rig.fresh_status().epoch
    for what, step in (
        ("Arm", lambda: rig.accept(m.Arm(*rig.permission))),
        ("Hold", lambda: rig.hold()),
        ("Disarm", lambda: rig.accept(m.Disarm())),
        ("Hold", lambda: rig.hold()),
        ("Greet", lambda: rig.greet()),
    ):
        step()
        rig.listen(0.08)
        epoch = (epoch + 1) & 0xFFFF
        now = rig.fresh_status().epoch
        must(now == epoch, f"epoch {now} after {what}; expected: {epoch}")


@clause(
    4,
    "Epoch",
    "the end of turning, a trip and ClearTrip raise it by one each; Go does not",
    needs=DRIVE,
    moves=True,
)
def epochs_turning(rig: Rig) -> None:
    rig.ready(fitted=int(DRIVE))
    epoch = rig.epoch
    rig.go(rig.machine.counts_per_turn // 2 + 1)
    must(rig.fresh_status().epoch == epoch, "Go raised the epoch")
    rig.settle()
    must(rig.epoch == epoch + 1 & 0xFFFF, f"epoch {rig.epoch} at the stop point; expected: {epoch + 1}")
    rig.go(2 * rig.machine.counts_per_turn)
    rig.listen(0.2)
    rig.hold()
    rig.settle()
    must(
        rig.epoch == epoch + 2 & 0xFFFF,
        f"epoch {rig.epoch} after a Hold while turning; expected: {epoch + 2}",
    )
    tripped = rig.tripped()
    before = rig.since(0, m.Accepted)[-1].epoch
    must(tripped.epoch == before + 1 & 0xFFFF, f"epoch {tripped.epoch} after a trip at {before}")
    rig.clear()
    must(rig.epoch == before + 2 & 0xFFFF, f"epoch {rig.epoch} after ClearTrip; expected: {before + 2}")


def _movers(rig: Rig, boot: int, epoch: int) -> list[m.HostMessage]:
    return [
        m.Arm(boot, epoch),
        m.Pace(boot, epoch, rig.machine.pace),
        m.StopAt(boot, epoch, 10),
        m.Go(boot, epoch),
        m.GuideTo(boot, epoch, 1, 100),
        m.SetDatum(boot, epoch, PROGRAM, 5, 0, 0, 0),
        m.ClearTrip(boot, epoch),
    ]


@clause(4, "Epoch", "what can move something is refused as stale under another boot number or epoch")
def stale(rig: Rig) -> None:
    rig.ready()
    boot, epoch = rig.permission
    for other in ((boot, epoch - 1 & 0xFFFF), (boot, epoch + 1 & 0xFFFF), (boot ^ 1, epoch)):
        for command in _movers(rig, *other):
            rig.refuse(command, Refusal.STALE, epoch)
    must(rig.fresh_status().count == 0, "a stale command moved or placed something")


@clause(4, "Epoch", "a Go said again after a Hold starts nothing", needs=DRIVE, moves=True)
def replayed_go(rig: Rig) -> None:
    rig.ready(fitted=int(DRIVE))
    rig.go(100 * rig.machine.counts_per_turn)
    frame, number = rig.last_frame, rig.sequence
    rig.listen(0.2)
    rig.hold()
    stood = rig.settle()
    for _ in range(3):
        rig.again(frame, number)
        rig.listen(0.1)
    old = m.Go(*rig.permission)
    rig.hold()
    rig.listen(0.08)
    rig.refuse(old, Refusal.STALE)
    now = rig.fresh_status()
    must(now.state == State.HELD, f"{named(State, now.state)} after an old Go")
    must(
        abs(now.count - stood.count) <= rig.machine.dither,
        f"an old Go moved {now.count - stood.count} counts",
    )


@clause(4, "Order of checks", "greeted, sequence, known code, boot and epoch, state, in this order")
def order(rig: Rig) -> None:
    rig.fresh()
    rig.greet(schema=m.SCHEMA ^ 1)
    answer = rig.say(0x20, b"", 99)
    must(
        isinstance(answer, m.Refused) and answer.why == Refusal.NOT_GREETED,
        f"ungreeted comes first: {answer}",
    )
    rig.greet()
    answer = rig.say(0x20, b"", 99)
    must(isinstance(answer, m.Refused) and answer.why == Refusal.SEQUENCE, f"sequence before code: {answer}")
    rig.refuse(m.Go(rig.boot, rig.epoch + 1 & 0xFFFF), Refusal.STALE)
    rig.refuse(m.Go(*rig.permission), Refusal.STATE, State.DRIVES_OFF)


@clause(4, "Order of checks", "an unknown code is refused as unknown_type, and uses its number up")
def unknown_type(rig: Rig) -> None:
    rig.fresh()
    rig.sequence = (rig.sequence + 1) & 0xFF
    answer = rig.say(0x20, b"\x01\x02", rig.sequence)
    must(isinstance(answer, m.Refused) and answer.why == Refusal.UNKNOWN_TYPE, f"answered with {answer}")
    rig.accept(rig.same)


@clause(4, "What the board says unasked", "a Status every 50 ticks, in ticks that are multiples of 50")
def status_beat(rig: Rig) -> str:
    rig.fresh()
    rig.listen(0.1)
    begun, at = rig.mark(), rig.port.now()
    rig.listen(2.0)
    took = rig.port.now() - at
    ticks = [status.ticks for status in rig.since(begun, m.Status)]
    for before, after in itertools.pairwise(ticks):
        must(after - before == 50 and after % 50 == 0, f"a Status at tick {after} after one at {before}")
    must(len(ticks) >= 35, f"{len(ticks)} Status in {took:.1f} s")
    return f"{len(ticks)} in {took:.1f} s"


@clause(4, "What the board says unasked", "a tick is a millisecond")
def tick_length(rig: Rig) -> str:
    rig.greet()
    rig.fresh_status()
    first = rig.heard[-1]
    while not isinstance(first.message, m.Status):
        rig.fresh_status()
        first = rig.heard[-1]
    rig.listen(2.0)
    last = next(one for one in reversed(rig.heard) if isinstance(one.message, m.Status))
    assert isinstance(first.message, m.Status) and isinstance(last.message, m.Status)
    rate = (last.message.ticks - first.message.ticks) / (last.at - first.at)
    slack = 1000.0 * (0.01 + rig.machine.late_s) / (last.at - first.at)
    must(abs(rate - 1000.0) <= slack, f"{rate:.1f} ticks a second; expected: 1000 within {slack:.0f}")
    return f"{rate:.0f} ticks a second"


@clause(
    4,
    "What the board says unasked",
    "after a start: Notice booted and a Status; ungreeted, nothing known",
    hand=True,
)
def booted(rig: Rig) -> str:
    rig.fresh()
    rig.place(count=123)
    boot, begun = rig.boot, rig.mark()
    rig.please(
        Act.RESET,
        lambda: (
            any(n.kind == NoticeKind.BOOTED for n in rig.since(begun, m.Notice))
            or any(s.boot != boot for s in rig.since(begun, m.Status))
        ),
    )
    rig.listen(0.2)
    after = (boot + 1) & 0xFFFF
    status = rig.fresh_status()
    must(status.boot == after, f"boot number {status.boot} after {boot}")
    must((status.state, status.cause) == (State.DRIVES_OFF, m.Cause.BOOT), f"{status} after a start")
    must(status.trust == 0, f"trust {status.trust} after a start")
    rig.refuse_unheard()
    seen = rig.greet()
    must(seen.setup_crc == 0 and seen.program == 0, f"a Setup or a program outlived the start: {seen}")
    rig.refuse(m.Arm(*rig.permission), Refusal.NO_SETUP)
    rig.refuse(m.SetDatum(*rig.permission, PROGRAM, 0, 0, 0, 0), Refusal.NO_SETUP)
    notices = [n.a for n in rig.since(begun, m.Notice) if n.kind == NoticeKind.BOOTED]
    must(notices in ([], [after]), f"Notice booted tells {notices}; expected: {after}")
    return f"boot {boot} then {after}"
