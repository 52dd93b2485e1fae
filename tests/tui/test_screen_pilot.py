"""The interactive screen by Textual's pilot: walking, edits, faults, undo, stale results, units, ways, pin, referee."""

from __future__ import annotations

import threading
import time
from pathlib import Path

import pytest

import cycle
from cycle.case import Case, template
from tests.tui.screen_support import CASES, opened, to_input
from tests.tui.test_screen_parts import TEXT
from tui import figures, items
from tui.actions import ACTIONS
from tui.figures import Figures
from tui.screens.main import MainScreen
from tui.screens.page import Page


@pytest.fixture
def path(tmp_path: Path, state: Path) -> Path:
    file = tmp_path / "case.toml"
    file.write_text(TEXT)
    return file


async def test_opens_and_walks_the_stations_with_their_inputs(path: Path) -> None:
    async with opened(path) as driver:
        found = await driver.settled()
        assert found.solved
        assert driver.session.station == "0"
        assert "altitude" in driver.screen()
        await driver.press("right")
        assert driver.session.station == "2"
        assert "temperature ratio" in driver.screen()
        await driver.press("right", "right", "right", "right", "right")
        assert driver.session.station == "10"
        await driver.press("tab", "left")
        assert driver.session.station == "4"
        assert "heating value" in driver.screen()


async def test_edit_in_place_solves_and_shows_the_change_against_the_pin(path: Path) -> None:
    async with opened(path) as driver:
        before = await driver.settled()
        await to_input(driver, "flight.altitude")
        await driver.press("enter")
        assert "a bare number is in kft" in driver.screen()
        await driver.type("90")
        await driver.press("enter")
        after = await driver.settled()
        assert driver.session.case.value("flight.altitude") == pytest.approx(90e3 * 0.3048, rel=1e-12)  # exact unit
        assert after.performance["thrust"] < before.performance["thrust"]
        assert driver.session.pin.figures.walk is before.walk
        assert "90 kft" in driver.screen()
        assert " -" in driver.screen().splitlines()[1]


async def test_live_figures_are_those_of_the_batch_interface(path: Path) -> None:
    async with opened(path) as driver:
        found = await driver.settled()
        assert found.performance["thrust"] == cycle.solve(cycle.load(str(path))).performance.thrust


async def test_bad_entry_says_why_and_keeps_the_field(path: Path) -> None:
    async with opened(path) as driver:
        await driver.settled()
        generation = driver.session.generation
        await to_input(driver, "flight.altitude")
        await driver.press("enter")
        await driver.type("9 parsec")
        await driver.press("enter")
        assert driver.session.entry.text == "9 parsec"
        assert '"9 parsec"' in driver.session.entry.fault
        assert "kft" in driver.session.entry.fault
        assert "parsec" in driver.screen().splitlines()[-2]
        assert driver.session.generation == generation
        await driver.press("backspace")
        assert driver.session.entry.fault == ""
        await driver.press("escape")
        assert driver.session.entry is None
        assert "85 kft" in driver.screen()


async def test_letters_in_a_field_are_text_not_actions(path: Path) -> None:
    async with opened(path) as driver:
        await driver.settled()
        await to_input(driver, "flight.altitude")
        await driver.press("enter")
        await driver.type("qsu")
        assert driver.session.entry.text == "qsu"
        assert driver.app.is_running


async def test_step_keys_undo_and_redo(path: Path) -> None:
    async with opened(path) as driver:
        await driver.settled()
        await to_input(driver, "flight.mach")
        await driver.press("plus", "plus", "minus", "plus")
        await driver.settled()
        assert driver.session.case.value("flight.mach") == pytest.approx(6.2, rel=1e-12)
        await driver.press("u", "u", "u")
        assert driver.session.case.value("flight.mach") == pytest.approx(6.1, rel=1e-12)
        await driver.press("U")
        assert driver.session.case.value("flight.mach") == pytest.approx(6.2, rel=1e-12)
        assert "redone: Mach number" in driver.screen()
        await driver.press("u", "u")
        assert not driver.session.unsaved


