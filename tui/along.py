"""`solve --along`: a case flown along a trajectory, one row a point."""

from __future__ import annotations

import argparse
import math
from collections.abc import Callable, Iterable
from dataclasses import dataclass
from typing import TYPE_CHECKING

from cycle.errors import CaseError, DuctwalkError, Fault
from cycle.glossary import mode_of
from cycle.quantities import MODES, OUTPUT, STATUSES, Input, Output, input_of
from cycle.record import Json, dumps, flown, refused
from tui import sheets
from tui.output import STANDARD_INPUT, emit, load_case, read_content, tell
from tui.solve import AUDIT_FAILED, BAD_INPUT, NO_SOLUTION, SOLVED, settings
from tui.tables import Block, Heading, Lines, Table, as_markdown, as_text
from tui.text import CAUTION, audit_words, figure, named

if TYPE_CHECKING:
    from cycle.flying import Trajectory
    from cycle.result import Walk

_ENTERING = {"flight": ("mach", "dynamic_pressure"), "entry": ("mach", "pressure", "temperature")}
_EARNED = ("altitude", "equivalence_ratio", "captured_mass_fraction", "thrust", "specific_impulse", "stream_thrust_gain")
_TWICE = (
    "flight.mach", "flight.altitude", "flight.dynamic_pressure", "entry.mach", "entry.pressure", "entry.temperature",
    "combustor.equivalence_ratio",
)  # fmt: skip
"""Inputs that the table shows as figures of the walk."""


@dataclass(frozen=True, slots=True)
class Flight:
    """What became of one case along the trajectory: its walk of N points, or the faults."""

    name: str
    walk: Walk | None
    faults: tuple[Fault, ...] = ()


def run(options: argparse.Namespace) -> int:
    """Fly the cases of the command line along the trajectory and write them; returns the highest exit status."""
    if options.output is not None or options.referee or options.sensitivities or options.rows != "stations":
        raise DuctwalkError("--along takes none of -o, --referee, --sensitivities and --rows: those are for single points")
    trajectory = read(options.along)
    changes = settings(options.set)
    flights = [_flown(name, changes, trajectory) for name in options.cases]
    FORMS[options.format](flights, trajectory, options.units)
    return max(status(flight) for flight in flights)


def read(name: str) -> Trajectory:
    """The trajectory of a file, or of standard input for "-". Raises CaseError with all its faults."""
    from cycle.flying import parse_trajectory, read_trajectory

    return parse_trajectory(read_content(name), "standard input") if name == STANDARD_INPUT else read_trajectory(name)


def _flown(name: str, changes: dict[str, object], trajectory: Trajectory) -> Flight:
    from cycle.flying import fly

    try:
        walk = fly(load_case(name).replace(changes), trajectory)
    except CaseError as error:
        tell(str(error))
        return Flight(name, None, error.faults)
    lost = sum(found != "solved" for found in walk.status)
    if lost:
        tell(f"{name}: no solution at {lost} of {walk.size} points")
    if not walk.audit.ok:
        tell(f"{name}: {audit_words(walk)}")
    return Flight(name, walk)


def status(flight: Flight) -> int:
    """0 all solved, 2 bad input, 3 a point without a solution, 4 audit failed."""
    if flight.walk is None:
        return BAD_INPUT
    if not flight.walk.audit.ok:
        return AUDIT_FAILED
    return SOLVED if all(found == "solved" for found in flight.walk.status) else NO_SOLUTION


def flight_blocks(walk: Walk, trajectory: Trajectory, system: str) -> list[Block]:
    """The flight as blocks: a row a point, what the words mean, why points have no solution."""
    told = list(_columns(walk, trajectory, system))
    heads, columns = [head for head, _ in told], [cells for _, cells in told]
    outcome = [mode if found == "solved" else f"no: {found}" for mode, found in zip(_modes(walk), walk.status, strict=True)]
    numbers = [str(i + 1) for i in range(walk.size)]
    rows = tuple(zip(numbers, outcome, *columns, strict=True))
    case = f"Case {walk.case.name} along {trajectory.name}: {walk.size} points; gas model {walk.case.choices['gas.model']}."
    return [
        Heading(walk.case.title, 1), Lines((case,)), Heading("Points"), Table(("point", "mode", *heads), rows, left=(1,)),
        Heading("What the words mean"), Lines(tuple(_meanings(walk))), *_failures(walk), Heading("Audit"), Lines((audit_words(walk),)),
        Heading("Caution"), Lines((CAUTION,)),
    ]  # fmt: skip


