"""Where a user's settings, machine profiles and log are: the platform's own folders."""

from __future__ import annotations

from pathlib import Path

import platformdirs


def config_folder() -> Path:
    """Holds `settings.toml` and the folder `machines` of profiles; need not exist yet."""
    return platformdirs.user_config_path("windctl", appauthor=False)


def machines_folder() -> Path:
    """One profile per file; a profile is called by its file's name without `.toml`."""
    return config_folder() / "machines"


def settings_file() -> Path:
    """The user's settings."""
    return config_folder() / "settings.toml"


def log_file() -> Path:
    """The newest of the rotating log files."""
    return platformdirs.user_log_path("windctl", appauthor=False) / "windctl.log"


def line_trace_file() -> Path:
    """The last bytes to and from a real board, beside the log."""
    return log_file().with_name("last-line.txt")
