"""Where a figure of a walk comes from: the figures and inputs behind it, one step back at a time.

An equation's terms come first. A figure that no equation gives (pressure, temperature ...) follows from the stream ahead of the
process that ends at its station and from the inputs of that component. Nothing here knows Textual.
"""

from __future__ import annotations

from collections.abc import Callable, Iterable
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

from cycle.quantities import GROUP, INPUT, MODES, OUTPUT, OUTPUTS, STATUSES, Group, Input, Output, input_of, split_cell
from cycle.units import format_number
from tui import items
from tui.figures import NAN, PERFORMANCE_KEYS, Figures
from tui.session import Session, columns_of
from tui.views.numbers import quantity

if TYPE_CHECKING:
    from cycle.explain import Entry, Number

DIGITS = 6
"""Significant digits of a value that is explained."""

STREAM = ("mach", "pressure", "temperature", "velocity", "mass_flow")
"""Figures that say the stream ahead of a process."""

STATED: dict[str, tuple[str, ...]] = {
    "altitude": ("flight.place",),
    "fuel_air_ratio": ("combustor.heat",),
    "equivalence_ratio": ("combustor.heat",),
    "stoichiometric_ratio": ("fuel.identity", "air.moisture"),
    "heating_value": ("fuel.identity", "fuel.energy"),
    "throat_area": ("nozzle.throat_size",),
}
"""Figure of the engine -> groups of inputs that state it, or from which it is found."""


@dataclass(frozen=True, slots=True)
class Place:
    """A figure at its place. key: of a figure, an input, a group, a status or a mode, "" for the list of headline figures; where: as in
    `cycle.explain.Number`."""

    key: str
    where: str = ""

    @property
    def station(self) -> str:
        """The station, "" where the place is none."""
        return self.where.removeprefix("station ") if self.where.startswith("station ") else ""


HEADLINE = Place("")


@dataclass(frozen=True, slots=True)
class Origin:
    """One thing that a figure comes from. place: None for a constant; value: with its unit."""

    place: Place | None
    symbol: str
    label: str
    value: str

    @property
    def name(self) -> str:
        """A name of its own in the list."""
        return f"{self.place.key} @ {self.place.where}" if self.place is not None else f"= {self.symbol}"


def entry_of(place: Place) -> Entry:
    """The declaration behind a place. Parameters: place, with a key. Errors: UnknownQuantityError."""
    from cycle.explain import find

    return find(place.key)[0]


def worked(place: Place, walk: object) -> tuple[Number, ...]:
    """The figure in a walk with its equation; of every station where the place says none. Call it in the worker thread.

    Parameters: place; walk, a `cycle.Walk` of one point. Returns: () for what is no figure.
    """
    from cycle.explain import numbers

    entry = entry_of(place)
    found = numbers(entry, walk) if isinstance(entry, Output) else ()  # type: ignore[arg-type]
    return tuple(n for n in found if not place.where or n.where == place.where)


def in_hand(session: Session) -> Place:
    """The figure under the cursor, or the input in hand."""
    from tui.views.table import ROWS

    if session.focus == "table":
        return Place(ROWS[session.row], f"station {session.station}")
    hand = items.in_hand(session)
    return Place(hand.key) if hand is not None else HEADLINE


def value(session: Session, place: Place) -> str:
    """A figure in the present walk, or an input, with its unit; "-" where there is none, "" where only the worker knows."""
    spec, found = OUTPUT.get(place.key), session.figures
    if spec is not None and found is not None:
        number = found.at(place.station, spec.key) if spec.where == "station" else found.performance.get(spec.key, NAN)
        return quantity(number, spec.unit, session.system, DIGITS, spec.key)
    if place.key.startswith("process.") and found is not None:
        return _process_value(session, found, place)
    if place.key.startswith("potential.") and found is not None:
        label = getattr(entry_of(place), "label", "")
        return next((quantity(r.value, r.unit, session.system, DIGITS) for r in found.potentials if r.label == label), "-")
    limit = next((m for m in found.limits if f"limit.{m.key}" == place.key), None) if found is not None else None
    if limit is not None:
        return limit.state if limit.margin != limit.margin else f"margin {format_number(100.0 * limit.margin, 3)} %, {limit.state}"
    if place.key in STATUSES or place.key in MODES:
        return _word(found, place.key) if found is not None else ""
    return _written(session, place.key)


