"""What a quantity is: meaning, unit, equation and source, and the equation with a walk's numbers in it."""

from __future__ import annotations

import difflib
import math
from collections.abc import Callable, Iterable, Mapping
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING, Any

from cycle import formula, glossary
from cycle.constants import GAS_CONSTANT, STANDARD_GRAVITY
from cycle.errors import DuctwalkError
from cycle.quantities import GROUPS, INPUTS, MODES, OUTPUTS, STATUSES, Group, Input, Output, input_of
from cycle.record import heat_limit_words
from cycle.units import format_number, si_unit

if TYPE_CHECKING:
    from cycle.figures import Process
    from cycle.result import Walk

CONSTANTS: dict[str, tuple[float, str, str]] = {
    "g0": (STANDARD_GRAVITY, "m/s2", "standard gravity"),
    "Ru": (GAS_CONSTANT, "J/(mol K)", "molar gas constant"),
}
"""Symbols of equations that stand for a constant: value in SI, unit, label."""

_STATION = {o.symbol: o for o in OUTPUTS if o.where == "station"}
_PERFORMANCE = {o.symbol: o for o in OUTPUTS if o.where == "performance"}
_FIGURES = {o.key.partition(".")[2]: o for o in glossary.PROCESS_FIGURES}
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
    """One symbol of an equation with its number. value in SI, `unit` as text ("" for a ratio); key: of the figure or input that it is,
    "" for a constant; where: the place of that figure, as in `Number`."""

    symbol: str
    label: str
    value: float
    unit: str
    key: str = ""
    where: str = ""


