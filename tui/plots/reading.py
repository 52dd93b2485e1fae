"""What a picture has to say before it is drawn: whether it can be, how far its axes reach, how its series look, its legend."""

from __future__ import annotations

import math
from collections import Counter
from collections.abc import Iterable, Mapping
from dataclasses import dataclass
from typing import Literal

from tui.plots.chart import Axis, Chart, Grid, Kind, Rule, Series
from tui.plots.scale import drawable

Across = Literal["x", "y"]
Path = list[tuple[float, float]]
Ends = Mapping[Across, tuple[float, float]]
"""Low and high end of both axes as drawn."""

MARKS = ("x", "#", "%")
OTHER_MARK = "?"
"""Marks of points without a solution: one for each of the commonest statuses, one for all others."""

PATTERNS: tuple[tuple[str, str], ...] = (("solid", "1"), ("dashed", "111111000"), ("dotted", "100"), ("dash-dot", "111111000100"))
"""How lines are told apart without colour: name, and dots drawn or left out along the line."""

HUES = 6
_LETTERS = "abcdefghijklmnopqrstuvwxyz"
_TAG: Mapping[Kind, str] = {"limit": "L", "mode change": "M", "place": "P", "here": "O", "pin": "A"}
_HOLDS: tuple[Kind, ...] = ("here", "pin")
"""Rules that the axes always reach."""

_NEAR = 0.25
"""Share of the data's span within which a limit outside it still widens the axis."""

_BEYOND = {("x", False): "left of the picture", ("x", True): "right of the picture",
           ("y", False): "below the picture", ("y", True): "above the picture"}  # fmt: skip


@dataclass(frozen=True, slots=True)
class Look:
    """How a series is drawn: index of its dash pattern, of its hue and of its mark, and its letter ("" where it is alone)."""

    pattern: int
    hue: int
    mark: int
    letter: str


@dataclass(frozen=True, slots=True)
class Entry:
    """A line of the legend: what it explains, which one of these, its tag or mark, and the words."""

    what: Literal["series", "rule", "unsolved", "spot"]
    index: int
    tag: str
    words: str


def points(series: Series) -> Path:
    """The points of a series as they can be drawn, (nan, nan) for a gap."""
    pairs = ((drawable(x), drawable(y)) for x, y in zip(series.x, series.y, strict=True))
    return [(x, y) if x == x and y == y else (math.nan, math.nan) for x, y in pairs]


def runs(path: Path, joined: bool) -> list[Path]:
    """The pieces of a path between its gaps; single points where it is not joined."""
    if not joined:
        return [[p] for p in path if p[0] == p[0]]
    out: list[Path] = [[]]
    for point in path:
        if point[0] == point[0]:
            out[-1].append(point)
        elif out[-1]:
            out.append([])
    return [run for run in out if run]


def looks(series: tuple[Series, ...]) -> tuple[Look, ...]:
    """The look of every series: roles have their own, the others share what is left in turn."""
    roles = {"now": 0, "pin": 1}
    taken = {roles[s.role] for s in series if s.role in roles}
    patterns, hues = ([n for n in range(size) if n not in taken] for size in (len(PATTERNS), HUES))
    out, plain = [], 0
    for order, one in enumerate(series):
        letter = _LETTERS[order % len(_LETTERS)] if len(series) > 1 else ""
        if one.role in roles:
            out.append(Look(roles[one.role], roles[one.role], order, letter))
        else:
            out.append(Look(patterns[plain % len(patterns)], hues[plain % len(hues)], order, letter))
            plain += 1
    return tuple(out)


def counted(statuses: Iterable[str]) -> list[tuple[str, int]]:
    """Statuses with the number of their points, the commonest first."""
    return sorted(Counter(statuses).items(), key=lambda item: (-item[1], item[0]))


def marks_of(statuses: Iterable[str]) -> dict[str, str]:
    """Status -> mark; the commonest have one of their own."""
    return {s: MARKS[i] if i < len(MARKS) else OTHER_MARK for i, (s, _) in enumerate(counted(statuses))}


def unsolved_entries(statuses: list[str]) -> list[Entry]:
    """The legend of points without a solution: mark, status and how many points."""
    tally = counted(statuses)
    entries = [Entry("unsolved", i, MARKS[i], f"no solution: {s} ({plural(n)})") for i, (s, n) in enumerate(tally[: len(MARKS)])]
    rest = tally[len(MARKS) :]
    if rest:
        words = ", ".join(f"{status} ({n})" for status, n in rest)
        entries.append(Entry("unsolved", len(MARKS), OTHER_MARK, f"no solution: {words}"))
    return entries


def plural(number: int) -> str:
    """A number of points in words."""
    return f"{number} point" if number == 1 else f"{number} points"


