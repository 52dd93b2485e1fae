"""The screen on a whole flowpath by Textual's pilot, and once in a pseudo-terminal: inlet geometry, rows, the duct's page."""

from __future__ import annotations

import threading
from collections.abc import Iterator
from dataclasses import replace
from pathlib import Path

import pytest

import cycle
import cycle.case
from tests.tui.pty_support import Terminal
from tests.tui.screen_support import Driver, opened
from tests.tui.test_screen_flowpath import DUCT, THROAT
from tui import figures, session
from tui.figures import Figures


@pytest.fixture
def path(tmp_path: Path, state: Path) -> Path:
    file = tmp_path / "duct.toml"
    file.write_text(DUCT)
    return file


async def hand(driver: Driver, key: str) -> None:
    """Take an input of the station in hand to hand."""
    driver.main.put(replace(driver.session, focus="inputs"))
    driver.main._take_in_hand(key)
    await driver.pilot.pause()


async def way(driver: Driver, key: str, words: str) -> Figures:
    """Choose another way of saying an input by its words."""
    await hand(driver, key)
    await driver.press("o")
    row = next(r for r in driver.screen().splitlines() if r[4:].startswith(words))
    await driver.press(row.split()[0])
    await driver.pilot.pause()
    return await driver.settled()


async def test_walks_every_station_of_a_flowpath(path: Path) -> None:
    async with opened(path) as driver:
        found = await driver.settled()
        assert found.solved
        seen = []
        for _ in range(6):
            seen.append((driver.session.station, driver.screen()))
            await driver.press("right")
        assert [s for s, _ in seen] == ["0", "1", "2", "3", "4", "10"]
        text = dict(seen)
        assert "ramp 1, angle" in text["1"]
        assert "captured 1" in text["1"]
        assert "cowl turn" in text["2"]
        assert "isolator length" in text["3"]
        assert "attached | p3/p2 1" in text["3"]
        assert "peak p/p2" in text["4"]
        assert "installed" in text["0"].splitlines()[4]


async def test_a_cell_takes_a_unit_and_undo_takes_it_back(path: Path) -> None:
    async with opened(path) as driver:
        before = await driver.settled()
        await hand(driver, "combustor.area.2.x")
        await driver.press("enter")
        assert "a bare number is in cm" in driver.screen()
        await driver.type("20")
        await driver.press("enter")
        after = await driver.settled()
        assert driver.session.case.value("combustor.area.2.x") == pytest.approx(0.2, rel=1e-12)  # exact unit
        assert after.performance["thrust"] != before.performance["thrust"]
        assert driver.session.past[-1].words == "duct section 2, place 30 cm -> 20 cm"
        await driver.press("u")
        assert not driver.session.unsaved


async def test_rows_come_and_go_by_a_key(path: Path) -> None:
    async with opened(path) as driver:
        await driver.settled()
        await hand(driver, "combustor.area.2.area_ratio")
        assert "a, x: a row more, less" in driver.screen()
        await driver.press("a")
        assert driver.main._hand().key == "combustor.area.3.area_ratio"
        assert len(driver.session.case.rows["combustor.area"]) == 4
        await driver.press("o")  # the same area in m2
        await driver.settled()
        assert driver.main._hand().key == "combustor.area.3.area"
        await driver.press("x")
        assert driver.main._hand().key == "combustor.area.3.area_ratio"
        assert len(driver.session.case.rows["combustor.area"]) == 3
        await hand(driver, "combustor.injector.1.x")
        await driver.press("x")
        assert "wrong number of rows" in driver.screen()
        await hand(driver, "fuel.heating_value")
        await driver.press("a")
        assert "stands in no row" in driver.screen()


async def test_an_inlet_goes_to_geometry_and_back_by_the_other_way(path: Path) -> None:
    async with opened(path) as driver:
        before = await driver.settled()
        plain = await way(driver, "inlet.ramp.1.angle", "total-pressure recovery [")
        assert driver.session.station == "2"
        assert "inlet.temperature_ratio" in driver.session.case.given
        # recovery and temperature ratio are taken over with six figures
        assert plain.performance["thrust"] == pytest.approx(before.performance["thrust"], rel=1e-4)
        ramps = await way(driver, "inlet.total_pressure_recovery", "geometry")
        assert ramps.solved
        assert (driver.session.station, driver.main._hand().key) == ("1", "inlet.ramp.1.angle")
        lip = await way(driver, "inlet.lip", "lip place and lip height")
        # the lip stands 0.1 % of its height under where the waves of the walk meet
        assert 0.99 < lip.performance["captured_mass_fraction"] < 1.0
        cone = await way(driver, "inlet.ramp.1.angle", "cone half angle")
        assert cone.solved
        assert driver.session.case.value("inlet.lip") == "none"


async def test_the_burner_goes_to_a_duct_and_back(path: Path) -> None:
    case = cycle.load(path)
    cycle.case.save(case.replace({"combustor.process": "constant-area"}), path, case.stamp)
    async with opened(path) as driver:
        before = await driver.settled()
        await hand(driver, "combustor.process")
        await driver.press("minus")
        after = await driver.settled()
        assert driver.session.case.value("combustor.process") == "duct"
        # a straight duct burns to the same state as a constant-area burner; slices of the march
        assert after.performance["thrust"] == pytest.approx(before.performance["thrust"], rel=1e-5)
        await driver.press("minus")
        assert (await driver.settled()).solved
        assert driver.session.case.value("combustor.process") == "pressure-loss"


