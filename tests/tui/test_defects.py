"""A defect of the program is an answer on the screen: a crash file, one line, the edit kept, and the screen goes on."""

from __future__ import annotations

import asyncio
import random
from collections.abc import Callable, Iterator
from pathlib import Path
from typing import Any

import pytest

from cycle.case import Case
from tests.tui import defect_search
from tests.tui.pty_support import READY, Terminal
from tests.tui.screen_support import Driver, opened, to_input
from tests.tui.test_screen_parts import left_by_another
from tests.tui.test_screen_pty import LEFT, journals
from tui import figures, journal, keeping, plots, tracing
from tui.figures import Figures
from tui.screens import telling
from tui.screens.main import MainScreen
from tui.views import margins, moving, table


@pytest.fixture
def crashes(state: Path) -> Iterator[Callable[[], list[str]]]:
    """The crash files written so far; they are the test's own, and go with it."""
    yield lambda: [file.read_text() for file in state.glob("crash-*.txt")]
    for file in state.glob("crash-*.txt"):
        file.unlink()


Crashes = Callable[[], list[str]]


def fails(*given: Any, **named: Any) -> Any:
    raise ZeroDivisionError("made by the test")


def above_mach_6(case: Case, solve: Callable[[Case], Figures] = figures.solve) -> Figures:
    if case.value("flight.mach") > 6.0:
        fails()
    return solve(case)


async def test_a_solve_that_fails_is_an_answer_and_undo_takes_it_back(
    path: Path, monkeypatch: pytest.MonkeyPatch, crashes: Crashes
) -> None:
    monkeypatch.setattr(figures, "solve", above_mach_6)
    async with opened(path) as driver:
        await driver.settled()
        await to_input(driver, "flight.mach")
        for _ in range(3):
            await driver.press("plus")
            await driver.until(lambda: driver.session.settled and "NO FIGURES: internal error" in driver.screen())
        assert "internal error (ZeroDivisionError): " in driver.session.faults[0] and "; the edit is kept" in driver.session.faults[0]
        (detail,) = crashes()
        assert "made by the test" in detail and "Traceback" in detail
        (left,) = [held.edits for held in journal.every()]
        assert left == 3 and driver.session.case is not None and driver.session.case.value("flight.mach") == 6.3
        await driver.press("s")
        await driver.until(lambda: "saved" in driver.session.note)
        await driver.press("u", "u", "u")
        found = await driver.settled()
        assert found.solved and "NO FIGURES" not in driver.screen()
    assert "mach = 6.3" in path.read_text()


async def test_limits_that_fail_are_not_assessed(path: Path, monkeypatch: pytest.MonkeyPatch, crashes: Crashes) -> None:
    monkeypatch.setattr(figures, "assess", fails)
    async with opened(path) as driver:
        await driver.until(lambda: "all limits" in driver.screen())
        assert "AUDIT FAILED" in driver.screen() and driver.session.figures is not None and driver.session.figures.solved
        await driver.press("w")
        await driver.until(lambda: "not assessed" in driver.screen())
        await driver.press("escape")
        monkeypatch.undo()
        await driver.press("tab", "plus")
        assert (await driver.settled()).audit_ok
        assert len(crashes()) == 1


PAGES: dict[str, tuple[Any, str]] = {
    "question_mark": (telling, "text_body"),
    "w": (margins, "rows"),
    "i": (moving, "rows"),
    "e": (tracing, "origins"),
    "p": (figures, "referee"),
    "v": (table, "changes_shown"),
    "r": (figures, "referee"),
    "b": (keeping, "recent"),
    "k": (plots, "draw"),
    "h": (plots, "draw"),
    "slash": (MainScreen, "do_find"),
}
"""Key -> module or class and its function that fails."""


@pytest.mark.parametrize("key", PAGES)
async def test_a_page_or_a_key_that_fails_says_so_and_the_screen_goes_on(
    path: Path, monkeypatch: pytest.MonkeyPatch, crashes: Crashes, key: str
) -> None:
    async with opened(path) as driver:
        await driver.settled()
        monkeypatch.setattr(*PAGES[key], fails)
        for pressed in (key, "R", "down", "enter"):
            await driver.press(pressed)
        await driver.press("escape", "escape", "escape")
        await driver.until(lambda: driver.app.screen is driver.main)
        monkeypatch.undo()
        await defect_search.goes_on(driver)
        assert all("made by the test" in detail for detail in crashes())


async def restored(driver: Driver) -> None:
    await driver.until(lambda: "Unsaved work found" in driver.screen())
    await driver.press("r")
    await driver.until(lambda: "restored" in " ".join((driver.session.note, *driver.session.faults)))


async def test_a_restore_whose_solve_fails_leaves_case_and_journal_as_they_were(
    path: Path, state: Path, monkeypatch: pytest.MonkeyPatch, crashes: Crashes
) -> None:
    file = left_by_another(state, str(path), {"edit": {"set": {"flight.mach": 7.0}}})
    before = file.read_bytes()
    monkeypatch.setattr(figures, "solve", above_mach_6)
    async with opened(path) as driver:
        await restored(driver)
        assert driver.session.faults[0].startswith("not restored: internal error") and "the journal is kept" in driver.session.faults[0]
        assert driver.session.case == driver.session.saved and driver.session.figures is not None and driver.session.figures.solved
    assert file.read_bytes() == before and list(state.glob("*.journal")) == [file] and len(crashes()) == 1


