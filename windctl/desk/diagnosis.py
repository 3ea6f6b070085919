"""What a fault report needs, gathered into one zip file: nothing of it leaves this computer by itself.

Versions, the machine's profile and settings, the ports, the log, and the last bytes on the line, spelt out.
No recipe, no record and no coil is in it. Whatever cannot be had is told in its place.
"""

from __future__ import annotations

import importlib.metadata
import json
import os
import platform
import sys
import zipfile
from collections.abc import Callable, Iterator
from dataclasses import asdict
from functools import partial
from pathlib import Path
from typing import Any

from windctl import __version__
from windctl.desk import places
from windctl.desk.asked import Shared
from windctl.errors import WindctlError

_LIBRARIES = ("pyserial", "numpy", "textual", "pydantic", "click", "platformdirs", "SQLAlchemy", "cobs")


def diagnosis(shared: Shared) -> Iterator[tuple[str, str]]:
    """(name in the zip, text), each made when it is asked for."""
    parts: dict[str, Callable[[], str]] = {
        "versions.json": _versions,
        "machine.json": partial(_machine, shared),
        "ports.json": _ports,
        "book.json": partial(_book, shared),
        "settings.toml": partial(_text, places.settings_file()),
        "line.txt": _line,
    }
    for file in sorted(places.machines_folder().glob("*.toml")):
        parts[f"machines/{file.name}"] = partial(_text, file)
    for file in sorted(places.log_file().parent.glob(places.log_file().name + "*")):
        parts[f"log/{file.name}"] = partial(_text, file)
    for name, make in parts.items():
        try:
            yield name, make()
        except (WindctlError, OSError) as error:
            yield name, f"not to be had: {error}\n"


def write_zip(file: Path, shared: Shared) -> list[str]:
    """Make the zip; the names of what is in it. Raises FileExistsError, and OSError where it cannot be
    written: then nothing is left behind."""
    with file.open("xb") as stream:
        try:
            with zipfile.ZipFile(stream, "w", zipfile.ZIP_DEFLATED) as made:
                for name, text in diagnosis(shared):
                    made.writestr(name, text)
                return made.namelist()
        except BaseException:
            file.unlink()
            raise


def _versions() -> str:
    from windctl.book.ledger import names
    from windctl.protocol.messages import PROTOCOL, SCHEMA

    return _json(
        {
            "windctl": __version__,
            "python": sys.version,
            "system": platform.platform(),
            "machine": platform.machine(),
            "processors": os.cpu_count(),
            "protocol": {"version": PROTOCOL, "schema": f"{SCHEMA:#010x}"},
            "book_schema": names()[-1][0],
            "libraries": {name: _version(name) for name in _LIBRARIES},
        }
    )


def _version(library: str) -> str:
    try:
        return importlib.metadata.version(library)
    except importlib.metadata.PackageNotFoundError:
        return "not found"


def _machine(shared: Shared) -> str:
    from windctl.desk.machines import configured_machine, profile_of

    asked = shared.machine or configured_machine()
    return _json({"machine": asked, "profile": json.loads(profile_of(shared).canonical_json())})


def _ports() -> str:
    from windctl.machine.ports_listed import listed_ports

    return _json([asdict(port) for port in listed_ports()])


def _book(shared: Shared) -> str:
    from windctl.desk.books import book_if_any

    with book_if_any(shared) as book:
        if book is None:
            return _json({"file": None})
        size = book.path.stat().st_size
        open_coils = [head.number for head in book.open_coils()]
        return _json({"file": str(book.path), "bytes": size, "coils": book.count(), "open": open_coils})


def _line() -> str:
    from windctl.machine.line_trace import spelt_out

    text = _text(places.line_trace_file())
    about, _, rest = text.partition("\n")
    return f"{about}\n{spelt_out(rest)}\n# the same as bytes\n{rest}"


def _text(file: Path) -> str:
    return file.read_bytes().decode("utf-8", errors="replace")


def _json(answer: Any) -> str:
    return json.dumps(answer, indent=2, ensure_ascii=False) + "\n"
