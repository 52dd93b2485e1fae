"""The points of a picture as comma-separated values (RFC 4180), with the status of each."""

from __future__ import annotations

import csv
import io
import math
from collections.abc import Iterator

from tui.plots.chart import NO_VALUE, Axis, Chart, Grid
from tui.plots.scale import heading

SOLVED = "solved"

Row = tuple[str, ...]


def csv_text(picture: Chart | Grid) -> str:
    """Every point of a chart or of a map, one a row, under a header that names the units.

    A chart has the columns series, x, y, status: its series in order, points asked for without a solution where they belong (or
    behind, where the series has no such x), then its labelled points. A map has x, y, z, status. A value that does not exist is
    empty and its status says why. Returns: the text, lines ended by CR LF.
    """
    out = io.StringIO()
    writer = csv.writer(out)
    if isinstance(picture, Grid):
        writer.writerow([*map(heading, (picture.x_axis, picture.y_axis, picture.z_axis)), "status"])
        writer.writerows(_grid(picture))
    else:
        writer.writerow(["series", heading(picture.x_axis), heading(picture.y_axis), "status"])
        writer.writerows(_chart(picture))
    return out.getvalue()


def _number(value: float) -> str:
    """The shortest text that reads back as the value, "" where there is none."""
    return repr(float(value)) if math.isfinite(value) else ""


def _place(axis: Axis, value: float) -> str:
    """A value of an axis, by its name where it has one."""
    return axis.names[int(value)] if axis.names and math.isfinite(value) else _number(value)


def _grid(grid: Grid) -> Iterator[Row]:
    for j, y in enumerate(grid.y):
        for i, x in enumerate(grid.x):
            status = grid.why_not(j, i)
            yield _number(x), _number(y), _number(grid.z[j][i]) if status is None else "", status or SOLVED


def _chart(chart: Chart) -> Iterator[Row]:
    used: set[int] = set()
    for series in chart.series:
        own = {u.x: n for n, u in reversed(list(enumerate(chart.unsolved))) if u.series in ("", series.label)}
        for x, y in zip(series.x, series.y, strict=True):
            solved = math.isfinite(x) and math.isfinite(y)
            at = None if solved else own.get(x)
            if at is not None:
                used.add(at)
            status = SOLVED if solved else NO_VALUE if at is None else chart.unsolved[at].status
            yield series.label, _place(chart.x_axis, x), _number(y), status
    for n, missing in enumerate(chart.unsolved):
        if n not in used:
            yield missing.series, _number(missing.x), "", missing.status
    for spot in chart.spots:
        status = SOLVED if math.isfinite(spot.x) and math.isfinite(spot.y) else NO_VALUE
        yield f"point {spot.label}", _place(chart.x_axis, spot.x), _number(spot.y), status
