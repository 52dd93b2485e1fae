"""The comparison: this walk beside the pinned one and others."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import replace
from typing import TYPE_CHECKING

from tui import session, sources
from tui.engine import Engine, Result
from tui.errands import Errands
from tui.journal import Journal
from tui.line import Line, clean
from tui.screens.fetching import Fetching, trouble
from tui.screens.page import Page
from tui.sources import Found, Source

if TYPE_CHECKING:
    from cycle.case import Case
    from cycle.shares import Shares
    from tui.session import Session
    from tui.views.beside import Beside, Walked

KEYS = "left/right next walk  a add  x remove  v % or units  y figure of the bars  Esc"
HERE = "this walk"
MOST_WALKS = 20


class Comparing(Fetching, inherit_bindings=False):
    """Handlers of the comparison."""

    def __init__(self, path: str, engine: Engine, journal: Journal) -> None:
        super().__init__(path, engine, journal)
        self.comparison = Comparison(self, engine)

    def shared(self, result: Result) -> None:
        """Shares of a difference came back."""
        self.comparison.sharing.came(result)

    def do_compare(self) -> None:
        """This walk beside the pinned one."""
        self.comparison.open()


class Comparison:
    """The page of walks beside each other. Parameters: desk, the screen with the session; engine."""

    def __init__(self, desk: Fetching, engine: Engine) -> None:
        self._desk = desk
        self.sharing = Errands("shares", engine.newest)
        self._view: Beside | None = None
        self._note = ""

    @property
    def _session(self) -> Session:
        return self._desk.session

    def open(self) -> None:
        """Show this walk beside the pinned one."""
        now, pin = self._session, self._session.pin
        if now.case is None or now.figures is None or not now.settled:
            self._desk.put(replace(now, note="no walk of these inputs to compare yet"))
            return
        from tui.views.beside import Beside, Walked

        here = Walked(sources.side(HERE, now.case, now.figures), now.case)
        there = pin is not None and pin.figures is not now.figures
        base = [Walked(sources.side(f"pin, {pin.label}", pin.case, pin.figures, pin.stored), pin.case)] if pin is not None and there else []
        self._view, self._note = Beside([*base, here]), ""
        verbs = {"left": self._before, "right": self._next, "a": self._add, "x": self._remove, "v": self._other_view, "y": self._other_bars}
        self._page = Page("Walks beside each other", self._lines, verbs=verbs, keys=KEYS)
        self._desk.app.push_screen(self._page, lambda _: self._closed())
        self._share()

    def _closed(self) -> None:
        self._view = None
        self.sharing.clear()

    def _lines(self, wide: int) -> list[Line]:
        from tui.screens.page import text_body
        from tui.views.beside import lines

        if self._view is None:
            return []
        told = text_body([self._note])(wide) if self._note else []
        return told + lines(self._view, self._session.system, session.watched(self._session), wide)

    def _share(self) -> None:
        """Ask where the difference of the walk in hand comes from, where that is not known."""
        view = self._view
        if view is None or len(view.walks) < 2 or view.walks[view.hand].shares is not None:
            return
        walk = view.walks[view.hand]
        self.sharing.clear()
        self._share_on(walk, _pieces(view.walks[0].case, walk.case, ("A", view.letter)))

    def _share_on(self, walk: Walked, pieces: Iterator[Shares | None]) -> None:
        """Ask for the next piece of the shares of a walk, until they are there."""

        def then(found: Shares | None, error: BaseException | None) -> None:
            walk.shares = found
            if error is not None:
                self._say(f"where the difference comes from: {clean(trouble(error))}")
            elif found is None:
                self._share_on(walk, pieces)
            else:
                self._repaint()

        self.sharing.ask(lambda: next(pieces), then)

    def _repaint(self) -> None:
        if self._view is not None and self._page.is_attached:
            self._page.paint()

    def _turn(self, steps: int) -> None:
        view = self._view
        if view is not None and len(view.walks) > 1:
            view.hand = max(1, min(view.hand + steps, len(view.walks) - 1))
            self._note = ""
            self._share()
            self._repaint()

    def _before(self) -> None:
        self._turn(-1)

    def _next(self) -> None:
        self._turn(1)

    def _other_view(self) -> None:
        if self._view is not None:
            self._view.relative = not self._view.relative
            self._repaint()

    def _other_bars(self) -> None:
        keys = session.performance_keys(self._session)
        at = keys.index(session.watched(self._session))
        self._desk.put(replace(self._session, watched=keys[(at + 1) % len(keys)]))
        self._repaint()

    def _remove(self) -> None:
        """The walk in hand gone from the comparison."""
        view = self._view
        if view is not None and len(view.walks) > 1:
            del view.walks[view.hand]
            view.hand = max(1, min(view.hand, len(view.walks) - 1))
            self._share()
            self._repaint()

    def _add(self) -> None:
        view = self._view
        if view is not None and len(view.walks) >= MOST_WALKS:
            self._say(f"{MOST_WALKS} walks at most; x removes one")
        else:
            self._desk.choose("Add to the comparison", self._add_source)

    def _say(self, words: str) -> None:
        self._note = words
        self._repaint()

    def _add_source(self, source: Source) -> None:
        self._say(f"{clean(source.label)} is being solved ...")
        asked = self._view

        def then(found: tuple[Found, ...] | None, error: BaseException | None) -> None:
            if self._view is not asked:
                return  # the comparison that asked is closed
            self._say("" if error is None else f"not added: {clean(trouble(error))}")
            if found is not None:
                self._desk.one_of(found, self._added)

        self._desk.fetching.ask(lambda: sources.fetch(source), then)

    def _added(self, found: Found) -> None:
        from tui.views.beside import Walked

        view = self._view
        if view is None:
            return
        view.walks.append(Walked(sources.side(found.label, found.case, found.figures, found.stored), found.case))
        view.hand = len(view.walks) - 1
        self._share()
        self._repaint()


def _pieces(first: Case, other: Case, names: tuple[str, str]) -> Iterator[Shares | None]:
    """The shares of a difference, None while they are not there yet. Each piece is computed where it is asked for."""
    from cycle.shares import shares_in_steps

    steps = shares_in_steps(first, other, names=names)
    while True:
        try:
            yield next(steps)
        except StopIteration as done:
            yield done.value
            return
