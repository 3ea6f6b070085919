"""The spindle's motion: a pace that rises and falls in whole steps per second and ends exactly where it must.

Each tick the pace is held under v*v <= 2*decel*left, `left` being the steps to where the spindle must stand:
that is the constant-deceleration law v^2 = 2*a*s, without a division. Positions come from two sources:
steps that were issued (exact, ahead) and counts that were seen (the truth about the wire, late and
perhaps coarse). `left` believes whichever is nearer to the goal, so a late count is never an overshoot.
Once everything stands, what is still missing in counts is slip, not lag, and is made up at a creep.
Where in its count a coarse counter stands is not known at first: until it has counted once, the worst is
assumed. Widths in the firmware: pace u16; steps, products, ramp u32; err and taken i32.
"""

from __future__ import annotations

from typing import Final

REST: Final = 0  # not driven; it may still be turned by hand
RUN: Final = 1  # towards the goal at the pace asked for
BRAKE: Final = 2  # to a stand, wherever that is
SETTLE: Final = 3  # arrived; waiting until it stands

M32: Final = 0xFFFFFFFF
ERROR_LIMIT: Final = 1 << 29  # of issued minus counted: beyond every slip limit, and i32 arithmetic holds


class Spindle:
    """Pace and way to go of a spindle with a step drive."""

    __slots__ = (
        "_accel",
        "_counts_per_turn",
        "_creep_pace",
        "_creeping",
        "_decel",
        "_edge_at",
        "_err",
        "_gap_limit",
        "_issued",
        "_left_limit",
        "_pace_now",
        "_placed",
        "_ramp",
        "_seen_count",
        "_seen_issued",
        "_stand_at",
        "_steps_per_turn",
        "_taken",
        "_two_decel",
        "coarse",
        "goal",
        "mode",
        "pace",
        "v",
    )

    def __init__(self) -> None:
        self.mode = REST
        self.v = 0  # u16, steps/s
        self.pace = 0  # u16, steps/s asked for
        self._pace_now = 0  # u16, the same, or less at a creep
        self._creeping = False
        self._placed = True  # the place within a count is known
        self.goal = 0  # i32, count to stand at
        self._ramp = 0  # thousandths of a step/s owed to v
        self._issued = 0  # u32, steps since the spindle set out
        self._stand_at = 0  # u32, step to stand at, in the same terms
        self._err = 0  # i32, issued*counts_per_turn - counted*steps_per_turn since then, up to the last check
        self._taken = 0  # i32, the part of it that is slip or an unknown start, not lag
        self._seen_issued = 0  # u32, _issued at the last check
        self._seen_count = 0  # i32, count at the last check
        self._edge_at = 0  # i32, count at the last edge of a coarse counter
        self.configure(1, 1, 1000, 1000)

    def configure(self, counts_per_turn: int, steps_per_turn: int, accel: int, decel: int) -> None:
        """Take a Setup's figures: steps/s2, all at least 1."""
        self._counts_per_turn = counts_per_turn
        self._steps_per_turn = steps_per_turn
        self._accel = accel
        self._decel = decel
        self._two_decel = 2 * decel
        self._left_limit = M32 // self._two_decel  # beyond, two_decel * left would leave u32
        self._gap_limit = 0x7FFFFFFF // steps_per_turn
        self.coarse = counts_per_turn < steps_per_turn  # a count is more than a step
        creep = 1
        while (creep + 1) * (creep + 1) <= 8 * decel:  # a pace that four steps suffice to stand from
            creep += 1
        self._creep_pace = creep
        self.pace = self._pace_now = 0

    def set_pace(self, pace: int) -> None:
        """Work towards this pace, steps/s."""
        self.pace = pace
        self._choose_pace()

    def set_out(self, count: int, goal: int) -> None:
        """Start from a stand towards `goal`."""
        self.mode = RUN
        self.v = self._ramp = 0
        self._issued = self._seen_issued = 0
        self._err = 0
        self._placed = not self.coarse
        self._taken = 0 if self._placed else 1 - self._steps_per_turn  # as if it counted with the next step
        self._seen_count = self._edge_at = count
        self.aim(count, goal)
        self._creeping = False
        self._choose_pace()

    def aim(self, count: int, goal: int) -> None:
        """Stand at `goal`, as far as counts and issued steps now tell."""
        if goal != self.goal:
            self._creeping = False
            self._choose_pace()
        self.goal = goal
        self._stand_at = self._issued + self.steps_to(count, goal)

    def steps_to(self, count: int, goal: int) -> int:
        """Whole steps from where the issued steps have brought it to `goal`."""
        gap = goal - count
        if gap <= 0:
            return 0
        units = min(gap, self._gap_limit) * self._steps_per_turn
        lead = self._lead(count)
        return (units - lead) // self._counts_per_turn if units > lead else 0

    def nearest_stand(self, count: int) -> int:
        """The nearest count at which it can be made to stand from its present pace."""
        v = self.v
        steps = (v * v + self._two_decel - 1) // self._two_decel + v // 1000 + 2
        units = steps * self._counts_per_turn + self._lead(count)
        return count + (units + self._steps_per_turn - 1) // self._steps_per_turn

    def step(self, issued: int, count: int) -> None:
        """One tick of RUN or BRAKE: these steps were issued since the last, and the count is this."""
        self._issued = issued = self._issued + issued
        if self.coarse and count != self._edge_at:
            self._edge(count)
        left = self._stand_at - issued
        if left <= 0 or count >= self.goal:
            self.v = 0
            self.mode = SETTLE if self.mode == RUN else REST
            return
        v = self.v
        bound = M32 if left > self._left_limit else self._two_decel * left
        if self.mode == BRAKE:
            v = self._slower(v, 0)
            if v == 0:
                self.mode = REST
        elif v * v > bound:
            v = self._slower(v, 1)
        elif v == self._pace_now:
            return
        elif v > self._pace_now:
            v = self._slower(v, self._pace_now)
        else:
            v = self._faster(v, bound)
        self.v = v

    def brake(self) -> None:
        """Begin to stand."""
        self.mode = REST if self.v == 0 else BRAKE

    def cut(self) -> None:
        """Stop issuing steps at once."""
        self.mode = REST
        self.v = 0

    def check(self, count: int) -> int:
        """Account for the steps and counts since the last check.

        Returns issued minus counted since it set out, in 1/steps_per_turn count.
        """
        self._err = max(-ERROR_LIMIT, min(self._error(count), ERROR_LIMIT))
        self._seen_issued = self._issued
        self._seen_count = count
        return self._err

    def creep(self, count: int) -> bool:
        """Standing: if at least a step is missing, take the difference for slip and go on."""
        self._taken = self._error(count)
        if self.steps_to(count, self.goal) == 0:
            return False
        self.aim(count, self.goal)
        self.mode = RUN
        self._creeping = True
        self._choose_pace()
        return True

    def _choose_pace(self) -> None:
        creeps = self._creeping and self.pace > self._creep_pace
        self._pace_now = self._creep_pace if creeps else self.pace

    def _error(self, count: int) -> int:
        steps = self._issued - self._seen_issued
        return self._err + steps * self._counts_per_turn - (count - self._seen_count) * self._steps_per_turn

    def _lead(self, count: int) -> int:
        """How far the issued steps are ahead of the count, in 1/counts_per_turn step, never negative."""
        if self.mode == REST:
            return 0
        lead = self._error(count) - self._taken
        return lead if lead > 0 else 0

    def _edge(self, count: int) -> None:
        """A coarse counter has counted: at this very step the place is known better than in between."""
        self._edge_at = count
        error = self._error(count)
        if error < self._taken or not self._placed:
            self._taken = error
            self._placed = True
        self.aim(count, self.goal)

    def _slower(self, v: int, least: int) -> int:
        ramp = self._ramp + self._decel
        while ramp >= 1000:
            ramp -= 1000
            if v > least:
                v -= 1
        self._ramp = ramp
        return v

    def _faster(self, v: int, bound: int) -> int:
        ramp = self._ramp + self._accel
        while ramp >= 1000:
            ramp -= 1000
            if v < self._pace_now and (v + 1) * (v + 1) <= bound:
                v += 1
        self._ramp = ramp
        return v
