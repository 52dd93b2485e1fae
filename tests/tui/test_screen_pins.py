"""The pin from elsewhere and from a session before, and walks beside each other, by Textual's pilot."""

from __future__ import annotations

import json
import math
import re
from pathlib import Path

import pytest

import cycle
from cycle.compare import Side, compare
from cycle.record import dumps, record, stored
from cycle.shares import shares
from tests.tui.screen_support import Driver, opened, to_input
from tests.tui.test_screen_parts import TEXT
from tui import keeping, sources
from tui.figures import DEAR, PERFORMANCE_KEYS
from tui.keeping import Kept
from tui.screens.main import MainScreen
from tui.screens.page import Page
from tui.screens.roster import Roster

OTHER = TEXT.replace("mach = 6.0", "mach = 7.0").replace("invented for the tests", "another, invented for the tests")
CHOKED = TEXT.replace("fuel_air_ratio = 0.005", "fuel_air_ratio = 0.05")


@pytest.fixture
def path(tmp_path: Path) -> Path:
    (tmp_path / "other.toml").write_text(OTHER)
    file = tmp_path / "case.toml"
    file.write_text(TEXT)
    return file


async def choose(driver: Driver, key: str, words: str) -> None:
    """Open the list of walks from elsewhere, narrow it down and take the first row."""
    await driver.press(key)
    await driver.until(lambda: isinstance(driver.app.screen, Roster) and "other.toml" in driver.screen())
    await driver.type(words)
    await driver.press("enter")


async def pinned(driver: Driver, label: str) -> None:
    await driver.until(lambda: driver.session.pin is not None and driver.session.pin.label.startswith(label))


def pins(state: Path) -> list[Path]:
    return list(state.glob("*.pin"))


async def kept(driver: Driver, state: Path) -> None:
    await driver.until(lambda: pins(state))


async def test_a_case_of_the_folder_is_pinned_and_the_change_is_against_it(path: Path) -> None:
    expected = cycle.solve(cycle.loads(OTHER, "other"))
    async with opened(path) as driver:
        await driver.settled()
        await choose(driver, "P", "other")
        await pinned(driver, "other")
        pin = driver.session.pin
        assert {k: pin.figures.performance[k] for k in ("thrust", "specific_impulse")} == pytest.approx(
            {"thrust": expected.performance.thrust, "specific_impulse": expected.performance.specific_impulse}, rel=1e-9
        )
        assert all(key in pin.figures.stations["4"] for key in DEAR)
        assert "vs pin: other" in driver.screen()


async def test_a_stored_walk_keeps_the_figures_it_was_stored_with(path: Path, tmp_path: Path) -> None:
    walk = stored(cycle.solve(cycle.loads(OTHER, "other")), "0.0.1")
    walk["walk"]["performance"]["thrust"] = 1234.5  # what another version found
    (tmp_path / "walk.json").write_text(dumps(walk))
    async with opened(path) as driver:
        await driver.settled()
        await choose(driver, "P", "walk.json")
        await pinned(driver, "other, stored")
        pin = driver.session.pin
        assert pin.label.endswith(", version 0.0.1")
        assert pin.figures.performance["thrust"] == 1234.5
        assert pin.figures.walk is None
        assert pin.case.value("flight.mach") == 7.0
        await driver.press("w", "q", "v", "v", "r", "c")
        await driver.until(lambda: "different versions" in driver.screen())


async def test_of_several_stored_walks_one_is_chosen(path: Path, tmp_path: Path) -> None:
    walks = [stored(cycle.solve(cycle.loads(text, name)), cycle.__version__) for text, name in ((TEXT, "one"), (OTHER, "two"))]
    (tmp_path / "walks.json").write_text(dumps(walks))
    async with opened(path) as driver:
        await driver.settled()
        await choose(driver, "P", "walks.json")
        await driver.until(lambda: "Which of the stored walks" in driver.screen())
        await driver.press("down", "enter")
        await pinned(driver, "two, stored")
        assert driver.session.pin.figures.at("0", "mach") == 7.0


async def test_a_moment_of_this_session_is_pinned_and_as_loaded_again(path: Path, state: Path) -> None:
    async with opened(path) as driver:
        await driver.settled()
        await to_input(driver, "flight.mach")
        await driver.press("plus")
        await driver.press("plus")
        await driver.settled()
        await choose(driver, "P", "mach 6 ->")
        await pinned(driver, "Mach number 6 -> 6.1")
        assert driver.session.pin.figures.at("0", "mach") == pytest.approx(6.1, rel=1e-9)
        await kept(driver, state)
        await choose(driver, "P", "as loaded")
        await pinned(driver, "as loaded")
        assert driver.session.pin.figures.at("0", "mach") == pytest.approx(6.0, rel=1e-9)
        await driver.until(lambda: not pins(state))


async def test_a_case_without_a_solution_or_that_is_none_is_not_pinned(path: Path, tmp_path: Path) -> None:
    (tmp_path / "choked.toml").write_text(CHOKED)
    (tmp_path / "faulty.toml").write_text(TEXT.replace("mach = 6.0", "mach = -6.0"))
    async with opened(path) as driver:
        await driver.settled()
        for name, words in (("choked", "has no solution"), ("faulty", "flight.mach")):
            await choose(driver, "P", name)
            await driver.until(lambda: "not pinned" in driver.session.note)
            assert words in driver.session.note
        assert driver.session.pin.label == "as loaded"