async def test_a_held_step_key_paints_at_most_four_times_a_second(path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    async with opened(path) as driver:
        await driver.settled()
        await to_input(driver, "flight.mach")
        painted: list[float] = []
        paint = driver.main.paint
        monkeypatch.setattr(driver.main, "paint", lambda: (painted.append(driver.session.case.value("flight.mach")), paint()))
        began = time.monotonic()
        for _ in range(20):
            await driver.pilot.press("plus")
            await driver.pilot.pause(0.02)
        elapsed, paints = time.monotonic() - began, len(painted)
        await driver.until(lambda: painted and painted[-1] == driver.session.case.value("flight.mach"))
        # four a second, the one that opens the row and the one that waits; every press painted would be 20 in half a second
        assert 1 <= paints <= 4.0 * elapsed + 2.0
        assert painted[-1] == pytest.approx(8.0, rel=1e-12)


async def test_stale_results_are_dropped(path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    solve, hold, solved = figures.solve, threading.Event(), []

    def slow(case: Case) -> Figures:
        hold.wait(10)
        solved.append(case.value("flight.mach"))
        return solve(case)

    async with opened(path) as driver:
        await driver.settled()
        monkeypatch.setattr(figures, "solve", slow)
        await to_input(driver, "flight.mach")
        for _ in range(6):
            await driver.press("plus")
        assert not driver.session.settled
        hold.set()
        found = await driver.settled()
        assert found.at("0", "mach") == pytest.approx(6.6, rel=1e-9)
        assert len(solved) < 6
        assert solved[-1] == pytest.approx(6.6, rel=1e-12)


async def test_failure_is_said_and_the_last_good_walk_stands_in_parentheses(path: Path) -> None:
    async with opened(path) as driver:
        await driver.settled()
        await driver.press("right", "right", "right")
        await to_input(driver, "combustor.fuel_air_ratio")
        await driver.press("enter")
        await driver.type("0.5")
        await driver.press("enter")
        found = await driver.settled()
        assert found.status == "choked"
        text = driver.screen()
        assert "NO SOLUTION: burner" in text
        assert "largest fuel-air ratio here" in text
        assert "figures in ( ) as of the previous inputs" in text
        mach = next(row for row in text.splitlines() if row.startswith("Mach "))
        assert mach.count("(") == 2  # burner exit and nozzle exit; flight, inlet and isolator stay live
        await driver.press("u")
        assert (await driver.settled()).solved
        assert "NO SOLUTION" not in driver.screen()


async def test_unit_toggle(path: Path) -> None:
    async with opened(path) as driver:
        await driver.settled()
        assert "T, K" in driver.screen()
        await driver.press("t")
        text = driver.screen()
        assert "T, degR" in text
        assert "lbf" in text
        await driver.press("t")
        assert "T, K" in driver.screen()


async def test_another_way_of_saying_it_leaves_the_walk_where_it_is(path: Path) -> None:
    async with opened(path) as driver:
        before = await driver.settled()
        await driver.press("right")
        await to_input(driver, "inlet.temperature_ratio")
        await driver.press("o")
        assert isinstance(driver.app.screen, Page)
        assert "pressure ratio [" in driver.screen()
        await driver.press("1")
        await driver.pilot.pause()
        after = await driver.settled()
        assert driver.session.case.value("inlet.end") == "pressure_ratio"
        # the value goes through the same laws both ways: round-off of a closed-form inversion
        assert after.performance["thrust"] == pytest.approx(before.performance["thrust"], rel=1e-9)
        assert driver.main._hand().key == "inlet.pressure_ratio"


async def test_choices_cycle_and_defaults_come_back(path: Path) -> None:
    async with opened(path) as driver:
        await driver.settled()
        await driver.press("right", "right", "right")
        await to_input(driver, "combustor.process")
        await driver.press("enter")
        assert driver.session.case.value("combustor.process") == "constant-pressure"
        await driver.press("delete")
        assert driver.session.case.value("combustor.process") == "constant-area"
        await driver.settled()


async def test_inputs_out_of_sight_are_marked_and_scrolled_to(path: Path) -> None:
    async with opened(path) as driver:
        await driver.settled()
        rows = driver.screen().splitlines()
        assert rows[21].endswith("v")  # the last line of inputs; a constant-gamma case has more than ten at the first station
        assert not rows[17].endswith("^")
        await to_input(driver, items.items(driver.session)[-1].key)
        rows = driver.screen().splitlines()
        assert rows[17].endswith("^")
        assert items.items(driver.session)[-1].label[:20] in driver.screen()


async def test_views_of_the_cells(path: Path) -> None:
    async with opened(path) as driver:
        await driver.settled()
        await to_input(driver, "flight.mach")
        await driver.press("plus")
        await driver.settled()
        await driver.press("v")
        mach = next(row for row in driver.screen().splitlines() if row.startswith("Mach "))
        assert "+0.1" in mach
        await driver.press("v", "p")
        await driver.settled()
        mach = next(row for row in driver.screen().splitlines() if row.startswith("Mach "))
        assert mach.split()[1] == "+0"


@pytest.mark.parametrize("size", [(20, 5), (40, 12), (79, 23), (120, 40), (200, 60), (3, 2)])
async def test_any_size_holds_and_takes_keys(path: Path, size: tuple[int, int]) -> None:
    async with opened(path, size) as driver:
        await driver.settled()
        await driver.press("right", "down", "tab", "plus", "o", "escape", "enter", "1", "escape", "w", "down", "escape")
        await driver.press("question_mark", "end", "escape", "u")
        await driver.settled()
        assert driver.session.case.value("flight.mach") == 6.0


async def test_wide_screens_show_margins_and_where_the_thrust_went(path: Path) -> None:
    async with opened(path, (120, 40)) as driver:
        await driver.settled()
        text = driver.screen()
        assert "limits by margin" in text
        assert "where the thrust potential went" in text


async def test_help_lists_every_action(path: Path) -> None:
    async with opened(path, (140, 90)) as driver:
        await driver.settled()
        await driver.press("question_mark")
        await driver.until(lambda: "in a field" in driver.screen().lower())
        text = driver.screen()
        for action in ACTIONS:
            assert action.help in text
        await driver.press("escape")
        await driver.until(lambda: isinstance(driver.app.screen, MainScreen))


async def test_a_rig_shows_its_own_headline_and_stations(tmp_path: Path, state: Path) -> None:
    path = tmp_path / "rig.toml"
    path.write_text(template("entry"))
    async with opened(path) as driver:
        found = await driver.settled()
        assert found.mode == "rig"
        assert "stream-thrust gain" in driver.screen() or "dF" in driver.screen()
        assert driver.session.station == next(iter(found.stations))
        assert "entry Mach number" in driver.screen()


@pytest.mark.parametrize("name", sorted(p.name for p in CASES.glob("*.toml")))
async def test_every_shipped_case_opens_and_walks(name: str, tmp_path: Path, state: Path) -> None:
    path = tmp_path / name
    path.write_bytes((CASES / name).read_bytes())
    async with opened(path, (120, 40)) as driver:
        await driver.settled()
        for _ in range(6):
            await driver.press("right")
        await driver.press("tab", "down", "down", "left", "t", "v", "w", "escape")
        assert driver.app.is_running


async def test_the_referee_is_asked_by_a_key_and_forgotten_with_the_next_edit(tmp_path: Path, state: Path) -> None:
    path = tmp_path / "saltmarsh.toml"
    path.write_bytes((CASES / "saltmarsh.toml").read_bytes())
    async with opened(path) as driver:
        await driver.settled()
        assert "Cantera check: not run" in driver.screen()
        await driver.press("r")
        await driver.until(lambda: "agrees" in driver.session.referee)
        assert "agrees" in driver.screen().splitlines()[2]
        await to_input(driver, "flight.mach")
        await driver.press("plus")
        await driver.settled()
        await driver.until(lambda: "Cantera check: not run" in driver.screen())
