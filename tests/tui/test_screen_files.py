"""Saving, the journal and what was left behind, by Textual's pilot."""

from __future__ import annotations

from pathlib import Path

import pytest

import cycle
from tests.tui.screen_support import opened, to_input
from tests.tui.test_screen_parts import TEXT, left_by_another
from tui.screens.main import MainScreen
from tui.screens.page import Page
from tui.screens.prompt import Prompt


@pytest.fixture
def path(tmp_path: Path, state: Path) -> Path:
    file = tmp_path / "case.toml"
    file.write_text(TEXT)
    return file


async def test_save_keeps_comments_and_removes_the_journal(path: Path, state: Path) -> None:
    path.write_text(TEXT.replace("mach = 6.0", "mach = 6.0   # first guess"))
    async with opened(path) as driver:
        await driver.settled()
        await to_input(driver, "flight.mach")
        await driver.press("plus")
        assert len(list(state.glob("*.journal"))) == 1
        await driver.until(lambda: " *" in driver.screen())
        await driver.press("s")
        await driver.until(lambda: not driver.session.unsaved)
        assert "saved" in driver.screen()
        assert list(state.glob("*.journal")) == []
    text = path.read_text()
    assert "# first guess" in text
    assert cycle.load(str(path)).value("flight.mach") == pytest.approx(6.1, rel=1e-12)


async def test_a_file_changed_by_another_is_not_overwritten(path: Path, tmp_path: Path) -> None:
    async with opened(path) as driver:
        await driver.settled()
        await to_input(driver, "flight.mach")
        await driver.press("plus")
        path.write_text(TEXT.replace("0.005", "0.0051"))
        await driver.press("s")
        await driver.until(lambda: isinstance(driver.app.screen, Page))
        await driver.until(lambda: "show the difference" in driver.screen())
        await driver.press("d")
        await driver.until(lambda: "+mach = 6.1" in driver.screen())
        await driver.press("escape")
        await driver.until(lambda: "show the difference" in driver.screen())
        await driver.press("o")
        await driver.until(lambda: isinstance(driver.app.screen, Prompt))
        await driver.press("ctrl+u")
        await driver.type(str(tmp_path / "other.toml"))
        await driver.press("enter")
        await driver.until(lambda: not driver.session.unsaved)
    assert "0.0051" in path.read_text()
    assert cycle.load(str(tmp_path / "other.toml")).value("flight.mach") == pytest.approx(6.1, rel=1e-12)


async def test_left_work_is_offered_and_restored_with_its_undo_list(path: Path, state: Path) -> None:
    edits = [{"edit": {"set": {"flight.mach": 7.0}}}, {"edit": {"set": {"flight.mach": 8.0}}}, {"undo": 1}]
    left_by_another(state, str(path), *edits, {"edit": {"set": {"inlet.gone": 1.0}}})
    async with opened(path) as driver:
        await driver.until(lambda: isinstance(driver.app.screen, Page))
        await driver.until(lambda: "left 2 edits" in driver.screen())
        await driver.press("r")
        await driver.until(lambda: driver.session.case.value("flight.mach") == 7.0)
        found = await driver.settled()
        assert found.at("0", "mach") == pytest.approx(7.0, rel=1e-9)
        assert "restored 1 edit, 1 no longer hold" in driver.screen()
        assert driver.session.pin.figures.at("0", "mach") == pytest.approx(6.0, rel=1e-9)
        await driver.press("U")
        assert driver.session.case.value("flight.mach") == 8.0


async def test_left_work_can_be_discarded(path: Path, state: Path) -> None:
    file = left_by_another(state, str(path), {"edit": {"set": {"flight.mach": 7.0}}})
    async with opened(path) as driver:
        await driver.until(lambda: "left 1 edit of" in driver.screen())
        await driver.press("d")
        await driver.settled()
        assert driver.session.case.value("flight.mach") == 6.0
    assert not file.exists()


async def test_a_file_that_is_no_case_says_why_and_is_read_again_on_enter(path: Path) -> None:
    path.write_text(TEXT.replace("mach = 6.0", "mach = -6.0"))
    async with opened(path) as driver:
        await driver.until(lambda: "flight.mach" in driver.screen())
        path.write_text(TEXT)
        await driver.press("enter")
        assert (await driver.settled()).solved


async def test_without_a_path_it_opens_a_new_case_and_asks_for_a_name(tmp_path: Path, state: Path) -> None:
    async with opened("") as driver:
        assert (await driver.settled()).solved
        await driver.press("s")
        await driver.until(lambda: isinstance(driver.app.screen, Prompt))
        await driver.press("ctrl+u")
        await driver.type(str(tmp_path / "new.toml"))
        await driver.press("enter")
        await driver.until(lambda: "saved" in driver.session.note)
    assert cycle.load(str(tmp_path / "new.toml")) is not None


async def test_edits_that_cannot_be_kept_on_disk_are_said_and_not_lost_unasked(
    path: Path, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    (tmp_path / "file").write_text("")
    monkeypatch.setenv("XDG_STATE_HOME", str(tmp_path / "file"))
    async with opened(path) as driver:
        await driver.settled()
        await to_input(driver, "flight.mach")
        await driver.press("plus")
        await driver.settled()
        await driver.until(lambda: "edits are not kept on disk" in driver.screen())
        await driver.press("q")
        await driver.until(lambda: "leave and lose them" in driver.screen())
        await driver.press("s")
        await driver.until(lambda: isinstance(driver.app.screen, MainScreen))
        assert driver.session.unsaved
