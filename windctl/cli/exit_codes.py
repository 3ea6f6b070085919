"""How windctl ends: every exit code, and the one place that turns an exception or an outcome into one."""

from __future__ import annotations

from enum import IntEnum

import click

from windctl.errors import (
    BookError,
    FileInvalid,
    MachineError,
    PlanRefused,
    RecordBroken,
    RunFailed,
    UsageError,
    WindctlError,
)


class ExitCode(IntEnum):
    """The exit codes of every command; scripts rely on them."""

    DONE = 0  # also when the verdict is "not judged"
    FAILED = 1  # link lost, disk, book, or a fault of the program
    USAGE = 2
    FILE_INVALID = 3
    NO_MACHINE = 4
    ENDED_EARLY = 5  # by a trip or by the operator
    OUTSIDE = 6  # finished, outside its tolerance
    RECORD_BROKEN = 7
    INTERRUPTED = 130  # Ctrl-C, SIGTERM or SIGHUP, after a confirmed stop; the coil stays open


# Every class of windctl.errors finds its code through the most specific of these that it belongs to.
_CODES: dict[type[BaseException], ExitCode] = {
    UsageError: ExitCode.USAGE,
    FileInvalid: ExitCode.FILE_INVALID,
    PlanRefused: ExitCode.FILE_INVALID,
    MachineError: ExitCode.NO_MACHINE,
    RunFailed: ExitCode.FAILED,
    BookError: ExitCode.FAILED,
    RecordBroken: ExitCode.RECORD_BROKEN,
    WindctlError: ExitCode.FAILED,
    click.exceptions.Abort: ExitCode.INTERRUPTED,
    click.UsageError: ExitCode.USAGE,
    click.FileError: ExitCode.FILE_INVALID,
    click.ClickException: ExitCode.FAILED,
    KeyboardInterrupt: ExitCode.INTERRUPTED,
}


def code_for(error: BaseException) -> ExitCode:
    """The exit code of an exception: that of its nearest base with a code; FAILED for the unforeseen."""
    for base in type(error).__mro__:
        if base in _CODES:
            return _CODES[base]
    return ExitCode.FAILED


def code_for_coil(outcome: str, verdict: str) -> ExitCode:
    """The exit code of a coil whose run came to an end: from its outcome and, if finished, its verdict."""
    if outcome == "finished":
        return ExitCode.OUTSIDE if verdict == "outside" else ExitCode.DONE
    return ExitCode.INTERRUPTED if outcome == "open" else ExitCode.ENDED_EARLY
