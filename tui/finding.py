"""Finding an input, a figure or a word by name, symbol or key. Nothing here knows Textual."""

from __future__ import annotations

import difflib
from collections.abc import Callable, Iterable
from dataclasses import dataclass

from cycle.quantities import GROUPS, INPUTS, MODES, OUTPUTS, STATUSES, Input, Output, input_of
from tui import tracing
from tui.items import written
from tui.rows import hidden
from tui.session import Session
from tui.tracing import Place

LONGEST = 80
"""Characters of a text that are looked for."""


@dataclass(frozen=True, slots=True)
class Found:
    """Something with a name. kind: what it is, in a word or two; rank: which kinds go first; meaning: to look in last."""

    place: Place
    symbol: str
    label: str
    kind: str
    rank: int
    meaning: str
    value: str

    @property
    def name(self) -> str:
        """A name of its own."""
        return f"{self.place.key} @ {self.place.where}"


def everything(session: Session) -> tuple[Found, ...]:
    """All that can be found in a session, with its value; station figures at the station in hand."""
    return (*_inputs(session), *_figures(session), *_processes(session), *_others(session), *_words(session))


def _inputs(session: Session) -> Iterable[Found]:
    case = session.case
    if case is None:
        return
    used = [s for s in case.inputs() if not hidden(case, s.input.key)]
    there = {s.input.key for s in used}
    grouped = {k for g in GROUPS for m in g.members for k in m.keys if g.name in case.choices}
    for stated in used:
        yield _input(stated.input, "input", 0, written(stated, session.system))
    for spec in (i for i in INPUTS if i.key not in there and i.kind != "rows"):
        yield _input(spec, "another way" if spec.key in grouped else "not used here", 6, "-")
    for group in GROUPS:
        if input_of(group.name) is None:
            yield Found(Place(group.name), "", group.meaning, "choice", 5, "", tracing.value(session, Place(group.name)))


def _input(spec: Input, kind: str, rank: int, value: str) -> Found:
    return Found(Place(spec.key), spec.symbol, spec.label, kind, rank, spec.meaning, value)


def _figure(session: Session, spec: Output, where: str, kind: str, rank: int) -> Found:
    place = Place(spec.key, where)
    return Found(place, spec.symbol, spec.label, kind, rank, spec.meaning, tracing.value(session, place))


def _figures(session: Session) -> Iterable[Found]:
    here = session.station
    for spec in OUTPUTS:
        if spec.where == "station":
            yield _figure(session, spec, f"station {here}", f"station {here}", 1)
        else:
            yield _figure(session, spec, "", "engine", 2)


def _processes(session: Session) -> Iterable[Found]:
    from cycle.glossary import process_figure

    for passage in session.figures.passages if session.figures is not None else ():
        for key in passage.figures:
            spec = process_figure(key)
            if spec is not None:
                number = key.rpartition("_")[2]
                where = f"{passage.name} {passage.start} to {passage.end}" + (f", {number}" if number.isdigit() else "")
                yield _figure(session, spec, where, passage.label, 4)


def _others(session: Session) -> Iterable[Found]:
    """Limits, rows of the accounts, and what a duct has."""
    from cycle.glossary import ENTRIES

    duct = session.figures is not None and bool(session.figures.profile)
    kinds = {"limit": "limit", "potential": "thrust account", "loss": "losses", "exergy": "exergy"}
    kinds |= {"profile": "along the duct", "heat": "heat border"} if duct else {}
    for spec in ENTRIES:
        if spec.where in kinds:
            yield _figure(session, spec, "", kinds[spec.where], 3)


def _words(session: Session) -> Iterable[Found]:
    for kind, words in (("status", STATUSES), ("mode", MODES)):
        for key, meaning in words.items():
            yield Found(Place(key), "", key, kind, 5, meaning, tracing.value(session, Place(key)))


def _last(found: Found) -> str:
    return found.place.key.rpartition(".")[2].replace("_", " ").replace("-", " ")


def _begins(words: list[str], text: str) -> bool:
    """Whether each of the words begins a word of the text."""
    there = text.lower().replace("-", " ").replace(".", " ").replace("_", " ").replace(",", " ").split()
    return all(any(t.startswith(w) for t in there) for w in words)


WAYS: tuple[Callable[[Found, str, list[str]], bool], ...] = (
    lambda f, text, words: f.symbol == text or f.place.key == text,
    lambda f, text, words: f.label.lower() == text.lower() or _last(f) == text.lower(),
    lambda f, text, words: f.symbol.lower() == text.lower(),
    lambda f, text, words: f.label.lower().startswith(text.lower()),
    lambda f, text, words: _begins(words, f.label),
    lambda f, text, words: _begins(words, f"{f.place.key} {f.label} {f.kind}"),
    lambda f, text, words: text.lower() in f.label.lower() or text.lower() in f.place.key,
    lambda f, text, words: _begins(words, f.meaning),
)
"""Ways in which a text means a thing, the nearest first: symbol or key, whole name, beginnings of words, a part, the meaning."""


def ranked(everywhere: tuple[Found, ...], text: str) -> list[Found]:
    """What a text means, the nearest first; names that come close to it where nothing has it; all of it for no text."""
    text = " ".join(text.split())[:LONGEST]
    if not text:
        return list(everywhere)
    words = text.lower().replace("-", " ").replace(".", " ").replace("_", " ").split()
    ways = ((next((n for n, way in enumerate(WAYS) if way(f, text, words)), -1), f) for f in everywhere)
    hits = sorted(((n, f.rank, i) for i, (n, f) in enumerate(ways) if n >= 0))
    return [everywhere[i] for _, _, i in hits] or _near(everywhere, text.lower())


def _near(everywhere: tuple[Found, ...], text: str) -> list[Found]:
    names: dict[str, list[Found]] = {}
    for found in everywhere:
        for name in {found.label.lower(), _last(found), *(w for w in found.label.lower().split() if len(w) > 3)}:
            names.setdefault(name, []).append(found)
    close = difflib.get_close_matches(text, names, 6, 0.6)
    return list({f.name: f for name in close for f in names[name]}.values())


def at_stations(session: Session, text: str) -> list[Found]:
    """Figures that a symbol with a station behind it means: Tt4 is the total temperature at station 4."""
    text = text.strip()
    for station in sorted(session.figures.stations if session.figures is not None else (), key=len, reverse=True):
        key = tracing.SYMBOLS.get(text.removesuffix(station)) if text.endswith(station) else None
        if key is not None:
            spec = next(o for o in OUTPUTS if o.key == key)
            return [_figure(session, spec, f"station {station}", f"station {station}", 1)]
    return []
