"""What the firmware's tests are built with; a missing compiler is a skip that says so, in CI a failure."""

from __future__ import annotations

import importlib.util
import os
from collections.abc import Callable
from pathlib import Path

import pytest

from tests.firmware.build import MissingTool, chip_elf, find
from tests.firmware.recording import Recorded, record


@pytest.fixture(scope="session")
def tool() -> Callable[[str], str]:
    """`tool("clang")` is that compiler's name, if this computer has it."""

    def need(name: str) -> str:
        try:
            find(name)
        except MissingTool as missing:
            if os.environ.get("CI"):
                pytest.fail(f"{missing}: CI installs it")
            pytest.skip(f"platform: {missing}")
        return name

    return need


@pytest.fixture(scope="session")
def cc(tool: Callable[[str], str]) -> str:
    """Any C compiler."""
    return tool("cc")


@pytest.fixture(scope="session")
def recorded() -> Recorded:
    """Plays by hand and random ticks on the virtual machine's board."""
    return record()


@pytest.fixture(scope="session")
def chip(tool: Callable[[str], str]) -> Callable[..., Path]:
    """`chip("hand")` is a variant's program, where compiler and emulator are at hand."""
    tool("avr-gcc")
    tool("make")
    if importlib.util.find_spec("yasimavr") is None:
        missing = MissingTool("yasimavr")
        if os.environ.get("CI"):
            pytest.fail(f"{missing}: CI installs it")
        pytest.skip(f"platform: {missing}")
    return chip_elf