async def test_the_page_along_the_duct(path: Path) -> None:
    async with opened(path) as driver:
        found = await driver.settled()
        await driver.press("d")
        await driver.until(lambda: "unstart from" in driver.screen())
        text = driver.screen()
        assert "scramjet: supersonic through the burner" in text
        assert "fuel-air ratio 0.01 now" in text
        assert "fuel" in next(r for r in text.splitlines() if r.split()[:1] == ["0.05"])
        await driver.press("end")
        last = driver.screen().splitlines()[-2].split()
        assert float(last[0]) == pytest.approx(1.2)
        assert float(last[3]) == pytest.approx(found.at("4", "mach"), rel=1e-3)  # four figures are shown
        assert driver.screen().splitlines()[0].startswith("Along the duct (")
        await driver.press("escape")
        await hand(driver, "combustor.fuel_air_ratio")
        await driver.press("plus")
        assert driver.session.borders is None


async def test_without_a_duct_its_page_says_so(tmp_path: Path, state: Path) -> None:
    file = tmp_path / "throat.toml"
    file.write_text(THROAT)
    async with opened(file) as driver:
        found = await driver.settled()
        assert found.mode == "ramjet-critical"
        await driver.press("d")
        assert "no duct" in driver.screen()
        heads = driver.screen().splitlines()[6]
        assert heads.split()[-6:] == ["1", "2", "3", "4", "5", "10"]  # seven stations side by side at 80 columns


async def test_an_unstarted_inlet_is_said_with_what_restores_it(path: Path) -> None:
    async with opened(path) as driver:
        await driver.settled()
        await hand(driver, "combustor.fuel_air_ratio")
        await driver.press("enter")
        await driver.type("0.4")
        await driver.press("enter")
        await driver.settled()
        text = " ".join(driver.screen().split())
        assert "NO SOLUTION: isolator: the inlet does not stay started" in text
        assert "fuel-air ratio 0.4, at most 0." in text
        await driver.press("d")
        await driver.until(lambda: "unstart from" in driver.screen())
        assert "no flow along the duct" in driver.screen()


async def test_a_detached_shock_is_said_with_what_restores_it(path: Path) -> None:
    async with opened(path) as driver:
        await driver.settled()
        await hand(driver, "inlet.lip_x")
        await driver.press("o", "1")
        await driver.settled()
        await hand(driver, "inlet.ramp.3.angle")
        await driver.press("enter")
        await driver.type("44 deg")
        await driver.press("enter")
        found = await driver.settled()
        assert found.status == "detached"
        assert "a smaller turn or a faster flight" in " ".join(driver.screen().split())


async def test_edits_go_on_while_limits_are_assessed(path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    assess, hold = figures.assess, threading.Event()

    def slow(found: Figures) -> Figures:
        hold.wait(10)
        return assess(found)

    async with opened(path) as driver:
        await driver.settled()
        monkeypatch.setattr(figures, "assess", slow)
        await hand(driver, "flight.mach")
        for _ in range(3):
            await driver.press("plus")
            await driver.until(lambda: driver.session.settled)
            assert not driver.session.figures.assessed
        await driver.until(lambda: session.ASSESSING in driver.session.note)
        hold.set()
        found = await driver.settled()
        assert found.at("0", "mach") == pytest.approx(8.3, rel=1e-12)
        assert driver.session.note == ""


@pytest.mark.parametrize("size", [(20, 5), (40, 12), (120, 40), (3, 2)])
async def test_any_size_holds_on_a_flowpath(path: Path, size: tuple[int, int]) -> None:
    async with opened(path, size) as driver:
        await driver.settled()
        for _ in range(6):
            await driver.press("right")
        await driver.press("d", "end", "home", "escape", "left", "tab", "down", "a", "x", "t", "d", "escape", "w", "escape")
        assert driver.app.is_running


@pytest.fixture
def terminal(path: Path, tmp_path: Path) -> Iterator[Terminal]:
    with Terminal([str(path)], env={"XDG_STATE_HOME": str(tmp_path / "state")}) as started:
        started.wait("audit ok")
        started.settle()
        yield started


def test_a_flowpath_in_a_real_terminal(terminal: Terminal) -> None:
    # bars of the design at 80x24: 0 B/s idle, 1 kB a cursor move, 6 kB an edit
    moves = []
    for key in ("right", "right", "right", "right", "right", "left", "down"):
        terminal.press(key)
        moves.append(terminal.settle())
    assert max(moves) <= 1000, moves
    terminal.press("tab", "+")
    assert terminal.settle(0.8) <= 6000
    terminal.press("d")
    terminal.wait("unstart from")
    terminal.press("q")
    terminal.wait("audit ok")
    terminal.settle(0.8)
    assert terminal.pump(1.0) == 0
    terminal.press("q")
    assert terminal.status() == 0
