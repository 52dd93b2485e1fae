"""A map as bands between round values, and what lies between the points of its grid."""

from __future__ import annotations

import math
from bisect import bisect_right
from dataclasses import dataclass

from cycle.units import format_number
from tui.plots.chart import Grid
from tui.plots.scale import Scale, Tick, drawable, heading, scale_of

MOST = 9
"""Contours of a map, so that one digit names each."""

HERE, PIN, CURSOR = "O", "A", "+"
"""Marks of the point in hand and of the pinned one."""

Bands = list[list[int | str]]
Place = tuple[int, int]
_DIGITS = (1 / 6, 1 / 2, 5 / 6)
"""Places along a contour, as shares of its cells, where coloured maps carry its digit."""


@dataclass(frozen=True, slots=True)
class Levels:
    """The contours of a map, rising (() where every value is one), their heading, least and greatest value."""

    contours: tuple[Tick, ...]
    heading: str
    least: float
    most: float

    def band(self, value: float) -> int:
        """How many contours lie at or below a value."""
        return bisect_right([c.value for c in self.contours], value)


def levels_of(grid: Grid) -> Levels:
    """Contours at round values between the least and the greatest value of a grid that has one."""
    values = [v for j in range(len(grid.y)) for i in range(len(grid.x)) if (v := value_at(grid, j, i)) == v]
    least, most = min(values), max(values)
    scale = scale_of(grid.z_axis, values, MOST, tight=True)
    inside = tuple(t for t in scale.ticks if least < t.value < most)[:MOST]
    return Levels(inside, heading(grid.z_axis, scale.power if inside else 0), least, most)


def value_at(grid: Grid, row: int, column: int) -> float:
    """The value of a point of the grid, nan where it has no solution."""
    return drawable(grid.z[row][column]) if grid.why_not(row, column) is None else math.nan


def _brackets(nodes: tuple[float, ...], scale: Scale, cells: int) -> list[tuple[int, int, float]]:
    """For each of `cells` places between the ends of the scale: the nodes on both sides, and the share of the way between them."""
    at = [scale.share(n) * (cells - 1) for n in nodes]
    out = []
    for k in range(cells):
        right = min(max(1, bisect_right(at, k)), len(at) - 1)
        left = max(0, right - 1)
        span = at[right] - at[left]
        out.append((left, right, min(1.0, max(0.0, (k - at[left]) / span)) if span > 0.0 else 0.0))
    return out


def sampled(grid: Grid, x: Scale, y: Scale, columns: int, rows: int) -> list[list[float | str]]:
    """The map at `columns` by `rows` places, the first row at the top (the high end of y).

    A value between four solved points is linear between them; elsewhere the nearest point speaks: its value, or the word of its
    status. Returns: rows of values and words.
    """
    values = [[value_at(grid, j, i) for i in range(len(grid.x))] for j in range(len(grid.y))]
    across, up = _brackets(grid.x, x, columns), _brackets(grid.y, y, rows)
    out: list[list[float | str]] = []
    for low, high, v in reversed(up):
        below, above = values[low], values[high]
        row: list[float | str] = []
        for left, right, u in across:
            between = (1.0 - v) * ((1.0 - u) * below[left] + u * below[right]) + v * ((1.0 - u) * above[left] + u * above[right])
            row.append(between if between == between else _nearest(grid, values, (low, high)[v > 0.5], (left, right)[u > 0.5]))
        out.append(row)
    return out


def _nearest(grid: Grid, values: list[list[float]], row: int, column: int) -> float | str:
    value = values[row][column]
    return value if value == value else status_at(grid, row, column)


def status_at(grid: Grid, row: int, column: int) -> str:
    """Why a point of the grid has no value that can be drawn."""
    return grid.why_not(row, column) or "beyond what is drawn"


def statuses(grid: Grid) -> list[str]:
    """The status of every point without a value."""
    missing = ((j, i) for j in range(len(grid.y)) for i in range(len(grid.x)) if math.isnan(value_at(grid, j, i)))
    return [status_at(grid, j, i) for j, i in missing]


def banded(grid: Grid, levels: Levels, x: Scale, y: Scale, columns: int, rows: int) -> Bands:
    """The map at `columns` by `rows` places: the number of a band, or the word of a status."""
    return [[s if isinstance(s, str) else levels.band(s) for s in row] for row in sampled(grid, x, y, columns, rows)]


def edges(bands: Bands) -> dict[int, list[Place]]:
    """Number of a contour -> its cells (row, column): those of the band above it beside a lower band."""
    out: dict[int, list[Place]] = {}
    for r, row in enumerate(bands):
        for c, own in enumerate(row):
            if isinstance(own, int) and own and _above(bands, r, c, own):
                out.setdefault(own, []).append((r, c))
    return out


def _above(bands: Bands, row: int, column: int, own: int) -> bool:
    around = ((row - 1, column), (row + 1, column), (row, column - 1), (row, column + 1))
    inside = (bands[r][c] for r, c in around if 0 <= r < len(bands) and 0 <= c < len(bands[r]))
    return any(isinstance(b, int) and b < own for b in inside)


def spread(places: list[Place]) -> list[Place]:
    """A few of the cells of a contour, apart from each other."""
    return [places[int(share * len(places))] for share in _DIGITS]


def legend_of(levels: Levels) -> list[tuple[int, str]]:
    """The figures of a map's legend: number of a contour from the highest to the lowest, 0 for words alone, and the words."""
    if not levels.contours:
        return [(0, f"{levels.heading}: {extent(levels.least, levels.most)}")]
    rows = [(n, f"= {levels.contours[n - 1].text}") for n in range(len(levels.contours), 0, -1)]
    return [(0, f"{levels.heading}:"), *rows, (0, f"from {extent(levels.least, levels.most)}")]


def extent(low: float, high: float) -> str:
    """Two values as a range, or as one where they read the same."""
    ends = format_number(low), format_number(high)
    return f"{ends[0]} to {ends[1]}" if ends[0] != ends[1] else ends[0]
