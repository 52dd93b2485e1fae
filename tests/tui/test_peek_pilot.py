"""Peek, plots and losses on the screen, by Textual's pilot."""

from __future__ import annotations

import csv
import io
import shutil
import threading
import xml.etree.ElementTree as ET
from pathlib import Path
from typing import Any

import pytest

from cycle.case import load
from tests.case_files import case_file
from tests.tui.screen_support import CASES, Driver, opened, to_input
from tui import peek, sweeping
from tui.screens.peek import PeekScreen
from tui.sweeping import Piece

HEAT = "combustor.equivalence_ratio"


@pytest.fixture
def path(tmp_path: Path, state: Path) -> Path:
    return Path(shutil.copy(case_file("plain"), tmp_path / "plain.toml"))


async def to_peek(driver: Driver) -> PeekScreen:
    """Open the peek of the equivalence ratio and wait until all of it is there."""
    await driver.settled()
    await driver.press("right", "right", "right")
    await to_input(driver, HEAT)
    await driver.press("g")
    screen = driver.app.screen
    assert isinstance(screen, PeekScreen)
    await driver.until(lambda: screen.peek.due is None)
    return screen


async def test_a_point_of_the_curve_is_taken_and_given_back(path: Path) -> None:
    async with opened(path) as driver:
        screen = await to_peek(driver)
        assert "specific impulse against equivalence ratio" in driver.screen() and "O here: 0.6" in driver.screen()
        await driver.press("enter")
        assert "stands at the present value" in driver.screen()
        await driver.press("right", "right", "enter")
        assert driver.session.case.value(HEAT) == pytest.approx(0.62) and screen.peek.here == (driver.session.case.value(HEAT),)
        assert len(driver.session.past) == 1
        await driver.press("u")
        assert driver.session.case.value(HEAT) == 0.6 and "undone" in driver.screen()
        await driver.press("y")
        assert driver.session.watched == "specific_thrust" and driver.screen().startswith("specific thrust against")
        await driver.press("escape")
        assert driver.app.screen is driver.main