def _word(found: Figures, key: str) -> str:
    """What a status or a mode is in this walk: its reason where the walk ended by it."""
    if key == found.status and found.reason:
        return f"this walk: {found.reason}"
    return "this walk" if key in (found.status, found.mode) else ""


def _process_value(session: Session, found: Figures, place: Place) -> str:
    from cycle.glossary import process_figure

    for passage in found.passages:
        if place.where.startswith(f"{passage.name} {passage.start} to {passage.end}"):
            number = place.where.rpartition(", ")[2]
            key = place.key.removeprefix("process.")
            key = f"{key}_{number}" if number.isdigit() else key
            spec = process_figure(key)
            return quantity(passage.figures.get(key, NAN), spec.unit, session.system, DIGITS) if spec is not None else "-"
    return "-"


def _written(session: Session, key: str) -> str:
    case = session.case
    if case is None:
        return "-"
    if key in GROUP:
        return str(case.choices.get(key, "not used"))
    stated = next((s for s in case.inputs() if s.input.key == key), None)
    if stated is None:
        return "-" if input_of(key) is not None else ""
    return items.written(stated, session.system)


def origins(session: Session, place: Place, found: tuple[Number, ...]) -> tuple[Origin, ...]:
    """What a figure comes from, one step back.

    Parameters: session; place; found, the figure as `worked` gave it, () where it has not come yet. Returns: each origin once.
    """
    if place == HEADLINE:
        rows = [*_failed(session), *(_figure(session, OUTPUT[key], Place(key)) for key in PERFORMANCE_KEYS)]
    else:
        rows = list(_ORIGINS[type(entry_of(place)).__name__](session, place, entry_of(place), found))
    once = {r.name: r for r in reversed(rows) if r.place != place}
    return tuple(reversed(once.values()))


def _failed(session: Session) -> Iterable[Origin]:
    """The status of a walk without a solution."""
    if session.failed and session.figures is not None:
        status = session.figures.status
        yield Origin(Place(status), "", f"no solution: {STATUSES.get(status, status)}", status)


def _figure(session: Session, spec: Output, place: Place) -> Origin:
    where = f", {place.where}" if place.where else ""
    return Origin(place, spec.symbol, f"{spec.label}{where}", value(session, place))


def _of_output(session: Session, place: Place, entry: Output, found: tuple[Number, ...]) -> Iterable[Origin]:
    if value(session, place) in ("-", "") and len(found) < 2:
        yield from _failed(session)
    yield from _terms(session, place, entry, found)
    yield from _BEHIND[entry.where](session, place)


def _terms(session: Session, place: Place, entry: Output, found: tuple[Number, ...]) -> Iterable[Origin]:
    """The terms of the equation; the places of the figure where it has several and none is meant."""
    if len(found) > 1:
        for number in found:
            shown = quantity(number.value, entry.unit, session.system, DIGITS, entry.key)
            yield Origin(replace(place, where=number.where), entry.symbol, number.where, shown)
        return
    for term in (t for n in found for t in n.terms):
        at = Place(term.key, term.where) if term.key else None
        if at is None:
            yield Origin(None, term.symbol, term.label, f"{format_number(term.value, DIGITS)} {term.unit}".strip())
        else:
            unit = getattr(entry_of(at), "unit", "ratio")
            yield Origin(at, term.symbol, term.label, quantity(term.value, unit, session.system, DIGITS, term.key))


def _inputs(session: Session, station: str) -> Iterable[Origin]:
    """Inputs of the component that ends at a station, those given first."""
    here = [i for i in items.items(replace(session, station=station)) if not i.key.startswith("limits.")]
    for item in sorted(here, key=lambda i: i.default):
        yield Origin(Place(item.key), _symbol(item.input), item.label, item.written + (" d" if item.default else ""))


def _symbol(spec: Input | None) -> str:
    return spec.symbol if spec is not None else ""


def _stream(session: Session, station: str) -> Iterable[Origin]:
    return (_figure(session, OUTPUT[key], Place(key, f"station {station}")) for key in STREAM)


def _component(session: Session, start: str, end: str) -> Iterable[Origin]:
    """The stream ahead of a component and its inputs."""
    if start and start != end:
        yield from _stream(session, start)
    yield from _inputs(session, end)