def _modes(walk: Walk) -> list[str]:
    """The mode of every point; that of its duct for a rig that has one."""
    isolator = next((p.figures for p in walk.processes if p.name == "isolator"), {})
    own = [mode_of({key: values[i] for key, values in isolator.items()}) for i in range(walk.size)]
    return [f"{mode}, {duct}" if mode == "rig" and duct else str(mode) for mode, duct in zip(walk.mode, own, strict=True)]


def _columns(walk: Walk, trajectory: Trajectory, system: str) -> Iterable[tuple[str, list[str]]]:
    """Head and cells of every column that has a value anywhere."""
    first = next(iter(walk.station.values()), None)
    shown: list[tuple[Input | Output, Iterable[float]]] = []
    shown += [(OUTPUT[key], getattr(first, key)) for key in _ENTERING[walk.case.choices["start"]] if first is not None]
    shown += [(asked, values) for key, values in trajectory.values.items() if key not in _TWICE and (asked := input_of(key))]
    shown += [(OUTPUT[key], getattr(walk.performance, key)) for key in _EARNED]
    for entry, given in shown:
        values = [float(v) for v in given]
        if any(math.isfinite(v) for v in values):
            head = named(entry.symbol or entry.label, entry.unit, system, entry.key)
            yield head, [figure(v, entry.unit, system, entry.key) for v in values]


def _meanings(walk: Walk) -> Iterable[str]:
    for mode in dict.fromkeys(word for modes in _modes(walk) for word in modes.split(", ")):
        if mode != "none":
            yield f"{mode}: {MODES[mode]}."
    for found in dict.fromkeys(walk.status):
        if found != "solved":
            yield f"{found}: {STATUSES[found]}."


def _failures(walk: Walk) -> Iterable[Block]:
    """Each reason once, with the points that have it."""
    where: dict[str, list[int]] = {}
    for number, reason in enumerate(walk.reason, 1):
        if reason:
            where.setdefault(reason, []).append(number)
    if where:
        yield Heading("No solution")
        yield Lines(tuple(f"Point{'s' if len(at) > 1 else ''} {_spans(at)}: {reason}" for reason, at in where.items()))


def _spans(numbers: list[int]) -> str:
    """ "1 to 4, 7" for 1, 2, 3, 4, 7."""
    spans: list[list[int]] = []
    for number in numbers:
        if spans and spans[-1][-1] == number - 1:
            spans[-1] = [spans[-1][0], number]
        else:
            spans.append([number])
    return ", ".join(" to ".join(map(str, span)) for span in spans)


def _plain_form(render: Callable[..., str]) -> Callable[[list[Flight], Trajectory, str], None]:
    def write(flights: list[Flight], trajectory: Trajectory, system: str) -> None:
        found = [render(flight_blocks(f.walk, trajectory, system)) for f in flights if f.walk is not None]
        emit("\n\n".join(found))

    return write


def _json(flight: Flight, trajectory: Trajectory) -> Json:
    if flight.walk is None:
        return refused(flight.name, flight.faults)
    return flown(flight.walk, trajectory.name, trajectory.values)


def _json_form(flights: list[Flight], trajectory: Trajectory, system: str) -> None:
    if system != "si":
        tell("JSON is always in SI; --units has no effect on it")
    found = [_json(flight, trajectory) for flight in flights]
    emit(dumps(found if len(found) > 1 else found[0]))


def _csv_form(flights: list[Flight], trajectory: Trajectory, system: str) -> None:
    emit(sheets.points([(f.name, _json(f, trajectory)) for f in flights], system))


FORMS: dict[str, Callable[[list[Flight], Trajectory, str], None]] = {
    "text": _plain_form(as_text),
    "json": _json_form,
    "csv": _csv_form,
    "markdown": _plain_form(as_markdown),
}
"""Form of the output -> what writes it."""
