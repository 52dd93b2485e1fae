"""The screen of the pictures of a walk."""

from __future__ import annotations

from dataclasses import replace
from typing import ClassVar

from tui.line import CURSOR, DIM, OVER, PLAIN, Line, Piece, clean, line, wrap
from tui.plots import Chart, Grid
from tui.plots.reading import held, log_refusal
from tui.screens.desk import Desk
from tui.screens.picture import Picture
from tui.views import pictures

TALL = 34
"""Lines from which two quantities stand one below the other."""


class PlotsScreen(Picture):
    """Draws the walk of the session beside the pinned one, one kind of picture at a time."""

    KEYS: ClassVar[dict[str, str]] = {
        "left": "do_before", "right": "do_next", "tab": "do_next", "shift+tab": "do_before", "up": "do_up", "down": "do_down",
        "l": "do_log", "t": "do_units", "w": "do_write", **{str(n + 1): "do_pick" for n in range(len(pictures.VIEWS))},
    }  # fmt: skip
    WORDS = "left right picture  up down quantity  l log axis  t units  w file  Esc back"

    def __init__(self, desk: Desk) -> None:
        super().__init__(desk)
        self._view, self._log = 0, False
        self._items: dict[str, int] = {}

    def _chosen(self) -> tuple[pictures.View, int] | None:
        """The kind of picture in hand and the number of its quantity."""
        views = pictures.views(self.desk.session)
        if not views:
            return None
        view = views[self._view % len(views)]
        return view, self._items.get(view.name, 0)

    def drawn(self) -> list[Chart | Grid]:
        """The picture in hand; on a tall screen the next quantity below it."""
        chosen = self._chosen()
        if chosen is None:
            return []
        view, at = chosen
        count = min(len(view.items), 2 if self.app.size.height >= TALL else 1)
        items = [view.items[(at + n) % len(view.items)] for n in range(count)] or [""]
        return [self._picture(view, item) for item in items]

    def _picture(self, view: pictures.View, item: str) -> Chart:
        """One picture; even steps where a value has no logarithm, and a note of it."""
        chart = view.drawn(self.desk.session, item, self._log)
        lost = log_refusal(chart.y_axis, held(chart, "y"))
        if not lost:
            return chart
        even = view.drawn(self.desk.session, item, False)
        return replace(even, notes=(*even.notes, lost))

    def foot(self, wide: int) -> list[Line]:
        """Why the walk ends where it does, where it has no solution."""
        found = self.desk.session.figures
        words = f"no solution: {found.reason}" if found is not None and not found.solved else ""
        return [line((part, OVER)) for part in wrap(clean(words).split(), wide)]

    def instead(self) -> str:
        """Why there is nothing to be drawn."""
        return "no walk yet: there is nothing to be drawn"

    def head(self, wide: int) -> list[Line]:
        """The kinds of pictures, the one in hand marked."""
        chosen = self._chosen()
        if chosen is None:
            return []
        pieces: list[Piece] = []
        for n, view in enumerate(pictures.views(self.desk.session)):
            pieces.append((f" {n + 1} {view.name} ", CURSOR if view is chosen[0] else PLAIN))
        view, at = chosen
        if view.items:
            pieces.append((f"  {pictures.label_of(view, view.items[at])}, {at + 1} of {len(view.items)}", DIM))
        return [line(*pieces)]

    def do_next(self) -> None:
        """The next kind of picture."""
        self._view = (self._view + 1) % max(1, len(pictures.views(self.desk.session)))

    def do_before(self) -> None:
        """The kind of picture before."""
        self._view = (self._view - 1) % max(1, len(pictures.views(self.desk.session)))

    def do_pick(self) -> None:
        """The kind of picture of the number typed."""
        if int(self.key) <= len(pictures.views(self.desk.session)):
            self._view = int(self.key) - 1

    def _step(self, steps: int) -> None:
        chosen = self._chosen()
        if chosen is not None and chosen[0].items:
            view, at = chosen
            self._items[view.name] = (at + steps) % len(view.items)

    def do_up(self) -> None:
        """The quantity before."""
        self._step(-1)

    def do_down(self) -> None:
        """The next quantity."""
        self._step(1)

    def do_log(self) -> None:
        """The quantity's axis logarithmic, or not."""
        self._log = not self._log
