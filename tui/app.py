"""The interactive program: the application that holds the worker, the journal and the main screen."""

from __future__ import annotations

import asyncio
import os
import sys
import termios
from collections import deque
from collections.abc import Iterator
from contextlib import contextmanager
from functools import partial
from typing import Any, ClassVar

from textual import events
from textual.app import App
from textual.binding import BindingType
from textual.message import Message

from tui import leaving
from tui.crash import caught
from tui.engine import Engine, Result
from tui.journal import Journal
from tui.screens.main import MainScreen
from tui.screens.overlay import Overlay
from tui.terminal import TerminalDriver

MOMENT = 0.05
"""Seconds within which a new size of the terminal is taken."""


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
        super().__init__(driver_class=TerminalDriver, ansi_color=True)
        self.theme = "ansi-dark"
        self.path = path
        self.defect: BaseException | None = None
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
        if isinstance(event, events.Key) and self.screen_stack and isinstance(self.screen, MainScreen | Overlay):
            self._keys.append(event)
            self.type_on()
        else:
            with caught(self.tell_defect):
                await super().on_event(event)

    def type_on(self) -> None:
        """Hand the keys typed to the screen that stands, one by one; one that is not painted yet holds them back."""
        while self._keys and isinstance(self.screen, MainScreen | Overlay) and self.screen.ready:
            event = self._keys.popleft()
            taker = self.main if self.main is not None and self.main.everywhere(event) else self.screen
            with caught(partial(self._typed_wrong, taker)):
                taker.typed(event)

    def _typed_wrong(self, taker: MainScreen | Overlay[Any], words: str) -> None:
        """A key met a defect: a page that took it is closed, for it may meet it at every key."""
        if isinstance(taker, Overlay) and taker.ready:
            taker.leave(None)
        self.tell_defect(words)

    def tell_defect(self, words: str) -> None:
        """Say on the main screen that something went wrong inside; the screen goes on."""
        if self.main is not None:
            self.main.tell_defect(words)

    def push_screen(self, screen: Any, callback: Any = None, *more: Any, **named: Any) -> Any:
        """Put a screen over the others; what takes its answer may meet a defect, which is told."""

        def answered(answer: Any) -> None:
            with caught(self.tell_defect):
                if callback is not None:
                    callback(answer)

        return super().push_screen(screen, answered, *more, **named)

    def on_mount(self) -> None:
        """Guard against ends nobody asked for."""
        if not self.is_headless:
            leaving.guard(lambda code: self.exit(return_code=code), self._attributes)

    def on_resize(self) -> None:
        """Hand a new size on for certain: the library's own timer for it skips a call that comes late, and all sizes after it."""
        asyncio.get_running_loop().call_later(MOMENT, self.call_later, self._check_resize)

    def on_ductwalk_app_came(self, message: Came) -> None:
        """Hand a result to the main screen."""
        with caught(self.tell_defect):
            if self.main is not None and self.screen_stack:  # none stands while the program ends
                self.main.came_back(message.result)

    def give_up(self, error: BaseException) -> None:
        """End after an error behind which the screen cannot go on. The caller of `run` writes the crash file."""
        self.defect = self.defect or error
        self.exit(return_code=1)

    def _handle_exception(self, error: Exception) -> None:
        # a traceback with all locals over the user's terminal helps nobody
        if self.is_headless:
            super()._handle_exception(error)
        else:
            self.give_up(error)


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
    if app.return_code is None:
        raise RuntimeError("the screen ended without being asked to")
    return app.return_code
