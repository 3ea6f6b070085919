"""What the firmware's tests are built with; a compiler that is missing is said clearly, and in CI is a failure."""

from __future__ import annotations

import os
from collections.abc import Callable

import pytest

from tests.firmware.build import MissingTool, find


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