def _behind_station(session: Session, place: Place) -> Iterable[Origin]:
    columns = columns_of(session.case)
    if not OUTPUT[place.key].equation and place.station in columns:
        at = columns.index(place.station)
        yield from _component(session, columns[at - 1] if at else "", place.station)


def _behind_performance(session: Session, place: Place) -> Iterable[Origin]:
    stated = {s.input.key: s for s in session.case.inputs()} if session.case is not None else {}
    for group in STATED.get(place.key, ()):
        for key in (k for m in GROUP[group].members for k in m.keys if k in stated):
            yield Origin(Place(key), INPUT[key].symbol, f"{INPUT[key].label}, input", items.written(stated[key], session.system))


def _behind_process(session: Session, place: Place) -> Iterable[Origin]:
    start, _, end = place.where.partition(",")[0].rpartition(" to ")
    if end:
        yield from _component(session, start.rpartition(" ")[2], end)


def _behind_limit(session: Session, place: Place) -> Iterable[Origin]:
    """The input that gives margin back."""
    found = session.figures
    limit = next((m for m in found.limits if f"limit.{m.key}" == place.key), None) if found is not None else None
    spec = input_of(limit.input) if limit is not None and limit.input else None
    if spec is not None:
        yield Origin(Place(spec.key), spec.symbol, f"{spec.label}, moves it", _written(session, spec.key))


def _behind_burner(session: Session, place: Place) -> Iterable[Origin]:
    return _component(session, "3", "4")


def _behind_potential(session: Session, place: Place) -> Iterable[Origin]:
    """The thrust potential ahead of a process and behind it."""
    name = place.key.partition(".")[2].replace("_", " ")
    for passage in session.figures.passages if session.figures is not None else ():
        if passage.name == name:
            for station in dict.fromkeys((passage.end, passage.start)):
                yield _figure(session, OUTPUT["thrust_potential"], Place("thrust_potential", f"station {station}"))


def _behind_nothing(session: Session, place: Place) -> Iterable[Origin]:
    return ()


_BEHIND: dict[str, Callable[[Session, Place], Iterable[Origin]]] = {
    "station": _behind_station,
    "performance": _behind_performance,
    "process": _behind_process,
    "limit": _behind_limit,
    "profile": _behind_burner,
    "heat": _behind_burner,
    "potential": _behind_potential,
    "loss": _behind_nothing,
    "exergy": _behind_nothing,
}
"""Where a figure stands -> what it comes from beside the terms of its equation."""


def _of_input(session: Session, place: Place, entry: Input, found: tuple[Number, ...]) -> Iterable[Origin]:
    """Other ways to say it, and the stream that it meets first."""
    cell = split_cell(entry.key)
    key = cell[0].key if cell is not None else entry.key
    for group in (g for g in GROUP.values() if any(key in m.keys for m in g.members)):
        for other in (k for m in group.members for k in m.keys if k != key):
            yield Origin(Place(other), INPUT[other].symbol, f"{INPUT[other].label}, another way", _written(session, other))
    station = items.home(session, entry.key)
    for origin in _stream(session, station):
        yield replace(origin, label=f"{origin.label}, behind it")


def _of_group(session: Session, place: Place, entry: Group, found: tuple[Number, ...]) -> Iterable[Origin]:
    for key in dict.fromkeys(k for m in entry.members for k in m.keys):
        yield Origin(Place(key), INPUT[key].symbol, INPUT[key].label, _written(session, key))


def _of_word(session: Session, place: Place, entry: object, found: tuple[Number, ...]) -> Iterable[Origin]:
    """Of a status that holds: the stream it stopped at, and the inputs of the process that failed."""
    now = session.figures
    if now is None or place.key != now.status or now.solved:
        return
    columns = columns_of(session.case)
    reached = [s for s in columns if s in now.stations]
    beyond = [s for s in columns if s not in now.stations]
    yield from _component(session, reached[-1] if reached else "", beyond[0] if beyond else columns[-1])


_ORIGINS: dict[str, Callable[..., Iterable[Origin]]] = {
    "Output": _of_output,
    "Input": _of_input,
    "Group": _of_group,
    "Word": _of_word,
}
"""Kind of an entry -> what it comes from."""

SYMBOLS = {o.symbol: o.key for o in OUTPUTS if o.where == "station"}
"""Symbol of a figure of a station -> its key."""
