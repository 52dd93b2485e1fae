"""Files of the state directory from another version or another hand, and files of a folder that move under the program's hands."""

from __future__ import annotations

import json
import math
import os
from dataclasses import replace
from pathlib import Path
from typing import Any
from urllib.parse import unquote_to_bytes

import pytest

import cycle
from cycle.record import read_stored, stored
from tests.tui.test_screen_parts import TEXT
from tui import figures, folder, journal, keeping, plots, sources, trash, writing
from tui.journal import Journal, Left
from tui.keeping import Kept
from tui.screens.filing import read, replay
from tui.session import Pin, Session, is_change, loaded, with_figures
from tui.views import cases, pictures

DEEP = "[" * 100_000


@pytest.fixture
def path(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> str:
    monkeypatch.setenv("XDG_DATA_HOME", str(tmp_path / "data"))
    file = tmp_path / "case.toml"
    file.write_text(TEXT)
    return str(file)


def journalled(path: str, *lines: str, case: str = "") -> Path:
    """A journal left behind with these lines behind its head."""
    file = journal.state_directory() / f"{journal.stem(path)}-1.journal"
    file.parent.mkdir(parents=True, exist_ok=True)
    head = {"format": journal.FORMAT, "case": case or path, "content": journal.content_hash(path)}
    file.write_text("\n".join((json.dumps(head), *lines)) + "\n")
    return file


def test_a_journal_that_is_spoilt_hides_no_other_and_stops_nothing(path: str) -> None:
    spoilt = journalled(path, DEEP)
    beside = spoilt.with_name(spoilt.name.replace("-1.", "-2."))
    beside.write_text(spoilt.read_text().replace(DEEP, json.dumps({"edit": {"set": {"flight.mach": 6.5}}})))
    os.mkfifo(spoilt.with_name(spoilt.name.replace("-1.", "-3.")))
    spoilt.with_name(spoilt.name.replace("-1.", "-4.")).mkdir()
    left = read(path).left
    assert left is not None and left.file == beside
    assert [held.file for held in journal.every()] == [beside]
    assert [entry.held[0].file for entry in folder.listing(os.path.dirname(path))] == [beside]


@pytest.mark.parametrize(
    "change",
    [
        None, 5, "set", [], {}, {"set": 5}, {"set": {}}, {"set": {"flight.mach": {"a": 1}}}, {"switch": 5}, {"switch": [["a"], "b", 3]},
        {"switch": ["inlet.end", "no such way", 1.0]}, {"study": 5}, {"study": ["a", 5]}, {"study": ["a", {}]},
        {"study": ["a", {"outputs": [5], "vary": []}]}, {"study": ["a", {"outputs": [], "vary": [{"input": "flight.mach"}]}]},
        {"study": ["a", {"outputs": [], "vary": [{"input": "flight.mach", "from": 1, "to": 2, "points": "x"}]}]},
        {"set": {"flight.mach": 6.5}, "switch": []},
    ],
)  # fmt: skip
def test_a_record_that_is_no_edit_of_this_version_is_refused_and_counted(path: str, change: Any) -> None:
    case = cycle.load(path)
    now = loaded(Session(path), case, case.stamp)
    records = ({"edit": change}, {"edit": {"set": {"flight.mach": 6.5}}})
    restored = replay(now, Left(Path(path), records, 0.0, True))
    assert restored.refused == 1
    assert restored.session.case is not None and restored.session.case.value("flight.mach") == 6.5


def test_what_the_screen_records_is_a_change() -> None:
    study = {"outputs": ["thrust"], "vary": [{"input": "flight.mach", "from": "5", "to": 7.0, "points": 5}]}
    for change in ({"set": {"flight.mach": None}}, {"switch": ["inlet.end", "exit_mach", 2.0]}, {"study": ["a", study]}):
        assert is_change(json.loads(json.dumps(change)))


@pytest.mark.parametrize("opened", [10**400, float("nan"), "yesterday", None])
def test_a_case_opened_at_no_time_is_left_out_of_the_list(path: str, opened: Any) -> None:
    keeping.remember(path)
    file = journal.state_directory() / keeping.RECENT
    file.write_text(json.dumps({"format": keeping.FORMAT, "cases": [{"path": path, "opened": opened}]}))
    assert keeping.recent() == ()


@pytest.mark.parametrize("name", ["a\0b", "\ud800", "", 5])
def test_what_can_be_no_path_is_in_no_list(path: str, name: Any) -> None:
    keeping.remember(path)
    file = journal.state_directory() / keeping.RECENT
    file.write_text(json.dumps({"format": keeping.FORMAT, "cases": [{"path": name, "opened": 1.0}]}))
    assert keeping.recent() == ()
    journalled(path, json.dumps({"edit": {}}), case=name)
    assert journal.every() == () or name in ("", 5)


@pytest.mark.parametrize("seconds", [-1e30, -1.0, 1e30])
def test_any_time_of_a_file_can_be_shown(seconds: float) -> None:
    assert len(cases.when(seconds)) == len("2024-01-01 00:00")


def test_a_pin_that_could_not_be_written_is_spoilt(path: str, monkeypatch: pytest.MonkeyPatch) -> None:
    keeping.keep_pin(path, Kept("label", "day", "name", TEXT))
    pin = next(journal.state_directory().glob("*.pin"))
    pin.write_text(pin.read_text().replace('"day"', '"\\ud800"'))
    with pytest.raises(keeping.Spoilt):
        keeping.kept_pin(path)

    def refuse(path: str) -> None:
        raise PermissionError(13, "permission denied")

    monkeypatch.setattr(keeping, "drop_pin", refuse)
    got = read(path)
    assert got.pin is None and "dropped" in got.trouble


def test_a_record_that_did_not_fit_on_the_disk_leaves_no_half_line(path: str, monkeypatch: pytest.MonkeyPatch) -> None:
    """Nor a file without a head where the disk is full from the beginning."""
    write, written = os.write, [0]

    def full(descriptor: int, data: bytes) -> int:
        written[0] += 1
        if written[0] % 2 == 0:
            raise OSError(28, "no space left on device")
        return write(descriptor, data[:4])

    kept = Journal(path)
    for record in ({"edit": 1}, {"edit": 2}, {"edit": 3}):
        monkeypatch.setattr(os, "write", full)
        kept.append(record)
        assert "no space" in kept.failure and len(list(journal.state_directory().iterdir())) == (record != {"edit": 1})
        monkeypatch.setattr(os, "write", write)
        kept.append(record)
    assert [held.edits for held in journal.every()] == [6]  # those that the disk refused come before the next one
    kept.remove()


def test_links_that_lead_nowhere_and_files_that_vanish_leave_the_rest_of_the_list(path: str, monkeypatch: pytest.MonkeyPatch) -> None:
    here = os.path.dirname(path)
    os.symlink("loop.toml", os.path.join(here, "loop.toml"))
    assert [entry.name for entry in folder.listing(here)] == ["case.toml", "loop.toml"]
    assert folder.solved(os.path.join(here, "loop.toml")).fault
    monkeypatch.setattr(sources, "names", lambda *_: ["case.toml", "gone.toml"])
    assert [entry.name for entry in folder.listing(here)] == ["case.toml"]


def test_a_file_whose_name_is_no_text_can_be_thrown_away_and_brought_back(path: str) -> None:
    odd = os.fsencode(os.path.dirname(path)) + b"/\xff\n.toml"
    os.rename(path, odd)
    thrown = trash.throw_away(os.fsdecode(odd))
    words = thrown.info.read_text(encoding="ascii").splitlines()
    assert unquote_to_bytes(words[1].removeprefix("Path=")) == odd
    trash.bring_back(thrown)
    assert os.path.exists(odd) and not thrown.info.exists()


@pytest.mark.parametrize("linked", [True, False])
def test_no_move_overwrites_even_where_the_name_was_free_a_moment_ago(path: str, monkeypatch: pytest.MonkeyPatch, linked: bool) -> None:
    """Without links (another file system) the file is copied under a name that must still be free when it is made."""
    target = f"{path}.new"
    if not linked:
        monkeypatch.setattr(os, "link", lambda *_, **__: (_ for _ in ()).throw(OSError(18, "cross-device link")))
        monkeypatch.setattr(os.path, "lexists", lambda _: False)
    Path(target).write_text("theirs")
    with pytest.raises(FileExistsError):
        trash.move_new(path, target)
    assert Path(target).read_text() == "theirs" and Path(path).read_text() == TEXT
    os.unlink(target)
    trash.move_new(path, target)
    assert Path(target).read_text() == TEXT and not os.path.exists(path)


def test_a_link_is_moved_as_a_link(path: str, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(os, "link", lambda *_, **__: (_ for _ in ()).throw(OSError(18, "cross-device link")))
    os.symlink("case.toml", f"{path}.link")
    trash.move_new(f"{path}.link", f"{path}.moved")
    assert os.readlink(f"{path}.moved") == "case.toml" and not os.path.lexists(f"{path}.link")


def test_a_picture_of_a_case_whose_name_is_no_text_is_written(tmp_path: Path) -> None:
    got = writing.write(str(tmp_path / "a"), "<svg>\udcff</svg>", "x")
    assert Path(got.drawing).read_text(encoding="utf-8") == "<svg>?</svg>"


@pytest.mark.parametrize("wrong", [10**400, "x", [], {}, True, None])
def test_a_stored_figure_that_is_no_number_has_no_value(path: str, wrong: Any) -> None:
    """Mole fractions and profiles are not judged when a stored walk is read: whatever stands there is shown as none."""
    item = json.loads(json.dumps(stored(cycle.solve(cycle.load(path)), cycle.__version__)))
    item["walk"]["stations"]["4"]["mole_fractions"]["H2O"] = wrong
    item["walk"]["profile"] = {"x": [0.0, wrong]}
    found = sources.of_stored(read_stored(json.dumps(item).encode(), "a file")[0]).figures
    assert math.isnan(found.fractions["4"]["H2O"]) and math.isnan(found.profile["x"][1])


def test_a_stored_speed_beyond_all_measure_can_be_drawn(path: str) -> None:
    case = cycle.load(path)
    item = json.loads(json.dumps(stored(cycle.solve(case), cycle.__version__)))
    item["walk"]["stations"]["4"]["velocity"] = -1e300
    found = sources.of_stored(read_stored(json.dumps(item).encode(), "a file")[0])
    now = loaded(Session(path), case, case.stamp)
    now = with_figures(now, now.generation, figures.solve(case))
    pinned = replace(now, pin=Pin(found.label, found.case, found.figures, found.stored, chosen=True))
    for view in pictures.views(pinned):
        for quantity in view.items or ("",):
            assert plots.draw(view.drawn(pinned, quantity, False), 80, 20, plots.depth_of_terminal({}), plots.glyphs_of({}, "utf-8"))
