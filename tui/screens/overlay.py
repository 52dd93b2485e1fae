"""What every screen over the main one shares: keys one by one, and one answer."""

from __future__ import annotations

from abc import abstractmethod
from typing import Generic, Protocol, TypeVar, cast

from textual import events
from textual.app import ComposeResult
from textual.geometry import Size
from textual.screen import Screen

from tui.line import Line
from tui.widgets.sheet import Sheet

Given = TypeVar("Given")


class Keyboard(Protocol):
    """The application, which holds the keys typed until a screen takes them."""

    def type_on(self) -> None:
        """Hand over the keys that wait."""


class Overlay(Screen[Given], Generic[Given]):
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
        self._sheet.show(self.lines_for(self.app.size), self.app.size)

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

    def leave(self, answer: Given) -> None:
        """Give the answer and go."""
        self.ready = False
        self.dismiss(answer)
