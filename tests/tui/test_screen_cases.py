"""The cases of a folder: figures, opening another one, copies, names, trash, notes, cases opened last, by Textual's pilot."""

from __future__ import annotations

import os
import threading
from pathlib import Path
from urllib.parse import unquote

import pytest

import cycle
from tests.tui.screen_support import Driver, opened, to_input
from tests.tui.test_screen_parts import TEXT
from tui import journal, keeping, sources, trash
from tui.keeping import Kept
from tui.screens.main import MainScreen
from tui.screens.page import Page
from tui.screens.prompt import Prompt
from tui.screens.roster import Roster
from tui.screens.writing import Writing

OTHER = TEXT.replace("mach = 6.0", "mach = 7.0   # as flown").replace("invented for the tests", "another, invented for the tests")


@pytest.fixture
def path(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    monkeypatch.setenv("XDG_DATA_HOME", str(tmp_path / "data"))
    folder = tmp_path / "cases"
    folder.mkdir()
    (folder / "other.toml").write_text(OTHER)
    (folder / "faulty.toml").write_text(TEXT.replace("mach = 6.0", "mach = -6.0"))
    (folder / "choked.toml").write_text(TEXT.replace("fuel_air_ratio = 0.005", "fuel_air_ratio = 0.05"))
    file = folder / "case.toml"
    file.write_text(TEXT)
    return file


async def listed(driver: Driver) -> None:
    """Open the list and wait until every case of it is solved."""
    await driver.press("b")
    await solved(driver)


async def solved(driver: Driver) -> None:
    await driver.until(lambda: isinstance(driver.app.screen, Roster))
    await driver.until(lambda: driver.main.shelf._entries and not driver.main.shelf.looking.waiting)
    await driver.pilot.pause()


async def point(driver: Driver, name: str) -> None:
    """Bring a row to hand."""
    await driver.press("home")
    for _ in range(20):
        if driver.app.screen.name_in_hand == name:
            return
        await driver.press("down")
    raise AssertionError(f"{name} is not in the list:\n{driver.screen()}")


async def named(driver: Driver, key: str, name: str) -> None:
    """Give a name to what a verb asks."""
    await driver.press(key)
    await driver.until(lambda: isinstance(driver.app.screen, Prompt))
    await driver.press("end", "ctrl+u")
    await driver.type(name)
    await driver.press("enter")
    await driver.until(lambda: isinstance(driver.app.screen, Roster))


async def said(driver: Driver, words: str) -> None:
    await driver.until(lambda: words in driver.main.shelf._said)
    await solved(driver)


def row(driver: Driver, name: str) -> str:
    return next(text for text in driver.screen().splitlines() if text[2:].startswith(name))


async def test_every_case_is_solved_and_a_faulty_one_shows_its_fault(path: Path) -> None:
    thrust = cycle.solve(cycle.loads(OTHER, "other")).performance.thrust
    async with opened(path) as driver:
        await driver.settled()
        await listed(driver)
        assert f"{thrust / 1000:.4g} kN" in row(driver, "other.toml")
        assert "out of bounds" in row(driver, "faulty.toml")
        assert "choked" in row(driver, "choked.toml")
        assert row(driver, "case.toml").startswith(">")
        assert driver.app.screen.name_in_hand == "case.toml"
        await point(driver, "choked.toml")
        assert "NO SOLUTION: " in driver.screen()
        await driver.press("t", "escape")
        assert isinstance(driver.app.screen, MainScreen)


async def test_another_case_is_opened_and_unsaved_work_is_offered_on_return(path: Path, state: Path) -> None:
    async with opened(path) as driver:
        await driver.settled()
        await to_input(driver, "flight.mach")
        await driver.press("plus")
        await driver.settled()
        await listed(driver)
        assert row(driver, "case.toml").startswith(">*")
        assert "1 edit" in driver.screen() and "in this session" in driver.screen()
        await point(driver, "other.toml")
        await driver.press("enter")
        await driver.until(lambda: driver.session.path.endswith("other.toml") and driver.session.case is not None)
        found = await driver.settled()
        assert found.at("0", "mach") == 7.0
        assert driver.session.past == () and driver.session.pin.label == "as loaded"
        await to_input(driver, "flight.mach")
        await driver.press("minus")
        await driver.settled()
        await listed(driver)
        assert row(driver, "case.toml").startswith(" *")
        await point(driver, "case.toml")
        await driver.press("enter")
        await driver.until(lambda: "left 1 edit of" in driver.screen())
        await driver.press("k")
        await driver.settled()
        await driver.press("plus")  # a journal of its own, that kept for later stays beside it
        assert len(list(state.glob("case-*.journal"))) == 2
        assert len(list(state.glob("other-*.journal"))) == 1


async def test_a_case_without_edits_leaves_no_journal_when_another_is_opened(path: Path, state: Path) -> None:
    async with opened(path) as driver:
        await driver.settled()
        await to_input(driver, "flight.mach")
        await driver.press("plus", "u")
        await driver.settled()
        await listed(driver)
        await point(driver, "other.toml")
        await driver.press("enter")
        await driver.until(lambda: driver.session.path.endswith("other.toml") and driver.session.case is not None)
        assert list(state.glob("*.journal")) == []


async def test_a_faulty_case_can_be_opened_and_left_for_another(path: Path) -> None:
    async with opened(path) as driver:
        await driver.settled()
        await listed(driver)
        await point(driver, "faulty.toml")
        await driver.press("enter")
        await driver.until(lambda: driver.session.faults)
        assert "flight.mach" in driver.screen()
        await listed(driver)
        await point(driver, "other.toml")
        await driver.press("enter")
        await driver.until(lambda: driver.session.case is not None)
        assert (await driver.settled()).at("0", "mach") == 7.0


async def test_copy_is_byte_for_byte_and_overwrites_nothing(path: Path) -> None:
    async with opened(path) as driver:
        await driver.settled()
        await listed(driver)
        await point(driver, "other.toml")
        await named(driver, "c", "new")
        await said(driver, "copied to new.toml")
        assert (path.parent / "new.toml").read_bytes() == (path.parent / "other.toml").read_bytes()
        await point(driver, "other.toml")
        await named(driver, "c", "case.toml")
        await said(driver, "not copied: there is a file of that name")
    assert path.read_text() == TEXT


async def test_rename_takes_journal_and_pin_along_and_overwrites_nothing(path: Path, state: Path) -> None:
    other = path.parent / "other.toml"
    keeping.keep_pin(str(other), Kept("one", "2026-01-01", "case", TEXT))
    writer = journal.Journal(str(other), journal.content_hash(str(other)))
    writer.append({"edit": {"set": {"flight.mach": 8.0}}})
    writer.turn_to("", keep=True)
    async with opened(path) as driver:
        await driver.settled()
        await listed(driver)
        await point(driver, "other.toml")
        await named(driver, "r", "case.toml")
        await said(driver, "not renamed: there is a file of that name")
        await point(driver, "other.toml")
        await named(driver, "r", "moved")
        await said(driver, "renamed to moved.toml")
        await point(driver, "moved.toml")
        await driver.press("enter")
        await driver.until(lambda: "left 1 edit of" in driver.screen())
        await driver.press("r")
        await driver.until(lambda: driver.session.case.value("flight.mach") == 8.0)
        await driver.until(lambda: driver.session.pin is not None and driver.session.pin.label == "one, of 2026-01-01")
    assert not other.exists()
    assert (path.parent / "moved.toml").read_text() == OTHER
    assert path.read_text() == TEXT


async def test_the_open_case_is_renamed_with_its_unsaved_work_and_saved_there(path: Path, state: Path) -> None:
    target = path.parent / "renamed.toml"
    async with opened(path) as driver:
        await driver.settled()
        await to_input(driver, "flight.mach")
        await driver.press("plus")
        await listed(driver)
        await named(driver, "r", "renamed.toml")
        await said(driver, "renamed to renamed.toml")
        held = journal.every()
        assert [Path(h.case) for h in held] == [target.resolve()]
        assert held[0].live
        await driver.press("escape", "s")
        await driver.until(lambda: not driver.session.unsaved)
    assert cycle.load(str(target)).value("flight.mach") == pytest.approx(6.1, rel=1e-12)
    assert not path.exists()
    assert journal.every() == ()


async def test_delete_asks_goes_to_the_trash_and_comes_back(path: Path, tmp_path: Path) -> None:
    other, bin_ = path.parent / "other.toml", tmp_path / "data" / "Trash"
    async with opened(path) as driver:
        await driver.settled()
        await listed(driver)
        await driver.press("d")
        await said(driver, "the case that is open is not deleted")
        await point(driver, "other.toml")
        await driver.press("d")
        await driver.until(lambda: isinstance(driver.app.screen, Page))
        await driver.press("k")
        await driver.until(lambda: isinstance(driver.app.screen, Roster))
        assert other.exists()
        await driver.press("d", "d")
        await said(driver, "other.toml is in the trash")
        assert not other.exists()
        info = (bin_ / "info" / "other.toml.trashinfo").read_text().splitlines()
        assert info[0] == "[Trash Info]"
        assert unquote(info[1]) == f"Path={other.resolve()}"
        assert (bin_ / "files" / "other.toml").read_text() == OTHER
        await driver.press("u")
        await said(driver, "other.toml is back")
        assert other.read_text() == OTHER
        assert list((bin_ / "info").iterdir()) == []


def test_a_second_file_of_a_name_does_not_take_the_place_of_the_first(path: Path, tmp_path: Path) -> None:
    other = path.parent / "other.toml"
    first = trash.throw_away(str(other))
    other.write_text("second")
    second = trash.throw_away(str(other))
    assert (first.file.read_text(), second.file.read_text()) == (OTHER, "second")
    other.write_text("third")
    with pytest.raises(FileExistsError):
        trash.bring_back(first)
    assert (other.read_text(), first.file.read_text()) == ("third", OTHER)


def test_the_state_directory_stands_in_for_a_trash_that_cannot_be_used(path: Path, state: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setenv("XDG_DATA_HOME", str(path))  # a file, not a folder
    thrown = trash.throw_away(str(path.parent / "other.toml"))
    assert thrown.file == state / "trash" / "files" / "other.toml"
    trash.bring_back(thrown)
    assert (path.parent / "other.toml").read_text() == OTHER


async def test_notes_of_the_open_case_are_an_edit_that_undo_takes_back(path: Path) -> None:
    async with opened(path) as driver:
        await driver.settled()
        await listed(driver)
        await driver.press("n")
        await driver.until(lambda: isinstance(driver.app.screen, Writing))
        await driver.type("first line")
        await driver.press("enter")
        await driver.type("second")
        await driver.press("ctrl+s")
        await driver.until(lambda: driver.session.case.notes == "first line\nsecond")
        await driver.until(lambda: "not saved yet" in driver.screen())
        await driver.press("escape")
        assert driver.session.unsaved
        await driver.press("u")
        assert driver.session.case.notes == ""
        assert not driver.session.unsaved
        await driver.press("U", "s")
        await driver.until(lambda: "saved" in driver.session.note)
    assert cycle.load(str(path)).notes == "first line\nsecond"


async def test_title_and_notes_of_another_case_are_saved_and_its_comments_stay(path: Path) -> None:
    async with opened(path) as driver:
        await driver.settled()
        await listed(driver)
        await point(driver, "other.toml")
        await driver.press("n", "up", "end", "ctrl+u")
        await driver.type("Changed")
        await driver.press("down")
        await driver.type("a note")
        await driver.press("escape")
        await driver.until(lambda: "go on writing" in driver.screen())
        await driver.press("t")
        await said(driver, "title and notes of other.toml saved")
    case = cycle.load(str(path.parent / "other.toml"))
    assert (case.title, case.notes) == ("Changed", "a note")
    assert "# as flown" in case.text


async def test_cases_opened_last_and_unsaved_work_anywhere_are_found(path: Path, tmp_path: Path) -> None:
    gone, far = tmp_path / "gone.toml", tmp_path / "far.toml"
    for file in (gone, far):
        file.write_text(OTHER)
        keeping.remember(str(file))
    gone.unlink()
    writer = journal.Journal(str(far), journal.content_hash(str(far)))
    writer.append({"edit": {"set": {"flight.mach": 8.0}}})
    writer.turn_to("", keep=True)
    async with opened(path, size=(120, 24)) as driver:
        await driver.settled()
        await listed(driver)
        await driver.press("R")
        await driver.until(lambda: "Cases opened last" in driver.screen())
        rows = driver.screen().splitlines()[2:5]
        assert "far.toml" in rows[0] and rows[0].startswith("*") and "1 edit left" in rows[0]
        assert "case.toml" in rows[1]
        assert "gone.toml" in rows[2] and "missing" in rows[2]
        await driver.press("end", "x")
        assert "gone.toml" not in driver.screen()
        await driver.press("home", "enter")
        await driver.until(lambda: "left 1 edit of" in driver.screen())
        await driver.press("k")
        assert (await driver.settled()).at("0", "mach") == 7.0
        assert driver.session.path == str(far.resolve())
    assert str(gone.resolve()) not in [r.path for r in keeping.recent()]


async def test_a_folder_in_the_place_of_a_case_lists_its_cases(path: Path) -> None:
    async with opened(path.parent) as driver:
        await solved(driver)
        await point(driver, "other.toml")
        await driver.press("escape")
        assert "no case is open" in driver.screen()
        await listed(driver)
        await point(driver, "other.toml")
        await driver.press("enter")
        await driver.until(lambda: driver.session.case is not None)
        assert (await driver.settled()).at("0", "mach") == 7.0


@pytest.mark.parametrize("size", [(20, 5), (40, 12), (200, 60)])
async def test_list_and_writing_stand_at_every_size(path: Path, size: tuple[int, int]) -> None:
    async with opened(path, size=size) as driver:
        await driver.settled()
        await listed(driver)
        await driver.press("end", "n", "x", "enter", "y", "backspace", "backspace", "up", "ctrl+c", "l")
        await driver.until(lambda: isinstance(driver.app.screen, Roster))
        await driver.press("R")
        await driver.until(lambda: "opened" in driver.screen() or size[0] < 40)
        await driver.press("q")
        await driver.until(lambda: isinstance(driver.app.screen, MainScreen))


async def test_a_long_folder_is_cut_and_says_so(path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(sources, "MOST_FILES", 3)
    async with opened(path) as driver:
        await driver.settled()
        await listed(driver)
        assert "no more than 3 cases of a folder are listed" in driver.screen()


async def test_names_with_line_ends_and_escapes_are_shown_and_opened(path: Path) -> None:
    odd = path.with_name("a\x1b[31m\nb.toml")
    odd.write_text(OTHER)
    os.symlink("loop.toml", path.with_name("loop.toml"))
    path.with_name("binary.toml").write_bytes(bytes(range(256)) * 100)
    async with opened(path) as driver:
        await driver.settled()
        await listed(driver)
        assert "\x1b" not in driver.screen() and "a?[31m b" in driver.screen()
        await point(driver, odd.name)
        await driver.press("enter")
        await driver.settled()
        assert driver.session.path == str(odd)


async def test_what_became_of_a_file_is_told_where_the_list_is_left_by_then(path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    hold = threading.Event()

    def refuse(file: str) -> None:
        hold.wait(10)
        raise PermissionError(13, "permission denied")

    monkeypatch.setattr(trash, "throw_away", refuse)
    async with opened(path) as driver:
        await driver.settled()
        await listed(driver)
        await point(driver, "other.toml")
        await driver.press("d")
        await driver.until(lambda: isinstance(driver.app.screen, Page))
        await driver.press("d", "escape")
        hold.set()
        await driver.until(lambda: "not deleted: permission denied" in driver.session.note)
