"""What moves the walk and what limits it, on the screen: sensitivities, their list, the list of limits, solving for a limit."""

from __future__ import annotations

import threading
from pathlib import Path

import pytest

from cycle.case import Case, template
from cycle.limit_solving import solve_for_limit
from cycle.sensitivity import Sensitivities, sensitivities
from cycle.units import format_number
from tests.case_files import case_file
from tests.tui.screen_support import Driver, opened, to_input
from tui import figures, items
from tui.figures import Figures
from tui.screens import desk
from tui.screens.main import MainScreen
from tui.screens.page import Page
from tui.screens.roster import Roster
from tui.session import watched


def copied(name: str, folder: Path) -> Path:
    path = folder / f"{name}.toml"
    path.write_bytes(case_file(name).read_bytes())
    return path


@pytest.fixture
def path(tmp_path: Path, state: Path) -> Path:
    return copied("plain", tmp_path)


async def weighed(driver: Driver) -> Sensitivities:
    await driver.settled()
    await driver.until(lambda: driver.session.influence is not None and driver.session.influence.generation == driver.session.generation)
    return driver.session.influence.found


def answer(driver: Driver) -> str:
    return driver.screen().splitlines()[-2]


async def to_list(driver: Driver, key: str) -> None:
    await driver.press(key)
    await driver.until(lambda: isinstance(driver.app.screen, Roster))


async def to_row(driver: Driver, name: str) -> None:
    await driver.press("home")
    for _ in range(40):
        if driver.app.screen.name_in_hand == name:
            return
        await driver.press("down")
    raise AssertionError(f"no row {name}: {driver.screen()}")


async def test_the_answer_line_gives_what_a_step_of_the_input_in_hand_does(path: Path) -> None:
    async with opened(path) as driver:
        await weighed(driver)
        await driver.press("right", "right", "right")
        await to_input(driver, "combustor.equivalence_ratio")
        row = sensitivities(driver.session.case).row("combustor.equivalence_ratio")
        assert answer(driver).startswith("+0.01: thrust ")
        for key, factor, unit in (("thrust", 1e3, "kN"), ("specific_impulse", 1.0, "s"), ("specific_thrust", 1.0, "N s/kg")):
            assert f"+{format_number(row.changes[key] / factor, 3)} {unit}" in answer(driver)
        assert "| 0 to 5" in answer(driver)
        await driver.press("t")
        assert f"+{format_number(row.changes['thrust'] / 4.4482216152605, 3)} lbf" in answer(driver)


async def test_one_sided_and_left_out_inputs_say_so(path: Path) -> None:
    async with opened(path) as driver:
        await weighed(driver)
        await driver.press("end")
        await to_input(driver, "nozzle.divergence_factor")
        assert answer(driver).startswith("-0.005 (below only): thrust -")
        await driver.press("home")
        await to_input(driver, "limits.dynamic_pressure_low")
        assert answer(driver).startswith("not varied: a threshold of a limit")


async def test_a_walk_without_a_solution_has_no_sensitivities_and_says_why(path: Path) -> None:
    async with opened(path) as driver:
        await weighed(driver)
        await driver.press("right", "right", "right")
        await to_input(driver, "combustor.equivalence_ratio")
        await driver.press("enter")
        await driver.type("1.5")
        await driver.press("enter")
        assert not (await weighed(driver)).rows
        assert answer(driver).startswith("no sensitivities: no solution: burner: the heat")
        await to_list(driver, "i")
        assert "no sensitivities: no solution: burner: the heat" in driver.screen()


