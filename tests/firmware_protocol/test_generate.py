"""The generator: its files are fresh, staleness is noticed, and a definition that cannot be is refused."""

from __future__ import annotations

import importlib.util
import sys
from pathlib import Path
from types import ModuleType

import pytest

from windctl.protocol import messages

ROOT = Path(__file__).parents[2]


def load_generator() -> ModuleType:
    spec = importlib.util.spec_from_file_location("generate", ROOT / "firmware_protocol" / "generate.py")
    assert spec is not None and spec.loader is not None
    module = importlib.util.module_from_spec(spec)
    sys.modules["generate"] = module  # dataclasses look their module up
    spec.loader.exec_module(module)
    return module


generate = load_generator()
TEXT = generate.DEFINITION.read_text(encoding="utf-8")


def test_every_generated_file_is_fresh() -> None:
    assert generate.stale(generate.load(TEXT)) == []
    assert generate.main(["--check"]) == 0


def test_check_names_a_stale_file_and_writes_nothing(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    old = tmp_path / "messages.py"
    old.write_text("# an older codec\n")
    monkeypatch.setattr(generate, "HERE", tmp_path / "firmware_protocol")
    monkeypatch.setattr(generate, "OUTPUTS", {old: generate.python_codec})
    assert generate.main(["--check"]) == 1
    assert "stale: messages.py" in capsys.readouterr().err
    assert old.read_text() == "# an older codec\n"
    assert generate.main([]) == 0
    assert generate.main(["--check"]) == 0


def test_the_schema_follows_what_must_agree_and_ignores_prose() -> None:
    def schema(text: str) -> int:
        return generate.load(text).schema

    assert schema(TEXT) == messages.SCHEMA
    assert schema(TEXT.replace("ready to turning", "from rest to turning")) == schema(TEXT)
    assert schema(TEXT.replace('name = "nonce", type = "u32"', 'name = "nonce", type = "i32"')) != schema(
        TEXT
    )
    assert schema(TEXT.replace("silence = 5", "silence = 55")) != schema(TEXT)


@pytest.mark.parametrize(
    ("old", "new", "complaint"),
    [
        ("code = 0x02", "code = 0x01", "message codes are not all different"),
        ('{name = "nonce", type = "u32"}', '{name = "nonce", type = "f64"}', "type f64 is not known"),
        ("code = 0x81", "code = 0x71", "Identity: code 0x71 goes to the board"),
        ("guard_ok = 2", "guard_ok = 3", "wants one bit"),
        ("silence = 5", "silence = 500", "wants a u8"),
        (
            '[{name = "boot", type = "u16"}, {name = "epoch", type = "u16"}]',
            "[]",
            "Arm moves, so its body begins with boot and epoch",
        ),
        ('{name = "n", type = "u8"', '{name = "n", type = "segments"', "limit 60"),
    ],
)
def test_a_definition_that_cannot_be_is_refused(old: str, new: str, complaint: str) -> None:
    assert old in TEXT
    with pytest.raises(generate.DefinitionError, match=complaint):
        generate.load(TEXT.replace(old, new, 1))


def test_the_generator_builds_frames_by_the_letter() -> None:
    # Check value of CRC-16/IBM-3740 in the catalogue of parametrised CRC algorithms; the example packet of
    # Cheshire and Baker 1999.
    assert generate.crc16(b"123456789") == 0x29B1
    assert generate.cobs(bytes.fromhex("4500002C4C79000040064F37")).hex() == "024501042c4c79010540064f37"
