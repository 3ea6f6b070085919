"""One port, one user: within a process, between processes, and after one died."""

from __future__ import annotations

import json
import os
import subprocess
import sys
import tempfile
from pathlib import Path

import pytest

from windctl.errors import MachineError
from windctl.machine.port_lock import PortLock, lock_folder, lock_name, read_holder

HOLD = """
import sys, time
from pathlib import Path
from windctl.machine.port_lock import PortLock
lock = PortLock("/dev/ttyX0", coil="b1-2026-0007", folder=Path(sys.argv[1]))
print("held", flush=True)
time.sleep(60)
"""


def test_the_second_user_is_told_who_the_first_is(tmp_path: Path) -> None:
    lock = PortLock("/dev/ttyX0", coil="b1-2026-0001", folder=tmp_path)
    with pytest.raises(MachineError) as caught:
        PortLock("/dev/ttyX0", folder=tmp_path)
    assert f"port /dev/ttyX0 is in use by windctl process {os.getpid()}" in str(caught.value)
    assert "b1-2026-0001" in str(caught.value)
    lock.release()
    lock.release()
    PortLock("/dev/ttyX0", folder=tmp_path).release()


def test_other_ports_are_free(tmp_path: Path) -> None:
    first = PortLock("/dev/ttyX0", folder=tmp_path)
    second = PortLock("socket://127.0.0.1:7000", folder=tmp_path)
    second.release()
    first.release()


def test_the_coil_can_be_named_later(tmp_path: Path) -> None:
    lock = PortLock("/dev/ttyX0", coil="a much longer text than what comes after", folder=tmp_path)
    lock.name_coil("b1-2026-0002")
    holder = read_holder(lock.path)
    assert holder is not None
    assert (holder.pid, holder.coil) == (os.getpid(), "b1-2026-0002")
    lock.release()
    assert read_holder(lock.path) is None
    lock.name_coil("nobody's any more")
    assert read_holder(lock.path) is None


def test_another_process_holds_and_its_death_frees(tmp_path: Path) -> None:
    other = subprocess.Popen([sys.executable, "-c", HOLD, str(tmp_path)], stdout=subprocess.PIPE, text=True)
    try:
        assert other.stdout is not None
        assert other.stdout.readline() == "held\n"
        with pytest.raises(MachineError, match=f"process {other.pid} for coil b1-2026-0007"):
            PortLock("/dev/ttyX0", folder=tmp_path)
        other.kill()  # no chance to tidy up
        other.wait(10)
        left = read_holder(tmp_path / lock_name("/dev/ttyX0"))
        assert left is not None
        assert left.pid == other.pid  # stale: it still names the dead
        PortLock("/dev/ttyX0", folder=tmp_path).release()
    finally:
        other.kill()
        other.communicate()


@pytest.mark.parametrize("left", [b"", b"not json", b"[]", json.dumps({"pid": 999999999}).encode()])
def test_whatever_a_dead_process_left_in_the_file_is_taken_over(left: bytes, tmp_path: Path) -> None:
    (tmp_path / lock_name("/dev/ttyX0")).write_bytes(left)
    lock = PortLock("/dev/ttyX0", folder=tmp_path)
    holder = read_holder(lock.path)
    assert holder is not None
    assert holder.pid == os.getpid()
    lock.release()


def test_two_names_of_one_device_are_one_port(tmp_path: Path) -> None:
    device = tmp_path / "tty0"
    device.touch()
    by_id = tmp_path / "by-id"
    by_id.symlink_to(device)
    assert lock_name(str(by_id)) == lock_name(str(device))
    assert lock_name("/dev/ttyX0") != lock_name("/dev/ttyX1")


def test_a_folder_that_cannot_be_written_is_named(tmp_path: Path) -> None:
    blocked = tmp_path / "file"
    blocked.touch()
    with pytest.raises(MachineError, match="cannot lock port"):
        PortLock("/dev/ttyX0", folder=blocked)


def test_the_default_folder_is_the_users_own_temporary_one(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(tempfile, "tempdir", str(tmp_path))
    PortLock("/dev/ttyX0").release()
    assert lock_folder().parent == tmp_path
    assert lock_folder().stat().st_mode & 0o077 == 0


@pytest.mark.skipif(sys.platform == "win32", reason="platform: temporary folders are each user's own")
def test_somebody_elses_folder_is_not_trusted(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    me = os.getuid()
    monkeypatch.setattr(os, "getuid", lambda: me + 1)
    with pytest.raises(MachineError, match="another user"):
        PortLock("/dev/ttyX0", folder=tmp_path)
