"""A pilot that waits for the worker, for the tests of the interactive screen."""

from __future__ import annotations

from collections.abc import AsyncIterator, Callable, Iterable
from contextlib import asynccontextmanager
from pathlib import Path

from textual.pilot import Pilot

from tui.app import DuctwalkApp
from tui.figures import Figures
from tui.session import Session
from tui.widgets.sheet import Sheet

CASES = Path(__file__).resolve().parents[2] / "cases"


class Driver:
    """A pilot that waits for the worker."""

    def __init__(self, app: DuctwalkApp, pilot: Pilot[None]) -> None:
        assert app.main is not None
        self.app, self.pilot, self.main = app, pilot, app.main

    @property
    def session(self) -> Session:
        return self.main.session

    async def until(self, test: Callable[[], object]) -> None:
        """Wait until `test()` holds."""
        for _ in range(800):
            await self.pilot.pause(0.005)
            if test():
                return
        raise AssertionError(f"never came: {self.screen()}")

    async def settled(self) -> Figures:
        await self.until(lambda: self.session.settled and self.session.figures.assessed)
        assert self.session.figures is not None
        return self.session.figures

    async def press(self, *keys: str) -> None:
        await self.pilot.press(*keys)
        await self.pilot.pause()

    async def type(self, text: str) -> None:
        await self.press(*(NAMES.get(c, c) for c in text))

    def screen(self) -> str:
        """What is painted, as lines of text."""
        sheets: Iterable[Sheet] = self.app.screen.query(Sheet)
        return "\n".join("".join(c for c, _ in row) for sheet in sheets for row in sheet._rows)


NAMES = {" ": "space", ".": "full_stop", "/": "slash", "+": "plus", "-": "minus", "_": "underscore"}


@asynccontextmanager
async def opened(path: Path | str, size: tuple[int, int] = (80, 24)) -> AsyncIterator[Driver]:
    app = DuctwalkApp(str(path))
    async with app.run_test(size=size) as pilot:
        yield Driver(app, pilot)


async def to_input(driver: Driver, key: str) -> None:
    """Bring an input of the station in hand to hand by the arrow keys."""
    if driver.session.focus == "table":
        await driver.press("tab")
    for _ in range(30):
        hand = driver.main._hand()
        if hand is not None and hand.key == key:
            return
        await driver.press("down")
    raise AssertionError(f"{key} is not at station {driver.session.station}")
