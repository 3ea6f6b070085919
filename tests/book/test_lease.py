"""The right to write one coil."""

from __future__ import annotations

from pathlib import Path

import pytest

from tests.book.samples import files_beside
from windctl.book import lease as lease_module
from windctl.book.lease import Lease
from windctl.errors import BookError


def test_it_is_held_by_one_until_released(path: Path) -> None:
    one, other = Lease(path, "some-id", "b1-2026-0001"), Lease(path, "some-id", "b1-2026-0001")
    one.take()
    one.take()
    with pytest.raises(BookError, match=r"b1-2026-0001 is being written by process \d+: one coil has one"):
        other.take()
    one.release()
    one.release()
    other.take()
    with pytest.raises(BookError):
        one.take()
    other.release()
    assert files_beside(path) == []


def test_different_coils_do_not_meet(path: Path) -> None:
    one, other = Lease(path, "one", "1"), Lease(path, "other", "2")
    one.take()
    other.take()
    assert len(files_beside(path)) == 2
    one.release()
    other.release()


def test_a_file_left_behind_by_a_dead_process_is_taken_over(path: Path) -> None:
    path.with_name(f"{path.name}.some-id.writing").write_text("process 1")
    lease = Lease(path, "some-id", "b1-2026-0001")
    lease.take()
    lease.release()
    assert files_beside(path) == []


def test_a_file_removed_between_opening_and_locking_is_made_anew(
    path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    """The last holder removes it; who then held the removed file would hold nothing."""
    lock, times = lease_module._lock, 0

    def removed_meanwhile(handle: int) -> None:
        nonlocal times
        times += 1
        if times == 1:
            path.with_name(f"{path.name}.some-id.writing").unlink()
        lock(handle)

    monkeypatch.setattr(lease_module, "_lock", removed_meanwhile)
    one, other = Lease(path, "some-id", "1"), Lease(path, "some-id", "1")
    one.take()
    assert times == 2
    with pytest.raises(BookError, match="is being written"):
        other.take()
    one.release()


def test_a_folder_where_nothing_can_be_made(tmp_path: Path) -> None:
    lease = Lease(tmp_path / "nowhere" / "shop.book", "some-id", "b1-2026-0001")
    with pytest.raises(BookError, match=r"cannot be claimed for writing.*allow writing to the book's folder"):
        lease.take()


def test_a_disk_without_locks_says_so(path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    def no_locks(_handle: int) -> None:
        raise OSError(37, "No locks available")

    monkeypatch.setattr(lease_module, "_lock", no_locks)
    with pytest.raises(BookError, match=r"has no locks .*keep the book on a local disk"):
        Lease(path, "some-id", "b1-2026-0001").take()
