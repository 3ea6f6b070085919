"""A board in the test's own process behind a port of its own, whose plug can be pulled and put back."""

from __future__ import annotations

import io
import json
import threading
from collections.abc import Callable

from windctl.machine.plant.faults import Faults
from windctl.machine.virtual.bench import Bench, virtual_bench
from windctl.machine.virtual.endpoints import Endpoint, PtyEndpoint, TcpEndpoint
from windctl.machine.virtual.serve import Server
from windctl.machine.virtual.trace import Trace
from windctl.profile.builtin import VIRTUAL
from windctl.protocol.messages import State as BoardState
from windctl.recipe.load import parse_recipe


class Plug:
    """An `Endpoint` that can be pulled while the machine behind it runs on. Pulling a terminal ends its name;
    a TCP port hangs up and turns callers away."""

    def __init__(self, open_door: Callable[[], Endpoint]) -> None:
        self._open_door = open_door
        self._door: Endpoint | None = open_door()
        self._lock = threading.Lock()
        self.url = self._door.url

    @property
    def open(self) -> bool:
        with self._lock:
            return self._door is not None and self._door.open

    def wait(self, seconds: float) -> None:
        with self._lock:
            door = self._door
            if door is not None:
                door.wait(seconds)
                return
        threading.Event().wait(seconds)

    def read(self) -> bytes:
        with self._lock:
            return b"" if self._door is None else self._door.read()

    def write(self, data: bytes) -> None:
        with self._lock:
            if self._door is not None:
                self._door.write(data)

    def close(self) -> None:
        self.pull()

    def pull(self) -> None:
        """The plug is out."""
        with self._lock:
            door, self._door = self._door, None
            if door is not None:
                door.close()

    def put_back(self) -> str:
        """The plug is in again, under another name: the new URL."""
        door = self._open_door()
        if door.url == self.url:  # a name that became free is given out again: not yet
            taken, door = door, self._open_door()
            taken.close()
        with self._lock:
            self._door, self.url = door, door.url
        return self.url


class Served:
    """A virtual machine at the pace of the wall clock, with an instrument clipped on."""

    def __init__(
        self,
        recipe: str,
        *,
        pty: bool = False,
        faults: Faults | None = None,
        seed: int = 3,
        speed: float = 1.0,
    ) -> None:
        self.bench: Bench = virtual_bench(parse_recipe(recipe, "test.toml"), VIRTUAL, seed, faults=faults)
        self.notes = io.StringIO()
        self.bench.watch = Trace(self.bench, self.notes).see
        self.plug = Plug(PtyEndpoint if pty else lambda: TcpEndpoint("127.0.0.1", 0))
        self._server = Server(self.bench, self.plug)
        self._thread = threading.Thread(target=self._server.run)
        self._thread.start()

    def stop(self) -> None:
        """Switch the machine off."""
        self._server.stop()
        self._thread.join(10)
        self.plug.close()

    def reboot(self) -> None:
        """The board is reset."""
        self._server.reboot()

    @property
    def url(self) -> str:
        """Where the board is now."""
        return self.plug.url

    @property
    def turning(self) -> bool:
        """The board drives the spindle."""
        return self.bench.board.state == BoardState.TURNING

    @property
    def standing(self) -> bool:
        """Nothing turns, and the board says so."""
        return self.bench.board.standing and self.bench.board.state != BoardState.TURNING

    @property
    def count_turns(self) -> float:
        """Turns as the board counts them."""
        return self.bench.board.count / self.bench.board.counts_per_turn

    @property
    def true_turns(self) -> float:
        """Turns of wire that are really on the bobbin."""
        return self.bench.plant.truth().true_turns

    def brake_after_beat(self, since: int) -> int | None:
        """Ticks from the last Beat to the first braking noted after `since`."""
        for line in self.notes.getvalue().splitlines():
            note = json.loads(line)
            if note["tick"] >= since and note["what"] == "braking":
                return int(note["tick"] - note["last_beat"])
        return None
