"""A file that cannot be read as text is one plain problem, whatever is wrong with it."""

from __future__ import annotations

import os
import threading
from pathlib import Path
from typing import Any

import pytest
from hypothesis import given
from hypothesis import strategies as st

from windctl.errors import FileInvalid
from windctl.forms.source import MAX_BYTES, read_text, text_of


def refusal(path: Path) -> str:
    with pytest.raises(FileInvalid) as caught:
        read_text(path, FileInvalid)
    (problem,) = caught.value.problems
    return str(problem).removeprefix(str(path))


def test_utf_8_is_read(tmp_path: Path) -> None:
    file = tmp_path / "x.toml"
    file.write_bytes("name = 'Prüfling'\r\n".encode())
    assert read_text(file, FileInvalid) == "name = 'Prüfling'\r\n"


@pytest.mark.parametrize(
    ("content", "said"),
    [
        (b"a = 1\nb = \x00\x01", ":2:5: is not a text file"),
        ("é = 'x'\n".encode("latin-1"), ":1:1: is not UTF-8 text: byte 0xe9; save it as UTF-8"),
        ("a = 1\nb = 'é'\n".encode("latin-1"), ":2:6: is not UTF-8 text: byte 0xe9; save it as UTF-8"),
        ("'é' = 1\n'ü".encode()[:-1], ":2:2: is not UTF-8 text: byte 0xc3; save it as UTF-8"),
        ("a = 1".encode("utf-16"), ":1:1: is text in UTF-16 or UTF-32; save it as UTF-8"),
        ("a = 1".encode("utf-32"), ":1:1: is text in UTF-16 or UTF-32; save it as UTF-8"),
        (b"#" * (MAX_BYTES + 1), ": is larger than 64 KiB, which no such file is"),
    ],
)
def test_what_is_not_text(tmp_path: Path, content: bytes, said: str) -> None:
    file = tmp_path / "x.toml"
    file.write_bytes(content)
    assert refusal(file) == said


def test_what_is_no_file(tmp_path: Path) -> None:
    assert refusal(tmp_path / "nothing.toml") == ": there is no such file"
    assert refusal(tmp_path) == ": is a folder, not a file"
    assert refusal(tmp_path / "a\0b").startswith(": cannot be read: ")


def test_what_may_not_be_read(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    """An administrator may read everything, so the refusal is the system's in name only."""
    file = tmp_path / "x.toml"
    file.write_text("a = 1")

    def refuse(self: Path, *_: Any) -> Any:
        raise PermissionError(13, "Permission denied", str(self))

    monkeypatch.setattr(Path, "open", refuse)
    assert refusal(file) == ": may not be read by this user"


def test_a_disk_that_fails(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    def fail(self: Path, *_: Any) -> Any:
        raise OSError(5, "Input/output error", str(self))

    monkeypatch.setattr(Path, "open", fail)
    assert refusal(tmp_path / "x.toml") == ": cannot be read: Input/output error"


@pytest.mark.skipif(not Path("/dev/zero").exists(), reason="platform: no device without end here")
def test_a_device_without_end_ends() -> None:
    assert "is larger than" in refusal(Path("/dev/zero"))


@pytest.mark.skipif(not hasattr(os, "mkfifo"), reason="platform: no named pipes here")
def test_a_pipe_is_read(tmp_path: Path) -> None:
    pipe = tmp_path / "pipe"
    os.mkfifo(pipe)
    writer = threading.Thread(target=pipe.write_bytes, args=(b"a = 1\n",))
    writer.start()
    assert read_text(pipe, FileInvalid) == "a = 1\n"
    writer.join()


@given(st.binary())
def test_any_bytes_are_text_or_the_error(content: bytes) -> None:
    try:
        assert text_of(content, "x", FileInvalid).encode() == content
    except FileInvalid as error:
        assert len(error.problems) == 1
