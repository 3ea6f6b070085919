"""One sitting at one machine: which machine, which spool, which book, and the board while nothing is wound.

Everything here but `hold` of a board may take a while and is called from threads of its own.
"""

from __future__ import annotations

from contextlib import AbstractContextManager, nullcontext
from dataclasses import replace
from pathlib import Path
from typing import TYPE_CHECKING

from windctl.desk.asked import Shared
from windctl.desk.books import book_if_any
from windctl.desk.machines import configured_machine, profile_file, profile_of, simulated_here

if TYPE_CHECKING:
    from windctl.book.book import Book
    from windctl.desk.machine_look import MachineLook
    from windctl.desk.spools import SpoolState
    from windctl.profile.model import MachineProfile

REAL_TIME = 1.0  # the simulated machine's speed where none is asked for: one practises on it


class Sitting:
    """What is chosen, and the board while it is looked at between coils."""

    def __init__(self, shared: Shared) -> None:
        self.shared = shared
        self.profile: MachineProfile = profile_of(shared)
        self.simulated = simulated_here(shared, self.profile)
        self.bench: MachineLook | None = None

    @property
    def machine_words(self) -> str:
        """The machine in a few words."""
        if self.profile.by_eye:
            return f"{self.profile.name} · counter read by eye"
        if not self.simulated:
            return f"{self.profile.name} · {self.profile.port.url}"
        speed = self.shared.speed
        pace = "as fast as possible" if speed == 0 else f"{REAL_TIME if speed is None else speed:g}×"
        return f"{self.profile.name} · {pace}"

    # ------------------------------------------------------------ wire

    @property
    def spool(self) -> str | None:
        """The spool that the next coils are wound from, if one is named."""
        return self.shared.spool

    def take_spool(self, name: str | None) -> None:
        """Wind the next coils from this spool, or from none that is named."""
        self.shared = replace(self.shared, spool=name)

    def spools(self) -> tuple[SpoolState, ...]:
        """All spools in the book, in order of their names."""
        from windctl.desk.spools import states_of

        with self._book() as book:
            return () if book is None else states_of(book)

    # ------------------------------------------------------------ the machine between coils

    def open_bench(self) -> MachineLook:
        """Look at the board, in a thread of its own. Only while no coil is on the machine."""
        from windctl.desk.machine_look import MachineLook

        self.close_bench()
        self.bench = MachineLook(self.shared, self.profile, self.simulated)
        self.bench.start()
        return self.bench

    def close_bench(self) -> bool:
        """Give the board back, its drives off; False where that was not seen. Safe to call twice."""
        bench, self.bench = self.bench, None
        return bench is None or bench.close()

    @property
    def checking(self) -> bool:
        """A check of the machine is running."""
        return self.bench is not None and self.bench.look().checking

    @property
    def machine_name(self) -> str:
        """The machine's name as it is asked for."""
        return self.shared.machine or configured_machine()

    def take_machine(self, name: str) -> None:
        """Plan for another machine and wind on it from now on. Raises WindctlError: nothing changed."""
        shared = replace(self.shared, machine=name, port=None)
        profile = profile_of(shared)
        simulated = simulated_here(shared, profile)
        self.close_bench()
        self.shared, self.profile, self.simulated = shared, profile, simulated

    def profile_file(self) -> Path | None:
        """The file of the machine's profile; None for the built-in one."""
        return profile_file(self.shared)

    def keep_calibration(self, values: dict[str, float | int]) -> Path | None:
        """Write them into the machine's profile; where that is, or None for the built-in one."""
        from windctl.desk.checking import save_calibration

        file = profile_file(self.shared)
        if file is not None:
            save_calibration(file, values)
            self.profile = profile_of(self.shared)
        return file

    # ------------------------------------------------------------ the book

    def _book(self) -> AbstractContextManager[Book | None]:
        """The book; None where no coil has been wound yet, also in one that was named."""
        named = self.shared.book
        if named is not None and not named.exists():
            return nullcontext()
        return book_if_any(self.shared)
