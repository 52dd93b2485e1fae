"""A peek as a picture: the curve or the map with what is marked on it, and the words on the point under the cursor."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from itertools import pairwise
from typing import TYPE_CHECKING

from cycle.declarations import Input
from cycle.quantities import STATUSES
from cycle.units import format_number, show
from tui.figures import NAN
from tui.line import clean
from tui.peek import Peek, named
from tui.plots import Axis, Chart, Grid, Rule, Series, Spot, Unsolved
from tui.views.numbers import quantity

if TYPE_CHECKING:
    from cycle.sweep import Curve

COMING = {"sweep": "finer points follow", "other": "the pinned case follows", "margins": "the limits follow"}
NOTHING = "nothing here has a solution: - widens the range, < and > move it; the reason stands below"
REFUSED = "these inputs are no case"
CURSOR = "<"
SOLVED = "solved"
DIGITS = 6


def of_input(entry: Input, value: float, system: str, digits: int = DIGITS) -> str:
    """A value of an input with its display unit."""
    return quantity(value, entry.unit, system, digits, entry.key)


def axis_of(entry: Input, system: str) -> Axis:
    """The axis of an input."""
    return Axis(entry.label, show(1.0, entry.unit, system, entry.key)[1])


def of_figure(figure: str, value: float, system: str) -> str:
    """A value of a figure with its display unit."""
    key, _, dimension = named(figure)
    return quantity(value, dimension, system, 5, key)


def _axis_of_figure(figure: str, system: str) -> Axis:
    key, label, dimension = named(figure)
    return Axis(label, show(1.0, dimension, system, key)[1])


def _shown(values: tuple[float, ...], dimension: str, system: str, key: str) -> tuple[float, ...]:
    return tuple(show(v, dimension, system, key)[0] for v in values)


def _values(curve: Curve, figure: str, system: str) -> tuple[float, ...]:
    key, _, dimension = named(figure)
    values = curve.figures.get(figure, (NAN,) * len(curve.status))
    solved = (v if s == SOLVED else NAN for v, s in zip(values, curve.status, strict=True))
    return _shown(tuple(solved), dimension, system, key)


def title(peek: Peek) -> str:
    """What is drawn against what, and of which case."""
    against = " and ".join(s.input.label for s in peek.spans)
    return f"{named(peek.figure)[1]} against {against}: {clean(peek.case.title)}"


def picture(peek: Peek, borders: Mapping[str, float] | None) -> Chart | Grid | None:
    """The curve or the map, None before there is one. borders: of the regimes of a duct, by its heat input."""
    curve = peek.curve
    if curve is None or not curve.status:
        return None
    return _map(peek, curve) if len(curve.shape) > 1 else _line(peek, curve, borders or {})


def _line(peek: Peek, curve: Curve, borders: Mapping[str, float]) -> Chart:
    entry, system = peek.spans[0].input, peek.system
    x, y = _along(curve, 0, system), _values(curve, peek.figure, system)
    axis = _axis_of_figure(peek.figure, system)
    series = [Series("these inputs" if peek.other else axis.label, x, y, "now")]
    other = peek.other.whole if peek.other is not None else None
    if other is not None:
        series.append(Series("the pinned case", _along(other, 0, system), _values(other, peek.figure, system), "pin"))
    marks = [*_marks(peek), *_changes(curve, entry, system, _borders(peek, borders)), *_crossings(peek)]
    unsolved = tuple(Unsolved(place, status) for place, status in zip(x, curve.status, strict=True) if status != SOLVED)
    notes = (NOTHING,) if len(unsolved) == len(x) else ()
    return Chart(title(peek), axis_of(entry, system), axis, tuple(series), tuple(marks), _cursor(peek, x, y), unsolved, notes)


def _along(curve: Curve, axis: int, system: str) -> tuple[float, ...]:
    entry = curve.axes[axis].input
    return _shown(curve.axes[axis].values, entry.unit, system, entry.key)


def _cursor(peek: Peek, x: tuple[float, ...], y: tuple[float, ...]) -> tuple[Spot, ...]:
    """The point under the cursor, at the lower edge where it has no value."""
    at, known = peek.at(), [v for v in y if v == v]
    if at is None or not known:
        return ()
    return (Spot(x[at], y[at] if y[at] == y[at] else min(known), CURSOR),)


def _marks(peek: Peek) -> Iterator[Rule]:
    """The present value and that of the pinned case."""
    entry, system = peek.spans[0].input, peek.system
    yield _rule(entry, peek.here[0], of_input(entry, peek.here[0], system), system, "here")
    pinned = peek.pin.case.value(entry.key) if peek.pin is not None else None
    if isinstance(pinned, float) and peek.pin is not None and (pinned != peek.here[0] or peek.other is not None):
        yield _rule(entry, pinned, of_input(entry, pinned, system), system, "pin")


def _rule(entry: Input, value: float, words: str, system: str, kind: str) -> Rule:
    return Rule("x", show(value, entry.unit, system, entry.key)[0], words, kind)  # type: ignore[arg-type]


def _changes(curve: Curve, entry: Input, system: str, borders: Mapping[str, float]) -> Iterator[Rule]:
    """Where the mode changes between neighbouring points, and where the solution ends: at the border solved for, where one lies
    between them, else halfway."""
    states = zip(curve.axes[0].values, curve.status, curve.mode, strict=True)
    for (left, status, mode), (right, status2, mode2) in pairwise(states):
        if status == status2 and (mode == mode2 or status != SOLVED):
            continue
        found = next((v for v in borders.values() if left <= v <= right), None)
        place = 0.5 * (left + right) if found is None else found
        where = f"{'near' if found is None else 'at'} {of_input(entry, place, system, 4)}"
        if status == status2:
            yield _rule(entry, place, f"{mode} to {mode2} {where}", system, "mode change")
        else:
            yield _rule(entry, place, f"{status if status != SOLVED else status2} {where}", system, "limit")


def _borders(peek: Peek, borders: Mapping[str, float]) -> Mapping[str, float]:
    """The borders of a duct's regimes where its heat is the input, else none."""
    heat = f"combustor.{peek.case.value('combustor.heat')}"
    return borders if [s.input.key for s in peek.spans] == [heat] else {}


