"""What every screen over the main one shares: keys one by one, and one answer."""

from __future__ import annotations

from abc import abstractmethod
from typing import Generic, Protocol, TypeVar, cast

from textual import events
from textual.screen import Screen

Given = TypeVar("Given")


class Keyboard(Protocol):
    """The application, which holds the keys typed until a screen takes them."""

    def type_on(self) -> None:
        """Hand over the keys that wait."""


class Overlay(Screen[Given], Generic[Given]):
    """A screen that gives one answer and is gone. It takes keys once it is painted."""

    ready = False

    def on_mount(self) -> None:
        """Take the keys that were typed before this screen stood."""
        self.ready = True
        cast(Keyboard, self.app).type_on()

    @abstractmethod
    def paint(self) -> None:
        """Paint what is to be shown now."""

    @abstractmethod
    def typed(self, event: events.Key) -> None:
        """Take a key."""

    def leave(self, answer: Given) -> None:
        """Give the answer and go."""
        self.ready = False
        self.dismiss(answer)
