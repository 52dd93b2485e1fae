"""A choice changed and changed back on the screen keeps what means nothing in between; so does a restored session."""

from __future__ import annotations

import json
from pathlib import Path

import pytest

import cycle
from tests.case_files import case_file
from tests.tui.screen_support import Driver, opened, to_input
from tui.screens.page import Page


@pytest.fixture
def humid(tmp_path: Path, state: Path) -> Path:
    file = tmp_path / "humid.toml"
    file.write_text(case_file("plain").read_text() + "\n[air]\nrelative_humidity = 0.4\n")
    return file


async def choose(driver: Driver, key: str, value: str) -> None:
    """Step through the choices of an input until it has a value."""
    await to_input(driver, key)
    for _ in range(5):
        if driver.session.case.value(key) == value:
            return
        await driver.press("plus")
        await driver.settled()
    raise AssertionError(f"{key} never was {value}")


async def test_the_gas_model_there_and_back_keeps_the_air(humid: Path) -> None:
    async with opened(humid) as driver:
        await driver.settled()
        before = driver.session.case
        await choose(driver, "gas.model", "constant-gamma")
        assert driver.session.case.value("air.relative_humidity") is None
        await choose(driver, "gas.model", "equilibrium")
        assert driver.session.case == before
        await driver.press("u", "u", "U", "U")
        assert driver.session.case == before


async def test_a_duct_left_and_taken_up_again_is_the_same_duct(tmp_path: Path, state: Path) -> None:
    file = tmp_path / "duct.toml"
    file.write_text(case_file("tidegate").read_text())
    async with opened(file) as driver:
        await driver.settled()
        before = driver.session.case
        await driver.press("right", "right", "right", "right")
        await choose(driver, "combustor.process", "constant-pressure")
        await choose(driver, "combustor.process", "duct")
        assert driver.session.case == before


async def test_a_session_restored_after_a_save_in_between_has_the_air(humid: Path, state: Path) -> None:
    async with opened(humid) as driver:
        await driver.settled()
        before = driver.session.case
        await choose(driver, "gas.model", "constant-gamma")
        await driver.press("s")
        await driver.until(lambda: not driver.session.unsaved)
        assert "relative_humidity" not in humid.read_text()
        await choose(driver, "gas.model", "equilibrium")
        assert driver.session.case == before
        (left,) = state.glob("*.journal")
        records = [json.loads(row) for row in left.read_text().splitlines()][1:]
        assert 0.4 in [record.get("back", {}).get("air.relative_humidity") for record in records]
        kept = left.read_bytes()
        driver.main.journal.remove()
    (state / f"{left.stem}9.journal").write_bytes(kept)
    async with opened(humid) as driver:
        await driver.until(lambda: isinstance(driver.app.screen, Page))
        await driver.press("r")
        await driver.until(lambda: driver.session.case == before)
    assert cycle.load(humid).value("air.relative_humidity") is None