async def test_a_limit_of_the_walk_before_is_not_searched_for_in_a_case_that_has_none(path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    assess, hold = figures.assess, threading.Event()

    def slow(found: Figures) -> Figures:
        hold.wait(10)
        return assess(found)

    async with opened(path) as driver:
        await weighed(driver)
        monkeypatch.setattr(figures, "assess", slow)
        assert driver.main.change({"set": {"gas.model": "constant-gamma", "nozzle.chemistry": None}})
        await driver.until(lambda: driver.session.settled)
        await to_list(driver, "w")
        await to_row(driver, "data_high")
        await driver.press("s")
        assert driver.main._seeking is None and isinstance(driver.app.screen, Roster)
        assert "limits are being assessed" in driver.screen()
        hold.set()
        await driver.settled()
        assert driver.main._seeking is None and driver.main._wanted is None and "data_high" not in driver.screen()


async def test_a_search_asked_for_early_begins_when_the_limits_are_there(path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    assess, hold = figures.assess, threading.Event()

    def slow(found: Figures) -> Figures:
        hold.wait(10)
        return assess(found)

    async with opened(path) as driver:
        await weighed(driver)
        monkeypatch.setattr(figures, "assess", slow)
        assert driver.main.change({"set": {"flight.mach": 8.1}})
        await driver.until(lambda: driver.session.settled)
        await to_list(driver, "w")
        await to_row(driver, "ignition_temperature")
        await driver.press("s")
        assert driver.main._seeking is None and "limits are being assessed" in driver.screen()
        hold.set()
        await driver.until(lambda: "gives margin 0" in driver.screen())


async def test_stale_sensitivities_are_dropped_and_those_before_stand_dimmed(path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    weigh, hold, asked = figures.influence, threading.Event(), []

    def slow(found: Figures) -> Sensitivities:
        asked.append(found.at("0", "mach"))
        hold.wait(10)
        return weigh(found)

    async with opened(path) as driver:
        before = await weighed(driver)
        await to_input(driver, "flight.mach")
        monkeypatch.setattr(figures, "influence", slow)
        await driver.press("plus")
        await driver.until(lambda: asked)
        await driver.press("plus")
        await driver.until(lambda: driver.session.settled)
        assert driver.session.influence.found is before
        assert all(style.dim for c, style in driver.main.query_one("#answer")._rows[0] if c.strip())
        hold.set()
        after = await weighed(driver)
        assert asked[-1] == pytest.approx(8.2)
        assert after.row("flight.mach").value == pytest.approx(8.2)
        await driver.until(lambda: not any(style.dim for _, style in driver.main.query_one("#answer")._rows[0]))


async def test_a_held_step_key_weighs_only_where_it_rests(path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    weigh, asked = figures.influence, []
    monkeypatch.setattr(figures, "influence", lambda found: (asked.append(found.at("0", "mach")), weigh(found))[1])
    # longer than any pause between two presses of this test, however slow the machine
    monkeypatch.setattr(desk, "HELD", 2.0)
    async with opened(path) as driver:
        await weighed(driver)
        await to_input(driver, "flight.mach")
        asked.clear()
        for _ in range(6):
            await driver.press("plus")
        await weighed(driver)
        assert asked[-1] == pytest.approx(8.6)
        # the first step is no held key yet
        assert len(asked) <= 2


async def test_the_list_of_inputs_is_ranked_by_the_watched_figure_and_goes_to_an_input(path: Path) -> None:
    async with opened(path) as driver:
        known = await weighed(driver)
        await to_list(driver, "i")

        def ranked() -> list[str]:
            return [c.name for c in driver.app.screen._rows(80, "")]

        assert ranked() == [r.input.key for r in known.ranked("specific_impulse")]
        await driver.press("y")
        assert watched(driver.session) == "specific_thrust"
        assert ranked() == [r.input.key for r in known.ranked("specific_thrust")]
        assert "by per kg air" in driver.screen()
        await to_row(driver, "inlet.pressure_ratio")
        await driver.press("enter")
        await driver.until(lambda: isinstance(driver.app.screen, MainScreen))
        assert (driver.session.station, driver.session.focus) == ("2", "inputs")
        assert items.in_hand(driver.session).key == "inlet.pressure_ratio"


async def test_inputs_without_a_value_stand_last_with_the_reason(tmp_path: Path, state: Path) -> None:
    async with opened(copied("tidegate", tmp_path), (120, 40)) as driver:
        known = await weighed(driver)
        await to_list(driver, "i")
        await driver.press("end")
        last = known.ranked("specific_impulse")[-1]
        assert last.side == "none"
        assert driver.app.screen.name_in_hand == last.input.key
        assert "no change told" in driver.screen() and last.reason[:40] in driver.screen()
        assert "not varied: " in driver.screen() and "limits.*" in driver.screen()


async def test_a_wide_screen_shows_limits_sensitivities_and_losses_together(tmp_path: Path, state: Path) -> None:
    async with opened(copied("tidegate", tmp_path), (120, 40)) as driver:
        known = await weighed(driver)
        await driver.until(lambda: "what moves Isp most" in driver.screen())
        text = driver.screen()
        for row in known.ranked("specific_impulse")[:3]:
            assert f"| {row.input.label}" in text
        assert "limits by margin" in text and "not assessed" in text and "uninstalled thrust" in text
        await driver.press("y")
        assert "what moves per kg air most, N s/kg" in driver.screen()


async def test_a_rig_has_sensitivities_of_its_own_figures(tmp_path: Path, state: Path) -> None:
    path = tmp_path / "rig.toml"
    path.write_text(template("entry"))
    async with opened(path) as driver:
        known = await weighed(driver)
        assert known.outputs[0] == "stream_thrust_gain"
        await to_input(driver, "entry.mach")
        assert "stream-thrust gain" in answer(driver)
        await to_list(driver, "i")
        assert "by stream-thrust gain" in driver.screen()


async def test_limits_stand_by_closeness_and_lead_to_their_input(path: Path) -> None:
    async with opened(path) as driver:
        found = await driver.settled()
        await to_list(driver, "w")
        names = [c.name for c in driver.app.screen._rows(80, "")]
        assessed = sorted((m for m in found.limits if m.state != "not assessed"), key=lambda m: m.margin)
        assert names[: len(assessed)] == [m.key for m in assessed]
        assert "audit ok" in driver.screen() and "Cantera check: not run" in driver.screen()
        assert assessed[0].restore in driver.screen()
        await to_row(driver, "gas_temperature")
        assert "not assessed: limits.gas_temperature is not given" in driver.screen()
        await driver.press("a")
        await driver.until(lambda: isinstance(driver.app.screen, Page))
        assert "where the thrust potential went" in driver.screen()
        await driver.press("escape")
        await driver.until(lambda: isinstance(driver.app.screen, Roster))
        await to_row(driver, "nozzle_separation")
        await driver.press("enter")
        await driver.until(lambda: isinstance(driver.app.screen, MainScreen))
        assert items.in_hand(driver.session).key == "nozzle.exit_area_over_capture"


async def solved_for(driver: Driver, limit: str) -> None:
    await to_list(driver, "w")
    await to_row(driver, limit)
    await driver.press("s")
    await driver.until(lambda: isinstance(driver.app.screen, Page))


async def test_a_limit_is_solved_for_and_its_value_taken_as_an_edit_that_can_be_undone(path: Path) -> None:
    async with opened(path) as driver:
        await driver.settled()
        case: Case = driver.session.case
        found = solve_for_limit(case, "ignition_temperature", "inlet.pressure_ratio")
        await solved_for(driver, "ignition_temperature")
        assert f"pressure ratio {found.value:.6g} gives margin 0; now 75" in driver.screen()
        await driver.press("enter")
        after = await driver.settled()
        assert driver.session.case.value("inlet.pressure_ratio") == found.value
        assert 0.0 <= next(m.margin for m in after.limits if m.key == "ignition_temperature") <= 1e-6
        await driver.press("escape")
        await driver.until(lambda: isinstance(driver.app.screen, MainScreen))
        await driver.press("u")
        assert driver.session.case == case


async def test_a_value_found_may_be_left_and_keeps_the_unit_of_the_case_where_taken(path: Path) -> None:
    async with opened(path) as driver:
        await driver.settled()
        await solved_for(driver, "corridor_high")
        await driver.press("escape")
        assert not driver.session.unsaved
        await driver.until(lambda: isinstance(driver.app.screen, Roster))
        await driver.press("s")
        await driver.until(lambda: isinstance(driver.app.screen, Page))
        await driver.press("enter")
        await driver.settled()
        # 96 kPa is the limit itself; the case said 50 kPa
        assert driver.session.case.spelled["flight.dynamic_pressure"] == "96 kPa"


async def test_a_limit_is_solved_for_by_another_input(path: Path) -> None:
    async with opened(path) as driver:
        await driver.settled()
        await to_list(driver, "w")
        await to_row(driver, "ignition_temperature")
        await driver.press("o")
        await driver.until(lambda: "by which input" in driver.screen())
        await driver.type("flight.mach")
        await driver.press("enter")
        await driver.until(lambda: isinstance(driver.app.screen, Page))
        found = solve_for_limit(driver.session.case, "ignition_temperature", "flight.mach")
        assert f"Mach number {found.value:.6g} gives margin 0; now 8" in driver.screen()


async def test_a_limit_that_is_not_reached_says_so_and_offers_nothing_to_take(path: Path) -> None:
    async with opened(path) as driver:
        await driver.settled()
        await solved_for(driver, "data_high")
        assert "The limit is not reached: beyond equivalence ratio 1.15483" in driver.screen()
        await driver.press("escape")
        await driver.until(lambda: isinstance(driver.app.screen, Roster))
        await to_row(driver, "isolator_length")
        await driver.press("s")
        await driver.until(lambda: isinstance(driver.app.screen, Page) or "by which input" in driver.screen())
        assert not driver.session.unsaved


async def test_a_search_that_is_left_takes_nothing(path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    hold = threading.Event()
    reaching = figures.reaching

    def slow(*asked: str) -> object:
        hold.wait(10)
        yield from reaching(*asked)

    monkeypatch.setattr(figures, "reaching", slow)
    async with opened(path) as driver:
        await driver.settled()
        await to_list(driver, "w")
        await driver.press("s")
        assert "solving for " in driver.screen()
        await driver.press("escape")
        await driver.until(lambda: isinstance(driver.app.screen, MainScreen))
        hold.set()
        await driver.press("plus")
        await weighed(driver)
        assert isinstance(driver.app.screen, MainScreen)
