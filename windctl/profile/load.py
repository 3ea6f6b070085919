"""Machine profile files."""

from __future__ import annotations

from pathlib import Path

from windctl.errors import ProfileError
from windctl.forms.source import read_text
from windctl.forms.toml_form import load_form
from windctl.profile.model import MachineProfile


def load_profile(path: Path) -> MachineProfile:
    """The profile in a file. Raises ProfileError with every problem, also when there is no readable file."""
    return parse_profile(read_text(path, ProfileError), str(path))


def parse_profile(text: str, file: str = "profile") -> MachineProfile:
    """The profile in a text; `file` names it in messages. Raises ProfileError with every problem."""
    return load_form(text, file, MachineProfile, ProfileError)