async def test_a_piece_of_a_peek_that_is_closed_is_not_drawn_in_the_next_one(path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    solve, hold = sweeping.solve, threading.Event()

    def slow(*asked: Any) -> Piece:
        hold.wait(10)
        return solve(*asked)

    async with opened(path) as driver:
        await driver.settled()
        monkeypatch.setattr(sweeping, "solve", slow)
        await to_input(driver, "flight.mach")
        await driver.press("g", "escape")
        await driver.press("right", "right", "right")
        await to_input(driver, HEAT)
        await driver.press("g")
        screen = driver.app.screen
        assert isinstance(screen, PeekScreen)
        taken: list[str] = []
        took = peek.took
        monkeypatch.setattr(peek, "took", lambda one, piece: taken.append(piece.curve.axes[0].input.key) or took(one, piece))
        hold.set()
        await driver.until(lambda: screen.peek.due is None)
        assert set(taken) == {HEAT}


async def test_wider_than_choking_the_cursor_gives_the_reason(path: Path) -> None:
    async with opened(path) as driver:
        screen = await to_peek(driver)
        await driver.press("-", "-", "end")
        await driver.until(lambda: screen.peek.due is None)
        await driver.press("end")
        assert "no solution: choked" in driver.screen() and "let the burner open" in driver.screen()


async def test_a_map_over_a_second_input_and_back(path: Path) -> None:
    async with opened(path) as driver:
        screen = await to_peek(driver)
        await driver.press("m")
        await driver.type("mach")
        await driver.press("enter")
        await driver.until(lambda: screen.peek.due is None)
        assert driver.screen().startswith("specific impulse against equivalence ratio and Mach number")
        await driver.press("up", "left")
        assert "Mach number 8.2" in driver.screen()
        await driver.press("m")
        await driver.until(lambda: screen.peek.due is None)
        assert len(screen.peek.spans) == 1


async def test_a_result_of_a_line_no_longer_drawn_is_dropped(path: Path) -> None:
    async with opened(path) as driver:
        screen = await to_peek(driver)
        await driver.press("+", "+", "-", "y")
        await driver.until(lambda: screen.peek.due is None)
        assert screen.peek.curve.axes[0].values[-1] == pytest.approx(0.7)


async def test_a_study_is_made_undone_saved_and_read_again(path: Path) -> None:
    async with opened(path) as driver:
        await to_peek(driver)
        await driver.press("s", "ctrl+u")
        await driver.type("heat")
        await driver.press("enter")
        assert "study heat made; u takes it back, s in the table saves the case" in driver.screen()
        assert driver.session.case.studies["heat"]["outputs"] == ("specific_impulse",)
        await driver.press("s", "ctrl+u")
        await driver.type("heat")
        await driver.press("enter")
        assert "there is a study of this name" in driver.screen()
        await driver.press("escape", "u")
        assert not driver.session.case.studies and "undone: study heat made" in driver.screen()
        await driver.press("U", "s")
        await driver.until(lambda: not driver.session.unsaved)
        vary = load(path).studies["heat"]["vary"][0]
        assert dict(vary) == {"input": HEAT, "from": 0.4, "to": 0.8, "points": 41}
        assert 'title = "Plain hydrogen scramjet"   # invented' in path.read_text()


async def test_picture_and_data_are_written_and_nothing_is_overwritten(path: Path, tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.chdir(tmp_path)
    async with opened(path) as driver:
        screen = await to_peek(driver)
        for message in ("written: ", "exists already and is not overwritten"):
            await driver.press("w", "ctrl+u")
            await driver.type("curve")
            await driver.press("enter")
            await driver.until(lambda message=message: message in screen.message)
        assert ET.parse(tmp_path / "curve.svg").getroot().tag.endswith("svg")
        rows = list(csv.DictReader(io.StringIO((tmp_path / "curve.csv").read_text(), newline="")))
        assert [float(r["specific impulse, s"]) for r in rows[:41]] == list(screen.peek.curve.figures["specific_impulse"])
        assert {r["status"] for r in rows} == {"solved"}


async def test_plots_go_by_kind_and_quantity_and_losses_by_account(path: Path) -> None:
    async with opened(path, size=(120, 40)) as driver:
        await driver.settled()
        await driver.press("l")
        assert "Mach number by station" in driver.screen() and "pressure by station" in driver.screen()
        await driver.press("right")
        assert "temperature and entropy" in driver.screen()
        await driver.press("3", "l")
        assert "no log axis: enthalpy" in driver.screen()
        await driver.press("escape", "f")
        assert "ideal thrust" in driver.screen() and "uninstalled thrust" in driver.screen()
        await driver.press("3")
        assert "entropy made" in driver.screen()


async def test_the_page_of_the_duct_offers_its_pictures(tmp_path: Path, state: Path) -> None:
    async with opened(shutil.copy(CASES / "breakwater.toml", tmp_path / "b.toml")) as driver:
        await driver.settled()
        await driver.press("d")
        assert "l draws it" in driver.screen()
        await driver.press("l")
        assert "wall pressure along the duct" in driver.screen()


@pytest.mark.parametrize("size", [(20, 5), (40, 12), (200, 60)])
async def test_every_picture_stands_on_any_screen(path: Path, size: tuple[int, int]) -> None:
    async with opened(path, size=size) as driver:
        screen = await to_peek(driver)
        assert len(driver.screen().splitlines()) == size[1]
        await driver.press("m", "enter")
        await driver.until(lambda: screen.peek.due is None)
        await driver.press("escape", "l", "right", "right", "escape", "f", "right", "right")
        assert len(driver.screen().splitlines()) == size[1]


async def test_without_colour_only_attributes_are_used(path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setenv("NO_COLOR", "1")
    async with opened(path) as driver:
        screen = await to_peek(driver)
        await driver.press("m")
        await driver.type("mach")
        await driver.press("enter")
        await driver.until(lambda: screen.peek.due is None)
        styles = {style for row in screen._sheet._rows for _, style in row}
        assert styles and all(s.color is None and s.bgcolor is None for s in styles)
