"""Edits made while the disk is full: told until they are kept, written when there is room again, never said to be kept before."""

from __future__ import annotations

import errno
import json
import os
import time
from pathlib import Path

import pytest

from tests.tui.pty_support import READY, Terminal
from tests.tui.test_link_pty import mounted, needs_mounts
from tests.tui.test_screen_parts import TEXT
from tui import journal
from tui.journal import Journal
from tui.journal_file import Written

EDIT = {"edit": {"set": {"flight.mach": 6.5}}}


def records(state: Path) -> list[list[dict[str, object]]]:
    """Records of the journals there are, without their heads."""
    return [[json.loads(line) for line in file.read_text().splitlines()[1:]] for file in state.glob("*.journal")]


@pytest.fixture
def full(monkeypatch: pytest.MonkeyPatch) -> list[bool]:
    """The disk is full while this holds [True]."""
    is_full, write = [False], os.write

    def limited(descriptor: int, data: bytes) -> int:
        if is_full[0]:
            raise OSError(errno.ENOSPC, "No space left on device")
        return write(descriptor, data)

    monkeypatch.setattr(os, "write", limited)
    return is_full


@pytest.mark.parametrize("before", [0, 1, 3])
def test_what_the_disk_refused_is_written_before_the_next_record(path: Path, state: Path, full: list[bool], before: int) -> None:
    kept = Journal(str(path))
    made = [{"edit": {"set": {"flight.mach": 6.0 + n / 10}}} for n in range(before + 3)]
    for record in made[:before]:
        kept.append(record)
    full[0] = True
    for record in made[before : before + 2]:
        kept.append(record)
        assert kept.failure == "edits are not kept on disk: No space left on device" and not kept.settle()
    full[0] = False
    kept.append(made[-1])
    assert kept.failure == "" and records(state) == [made]
    kept.remove()


def test_leaving_tries_once_more(path: Path, state: Path, full: list[bool]) -> None:
    kept = Journal(str(path))
    full[0] = True
    kept.append(EDIT)
    full[0] = False
    assert kept.settle() and records(state) == [[EDIT]]
    kept.remove()


def test_a_journal_that_another_hand_removed_is_written_anew(path: Path, state: Path) -> None:
    kept = Journal(str(path))
    kept.append(EDIT)
    next(state.glob("*.journal")).unlink()
    kept.append({"undo": 1})
    assert records(state) == [[EDIT, {"undo": 1}]] and kept.failure == ""
    kept.remove()


def test_a_disk_that_refuses_late_is_told_and_written_anew(path: Path, state: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    """A disk far away takes a record and says only when it is flushed that it is full."""

    def lost(descriptor: int) -> None:
        raise OSError(errno.EDQUOT, "Disk quota exceeded")

    kept = Journal(str(path))
    monkeypatch.setattr(os, "fsync", lost)
    kept.append(EDIT)
    end = time.monotonic() + 5.0
    while not kept.failure:
        assert time.monotonic() < end
    assert kept.failure == "edits are not kept on disk: Disk quota exceeded" and not kept.settle()
    monkeypatch.undo()
    monkeypatch.setenv("XDG_STATE_HOME", str(state.parent))
    assert kept.settle() and records(state) == [[EDIT]]
    kept.remove()


def test_an_undo_behind_a_save_is_kept_whole(path: Path, state: Path) -> None:
    kept = Journal(str(path))
    kept.append(EDIT)
    assert kept.knows({"undo": 1}) and not kept.knows({"redo": 1})
    kept.saving()
    assert not kept.knows({"undo": 1})
    kept.append({"edit": {"case": TEXT}})
    kept.restart(str(path), "")
    assert records(state) == [[{"edit": {"case": TEXT}}]] and not kept.knows({"undo": 1})
    kept.append(EDIT)
    assert kept.knows({"undo": 1})
    kept.append({"undo": 1})
    assert kept.knows({"redo": 1}) and not kept.knows({"undo": 1})
    kept.remove()
    assert records(state) == []


def test_a_file_that_cannot_be_begun_leaves_none(path: Path, state: Path, full: list[bool]) -> None:
    full[0] = True
    with pytest.raises(OSError, match="No space"):
        Written.begun(journal.state_directory(), "a", b"x")
    assert list(state.iterdir()) == []


@needs_mounts
def test_on_a_disk_that_is_really_full_the_warning_stays_until_there_is_room(tmp_path: Path) -> None:
    folder = tmp_path / "full"
    folder.mkdir()
    (tmp_path / "case.toml").write_text(TEXT)
    fill = f"mount -t tmpfs -o size=64k none {folder} && cp case.toml {folder} && mkdir {folder}/state"
    fill += f" && (head -c 131072 /dev/zero > {folder}/filler; true) && (read go < {tmp_path}/room; rm {folder}/filler) & sleep 1; true"
    os.mkfifo(tmp_path / "room")
    # what is on the mounted disk is seen in its own namespace only: it is copied out when the program has ended
    keep = f'"$0"; status=$?; cp -r {folder} {tmp_path}/copy; exit $status'
    program = mounted(fill, tmp_path).replace("exec ", "").replace('"$0"', keep)
    with Terminal([str(folder / "case.toml")], env={"XDG_STATE_HOME": str(folder / "state")}, program=program) as terminal:
        terminal.wait(READY, 30.0)
        terminal.press("tab", "+", "+")
        terminal.wait("M 6.2")
        terminal.wait(lambda text: "edits are not kept on disk: No space left" in text and "NOT ON DISK" in text.splitlines()[0])
        terminal.press("down", "up", "t", "t")
        terminal.wait(lambda text: "edits are not kept on disk" in text and "NOT ON DISK" in text.splitlines()[0])
        terminal.press("q")
        terminal.wait("leave and lose them")
        terminal.press("s")
        terminal.wait("Mach number")
        (tmp_path / "room").write_text("go\n")
        time.sleep(0.5)
        terminal.press("+")
        terminal.wait(lambda text: "M 6.3" in text and "not kept" not in text and "NOT ON DISK" not in text)
        terminal.press("q")
        assert terminal.status() == 0
        assert b"Work is kept" in terminal.raw
    (found,) = records(tmp_path / "copy" / "state" / "ductwalk")
    assert found == [{"edit": {"set": {"flight.mach": mach}}} for mach in (6.1, 6.2, 6.3)]
