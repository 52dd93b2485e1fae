"""A few of the kills of `tests.tui.kills`, and what a kill between an undo and the last save used to lose."""

from __future__ import annotations

import signal
from pathlib import Path

import pytest

from tests.tui import kills
from tests.tui.pty_support import READY, Terminal
from tests.tui.screen_support import opened, to_input


@pytest.mark.parametrize("seed", range(2))
def test_no_kill_loses_an_edit_that_was_shown(seed: int) -> None:
    kills.run(seed)


def test_an_undo_behind_the_last_save_survives_a_kill(path: Path, env: dict[str, str]) -> None:
    with Terminal([str(path)], env=env) as terminal:
        terminal.wait(READY)
        terminal.press("tab", "+", "+")
        terminal.wait("M 6.2")
        terminal.press("s")
        terminal.wait("saved")
        terminal.press("u")
        terminal.wait("M 6.1")
        terminal.press("u")
        terminal.wait(lambda text: " M 6 " in text.splitlines()[0])
        terminal.press("U")
        terminal.wait("M 6.1")
        terminal.press("+", "u", "u")
        terminal.wait(lambda text: " M 6 " in text.splitlines()[0])
        terminal.process.kill(signal.SIGKILL)
        terminal.status()
    assert "mach = 6.2" in path.read_text()
    assert kills.kept(path) == 6.0


async def test_an_edit_made_while_the_case_is_saved_stays_in_the_journal(path: Path) -> None:
    async with opened(path) as driver:
        await driver.settled()
        await to_input(driver, "flight.mach")
        await driver.press("plus")
        driver.main.do_save()
        driver.main.do_more()
        await driver.until(lambda: "saved" in driver.session.note)
        driver.main.do_undo()
        driver.main.do_undo()
        assert driver.session.case is not None and driver.session.case.value("flight.mach") == 6.0
        driver.main.journal.turn_to("", keep=True)
        assert "mach = 6.1" in path.read_text() and kills.kept(path) == 6.0