@pytest.mark.parametrize("kind", ["edited", "stored"])
async def test_the_pin_is_there_again_in_the_next_session(path: Path, tmp_path: Path, state: Path, kind: str) -> None:
    (tmp_path / "walk.json").write_text(dumps(stored(cycle.solve(cycle.loads(OTHER, "other")), cycle.__version__)))
    async with opened(path) as driver:
        await driver.settled()
        if kind == "edited":
            await to_input(driver, "flight.mach")
            await driver.press("plus")
            await driver.settled()
            await driver.press("p", "u")
        else:
            await choose(driver, "P", "walk.json")
        await driver.until(lambda: driver.session.pin.chosen)
        await kept(driver, state)
        before = driver.session.pin
        await driver.press("q")
    async with opened(path) as driver:
        await pinned(driver, f"{before.label}, of 20")
        again = driver.session.pin
        assert again.figures.performance["thrust"] == pytest.approx(before.figures.performance["thrust"], rel=1e-9)
        assert again.case.numbers == pytest.approx(dict(before.case.numbers), rel=1e-12)
        assert "vs pin: " in driver.screen()
        assert ", of 20" in driver.screen()


async def test_a_spoilt_pin_is_dropped_with_one_note(path: Path, state: Path) -> None:
    keeping.keep_pin(str(path), Kept("one", "2026-01-01", "case", TEXT))
    for content in ('{"format": 9}', "not JSON", json.dumps({"format": 1, "label": 3})):
        pins(state)[0].write_text(content)
        async with opened(path) as driver:
            await driver.settled()
            assert "the pin kept for this case is dropped" in driver.session.note
            assert driver.session.pin.label == "as loaded"
        assert pins(state) == []
        keeping.keep_pin(str(path), Kept("one", "2026-01-01", "case", TEXT))
    keeping.keep_pin(str(path), Kept("one", "2026-01-01", "case", CHOKED))
    async with opened(path) as driver:
        await driver.until(lambda: "dropped" in driver.session.note)
        await driver.until(lambda: not pins(state))


async def test_a_pin_that_cannot_be_kept_says_so_and_holds(path: Path, tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    (tmp_path / "file").write_text("")
    monkeypatch.setenv("XDG_STATE_HOME", str(tmp_path / "file"))
    async with opened(path) as driver:
        await driver.settled()
        await choose(driver, "P", "other.toml")
        await driver.until(lambda: "the pin is not kept" in driver.session.note)
        assert driver.session.pin.label == "other"


async def test_the_comparison_shows_what_compare_finds_and_shares_that_add_up(path: Path) -> None:
    a, b = cycle.loads(OTHER, "other"), cycle.loads(TEXT, "case")
    sides = [Side("x", record(cycle.solve(case)), cycle.__version__, "") for case in (a, b)]
    wanted = {row.output.key: row.values for row in compare(sides).headline}
    async with opened(path, size=(120, 60)) as driver:
        await driver.settled()
        await choose(driver, "P", "other.toml")
        await pinned(driver, "other")
        await driver.press("c")
        await driver.until(lambda: isinstance(driver.app.screen, Page) and "together" in driver.screen())
        view = driver.main.comparison._view
        found = compare([walk.side for walk in view.walks])
        assert {row.output.key for row in found.headline} == set(wanted)
        for row in found.headline:
            assert row.values == pytest.approx(wanted[row.output.key], rel=1e-9)
        assert {(r.output.key, r.station) for r in found.stations} == {(r.output.key, r.station) for r in compare(sides).stations}
        got = view.walks[1].shares
        assert got.parts == shares(a, b).parts
        for key in got.outputs:
            total = math.fsum(part.shares[key] for part in got.parts)
            assert total == pytest.approx(wanted[key][1] - wanted[key][0], rel=1e-9)
        assert re.search(r"Mach number +7 +6 +-1 +-14\.3", driver.screen())


async def test_more_walks_are_added_and_removed_and_one_is_in_hand(path: Path, tmp_path: Path) -> None:
    (tmp_path / "choked.toml").write_text(CHOKED)
    async with opened(path) as driver:
        await driver.settled()
        await driver.press("c")
        await driver.until(lambda: "Nothing to compare with" in driver.screen())
        for name in ("choked", "other"):
            await choose(driver, "a", name)
            await driver.until(lambda name=name: f"  {name}: " in driver.screen())
        assert [w.side.name for w in driver.main.comparison._view.walks] == ["this walk", "choked", "other"]
        assert "[C]" in driver.screen()
        assert "B  choked: " in driver.screen()
        assert "no solution" in driver.screen()
        await driver.press("left")
        assert "[B]" in driver.screen()
        await driver.until(lambda: driver.main.comparison._view.walks[1].shares is not None)
        assert driver.main.comparison._view.walks[1].shares.why_not
        await driver.press("x")
        assert "choked" not in driver.screen()
        await driver.press("q")
        assert isinstance(driver.app.screen, MainScreen)


@pytest.mark.parametrize("size", [(20, 5), (40, 12), (200, 60)])
async def test_comparison_and_list_stand_at_every_size(path: Path, size: tuple[int, int]) -> None:
    async with opened(path, size=size) as driver:
        await driver.settled()
        await driver.press("P", "escape", "c")
        await driver.until(lambda: isinstance(driver.app.screen, Page))
        await driver.press("a", "o", "t", "h", "enter", "down", "v", "y", "right", "x", "q")
        await driver.until(lambda: isinstance(driver.app.screen, MainScreen))


def test_a_record_without_a_figure_gives_nan_and_says_it_is_not_stored() -> None:
    walk = stored(cycle.solve(cycle.loads(TEXT, "case")), "0.0.1")["walk"]
    del walk["performance"]["thrust"], walk["stations"]["4"]["mach"]
    walk["profile"] = {"x": [1.0], "pressure": []}
    found = sources.recorded(walk)
    assert math.isnan(found.performance["thrust"]) and math.isnan(found.at("4", "mach"))
    assert found.why_not["thrust"] == "not stored"
    assert found.profile == {}
    assert set(found.performance) == set(PERFORMANCE_KEYS)
