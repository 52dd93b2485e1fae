"""What a quantity is: meaning, unit, equation and source, and the equation with a walk's numbers in it."""

from __future__ import annotations

import difflib
import math
from collections.abc import Callable
from dataclasses import dataclass
from typing import TYPE_CHECKING

from cycle import formula
from cycle.constants import GAS_CONSTANT, STANDARD_GRAVITY
from cycle.errors import DuctwalkError
from cycle.quantities import GROUPS, INPUTS, MODES, OUTPUTS, STATUSES, Group, Input, Output
from cycle.units import si_unit

if TYPE_CHECKING:
    from cycle.result import Walk

CONSTANTS: dict[str, tuple[float, str, str]] = {
    "g0": (STANDARD_GRAVITY, "m/s2", "standard gravity"),
    "Ru": (GAS_CONSTANT, "J/(mol K)", "molar gas constant"),
}
"""Symbols of equations that stand for a constant: value in SI, unit, label."""

_STATION = {o.symbol: o for o in OUTPUTS if o.where == "station"}
_PERFORMANCE = {o.symbol: o for o in OUTPUTS if o.where == "performance"}
_AGREES = 1e-6  # of the value: a worked equation is shown only where it gives the emitted figure


@dataclass(frozen=True, slots=True)
class Word:
    """A status or a mode: one word of a closed list and what it means."""

    key: str
    label: str
    meaning: str
    symbol: str = ""


Entry = Input | Output | Group | Word


class UnknownQuantityError(DuctwalkError):
    """No input, output or word has this name. given: the name; near: names that come close."""

    def __init__(self, given: str, near: tuple[str, ...]) -> None:
        self.given, self.near = given, near
        hint = f"; did you mean {' or '.join(near)}?" if near else ""
        super().__init__(f"no quantity is called {given!r}{hint}")


@dataclass(frozen=True, slots=True)
class Term:
    """One symbol of an equation with its number. value in SI, `unit` as text ("" for a ratio)."""

    symbol: str
    label: str
    value: float
    unit: str


@dataclass(frozen=True, slots=True)
class Number:
    """A quantity in one walk. where: the station, "" for a figure of the whole engine; value in SI, nan where `reason` says
    why there is none; worked: the equation with numbers, "" where it is in words; terms: the numbers that enter it."""

    where: str
    value: float
    reason: str
    worked: str
    terms: tuple[Term, ...]


def _words() -> tuple[Word, ...]:
    statuses = (Word(key, "status of a walk", meaning) for key, meaning in STATUSES.items())
    return (*statuses, *(Word(key, "mode of the engine", meaning) for key, meaning in MODES.items()))


def _label(entry: Entry) -> str:
    return entry.name if isinstance(entry, Group) else entry.label


def _key(entry: Entry) -> str:
    return entry.name if isinstance(entry, Group) else entry.key


def _symbol(entry: Entry) -> str:
    return "" if isinstance(entry, Group) else entry.symbol


def _long(name: str) -> str:
    return name.strip().lower().replace(" ", "_").replace("-", "_")


_ENTRIES: tuple[Entry, ...] = (*OUTPUTS, *INPUTS, *GROUPS, *_words())
_WAYS: tuple[Callable[[Entry, str], bool], ...] = (
    lambda entry, name: _key(entry) == name,
    lambda entry, name: _symbol(entry) == name,
    lambda entry, name: _long(_key(entry)) == _long(name),
    lambda entry, name: _long(_label(entry)) == _long(name),
    lambda entry, name: isinstance(entry, Input | Group) and _long(_key(entry).split(".")[1]) == _long(name),
    lambda entry, name: bool(_symbol(entry)) and _symbol(entry).lower() == name.strip().lower(),
)
"""Ways in which a name can be meant, the strictest first."""


def find(name: str) -> tuple[Entry, ...]:
    """Entries that `name` means: by long key, symbol or label of an output, an input, a group of inputs, a status or a mode.

    Returns one or more (a symbol may stand for several), those of the strictest way that finds any.
    Raises UnknownQuantityError with the nearest names.
    """
    for way in _WAYS:
        found = tuple(entry for entry in _ENTRIES if name.strip() and way(entry, name))
        if found:
            return found
    raise UnknownQuantityError(name, _nearest(name))


