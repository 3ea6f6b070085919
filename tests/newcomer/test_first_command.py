"""A stranger clones the repository, copies the README's first command, and has a wound coil that verifies."""

from __future__ import annotations

import json
import re
import shutil
import subprocess
import time
from pathlib import Path

import pytest

from tests.conftest import OUTER_ENVIRONMENT

ROOT = Path(__file__).resolve().parents[2]

pytestmark = [pytest.mark.newcomer, pytest.mark.timeout(900)]


def first_command(readme: str) -> str:
    """The first indented line of the README: the command a newcomer copies."""
    match = re.search(r"^ {4}(\S.*)$", readme, re.MULTILINE)
    assert match is not None
    return match[1]


@pytest.fixture
def own_home(tmp_path: Path) -> dict[str, str]:
    """A newcomer's environment: no virtual environment active, no book yet; pip keeps its own settings."""
    environment = {
        name: value
        for name, value in OUTER_ENVIRONMENT.items()
        if not name.startswith(("WINDCTL_", "PYTHON", "VIRTUAL_ENV", "PYTEST_", "COV_"))
    }
    environment["XDG_DATA_HOME"] = str(tmp_path / "data")
    environment["XDG_STATE_HOME"] = str(tmp_path / "state")
    return environment


def test_a_fresh_clone_winds_a_coil_with_one_command(tmp_path: Path, own_home: dict[str, str]) -> None:
    clone = tmp_path / "clone"
    subprocess.run(["git", "clone", "-q", str(ROOT), str(clone)], check=True, timeout=120)
    command = first_command((clone / "README.md").read_text(encoding="utf-8"))
    assert command.startswith("python3 -m venv ")

    shell = shutil.which("bash") or "sh"
    begun = time.monotonic()
    wound = subprocess.run(
        [shell, "-c", command],
        cwd=clone,
        env=own_home,
        capture_output=True,
        text=True,
        timeout=800,
        check=False,
    )
    print(wound.stdout, wound.stderr, f"{time.monotonic() - begun:.0f} s")
    assert wound.returncode == 0, wound.stderr
    assert "turns" in wound.stderr, "no progress was to be seen"

    def ask(*arguments: str) -> dict[str, object]:
        done = subprocess.run(
            [str(clone / ".venv/bin/windctl"), *arguments, "--json"],
            cwd=clone, env=own_home, capture_output=True, text=True, timeout=120, check=True,
        )  # fmt: skip
        answer: dict[str, object] = json.loads(done.stdout)
        return answer

    coils = ask("coils", "list")["coils"]
    assert isinstance(coils, list)
    assert [coil["outcome"] for coil in coils] == ["finished"]
    assert coils[0]["coil"] in wound.stdout
    assert ask("coils", "verify") == {"format": 1, "checked": 1, "broken": []}
