"""The way in: the console script and `python -m windctl`.

`windctl --help` is answered from a text that was made beforehand, without loading anything: help is what a
script or an impatient hand asks for most, and rendering it costs several times an interpreter's own start.
A test holds the text to what the commands would say; `python -m windctl.cli.entry` writes it anew.
"""

from __future__ import annotations

import os
import sys

HELP_FILE = os.path.join(os.path.dirname(__file__), "help.txt")  # noqa: PTH118, PTH120 - pathlib takes long to load


def main() -> None:
    """Run what the command line asks for; never returns but for help."""
    if sys.argv[1:] in (["--help"], ["-h"]):
        with open(HELP_FILE, encoding="utf-8") as file:  # noqa: PTH123 - as above
            _print(file.read())
        return
    from windctl.cli.main import main as whole

    whole()


def _print(text: str) -> None:
    """To standard output, whatever its encoding is and whether anybody still reads it."""
    out = sys.stdout
    if hasattr(out, "reconfigure"):
        out.reconfigure(errors="replace")
    try:
        out.write(text)
        out.flush()
    except BrokenPipeError:
        os.dup2(os.open(os.devnull, os.O_WRONLY), out.fileno())
        sys.exit(1)


def rendered() -> str:
    """The help as the commands themselves give it, for a terminal of 80 columns."""
    from windctl.cli.main import root

    context = root.make_context(
        "windctl", [], resilient_parsing=True, terminal_width=80, max_content_width=80
    )
    with context:
        return root.get_help(context) + "\n"


if __name__ == "__main__":
    with open(HELP_FILE, "w", encoding="utf-8", newline="\n") as written:  # noqa: PTH123 - as above
        written.write(rendered())