def _nearest(name: str) -> tuple[str, ...]:
    """Keys of entries with a name close to `name`, the closest first."""
    keys: dict[str, str] = {}
    for entry in _ENTRIES:
        for known in (_key(entry).split(".")[-1], _label(entry), _symbol(entry), _key(entry)):
            keys.setdefault(_long(known), _key(entry))
    given = _long(name)[:80]
    holding = [n for n in keys if len(given) > 2 and given in n]
    near = difflib.get_close_matches(given, [n for n in keys if n], 3, 0.6)
    return tuple(dict.fromkeys(keys[n] for n in [*near, *holding]))[:3]


def related(entry: Entry) -> tuple[Entry, ...]:
    """Other entries that share the last part of the key: the input `flight.mach` beside the output `mach`."""
    last = _key(entry).split(".")[-1]
    return tuple(e for e in _ENTRIES if e is not entry and _key(e).split(".")[-1] == last)


def group_of(entry: Input) -> Group | None:
    """The exactly-one-of group that an input belongs to, None where it stands alone."""
    return next((g for g in GROUPS if any(entry.key in m.keys for m in g.members)), None)


def numbers(entry: Output, walk: Walk) -> tuple[Number, ...]:
    """The quantity in a walk of one point: one Number a station, or one for the engine.

    walk: of shape (). A figure without a value comes with its reason.
    """
    if entry.where == "station":
        return tuple(_number(entry, walk, name) for name in walk.station)
    return (_number(entry, walk, ""),)


def _number(entry: Output, walk: Walk, where: str) -> Number:
    value = float(getattr(walk.station[where] if where else walk.performance, entry.key))
    if not math.isfinite(value):
        return Number(where, math.nan, walk.reason if where else walk.why_not(entry.key), "", ())
    entering = entry.equation.partition(" at ")[2] or entry.equation
    found = {s: _term(s, walk, where) for s in formula.symbols(entering)}
    terms = tuple(t for t in found.values() if t is not None and math.isfinite(t.value))
    return Number(where, value, "", _worked(entry, value, terms), terms)


def _worked(entry: Output, value: float, terms: tuple[Term, ...]) -> str:
    known = {t.symbol: t.value for t in terms}
    try:
        worked = formula.work(entry.equation, known.get)
    except formula.NoNumbersError:
        return ""
    return worked.text if abs(worked.value - value) <= _AGREES * max(abs(value), abs(worked.value)) else ""


def _term(symbol: str, walk: Walk, where: str) -> Term | None:
    """The number behind a symbol: a constant, a figure of the station at hand or of the engine, or with a station behind it."""
    if symbol in CONSTANTS:
        value, unit, label = CONSTANTS[symbol]
        return Term(symbol, label, value, unit)
    own = (_STATION if where else _PERFORMANCE).get(symbol)
    if own is not None:
        source = walk.station[where] if where else walk.performance
        return Term(symbol, own.label, float(getattr(source, own.key)), si_unit(own.unit))
    return _at_station(symbol, walk) or _input(symbol, walk)


def _at_station(symbol: str, walk: Walk) -> Term | None:
    names = tuple(walk.station)
    if not names:
        return None
    places = {name: name for name in names} | {"_entry": names[0], "_end": names[-1]}
    for suffix in sorted(places, key=len, reverse=True):
        output = _STATION.get(symbol.removesuffix(suffix))
        if symbol.endswith(suffix) and output is not None:
            name = places[suffix]
            value = float(getattr(walk.station[name], output.key))
            return Term(symbol, f"{output.label} at station {name}", value, si_unit(output.unit))
    return None


def _input(symbol: str, walk: Walk) -> Term | None:
    for entry in INPUTS:
        if entry.symbol == symbol and entry.key in walk.case.numbers:
            return Term(symbol, entry.label, walk.case.numbers[entry.key], si_unit(entry.unit))
    return None


def see_also(entries: tuple[Entry, ...]) -> tuple[str, ...]:
    """Keys worth a look beside the entries found: relations of theirs, and outputs of the same equations."""
    own = {_key(e) for e in entries}
    keys = [_key(r) for e in entries for r in related(e)]
    keys += [o.key for e in entries if isinstance(e, Output) for o in _entering(e)]
    return tuple(k for k in dict.fromkeys(keys) if k not in own)


def _entering(entry: Output) -> tuple[Output, ...]:
    table = _PERFORMANCE if entry.where == "performance" else _STATION
    return tuple(table[s] for s in formula.symbols(entry.equation) if s in table)