def _crossings(peek: Peek) -> Iterator[Rule]:
    """Where a limit is crossed, between neighbouring points that both have a margin."""
    curve = peek.margins.whole if peek.margins is not None else None
    if curve is None:
        return
    entry, system = peek.spans[0].input, peek.system
    for key, margins in curve.margins.items():
        for (left, low), (right, high) in pairwise(zip(curve.axes[0].values, margins, strict=True)):
            if (low < 0.0 <= high) or (high < 0.0 <= low):
                place = left + (right - left) * low / (low - high)
                words = f"{curve.labels[key]}, {'over above' if high < 0.0 else 'over below'} {of_input(entry, place, system, 3)}"
                yield _rule(entry, place, words, system, "limit")


def _map(peek: Peek, curve: Curve) -> Grid:
    first, second = (s.input for s in peek.spans)
    system = peek.system
    x, y = _along(curve, 1, system), _along(curve, 0, system)
    flat = _values(curve, peek.figure, system)
    wide = len(x)
    rows = range(0, len(flat), wide)
    status = tuple(tuple(None if s == SOLVED else s for s in curve.status[n : n + wide]) for n in rows)
    pinned = tuple(peek.pin.case.value(s.input.key) if peek.pin is not None else None for s in peek.spans)
    return Grid(
        title(peek),
        axis_of(first, system),
        axis_of(second, system),
        _axis_of_figure(peek.figure, system),
        x,
        y,
        tuple(flat[n : n + wide] for n in rows),
        status,
        _point(peek, peek.here),
        _point(peek, pinned) if pinned != peek.here else None,
        cursor=_point(peek, peek.place) if peek.place != peek.here else None,
    )


def _point(peek: Peek, values: tuple[object, ...]) -> tuple[float, float] | None:
    """A place on the map in the units shown, None where the case has none."""
    shown = [
        show(v, s.input.unit, peek.system, s.input.key)[0] for v, s in zip(values, peek.spans, strict=True) if isinstance(v, int | float)
    ]
    return (shown[0], shown[1]) if len(shown) == len(peek.spans) == 2 else None


def under_cursor(peek: Peek) -> str:
    """The point under the cursor in words: inputs, figure and mode, or the status with its reason."""
    curve, at = peek.curve, peek.at()
    if curve is None or at is None:
        return "being solved ..."
    index, places = at, []
    for axis in reversed(curve.axes):
        index, own = divmod(index, len(axis.values))
        places.append(f"{axis.input.label} {of_input(axis.input, axis.values[own], peek.system)}")
    status = curve.status[at]
    if status != SOLVED:
        reason = curve.reasons.get(status) or STATUSES.get(status, REFUSED)
        return f"{', '.join(places)}: {status}: {reason}"
    value = curve.figures.get(peek.figure, (NAN,) * len(curve.status))[at]
    told = of_figure(peek.figure, value, peek.system) if value == value else "no value"
    return f"{', '.join(places)}: {named(peek.figure)[1]} {told} | {curve.mode[at]}"


def under_way(peek: Peek) -> str:
    """What is still being solved, "" where all is there."""
    due = peek.due
    if due is None:
        return ""
    done, rows = due[1].done
    part = f", {format_number(done)} of {format_number(rows)} rows" if rows else ""
    words = COMING[due[0]] if peek.curve is not None else "being solved ..."
    return words + part
