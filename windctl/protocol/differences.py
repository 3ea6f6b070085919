"""What is wanted and not yet so, as the one command to send next. Nothing is sent or remembered here."""

from __future__ import annotations

from binascii import crc_hqx
from collections.abc import Iterator

from windctl.protocol.consents import Consents
from windctl.protocol.feeding import Feed
from windctl.protocol.frames import CRC_START
from windctl.protocol.messages import (
    Arm,
    Capability,
    ClearTrip,
    Disarm,
    Go,
    GuideTo,
    HostMessage,
    Measure,
    Pace,
    SetDatum,
    State,
    StopAt,
)
from windctl.protocol.picture import BoardPicture, Declared
from windctl.protocol.rules import AT_REST, NO_STOP_POINT, NOT_WHILE_HOLDING, TAKEN_IN
from windctl.protocol.wants import Wants

NO_MEASURE = Measure(0, 0)


def differences(picture: BoardPicture, wants: Wants, feed: Feed, consents: Consents) -> Iterator[HostMessage]:
    """Commands for what is wanted and not so, most urgent first; the first that may be sent is to be sent.

    Whatever rests on an earlier step is not named before that step is done: no Lay before the datum, no Arm
    or Go before the queue is full.
    """
    for command in _in_order(picture, wants, feed, consents):
        kind = type(command)
        if picture.state not in TAKEN_IN[kind]:
            continue
        if kind in AT_REST and not picture.stands:
            continue
        if wants.hold and kind in NOT_WHILE_HOLDING:
            continue
        yield command


def _in_order(picture: BoardPicture, wants: Wants, feed: Feed, consents: Consents) -> Iterator[HostMessage]:
    present = picture.permission
    if present is None:
        return
    boot, epoch = present.boot, present.epoch
    if wants.disarmed:
        yield Disarm()
    if wants.clear_trip == present and consents.good(ClearTrip, present):
        yield ClearTrip(boot, epoch)

    measure = _measure(picture, wants)
    if wants.setup is not None and picture.setup_crc != crc_hqx(wants.setup.encode_body(), CRC_START):
        yield wants.setup
        return
    place, status = wants.guide, picture.status
    powered = picture.state in (State.READY, State.HELD)
    if place is not None and powered and status is not None and status.guide != place.guide:
        if place.given_for == present and consents.good(GuideTo, place):
            yield GuideTo(boot, epoch, place.guide, place.pace)
        yield from measure
        return
    datum = wants.datum
    program = wants.program.id32 if wants.program is not None else 0
    if datum is not None and picture.declared != Declared.of(program, datum):
        if datum.given_for == present and consents.good(SetDatum, datum):
            yield SetDatum(boot, epoch, program, datum.count, datum.guide, datum.next, datum.into)
        yield from measure
        return

    agrees = feed.agrees(picture)
    lay = feed.next_lay(picture) if agrees is not False else None
    stop_and_pace: list[HostMessage] = [
        *_stop_point(picture, wants, boot, epoch),
        *_pace(picture, wants, boot, epoch),
    ]
    if lay is not None and (picture.state != State.TURNING or picture.lead_segments < picture.queue // 2):
        yield lay
    if picture.state == State.DRIVES_OFF:
        if lay is None and wants.armed == present and consents.good(Arm, present) and not wants.disarmed:
            yield Arm(boot, epoch)
        yield from measure
        return
    yield from stop_and_pace
    if lay is not None:
        yield lay
    yield from measure
    prepared = not stop_and_pace and lay is None and not wants.disarmed
    fed = feed.program is not None
    if (
        wants.go == present
        and consents.good(Go, present)
        and prepared
        and _may_go(picture, wants, fed, agrees)
    ):
        yield Go(boot, epoch)


def _may_go(picture: BoardPicture, wants: Wants, fed: bool, agrees: bool | None) -> bool:
    """The last look before something starts: the board holds our program, and knows how fast to turn."""
    status = picture.status
    if fed and (agrees is not True or status is None or status.next != picture.next):
        return False
    return wants.pace > 0 or not fitted(picture, wants) & Capability.DRIVE_STEP


def fitted(picture: BoardPicture, wants: Wants) -> Capability:
    """What this coil uses of the machine; all of it as long as no Setup is wanted."""
    return picture.capabilities if wants.setup is None else Capability(wants.setup.fitted)


def _stop_point(picture: BoardPicture, wants: Wants, boot: int, epoch: int) -> Iterator[StopAt]:
    wanted = NO_STOP_POINT if wants.stop_point is None else wants.stop_point
    asked = picture.stop_asked
    if asked is not None and asked[0] == epoch:  # what it made of it may differ: inside the braking distance
        present = asked[1]
    elif picture.status is not None:
        present = picture.status.stop_point
    else:
        return
    if present != wanted:
        yield StopAt(boot, epoch, wanted)


def _pace(picture: BoardPicture, wants: Wants, boot: int, epoch: int) -> Iterator[Pace]:
    if wants.pace > 0 and picture.pace != (epoch, wants.pace):
        yield Pace(boot, epoch, wants.pace)


def _measure(picture: BoardPicture, wants: Wants) -> list[Measure]:
    sampling = wants.sampling
    wanted = NO_MEASURE if sampling is None else Measure(sampling.window, sampling.every)
    return [] if (picture.measuring or NO_MEASURE) == wanted else [wanted]
