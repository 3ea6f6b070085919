"""The C compiler, as the firmware's tests have it."""

from __future__ import annotations

from tests.firmware.conftest import cc, tool

__all__ = ["cc", "tool"]