async def test_an_undo_of_an_edit_that_no_longer_holds_takes_back_no_other(path: Path, state: Path) -> None:
    edits = [{"edit": {"set": {"flight.mach": 7.0}}}, {"edit": {"set": {"no.such": 1.0}}}, {"undo": 1}, {"redo": 1}, {"undo": 1}]
    file = left_by_another(state, str(path), *edits)
    async with opened(path) as driver:
        await restored(driver)
        assert driver.session.note.startswith("restored 1 edit, 1 no longer hold (their journal is kept)")
        assert driver.session.case is not None and driver.session.case.value("flight.mach") == 7.0
    assert file.exists()


@pytest.mark.parametrize(
    "record",
    [
        b'{"edit": {"switch": ["no.such.group", "x", 1]}}', b'{"edit": {"set": {"flight.mach": ' + b"[" * 500 + b"]" * 500 + b"}}}",
        b'{"edit": {"set": {"flight.mach": {"a": [true, null]}}}}', b'{"edit": {"case": "x = "}}', b'{"edit": {"case": ["x"]}}',
        b'{"edit": {"set": {"inlet.ramp": 5, "title": 7}}}', b'{"edit": {"switch": ["inlet.end", "exit_mach", {"a": {"b": 1}}]}}',
        b'{"edit": {"set": {"flight.mach": 1' + b"0" * 5000 + b"}}}", b"\xff\xfe", b"[1]", b'{"edit": {"set": {"flight.mach": "\\ud800"}}}',
        b'{"edit": {"study": ["a\\u0000", {"outputs": [], "vary": []}]}, "back": 5}', b'{"edit": {"set": {"flight.mach": NaN}}}',
        b'{"edit": {"set": {"flight.mach": 6.5}}, "back": {"no.such": ' + b"[" * 15 + b"]" * 15 + b"}}", b"null", b"",
    ],
)  # fmt: skip
async def test_a_record_of_another_hand_costs_one_line_and_loses_nothing(path: Path, state: Path, record: bytes) -> None:
    good = {"edit": {"set": {"flight.mach": 7.0}}}
    file = left_by_another(state, str(path), good)
    file.write_bytes(file.read_bytes() + record + b"\n")
    async with opened(path) as driver:
        await restored(driver)
        assert "restored 1 edit, 1 no longer hold (their journal is kept)" in driver.session.note, (
            driver.session.note,
            driver.session.faults,
        )
        assert driver.session.case is not None and driver.session.case.value("flight.mach") == 7.0
    assert file.exists() and record in file.read_bytes()


async def test_a_journal_of_which_nothing_holds_restores_nothing(path: Path, state: Path) -> None:
    file = left_by_another(state, str(path), {"edit": {"set": {"no.such": 1.0}}}, {"edit": {"switch": ["a", "b", 1]}})
    async with opened(path) as driver:
        await restored(driver)
        assert driver.session.note == "not restored: 2 of 2 edits no longer hold; the journal is kept"
        assert driver.session.case == driver.session.saved
    assert file.exists()


def test_a_defect_behind_which_the_screen_cannot_go_on_ends_it_with_1_and_a_crash_file(path: Path, env: dict[str, str]) -> None:
    program = (
        "import sys\nfrom tui.commands import main\nfrom tui.widgets.sheet import Sheet\n"
        "def fails(self, y): raise ZeroDivisionError('made by the test')\n"
        "Sheet.render_line = fails\nsys.exit(main())\n"
    )
    with Terminal([str(path)], env=env, program=program) as terminal:
        assert terminal.status() == 1
        said = terminal.raw.split(LEFT)[-1]
        assert b"internal error, a defect of the program (ZeroDivisionError); details are in" in said and b"Traceback" not in said
    (crash,) = (Path(env["XDG_STATE_HOME"]) / "ductwalk").glob("crash-*.txt")
    assert "made by the test" in crash.read_text()
    crash.unlink()


def test_an_end_that_nobody_asked_for_has_status_1(path: Path, env: dict[str, str]) -> None:
    program = "import sys\nfrom tui.app import run\nfrom tui.screens.main import MainScreen\n"
    program += "MainScreen.do_units = lambda self: self.app._close_messages_no_wait()\nsys.exit(run(sys.argv[1]))\n"
    with Terminal([str(path)], env=env, program=program) as terminal:
        terminal.wait(READY)
        terminal.press("t")
        assert terminal.status() == 1


def test_a_defect_of_a_solve_in_a_real_terminal_keeps_the_work(path: Path, env: dict[str, str]) -> None:
    program = (
        "import sys\nfrom tui import figures\nfrom tui.app import run\nsolve = figures.solve\n"
        "def second(case):\n    if case.value('flight.mach') > 6.0: raise ZeroDivisionError('made by the test')\n    return solve(case)\n"
        "figures.solve = second\nsys.exit(run(sys.argv[1]))\n"
    )
    with Terminal([str(path)], env=env, program=program) as terminal:
        terminal.wait(READY)
        terminal.press("tab", "+")
        terminal.wait("NO FIGURES: internal error")
        terminal.press("u")
        terminal.wait(READY)
        terminal.press("+")
        terminal.wait("NO FIGURES")
        terminal.press("q")
        assert terminal.status() == 0
    assert len(journals(env)) == 1
    (crash,) = (Path(env["XDG_STATE_HOME"]) / "ductwalk").glob("crash-*.txt")
    crash.unlink()


def test_functions_made_to_fail_at_random(tmp_path: Path, state: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setenv("XDG_DATA_HOME", str(tmp_path / "data"))
    monkeypatch.chdir(tmp_path)
    every = defect_search.functions()
    for function in random.Random(5).sample(every, 1):
        asyncio.run(defect_search.survives(function, tmp_path))
        for file in state.glob("*"):
            file.unlink()
