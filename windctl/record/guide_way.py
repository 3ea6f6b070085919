"""The way of the guide in a dry pass, leg by leg, and what nudging has taught of its datum. Plain integers.

A leg is a level, never a command: either the guide is to stand at a place, or the place where it stands is to
be called another. What holds:

- A leg is done when the board reports its place, at rest; the next is not wanted before. Each place differs
  from that of the leg before and from where the way begins, so that a status that is late, lost or repeated
  can neither end a leg too early nor let one be made twice.
- `shift` changes only where a declaring leg was seen to be done. The motor then stands at what the board
  reports plus `shift`, counted from where the guide was put; so an interruption at any point leaves a datum
  that is true, with the nudge or without it.
- Whether a declaration that was on its way at an interruption was made is told by the board's next epoch:
  what was sent before it can come too late, but not act any more.
- The guide comes to every place where it is looked at moving away from the start flange, as it does when the
  coil begins: the drive's play is taken up, and what is seen is what the program means.
"""

from __future__ import annotations

from dataclasses import dataclass, replace

from windctl.protocol.messages import Setup

FAR, START, HOME = "far", "start", "home"


@dataclass(frozen=True, slots=True)
class Leg:
    """The guide is to stand at `place`, motor steps as the board reports them. `declares`: it does not move;
    where it stands is to be called `place`, which shifts the datum by so many steps."""

    place: int
    declares: int | None = None


@dataclass(frozen=True, slots=True)
class Unsure:
    """A declaration that was on its way when the pass was interrupted, in an epoch of the board."""

    leg: Leg
    epoch: int


@dataclass(frozen=True, slots=True)
class Shown:
    """How far a dry pass is. Steps are the guide motor's, positive away from the start flange."""

    end: str = FAR  # where the guide is to be seen next; HOME: seen at both, it only goes back
    way: tuple[Leg, ...] = ()  # what is left of the way there
    legs: int = 0  # done for this coil so far: tells each movement from the one before
    shift: int = 0  # of the datum, from where the guide was put
    seen: tuple[str, ...] = ()  # ends that were seen right, nothing nudged since
    far_at: int | None = None  # the shift at which an end was last seen right in this pass
    start_at: int | None = None
    unsure: Unsure | None = None

    @property
    def apart(self) -> int:
        """Steps by which the ends, each as last seen right, are further apart than the program has them."""
        if self.far_at is None or self.start_at is None:
            return 0
        return self.far_at - self.start_at


NOTHING_SHOWN = Shown()


def to_far(setup: Setup) -> tuple[Leg, ...]:
    """To the far turn-round."""
    return (Leg(setup.guide_max),)


def to_start(setup: Setup) -> tuple[Leg, ...]:
    """Back to the start, and by the drive's play beyond it, so that it is reached as a coil begins."""
    play = _play(setup)
    return (Leg(-play), Leg(0)) if play else (Leg(0),)


def nudge(at: int, steps: int, setup: Setup) -> tuple[Leg, ...]:
    """By `steps` from `at`, which the new place is then called. No place is outside the board's limits as
    long as `steps` are no more than from one end to the other.

    Which comes first, declaring or moving, is what the limits allow.
    """
    low, high, play = setup.guide_min, setup.guide_max, _play(setup)
    if steps > 0:
        if at - steps >= low:
            return Leg(at - steps, steps), Leg(at)
        return Leg(at + steps), Leg(at, steps)
    back = (Leg(at - play),) if play else ()
    if at - steps <= high:
        return Leg(at - steps, steps), *back, Leg(at)
    beyond = (Leg(at + steps - play),) if play else ()
    return *beyond, Leg(at + steps), Leg(at, steps)


def followed(shown: Shown, guide: int) -> Shown:
    """After the board has reported the guide at rest at `guide`, in the epoch of the pass."""
    if not shown.way or shown.way[0].place != guide:
        return shown
    done = shown.way[0]
    shift = shown.shift + (done.declares or 0)
    return replace(shown, way=shown.way[1:], legs=shown.legs + 1, shift=shift)


def broken_off(shown: Shown, epoch: int) -> Shown:
    """After an interruption; `epoch`: of the pass, at the latest."""
    head = shown.way[0] if shown.way else None
    unsure = Unsure(head, epoch) if head is not None and head.declares is not None else shown.unsure
    return replace(shown, end=FAR, way=(), seen=(), unsure=unsure)


def settled(shown: Shown, guide: int, epoch: int) -> Shown:
    """After the board has reported the guide at `guide` in `epoch`, nothing having moved since."""
    unsure = shown.unsure
    if unsure is None or not 0 < (epoch - unsure.epoch) & 0xFFFF < 0x8000:
        return shown
    made = unsure.leg.place == guide
    return replace(shown, unsure=None, shift=shown.shift + (unsure.leg.declares or 0 if made else 0))


def begun_anew(shown: Shown, *, shift: int) -> Shown:
    """Nothing seen yet, the datum shifted by so much."""
    return Shown(legs=shown.legs + 1, shift=shift)


def _play(setup: Setup) -> int:
    """Steps of the drive's play: the program begins at 0, and the limits leave that much below it."""
    return max(0, -setup.guide_min)
