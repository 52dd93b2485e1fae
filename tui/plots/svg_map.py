"""The field and the legend of a map in an SVG document."""

from __future__ import annotations

import xml.etree.ElementTree as ET
from functools import partial
from itertools import groupby

from cycle.units import format_number
from tui.plots.chart import Grid
from tui.plots.levels import HERE, PIN, Levels, banded, edges, legend_of, levels_of, spread, status_at, statuses, value_at
from tui.plots.paint import LIMIT_RGB, hexadecimal, ink, ramp
from tui.plots.reading import marks_of, unsolved_entries
from tui.plots.svg_parts import INK, SIZE, Field, Key, group, number, words

_COLUMNS, _ROWS = 120, 90
_LAP = 0.7
"""How far a row of bands reaches under the next one, so that rounding leaves no gap."""

_MOST_MARKS = 30
"""Marks of points without a solution along one side of the field; a finer grid shows some of them."""


def map_keys(grid: Grid, levels: Levels) -> list[Key]:
    """The legend of a map."""
    colours = ramp(len(levels.contours) + 1)
    keys = [Key(partial(_band, colours, n) if n else None, text) for n, text in legend_of(levels)]
    for name, mark, place in (("here", HERE, grid.here), ("pin", PIN, grid.pin)):
        if place is not None:
            keys.append(Key(partial(_mark, mark, INK), f"{name}: {', '.join(map(format_number, place))}"))
    return [*keys, *(Key(partial(_mark, e.tag, hexadecimal(LIMIT_RGB)), e.words) for e in unsolved_entries(statuses(grid)))]


def _mark(text: str, colour: str, parent: ET.Element, left: float, y: float) -> None:
    words(parent, left + 13.0, y + 4.0, text, SIZE, "middle", colour)


def _band(colours: tuple[tuple[int, int, int], ...], n: int, parent: ET.Element, left: float, y: float) -> None:
    """A contour: the colours above and below it, and its digit."""
    for colour, top in ((colours[n], y - 8.0), (colours[n - 1], y)):
        _box(parent, left, top, 26.0, 8.0, hexadecimal(colour))
    words(parent, left + 30.0, y + 4.0, str(n), SIZE)


def _box(parent: ET.Element, x: float, y: float, wide: float, high: float, fill: str) -> None:
    place = {"x": number(x), "y": number(y), "width": number(wide), "height": number(high)}
    ET.SubElement(parent, "rect", place | {"fill": fill})


def draw_map(root: ET.Element, grid: Grid, field: Field) -> None:
    """Bands, digits on their edges, marks of points without a solution, here and pin."""
    levels = levels_of(grid)
    colours = ramp(len(levels.contours) + 1)
    bands = banded(grid, levels, field.x, field.y, _COLUMNS, _ROWS)
    wide, high = field.wide / _COLUMNS, field.high / _ROWS
    own = group(root, "bands", {"shape-rendering": "crispEdges"})
    for r, row in enumerate(bands):
        start = 0
        for band, cells in groupby(row):
            size = len(list(cells))
            if isinstance(band, int):
                tall = high if r == _ROWS - 1 else high + _LAP
                _box(own, field.left + start * wide, field.top + r * high, size * wide, tall, hexadecimal(colours[band]))
            start += size
    text = group(root, "digits")
    for band, places in edges(bands).items():
        for r, c in spread(places):
            dark = ink(colours[band])
            words(text, field.left + (c + 0.5) * wide, field.top + (r + 0.5) * high + 4.0, str(band), SIZE, "middle", dark)
    _missing(group(root, "unsolved"), grid, field)
    for mark, place in ((PIN, grid.pin), (HERE, grid.here)):
        if place is not None and field.holds(*place):
            x, y = field.at_x(place[0]), field.at_y(place[1])
            ET.SubElement(text, "circle", {"cx": number(x), "cy": number(y), "r": "9", "fill": "#ffffff", "stroke": INK})
            words(text, x, y + 4.5, mark, SIZE, "middle")


def _missing(parent: ET.Element, grid: Grid, field: Field) -> None:
    marks = marks_of(statuses(grid))
    colour = hexadecimal(LIMIT_RGB)
    for j in range(0, len(grid.y), -(-len(grid.y) // _MOST_MARKS)):
        for i in range(0, len(grid.x), -(-len(grid.x) // _MOST_MARKS)):
            value = value_at(grid, j, i)
            if value != value:
                words(parent, field.at_x(grid.x[i]), field.at_y(grid.y[j]) + 4.0, marks[status_at(grid, j, i)], SIZE, "middle", colour)
