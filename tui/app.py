"""The interactive program: the application that holds the worker, the journal and the main screen."""

from __future__ import annotations

import os
import sys
import termios
from collections import deque
from collections.abc import Iterator
from contextlib import contextmanager
from typing import Any, ClassVar

from textual import events
from textual.app import App
from textual.binding import BindingType
from textual.message import Message

from tui import leaving
from tui.engine import Engine, Result
from tui.journal import Journal
from tui.screens.main import MainScreen
from tui.screens.overlay import Overlay


def terminal_settings() -> list[Any] | None:
    """Settings of the terminal as they are now, None where standard input is none."""
    try:
        return termios.tcgetattr(sys.__stdin__.fileno()) if sys.__stdin__ is not None else None
    except (termios.error, OSError, ValueError):
        return None


@contextmanager
def drawn_on_the_terminal() -> Iterator[None]:
    """Let the screen be drawn where standard error is a file or closed: the library draws on standard error."""
    kept, out = sys.__stderr__, sys.__stdout__
    if out is not None and out.isatty() and (kept is None or not kept.isatty()):
        sys.__stderr__ = out  # type: ignore[misc]
    try:
        yield
    finally:
        sys.__stderr__ = kept  # type: ignore[misc]


class DuctwalkApp(App[None], inherit_bindings=False):
    """Holds what outlives a screen. Its one screen renders the session."""

    TITLE = "ductwalk"
    ENABLE_COMMAND_PALETTE = False
    BINDINGS: ClassVar[list[BindingType]] = []
    CSS = "Screen { background: ansi_default; color: ansi_default; }"

    class Came(Message):
        """The worker has a result. Posted from its thread."""

        def __init__(self, result: Result) -> None:
            super().__init__()
            self.result = result

    def __init__(self, path: str, attributes: list[Any] | None = None) -> None:
        super().__init__(ansi_color=True)
        self.theme = "ansi-dark"
        self.path = path
        self.defect: Exception | None = None
        self._attributes = attributes
        self._keys: deque[events.Key] = deque()
        self.main: MainScreen | None = None
        self.engine = Engine(lambda result: self.post_message(self.Came(result)))
        self.journal = Journal(path)

    def get_default_screen(self) -> MainScreen:
        """The main screen is the first one painted."""
        self.main = MainScreen(self.path, self.engine, self.journal)
        return self.main

    async def on_event(self, event: events.Event) -> None:
        """Keep the order of what is typed: keys that come in one piece may open a screen and be meant for it."""
        if isinstance(event, events.Key) and isinstance(self.screen, MainScreen | Overlay):
            self._keys.append(event)
            self.type_on()
        else:
            await super().on_event(event)

    def type_on(self) -> None:
        """Hand the keys typed to the screen that stands, one by one; one that is not painted yet holds them back."""
        while self._keys and isinstance(self.screen, MainScreen | Overlay) and self.screen.ready:
            event = self._keys.popleft()
            taker = self.main if self.main is not None and self.main.everywhere(event) else self.screen
            taker.typed(event)

    def on_mount(self) -> None:
        """Guard against ends nobody asked for."""
        if not self.is_headless:
            leaving.guard(lambda code: self.exit(return_code=code), self._attributes)

    def on_ductwalk_app_came(self, message: Came) -> None:
        """Hand a result to the main screen."""
        if self.main is not None:
            self.main.came_back(message.result)

    def _handle_exception(self, error: Exception) -> None:
        # The caller of `run` writes the crash file; a traceback with all locals over the user's terminal helps nobody.
        if self.is_headless:
            super()._handle_exception(error)
        else:
            self.defect = self.defect or error
            self.exit(return_code=1)


def run(path: str | None) -> int:
    """Open the interactive screen on a case.

    Parameters: path, the case file; None starts a new case from the template. Returns: the exit status: 0 left by the
    user, 129 hang-up, 143 terminated. Errors: a defect of the program is raised after the terminal is set back; the
    journal has the work.
    """
    for name in ("COLUMNS", "LINES"):  # exported ones would hold against every resize of the terminal
        os.environ.pop(name, None)
    app = DuctwalkApp(path or "", terminal_settings())
    with drawn_on_the_terminal():
        app.run(mouse="SSH_CONNECTION" not in os.environ)
    if app.defect is not None:
        raise app.defect
    return app.return_code or 0
