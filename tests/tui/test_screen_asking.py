"""What the screen answers about a figure: where it comes from, where it stands, and any action by its name."""

from __future__ import annotations

from pathlib import Path

import pytest

from cycle.units import show
from tests.case_files import case_file
from tests.tui.screen_support import CASES, Driver, opened, to_input
from tui import finding, tracing
from tui.screens.roster import Roster
from tui.session import Session
from tui.tracing import HEADLINE, Place


@pytest.fixture
def path(tmp_path: Path, state: Path) -> Path:
    """A case with its place of flight said by the dynamic pressure."""
    file = tmp_path / "case.toml"
    file.write_text(case_file("plain").read_text())
    return file


def roster(driver: Driver) -> Roster:
    assert isinstance(driver.app.screen, Roster)
    return driver.app.screen


async def to_row(driver: Driver, name: str) -> None:
    """Bring a row of the list to hand by the arrow keys, once the worker has given it."""
    await driver.until(lambda: any(o.name == name for o in driver.main._tracer._origins()))
    await driver.press("home")
    for _ in range(40):
        if roster(driver).name_in_hand == name:
            return
        await driver.press("down")
    raise AssertionError(f"no row {name}: {driver.screen()}")


async def test_specific_impulse_is_followed_down_to_an_input_and_back(path: Path) -> None:
    chain = (
        Place("specific_impulse"),
        Place("thrust"),
        Place("pressure", "station 10"),
        Place("temperature", "station 4"),
        Place("combustor.burnt_fraction"),
    )
    async with opened(path) as driver:
        walk = (await driver.settled()).walk
        await driver.press("e", "h")
        for place in chain:
            await to_row(driver, f"{place.key} @ {place.where}")
            await driver.press("enter")
            assert driver.main._tracer.place == place
        screen = driver.screen()
        assert "0.92" in screen
        assert "above 0 to 1" in screen
        for place in reversed(chain[:-1]):
            await driver.press("left")
            assert driver.main._tracer.place == place
            source = walk.station[place.station] if place.station else walk.performance
            shown, unit = show(getattr(source, place.key), tracing.entry_of(place).unit, "si", place.key)
            assert f"{shown:.6g} {unit}" in driver.screen()
        assert f"/ (9.80665 * {walk.performance.fuel_flow:.6g})" in driver.screen()
        await driver.press("backspace")
        assert driver.main._tracer.place == HEADLINE


async def test_from_an_explained_figure_the_cursor_goes_to_an_input(path: Path) -> None:
    async with opened(path) as driver:
        await driver.settled()
        await driver.press("e", "h")
        await to_row(driver, "equivalence_ratio @ ")
        await driver.press("enter")
        await to_row(driver, "combustor.equivalence_ratio @ ")
        await driver.press("t")
        assert driver.app.screen is driver.main
        assert (driver.session.station, driver.session.focus) == ("4", "inputs")
        assert driver.main._hand().key == "combustor.equivalence_ratio"


async def test_figure_that_a_failed_walk_lacks_says_why_and_leads_to_the_status(state: Path) -> None:
    async with opened(CASES / "narrows.toml") as driver:
        found = await driver.settled()
        await driver.press("end", "e")
        await driver.until(lambda: "largest equivalence ratio here" in driver.screen())
        assert "no value: " in driver.screen()
        await driver.press("enter")
        assert driver.main._tracer.place == Place(found.status)
        assert "add less heat" in driver.screen()
        assert {"combustor.equivalence_ratio", "pressure"} <= {o.place.key for o in driver.main._tracer._origins()}


async def test_page_follows_a_walk_that_comes_while_it_is_open(path: Path) -> None:
    async with opened(path) as driver:
        before = (await driver.settled()).performance["thrust"]
        await to_input(driver, "flight.mach")
        await driver.press("plus", "e", "h")
        await to_row(driver, "thrust @ ")
        await driver.press("enter")
        after = (await driver.settled()).performance["thrust"]
        assert after != before
        await driver.until(lambda: f"{after / 1e3:.6g} kN" in driver.screen())
        await driver.until(lambda: "= " in driver.screen() and f"{after:.6g}" in driver.screen())