def refusal(picture: Chart | Grid) -> str:
    """Why a picture cannot be drawn, "" where it can."""
    if isinstance(picture, Grid):
        return _grid_refusal(picture)
    if not any(x == x for s in picture.series for x, _ in points(s)) and not picture.spots:
        return _none_solved([u.status for u in picture.unsolved])
    sides: tuple[tuple[Across, Axis], ...] = (("x", picture.x_axis), ("y", picture.y_axis))
    for across, axis in sides:
        words = log_refusal(axis, held(picture, across))
        if words:
            return words
    return "" if all(held(picture, across) for across, _ in sides) else _none_solved([])


def _grid_refusal(grid: Grid) -> str:
    statuses = [s for j in range(len(grid.y)) for i in range(len(grid.x)) if (s := grid.why_not(j, i))]
    values = [drawable(z) for j, row in enumerate(grid.z) for i, z in enumerate(row) if grid.why_not(j, i) is None]
    values = [z for z in values if z == z]
    if not values:
        return _none_solved(statuses)
    axes = ((grid.x_axis, grid.x), (grid.y_axis, grid.y), (grid.z_axis, values))
    for axis, places in axes:
        known = [v for v in map(drawable, places) if v == v]
        if len(known) < len(places):
            return f"{axis.label} reaches beyond what can be drawn"
        if words := log_refusal(axis, known):
            return words
    return ""


def _none_solved(statuses: list[str]) -> str:
    if not statuses:
        return "no point to draw"
    return "no solved point: " + ", ".join(f"{status} {number}" for status, number in counted(statuses))


def log_refusal(axis: Axis, values: list[float]) -> str:
    """Why an axis cannot be logarithmic, "" where it can or is not asked to be."""
    wrong = sum(v <= 0.0 for v in values)
    if not axis.log or not wrong:
        return ""
    return f"no log axis: {axis.label} has {wrong} {'value' if wrong == 1 else 'values'} at or below zero"


def held(chart: Chart, across: Across) -> list[float]:
    """The values that an axis of a chart has to contain: all points drawn, spots, points without a solution, here and pin."""
    which = 0 if across == "x" else 1
    values = [p[which] for s in chart.series for p in points(s)]
    values += [drawable((s.x, s.y)[which]) for s in chart.spots if drawable(s.x) == drawable(s.x) and drawable(s.y) == drawable(s.y)]
    values += [drawable(r.value) for r in chart.rules if r.across == across and r.kind in _HOLDS]
    if across == "x":
        values += [drawable(u.x) for u in chart.unsolved]
    return [v for v in values if v == v]


def reached(chart: Chart, across: Across) -> list[float]:
    """The values of `held`, and those of limits and mode changes near them."""
    axis = chart.x_axis if across == "x" else chart.y_axis
    values = held(chart, across)
    ends = [_stretched(v, axis) for v in (min(values), max(values))]
    room = _NEAR * (ends[1] - ends[0])
    others = (drawable(r.value) for r in chart.rules if r.across == across)
    near = (v for v in others if v > 0.0 or (v == v and not axis.log))
    return [*values, *(v for v in near if ends[0] - room <= _stretched(v, axis) <= ends[1] + room)]


def _stretched(value: float, axis: Axis) -> float:
    return math.log10(value) if axis.log else value


def tags(rules: tuple[Rule, ...]) -> tuple[str, ...]:
    """A short tag for every rule, numbered where a kind has several."""
    totals, seen = Counter(r.kind for r in rules), Counter[Kind]()
    out = []
    for rule in rules:
        seen[rule.kind] += 1
        out.append(_TAG[rule.kind] + (str(seen[rule.kind]) if totals[rule.kind] > 1 else ""))
    return tuple(out)


def outside(rule: Rule, low: float, high: float) -> str:
    """Where a rule lies that the picture does not reach, "" where it does."""
    value = drawable(rule.value)
    if low <= value <= high:
        return ""
    return "has no value" if value != value else _BEYOND[rule.across, value > high]


def entries(chart: Chart, ends: Ends) -> list[Entry]:
    """The legend of a chart.

    Parameters: chart; ends, low and high of the axes as drawn. Returns: series (where there is more than one, or its label says
    more than the axis), points without a solution, rules, spots that have words.
    """
    styles = looks(chart.series)
    out = [
        Entry("series", i, styles[i].letter, s.label)
        for i, s in enumerate(chart.series)
        if len(chart.series) > 1 or s.label not in ("", chart.y_axis.label)
    ]
    out += unsolved_entries([u.status for u in chart.unsolved])
    for i, (rule, tag) in enumerate(zip(chart.rules, tags(chart.rules), strict=True)):
        off = outside(rule, *ends[rule.across])
        out.append(Entry("rule", i, tag, f"{rule.kind}: {rule.words}" + (f" ({off})" if off else "")))
    return out + [Entry("spot", i, s.label, s.words) for i, s in enumerate(chart.spots) if s.words]
