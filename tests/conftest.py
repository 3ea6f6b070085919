"""Every test: a home of its own, no settings from outside, and no skip that nobody can account for."""

from __future__ import annotations

import logging
import os
import signal
from collections.abc import Iterator
from pathlib import Path

import hypothesis
import pytest

pytest_plugins = ("tests.workers",)

# A busy computer is slow, not wrong: pytest's own time limit is the only one.
# CI draws the same examples each time.
hypothesis.settings.register_profile("windctl", deadline=None)
hypothesis.settings.register_profile("ci", deadline=None, derandomize=True, print_blob=True)
hypothesis.settings.load_profile("ci" if os.environ.get("CI") else "windctl")

# A shell that starts the tests in the background has them ignore Ctrl-C, and so would each windctl of theirs.
if signal.getsignal(signal.SIGINT) is signal.SIG_IGN:
    signal.signal(signal.SIGINT, signal.default_int_handler)

OUTER_ENVIRONMENT = dict(os.environ)  # before any test's own; for what must run as the person outside does

LONG = os.environ.get("WINDCTL_LONG", "") not in ("", "0")

# A skip in CI is a failure unless its reason starts with one of these. DEVELOPERS.md documents them.
ALLOWED_SKIPS = (
    "long form:",  # runs with WINDCTL_LONG=1; a shorter form of the same check runs always
    "platform:",  # this operating system lacks what the test is about, e.g. a pseudo-terminal
)

_OUTSIDE = ("WINDCTL_BOOK", "NO_COLOR", "FORCE_COLOR", "COLUMNS", "LINES")
_FOLDERS = {
    "HOME": "",
    "USERPROFILE": "",
    "APPDATA": "config",
    "LOCALAPPDATA": "data",
    "XDG_CONFIG_HOME": "config",
    "XDG_DATA_HOME": "data",
    "XDG_STATE_HOME": "state",
    "XDG_CACHE_HOME": "cache",
}


@pytest.fixture(autouse=True)
def home(tmp_path_factory: pytest.TempPathFactory, monkeypatch: pytest.MonkeyPatch) -> Iterator[Path]:
    """An empty home: settings, profiles, book and log of whoever runs the tests stay out of sight."""
    folder = tmp_path_factory.mktemp("home")
    for name, part in _FOLDERS.items():
        monkeypatch.setenv(name, str(folder / part))
    for name in _OUTSIDE:
        monkeypatch.delenv(name, raising=False)
    yield folder
    logger = logging.getLogger("windctl")  # a log that a test began is in its home
    for handler in list(logger.handlers):
        logger.removeHandler(handler)
        handler.close()


@pytest.fixture(scope="session", autouse=True)
def _home_of_shared_fixtures(tmp_path_factory: pytest.TempPathFactory) -> Iterator[None]:
    """The same for fixtures that live longer than a test and are made before its own home is."""
    folder = tmp_path_factory.mktemp("shared-home")
    with pytest.MonkeyPatch.context() as patch:
        for name, part in _FOLDERS.items():
            patch.setenv(name, str(folder / part))
        for name in _OUTSIDE:
            patch.delenv(name, raising=False)
        yield


@pytest.fixture(scope="session")
def long_form() -> bool:
    """True where checks are to run in their full form (WINDCTL_LONG=1)."""
    return LONG


def pytest_collection_modifyitems(items: list[pytest.Item]) -> None:
    """Leave the long forms out unless they are asked for."""
    if LONG:
        return
    for item in items:
        if item.get_closest_marker("long"):
            item.add_marker(pytest.mark.skip(reason="long form: set WINDCTL_LONG=1"))


def skip_is_accounted_for(reason: str) -> bool:
    """Whether a skip with this reason may stand in CI."""
    return reason.removeprefix("Skipped: ").startswith(ALLOWED_SKIPS)


@pytest.hookimpl(wrapper=True)
def pytest_runtest_makereport(item: pytest.Item) -> Iterator[None]:
    """In CI, a skip whose reason is not documented is a failure."""
    report = yield
    if os.environ.get("CI") and report.skipped and not hasattr(report, "wasxfail"):
        reason = report.longrepr[2] if isinstance(report.longrepr, tuple) else str(report.longrepr)
        if not skip_is_accounted_for(reason):
            report.outcome = "failed"
            report.longrepr = (
                f"skipped without a documented reason: {reason} (allowed: {', '.join(ALLOWED_SKIPS)})"
            )
    return report