@pytest.mark.parametrize("name", ["tidegate", "bench-three", "narrows", "lighthouse"])
async def test_everything_that_is_found_can_be_explained(name: str, state: Path) -> None:
    async with opened(CASES / f"{name}.toml") as driver:
        walk = (await driver.settled()).walk
        session = driver.session
        for found in finding.everything(session):
            for origin in tracing.origins(session, found.place, tracing.worked(found.place, walk)):
                assert origin.place is None or tracing.entry_of(origin.place)


async def session_of(driver: Driver) -> Session:
    await driver.settled()
    return driver.session


async def test_names_are_found_by_symbol_by_word_and_nearly(path: Path) -> None:
    async with opened(path) as driver:
        everywhere = finding.everything(await session_of(driver))

        def first(text: str) -> str:
            return finding.ranked(everywhere, text)[0].place.key

        assert first("Tt") == "total_temperature"
        assert first("Isp") == "specific_impulse"
        assert first("isp") == "specific_impulse"
        assert first("burnt") == "combustor.burnt_fraction"
        assert first("fraction burnt") == "combustor.burnt_fraction"
        assert first("equivalance ratio") == "combustor.equivalence_ratio"
        assert first("nozzle.exit_pressure") == "nozzle.exit_pressure"
        assert first("choked") == "choked"
        assert [f.kind for f in finding.ranked(everywhere, "flight.altitude")][:1] == ["another way"]
        assert finding.ranked(everywhere, "zzzzqqqq") == []
        assert finding.at_stations(driver.session, "Tt4")[0].place == Place("total_temperature", "station 4")


async def test_find_goes_to_a_row_to_an_input_and_to_another_way_of_saying(path: Path) -> None:
    async with opened(path) as driver:
        await driver.settled()
        await driver.press("slash")
        await driver.type("Tt4")
        await driver.press("enter")
        assert (driver.session.station, driver.session.focus) == ("4", "table")
        await driver.press("e")
        assert driver.main._tracer.place == Place("total_temperature", "station 4")
        await driver.press("slash")
        await driver.type("burnt")
        await driver.press("enter")
        assert driver.main._hand().key == "combustor.burnt_fraction"
        await driver.press("slash")
        await driver.type("flight.altitude")
        await driver.press("enter")
        assert driver.main._hand().key == "flight.dynamic_pressure"
        assert "another way" in driver.session.note
        await driver.press("slash")
        await driver.type("Isp")
        await driver.press("tab")
        assert driver.main._tracer.place == Place("specific_impulse")


async def test_palette_runs_an_action_by_name(path: Path) -> None:
    async with opened(path) as driver:
        await driver.settled()
        await driver.press("colon")
        await driver.type("units")
        await driver.press("enter")
        assert driver.session.system == "us"
        await driver.press("ctrl+p")
        await driver.type("another quantity")
        assert roster(driver).name_in_hand == "ways"


async def test_digit_opens_the_number_in_hand_and_types_over(path: Path) -> None:
    async with opened(path) as driver:
        await driver.settled()
        await driver.press("7")
        assert driver.session.entry is None, "the table is in hand"
        await to_input(driver, "flight.mach")
        await driver.type("7.5")
        assert driver.session.entry.text == "7.5"
        await driver.press("enter")
        assert driver.session.case.value("flight.mach") == 7.5
        await to_input(driver, "gas.model")
        await driver.press("7")
        assert driver.session.entry is None, "a choice is no number"


async def test_ten_steps_are_one_edit(path: Path) -> None:
    async with opened(path) as driver:
        await driver.settled()
        await to_input(driver, "flight.dynamic_pressure")
        await driver.press("greater_than_sign")
        assert driver.session.case.value("flight.dynamic_pressure") == pytest.approx(60e3)  # ten steps of 1 kPa
        await driver.press("u")
        assert driver.session.case.value("flight.dynamic_pressure") == pytest.approx(50e3)
        await driver.press("less_than_sign")
        assert driver.session.case.value("flight.dynamic_pressure") == pytest.approx(40e3)
