"""One function of the screen after the other made to fail: `python -m tests.tui.defect_search LOW HIGH [EVERY]`.

Whatever fails, the screen stands: keys are answered, an edit is taken, solved once the function works again, and kept in the journal.
"""

from __future__ import annotations

import asyncio
import importlib
import inspect
import os
import pkgutil
import sys
import tempfile
from collections.abc import Callable, Iterator
from pathlib import Path
from types import CodeType, FunctionType

import tui
from tests.tui.screen_support import CASES, Driver, opened
from tui import crash

OWN = (
    "tui.app", "tui.crash", "tui.engine", "tui.journal", "tui.journal_file", "tui.leaving", "tui.line", "tui.output", "tui.terminal",
    "tui.screens.overlay", "tui.widgets.panel", "tui.widgets.sheet", "tui.screens.desk", "tui.actions",
    "tui.along", "tui.commands", "tui.comparing", "tui.explaining", "tui.influence", "tui.sheets", "tui.solve", "tui.sweeping",
    "tui.tables", "tui.text",
)  # fmt: skip
"""Modules that the answer to a defect stands on, and those of the batch command."""

STANDING = ("MainScreen.compose", "MainScreen.paint", "MainScreen.came_back", "MainScreen.typed", "MainScreen.everywhere", "Asking.asked")
"""Functions that every key goes through."""

KEYS = """
tab plus plus u enter 7 enter equals_sign escape e escape w a escape s escape escape r i enter g right escape slash m a c h enter escape
colon v i e w enter p P escape c v y escape b escape question_mark escape y v t h escape k escape n d x escape enter 6 enter escape escape
tab down right down e enter backspace escape
"""
"""Keys that open what there is."""


def functions() -> list[FunctionType]:
    """All functions and methods of the screen, in the order of their names, but for those the answer stands on."""
    found = {}
    for info in pkgutil.walk_packages(tui.__path__, "tui."):
        if info.name not in OWN:
            for function in _of_module(importlib.import_module(info.name)):
                found[f"{function.__module__}.{function.__qualname__}"] = function
    return [found[name] for name in sorted(found) if not name.endswith(STANDING)]


def _of_module(module: object) -> Iterator[FunctionType]:
    for thing in vars(module).values():
        if getattr(thing, "__module__", "") != getattr(module, "__name__", ""):
            continue
        inside = vars(thing).values() if inspect.isclass(thing) else [thing]
        yield from (f for f in inside if isinstance(f, FunctionType) and f.__module__.startswith("tui") and f.__name__[:2] != "__")


def broken(closed: tuple[str, ...]) -> CodeType:
    """Code that fails, for a function that closes over these names."""

    def fails(*given: object, **named: object) -> None:
        raise ZeroDivisionError("made by the search")

    code = fails.__code__
    return code.replace(co_freevars=closed) if closed else code


async def survives(function: Callable[..., object], folder: Path) -> bool:
    """Whether the screen stands while a function fails. Returns: whether the function was called at all. Errors: AssertionError."""
    path = folder / "case.toml"
    path.write_bytes((CASES / "saltmarsh.toml").read_bytes())
    crash._written.clear()
    async with opened(path, (120, 40)) as driver:
        await driver.settled()
        whole = function.__code__
        function.__code__ = broken(whole.co_freevars)
        try:
            for key in KEYS.split():
                await driver.pilot.press(key)
            await driver.pilot.pause(0.2)
        finally:
            function.__code__ = whole
        await goes_on(driver)
    return bool(crash._written)


async def goes_on(driver: Driver) -> None:
    """Back on the main screen an edit is taken, solved and kept. Errors: AssertionError."""
    for _ in range(8):
        await driver.press("escape")
    assert driver.app.is_running and driver.app.screen is driver.main, driver.screen()
    before = driver.session.generation
    driver.main.change({"set": {"flight.mach": 7.77}})
    await driver.settled()
    assert driver.session.generation == before + 1 and "7.77" in driver.screen(), driver.screen()
    await driver.press("u")
    assert driver.session.unkept == ""


def main(low: int, high: int, every: int = 1) -> None:
    """Break these functions, and print which of them mattered."""
    for number, function in list(enumerate(functions()))[low:high:every]:
        with tempfile.TemporaryDirectory() as folder:
            os.environ.update(XDG_STATE_HOME=f"{folder}/state", XDG_DATA_HOME=f"{folder}/data")
            os.chdir(folder)
            told = "met" if asyncio.run(survives(function, Path(folder))) else "not called"
            print(number, f"{function.__module__}.{function.__qualname__}", told, flush=True)
            os.chdir("/")


if __name__ == "__main__":
    main(*map(int, sys.argv[1:]))
