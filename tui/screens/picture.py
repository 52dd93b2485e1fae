"""A picture over the main screen: what it shows, words below it, its keys, and the files it is written to."""

from __future__ import annotations

import os
import sys
from collections.abc import Callable
from typing import ClassVar

from textual import events
from textual.geometry import Size

from tui import plots, writing
from tui.engine import Result
from tui.line import BOLD, DIM, Line, clean, fit, line, wrap
from tui.plots import Chart, Grid
from tui.plots.csv_of import csv_text
from tui.plots.svg import svg
from tui.screens.desk import Desk
from tui.screens.overlay import Overlay
from tui.screens.prompt import Prompt
from tui.session import toggled

LEAST_PICTURE = 8
"""Lines below which a picture keeps the screen to itself."""

WAYS_OUT = ("escape", "q", "ctrl+q", "ctrl+c")


class Picture(Overlay[str]):
    """Draws what `drawn` gives, and does what `KEYS` says: name of a key, or the character it types, to the name of a method.

    Parameters: desk, the main screen. A subclass says what is drawn, what stands below, and the line of keys.
    """

    KEYS: ClassVar[dict[str, str]] = {}
    WORDS: ClassVar[str] = ""
    """The line of keys."""

    def __init__(self, desk: Desk) -> None:
        super().__init__()
        self.desk = desk
        self.message, self.key = "", ""
        self._depth = plots.depth_of_terminal(os.environ)
        out = sys.__stdout__
        self.glyphs = plots.glyphs_of(os.environ, (out.encoding if out is not None else "") or "")

    def drawn(self) -> list[Chart | Grid]:
        """The pictures, one below the other where there is room; [] where there is none yet."""
        raise NotImplementedError

    def head(self, wide: int) -> list[Line]:
        """Lines above the pictures."""
        return []

    def foot(self, wide: int) -> list[Line]:
        """Lines below the pictures."""
        return []

    def instead(self) -> str:
        """What is said where there is no picture."""
        return "being solved ..."

    def body(self, wide: int, lines: int) -> list[Line]:
        """The pictures in a room."""
        pictures = self.drawn()
        if not pictures:
            return [line(part) for part in wrap(clean(self.instead()).split(), wide)][:lines]
        each, more = divmod(lines, len(pictures))
        rooms = [each + (i < more) for i in range(len(pictures))]
        return [row for p, room in zip(pictures, rooms, strict=True) for row in plots.draw(p, wide, room, self._depth, self.glyphs)]

    def files(self) -> tuple[str, Callable[[], tuple[str, str]]] | None:
        """The name offered for the files, and what makes SVG and CSV; None where there is nothing to be written."""
        pictures = self.drawn()
        if not pictures:
            return None
        first = pictures[0]
        case = self.desk.session.case
        name = writing.plain_name(case.name if case is not None else "", first.y_axis.label, first.x_axis.label)
        return name, lambda: (svg(first), csv_text(first))

    def lines_for(self, size: Size) -> list[Line]:
        wide, height = size
        head, foot = self.head(wide), self.foot(wide)
        keys = line((fit(clean(self.message), wide), BOLD)) if self.message else line((fit(self.WORDS, wide), DIM))
        spare = max(0, height - 1 - LEAST_PICTURE)
        head, foot = head[:spare], foot[: max(0, spare - len(head[:spare]))]
        room = max(1, height - 1 - len(head) - len(foot))
        body = self.body(wide, room)[:room]
        padding: list[Line] = [()] * (room - len(body))
        return [*head, *body, *padding, *foot, keys][:height]

    def typed(self, event: events.Key) -> None:
        """Do what a key means here, or leave."""
        name = self.KEYS.get(event.key) or self.KEYS.get(event.character or "")
        if name is not None:
            self.message, self.key = "", event.key
            handler: Callable[[], None] = getattr(self, name)
            handler()
            if self.ready:
                self.paint()
        elif event.key in WAYS_OUT:
            self.leave("")

    def on_paste(self, event: events.Paste) -> None:
        """Pasted text means nothing here."""
        event.stop()

    def do_units(self) -> None:
        """The other unit system."""
        self.desk.put(toggled(self.desk.session))

    def do_write(self) -> None:
        """Ask for a name and write the picture and its data there."""
        offered = self.files()
        if offered is None:
            self.message = "there is nothing to be written yet"
            return
        name, make = offered
        self.app.push_screen(Prompt("Write picture and data as (name of new files .svg and .csv)", name), lambda n: self._named(n, make))

    def _named(self, name: str | None, make: Callable[[], tuple[str, str]]) -> None:
        if name:
            self.desk.engine.do("picture", 0, lambda: writing.write(name, *make()))

    def was_written(self, result: Result) -> None:
        """Say where the files are, or why there are none."""
        got = result.value
        self.message = (
            f"written: {got.drawing} and {os.path.splitext(got.data)[1]}"
            if result.error is None
            else " | ".join(str(result.error).splitlines())
        )
        self.paint()
