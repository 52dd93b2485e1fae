"""What every screen over the main one shares: keys one by one, and one answer."""

from __future__ import annotations

from abc import abstractmethod
from collections.abc import Callable
from typing import Any, Generic, Protocol, TypeVar, cast

from textual import events
from textual.app import ComposeResult
from textual.geometry import Size
from textual.screen import Screen

from tui.crash import caught
from tui.line import Line
from tui.widgets.sheet import Sheet, painted

Given = TypeVar("Given")


class Keyboard(Protocol):
    """The application, which holds the keys typed until a screen takes them."""

    def type_on(self) -> None:
        """Hand over the keys that wait."""

    def tell_defect(self, words: str) -> None:
        """Say that something went wrong inside."""


class Steady(Screen[Given], Generic[Given]):
    """A screen on which a defect is told and ends nothing."""

    async def on_event(self, event: events.Event) -> None:
        """Take an event, a call after some time among them."""
        with caught(self._tell):
            await super().on_event(event)

    def call_after_refresh(self, callback: Callable[..., object], *args: Any, **more: Any) -> bool:
        """Call after the next paint."""

        def called() -> None:
            with caught(self._tell):
                callback(*args, **more)

        return super().call_after_refresh(called)

    def _tell(self, words: str) -> None:
        cast(Keyboard, self.app).tell_defect(words)


class Overlay(Steady[Given], Generic[Given]):
    """A screen of one sheet that gives one answer and is gone. It takes keys once it is painted."""

    ready = False

    def __init__(self) -> None:
        super().__init__()
        self._sheet = Sheet(id="sheet")

    def compose(self) -> ComposeResult:
        """One sheet, painted before it is laid out, so that the screen is sent once."""
        self.paint()
        yield self._sheet

    def on_resize(self) -> None:
        """Paint for the new size, all of it: the terminal may have cut what stands there."""
        self.paint()
        self.refresh()

    def paint(self) -> None:
        """Paint what there is now; what is in hand stays in hand."""
        size = self.app.size
        self._sheet.show(painted(lambda: self.lines_for(size), size.width), size)

    def on_mount(self) -> None:
        """Take the keys that were typed before this screen stood."""
        self.ready = True
        cast(Keyboard, self.app).type_on()

    @abstractmethod
    def lines_for(self, size: Size) -> list[Line]:
        """What is to be shown now, for a size of the screen."""

    @abstractmethod
    def typed(self, event: events.Key) -> None:
        """Take a key."""

    def leave(self, answer: Given | None) -> None:
        """Give the answer and go."""
        self.ready = False
        self.dismiss(answer)