@dataclass(frozen=True, slots=True)
class Number:
    """A quantity in one walk. where: "station 4", "burner 3 to 4", "x 0.3 m", "" for the whole engine; value in SI, nan where `reason` says
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


_COLUMNS = tuple(replace(c, key=f"{i.key}.{c.key}", label=f"{i.label}, {c.label}", when=i.when) for i in INPUTS for c in i.columns)
_ENTRIES: tuple[Entry, ...] = (*OUTPUTS, *INPUTS, *_COLUMNS, *GROUPS, *glossary.ENTRIES, *_words())
_WAYS: tuple[Callable[[Entry, str], bool], ...] = (
    lambda entry, name: _key(entry) == name,
    lambda entry, name: _symbol(entry) == name,
    lambda entry, name: _long(_key(entry)) == _long(name),
    lambda entry, name: _long(_label(entry)) == _long(name),
    lambda entry, name: _long(_key(entry).rpartition(".")[2]) == _long(name),
    lambda entry, name: bool(_symbol(entry)) and _symbol(entry).lower() == name.strip().lower(),
)
"""Ways in which a name can be meant, the strictest first."""


def find(name: str) -> tuple[Entry, ...]:
    """Entries that `name` means: by long key, symbol or label of an output, an input, a cell of rows, a group of inputs, a figure of a
    process, a limit, a row of an account, a status or a mode.

    Returns one or more (a symbol may stand for several), those of the strictest way that finds any.
    Raises UnknownQuantityError with the nearest names.
    """
    cell = input_of(name)
    if cell is not None and cell.key not in {_key(e) for e in _ENTRIES}:
        return (cell,)
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
    last = _key(entry).rpartition(".")[2]
    return tuple(e for e in _ENTRIES if e is not entry and e not in glossary.PROFILE and _key(e).rpartition(".")[2] == last)


def group_of(entry: Input) -> Group | None:
    """The exactly-one-of group that an input belongs to, None where it stands alone."""
    return next((g for g in GROUPS if any(entry.key in m.keys for m in g.members)), None)


def numbers(entry: Output, walk: Walk) -> tuple[Number, ...]:
    """The quantity in a walk of one point: one Number a station, a process or a few places along the duct, or one for the engine.

    walk: of shape (). A figure without a value comes with its reason; () where this walk has no such figure.
    """
    return tuple(_NUMBERS[entry.where](entry, walk))


def _of_stations(entry: Output, walk: Walk) -> Iterable[Number]:
    return (_number(entry, walk, name) for name in walk.station)


def _of_engine(entry: Output, walk: Walk) -> Iterable[Number]:
    yield _number(entry, walk, "")


def _number(entry: Output, walk: Walk, where: str) -> Number:
    value = float(getattr(walk.station[where] if where else walk.performance, entry.key))
    place = f"station {where}" if where else ""
    if not math.isfinite(value):
        return Number(place, math.nan, walk.why_not_at(where, entry.key) if where else walk.why_not(entry.key), "", ())
    entering = entry.equation.partition(" at ")[2] or entry.equation
    found = {s: _term(s, walk, where) for s in formula.symbols(entering)}
    return _with_terms(entry, place, value, (t for t in found.values() if t is not None))


def _with_terms(entry: Output, where: str, value: float, terms: Iterable[Term]) -> Number:
    known = tuple(t for t in terms if math.isfinite(t.value))
    return Number(where, value, "", _worked(entry, value, known), known)


def _of_processes(entry: Output, walk: Walk) -> Iterable[Number]:
    for process in walk.processes:
        for key, given in process.figures.items():
            declared, value = glossary.process_figure(key), float(given)
            if declared is None or declared.key != entry.key:
                continue
            where = _place(process, key.rpartition("_")[2])
            if math.isfinite(value):
                yield _with_terms(entry, where, value, _figure_terms(entry, where, process.figures))
            else:
                yield Number(where, math.nan, glossary.no_value(key), "", ())


def _figure_terms(entry: Output, where: str, figures: Mapping[str, Any]) -> Iterable[Term]:
    """Figures of the same process that enter the equation."""
    for symbol in formula.symbols(entry.equation):
        declared = glossary.process_figure(symbol)
        if declared is not None and symbol in figures:
            yield Term(symbol, declared.label, float(figures[symbol]), si_unit(declared.unit), declared.key, where)


def _of_limits(entry: Output, walk: Walk) -> Iterable[Number]:
    for limit in walk.limits:
        if f"limit.{limit.key}" != entry.key:
            continue
        if math.isnan(limit.margin):
            yield Number("", math.nan, limit.restore, "", ())
        else:
            actual, allowed = (f(walk) for f in _SIDES.get(limit.key, (_nowhere, _nowhere)))
            sides = (
                ("actual", limit.label, limit.actual, actual),
                ("allowed", "at most" if limit.upper else "at least", limit.allowed, allowed),
            )
            terms = (Term(symbol, label, float(value), si_unit(limit.unit), *place) for symbol, label, value, place in sides)
            yield _with_terms(entry, "", float(limit.margin), terms)


_Side = Callable[["Walk"], tuple[str, str]]
"""Walk -> key and place of the figure or input that a side of a limit is, both "" where it has none."""


def _nowhere(walk: Walk) -> tuple[str, str]:
    return "", ""


def _side(key: str, where: str = "") -> _Side:
    return lambda walk: (key, where)


def _of_process(name: str, key: str) -> _Side:
    def found(walk: Walk) -> tuple[str, str]:
        return next(((f"process.{key}", _place(p)) for p in walk.processes if p.name == name and key in p.figures), ("", ""))

    return found


def _extreme(best: Callable[..., str]) -> _Side:
    """The station that is hottest or coldest."""

    def found(walk: Walk) -> tuple[str, str]:
        known = {s: float(at.temperature) for s, at in walk.station.items() if math.isfinite(float(at.temperature))}
        return ("temperature", f"station {best(known, key=lambda s: known[s])}") if known else ("", "")

    return found


def _heat(walk: Walk) -> tuple[str, str]:
    return f"combustor.{walk.case.choices['combustor.heat']}", ""


_SIDES: dict[str, tuple[_Side, _Side]] = {
    "corridor_low": (_side("dynamic_pressure", "station 0"), _side("limits.dynamic_pressure_low")),
    "corridor_high": (_side("dynamic_pressure", "station 0"), _side("limits.dynamic_pressure_high")),
    "ignition_temperature": (_side("temperature", "station 3"), _side("limits.ignition_temperature")),
    "ignition_pressure": (_side("pressure", "station 3"), _side("limits.ignition_pressure")),
    "slow_ignition": (_side("temperature", "station 3"), _nowhere),
    "burner_separation": (_side("pressure", "station 4"), _side("combustor.separation_limit")),
    "thermal_choking": (_heat, _nowhere),
    "unstart_heat": (_heat, _nowhere),
    "gas_temperature": (_extreme(max), _side("limits.gas_temperature")),
    "model_range": (_extreme(max), _nowhere),
    "data_high": (_extreme(max), _nowhere),
    "data_low": (_extreme(min), _nowhere),
    "nozzle_separation": (_nowhere, _side("limits.nozzle_separation")),
    "shock_on_lip": (_side("mach", "station 0"), _nowhere),
    "duct_separation": (_of_process("isolator", "separation_margin"), _nowhere),
    "unstart": (_of_process("isolator", "unstart_margin"), _nowhere),
    "throat_capacity": (_of_process("isolator", "throat_margin"), _nowhere),
    "train_mach": (_of_process("isolator", "train_mach"), _nowhere),
    "train_reynolds": (_of_process("isolator", "momentum_reynolds"), _nowhere),
    "isolator_length": (_of_process("isolator", "isolator_margin"), _nowhere),
}
"""Limit -> where its actual and its allowed figure come from."""


def _place(process: Process, numbered: str = "") -> str:
    return f"{process.name} {process.start} to {process.end}" + (f", {numbered}" if numbered.isdigit() else "")


def _of_heat(entry: Output, walk: Walk) -> Iterable[Number]:
    name = entry.key.partition(".")[2]
    if name in walk.heat_limits:
        value = walk.heat_limits[name]
        known = math.isfinite(value)
        yield Number("", value if known else math.nan, "" if known else heat_limit_words(value), "", ())


def _of_accounts(entry: Output, walk: Walk) -> Iterable[Number]:
    name, _, key = entry.key.partition(".")
    rows = {"potential": "potentials", "loss": "losses", "exergy": "exergy"}[name]
    found = {row.key: float(row.value) for row in getattr(walk, rows)}
    if key in found:
        yield Number("", found[key], "", "", ())
    elif not found:
        yield Number("", math.nan, walk.why_not("losses" if rows == "potentials" else rows), "", ())


def _of_duct(entry: Output, walk: Walk) -> Iterable[Number]:
    """The quantity at both ends of the duct and where it is least and most."""
    if not walk.profile:
        return
    x, values = walk.profile["x"], walk.profile[entry.key.rpartition(".")[2]]
    rows = [i for i in range(len(x)) if math.isfinite(x[i]) and math.isfinite(values[i])]
    ends = (min(rows, key=lambda i: values[i]), max(rows, key=lambda i: values[i])) if rows else ()
    for i in sorted({*rows[:1], *ends, *rows[-1:]}):
        yield Number(f"x {format_number(float(x[i]))} m", float(values[i]), "", "", ())


_NUMBERS: dict[str, Callable[[Output, Walk], Iterable[Number]]] = {
    "station": _of_stations,
    "performance": _of_engine,
    "process": _of_processes,
    "profile": _of_duct,
    "limit": _of_limits,
    "heat": _of_heat,
    "potential": _of_accounts,
    "loss": _of_accounts,
    "exergy": _of_accounts,
}


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
        return Term(symbol, own.label, float(getattr(source, own.key)), si_unit(own.unit), own.key, f"station {where}" if where else "")
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
            place = f"station {name}"
            return Term(symbol, f"{output.label} at {place}", value, si_unit(output.unit), output.key, place)
    return None


def _input(symbol: str, walk: Walk) -> Term | None:
    for entry in INPUTS:
        if entry.symbol == symbol and entry.key in walk.case.numbers:
            return Term(symbol, entry.label, walk.case.numbers[entry.key], si_unit(entry.unit), entry.key)
    return None


def see_also(entries: tuple[Entry, ...]) -> tuple[str, ...]:
    """Keys worth a look beside the entries found: relations of theirs, and outputs of the same equations."""
    own = {_key(e) for e in entries}
    keys = [_key(r) for e in entries for r in related(e)]
    keys += [o.key for e in entries if isinstance(e, Output) for o in _entering(e)]
    return tuple(k for k in dict.fromkeys(keys) if k not in own)


def _entering(entry: Output) -> tuple[Output, ...]:
    table = {"performance": _PERFORMANCE, "process": _FIGURES}.get(entry.where, _STATION)
    return tuple(table[s] for s in formula.symbols(entry.equation) if s in table)
