"""The page on one figure: what it is, its equation with this walk's numbers, and the figures it came from, to go back along."""

from __future__ import annotations

from collections.abc import Callable
from typing import TYPE_CHECKING

from cycle.quantities import MODES, STATUSES, Output, input_of
from tui import tracing
from tui.line import BOLD, DIM, OVER, Line, clean, fit, line, width, wrap
from tui.screens.page import text_body
from tui.screens.roster import Choice, Roster, Verb
from tui.session import Session
from tui.tracing import DIGITS, HEADLINE, Origin, Place
from tui.views.numbers import quantity

if TYPE_CHECKING:
    from cycle.explain import Number

VERBS = (
    Verb("enter", "Enter", "explains it", stays=True),
    Verb("right", "", "", stays=True),
    Verb("backspace", "Backspace", "back", stays=True, bare=True),
    Verb("left", "", "", stays=True, bare=True),
    Verb("t", "t", "goes there", bare=True),
    Verb("h", "h", "headline", stays=True, bare=True),
    Verb("slash", "/", "find", bare=True),
)
FIRST = ("equation", "in SI", "meaning", "restored by", "unit", "allowed", "source")
"""Facts in the order told; the others follow."""
LEAD = 13
"""Columns of the names of facts."""


WORDS = (*STATUSES, *MODES)


class Tracer:
    """The chain of figures that a user walks back along. It paints itself through one list.

    Parameters: session, gives the present one; ask, has the worker put numbers into an equation; place, the figure to begin with.
    """

    def __init__(self, session: Callable[[], Session], ask: Callable[[Place], None], place: Place) -> None:
        self._session, self._ask = session, ask
        self.trail: tuple[tuple[Place, str], ...] = ((place, ""),)
        self._known: dict[Place, tuple[Number, ...]] = {}
        self._walk: object = None
        self._roster = Roster(self._title, self._rows, VERBS, head=self._head, act=self._act, counted=False)

    @property
    def place(self) -> Place:
        """The figure that is explained."""
        return self.trail[-1][0]

    def screen(self) -> Roster:
        """The list that shows it."""
        return self._roster

    def look(self) -> None:
        """Take the present walk; ask for its numbers where they are not known."""
        found = self._session().figures
        walk = found.walk if found is not None else None
        if walk is not self._walk:
            self._walk, self._known = walk, {}
        if self.place != HEADLINE and self.place not in self._known:
            self._ask(self.place)
        if self._roster.is_attached:
            self._roster.paint()

    def took(self, place: Place, walk: object, numbers: tuple[Number, ...]) -> None:
        """Take a figure's numbers; those of another walk are dropped."""
        if walk is self._walk:
            self._known[place] = numbers
            if self._roster.is_attached:
                self._roster.paint()

    def place_of(self, name: str) -> Place:
        """The place behind a row, the figure that is explained where there is none."""
        return next((o.place for o in self._origins() if o.name == name and o.place is not None), self.place)

    def _origins(self) -> tuple[Origin, ...]:
        return tracing.origins(self._session(), self.place, self._known.get(self.place, ()))

    def _act(self, key: str, name: str) -> None:
        step = {"backspace": self._back, "left": self._back, "h": self._headline}.get(key)
        if step is not None:
            step()
            return
        to = self.place_of(name)
        if to != self.place:
            self.trail = (*self.trail[:-1], (self.place, name), (to, ""))
            self._roster.hold("")
            self.look()

    def _back(self) -> None:
        if len(self.trail) > 1:
            self.trail = self.trail[:-1]
            self._roster.hold(self.trail[-1][1])
            self.look()

    def _headline(self) -> None:
        if self.place != HEADLINE:
            self.trail = (*self.trail, (HEADLINE, ""))
            self._roster.hold("")
            self.look()

    def _title(self) -> str:
        from tui import entries

        if self.place == HEADLINE:
            return "Headline figures"
        entry = tracing.entry_of(self.place)
        words = entries.title(entry) if self.place.key not in WORDS else f"{self.place.key}, {entries.title(entry)}"
        return f"{words}, {self.place.where}" if self.place.where else words

    def _rows(self, wide: int, typed: str) -> list[Choice]:
        return [Choice(o.name, _row(o, wide)) for o in self._origins()]

    def _head(self, wide: int) -> list[Line]:
        session = self._session()
        if self.place == HEADLINE:
            reason = session.figures.reason if session.figures is not None else ""
            words = [f"NO SOLUTION: {reason}"] if session.failed else []
            return [tuple((text, OVER) for text, _ in row) for row in text_body(words)(wide)]
        crumbs = [line((fit(" < ".join(_short(p) for p, _ in reversed(self.trail)), wide), DIM))] if len(self.trail) > 1 else []
        found = self._known.get(self.place, ())
        number = found[0] if len(found) == 1 else None
        under = [line((_below(self.place), DIM))] if self._origins() else []
        return [*crumbs, *self._value(session, number, wide), *_facts(self.place, session.system, number, wide), *under]

    def _value(self, session: Session, number: Number | None, wide: int) -> list[Line]:
        """The figure in this walk, or why there is none."""
        entry = tracing.entry_of(self.place)
        value = tracing.value(session, self.place)
        if isinstance(entry, Output) and number is not None and value in ("-", ""):
            known = number.value == number.value
            value = quantity(number.value, entry.unit, session.system, DIGITS) if known else "-"
        if isinstance(entry, Output) and value == "-":
            value = _reason(session, self.place, number)
        stale = "" if session.settled else " (of the inputs before)"
        words = [f"{value}{stale}"] if value else []
        return [tuple((text, BOLD) for text, _ in row) for row in text_body(words)(wide)]


def _reason(session: Session, place: Place, number: Number | None) -> str:
    if number is not None and number.reason:
        return f"no value: {number.reason}"
    found = session.figures
    why = found.why_not.get(place.key, found.reason) if found is not None else ""
    return f"no value: {why}" if why else "no value in this walk"


def _facts(place: Place, system: str, number: Number | None, wide: int) -> list[Line]:
    """What is declared of a figure, and its equation with numbers, under their names."""
    from tui import entries

    facts = dict(entries.facts(tracing.entry_of(place), system))
    if number is not None and number.worked:
        facts["in SI"] = f"= {number.worked} = {number.value:.6g}"
    facts["name"] += f", {facts.pop('kind')}"
    order = [*(k for k in FIRST if k in facts), *(k for k in facts if k not in FIRST)]
    rows = ((k, wrap(clean(facts[k]).split(), max(8, wide - LEAD))) for k in order if facts[k])
    return [line((f"{k if i == 0 else '':<{LEAD}}", DIM), part) for k, parts in rows for i, part in enumerate(parts)]


def _short(place: Place) -> str:
    if place == HEADLINE:
        return "headline"
    symbol = getattr(tracing.entry_of(place), "symbol", "") or place.key.rpartition(".")[2].replace("_", " ")
    return f"{symbol} at {place.station}" if place.station else symbol


def _below(place: Place) -> str:
    return "beside it:" if input_of(place.key) is not None else "comes from:"


def _row(origin: Origin, wide: int) -> Line:
    """One origin: symbol, name, value."""
    size = max(13, min(26, wide - 39))
    value = fit(clean(origin.value), size)
    room = max(6, min(wide - 12 - size - 1, 56))
    label = fit(clean(origin.label), room)
    return line((f" {fit(origin.symbol, 9):<10} ", BOLD), label + " " * (room - width(label)), f"{value:>{size}}")
