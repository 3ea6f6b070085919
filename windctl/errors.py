"""The one exception tree. Every message says what was asked, the limit with its unit, and what to do.

    WindctlError
    ├── UsageError            the options contradict each other or something needed is missing   exit 2
    │   └── QueryError        a query for coils says something that cannot be looked for
    ├── FileInvalid           a recipe, profile or readings file has problems; carries them all  exit 3
    │   ├── RecipeError
    │   ├── ProfileError
    │   └── ReadingsError
    ├── PlanRefused           the recipe cannot be wound on this machine                         exit 3
    ├── MachineError          no such machine, port busy, board refuses to serve                 exit 4
    ├── RunFailed             the run cannot go on                                               exit 1
    │   ├── LinkLost          the serial line is gone
    │   └── ProgramMismatch   the board holds another program than the coil's
    ├── BookError             the coil book cannot be read or written                            exit 1
    │   └── BookOutdated      it has an older schema and was opened for reading only
    └── RecordBroken          a stored record does not verify                                    exit 7

`windctl.cli.exit_codes` maps each class to its exit code, at one place.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass


class WindctlError(Exception):
    """Base of everything windctl raises on purpose; its text is shown to the operator as it is."""


class UsageError(WindctlError):
    """What was asked for contradicts itself or lacks something that only the operator can give."""


class QueryError(UsageError):
    """A query cannot be understood. `at`: the place in its `text`, from 0; the message counts from 1."""

    def __init__(self, what: str, at: int, text: str = "") -> None:
        self.what = what
        self.at = at
        self.text = text
        super().__init__(f"the query, at character {at + 1}: {what}")


@dataclass(frozen=True)
class Problem:
    """One thing wrong with a file. `line` and `column` count from 1; 0 means the file as a whole."""

    file: str
    line: int
    column: int
    text: str

    def __str__(self) -> str:
        if self.line == 0:
            return f"{self.file}: {self.text}"
        return f"{self.file}:{self.line}:{self.column}: {self.text}"


class FileInvalid(WindctlError):
    """A file is not what it should be. All its problems come at once, in the file's order."""

    def __init__(self, problems: Sequence[Problem]) -> None:
        self.problems = tuple(problems)
        super().__init__("\n".join(str(problem) for problem in self.problems))


class RecipeError(FileInvalid):
    """A recipe file is invalid."""


class ProfileError(FileInvalid):
    """A machine profile is invalid."""


class ReadingsError(FileInvalid):
    """A readings file is invalid."""


class PlanRefused(WindctlError):
    """A valid recipe asks for what this machine or bobbin cannot do."""


class MachineError(WindctlError):
    """The machine cannot be found, is in use, or is not what the profile says."""


class RunFailed(WindctlError):
    """A coil cannot go on; what was wound so far is in the record."""


class LinkLost(RunFailed):
    """The line to the board is gone: unplugged, closed, or silent for too long."""


class ProgramMismatch(RunFailed):
    """What the board was given to wind is not what the record says."""


class BookError(WindctlError):
    """The coil book cannot be opened, read or written."""


class BookOutdated(BookError):
    """The coil book has an older schema, which only opening it for writing takes forward."""


class RecordBroken(WindctlError):
    """A stored record does not agree with its digests."""
