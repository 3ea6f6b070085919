"""All tests at once run on two workers; those of a room or a file run in this process.

What waits for the clock (a board turns at its own pace, a silence lasts two seconds) is played one after
another on one worker, so that it has one busy neighbour at most. No file is parted, and what is made once for
a whole room is made once. `-n 0` runs all of them in one process, as do `-s`, `--pdb` and WINDCTL_LONG=1.
"""

from __future__ import annotations

import os
from collections.abc import Iterator
from typing import TYPE_CHECKING

import pytest

if TYPE_CHECKING:
    from xdist.remote import Producer
    from xdist.scheduler import LoadScopeScheduling

WORKERS = 2

# What is never parted. The workers take these in this order, then what is left, file by file.
UNITS = {
    "waiting": (
        "tests/cli/test_at_the_wire.py",
        "tests/cli/test_by_eye.py",
        "tests/cli/test_diagnose.py",
        "tests/cli/test_machine.py",
        "tests/cli/test_machine_check.py",
        "tests/cli/test_watch.py",
        "tests/cli/test_wind.py",
        "tests/machine/test_serial_conversation.py",
        "tests/machine/virtual/test_serve.py",
        "tests/run/test_dry_pass.py",
        "tests/run/test_faults.py",
        "tests/run/test_killed.py",
        "tests/run/test_pacing.py",
        "tests/tui/test_coil_by_keys.py",
        "tests/tui/test_coils_in_tmux.py",
        "tests/tui/test_hold_on_the_wire.py",
        "tests/tui/test_terminal_gone.py",
    ),
    "firmware": ("tests/firmware/",),  # one recorded trace, the same compiled programs
    "paper": ("tests/paper/",),  # one book of wound coils
}


def unit(nodeid: str) -> str:
    """What a test is not parted from: one of UNITS, or its file."""
    file = nodeid.partition("::")[0]
    return next((name for name, paths in UNITS.items() if file.startswith(paths)), file)


def wanted(config: pytest.Config) -> bool:
    """Whether all tests are to run, on a computer that does two things at once, with nobody looking in."""
    return (
        config.args_source is pytest.Config.ArgsSource.TESTPATHS
        and (os.cpu_count() or 1) >= WORKERS
        and os.environ.get("WINDCTL_LONG", "") in ("", "0")
        and config.option.capture != "no"
        and not config.option.usepdb
    )


@pytest.hookimpl(wrapper=True)
def pytest_cmdline_main(config: pytest.Config) -> Iterator[None]:
    """Ask for workers before xdist looks whether they were asked for."""
    if config.pluginmanager.hasplugin("xdist") and not hasattr(config, "workerinput"):
        if config.option.numprocesses is None and wanted(config):
            config.option.numprocesses = WORKERS
        if config.option.numprocesses and config.option.dist == "no":
            config.option.dist = "loadfile"
            config.option.loadscopereorder = False
    return (yield)


@pytest.hookimpl(optionalhook=True)
def pytest_xdist_make_scheduler(config: pytest.Config, log: Producer) -> LoadScopeScheduling | None:
    """Hand out whole units."""
    from xdist.scheduler import LoadScopeScheduling

    class Units(LoadScopeScheduling):
        def _split_scope(self, nodeid: str) -> str:
            return unit(nodeid)

    return Units(config, log) if config.getvalue("dist") == "loadfile" else None


def pytest_collection_modifyitems(config: pytest.Config, items: list[pytest.Item]) -> None:
    """The long units first; every worker sorts alike."""
    if hasattr(config, "workerinput"):
        order = {name: at for at, name in enumerate(UNITS)}
        items.sort(key=lambda item: order.get(unit(item.nodeid), len(order)))
