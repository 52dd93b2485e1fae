"""The field and the legend of a chart in an SVG document."""

from __future__ import annotations

import xml.etree.ElementTree as ET
from functools import partial

from tui.plots.chart import Chart, Kind, Rule, Series
from tui.plots.paint import LIMIT_RGB, SERIES_RGB, hexadecimal
from tui.plots.reading import Ends, Entry, Look, entries, looks, marks_of, points, runs, tags
from tui.plots.scale import drawable
from tui.plots.svg_parts import INK, SIZE, Field, Key, group, number, segment, words

_DASHES = ("", "9 5", "2 4", "9 4 2 4")
"""Dashes of the patterns of `reading.PATTERNS`."""

_SHAPES = ("disc", "up", "box", "lozenge", "ring", "open")
_CORNERS = {"up": ((0, -5), (5, 4), (-5, 4)), "box": ((-4, -4), (4, -4), (4, 4), (-4, 4)),
            "lozenge": ((0, -5), (5, 0), (0, 5), (-5, 0)), "open": ((0, -5), (5, 4), (-5, 4))}  # fmt: skip
_HOLLOW = ("ring", "open")
_RULES: dict[Kind, tuple[str, str, str]] = {
    "limit": (hexadecimal(LIMIT_RGB), "2", ""),
    "mode change": ("#777777", "1", "2 3"),
    "place": ("#999999", "1", "1 2"),
    "here": (INK, "1.5", ""),
    "pin": (hexadecimal(SERIES_RGB[1]), "1.5", "6 4"),
}
"""Colour, width and dashes of a rule."""


def chart_keys(chart: Chart, ends: Ends) -> list[Key]:
    """The legend of a chart; ends: low and high of its axes."""
    return [Key(partial(_sample, chart, entry), entry.words) for entry in entries(chart, ends)]


def _stroke(look: Look, series: Series) -> dict[str, str]:
    dashes = _DASHES[look.pattern]
    own = {"stroke": hexadecimal(SERIES_RGB[look.hue]), "stroke-width": "2.6" if series.role == "now" else "1.8"}
    return own | ({"stroke-dasharray": dashes} if dashes else {})


def _sample(chart: Chart, entry: Entry, parent: ET.Element, left: float, y: float) -> None:
    if entry.what == "series":
        series, look = chart.series[entry.index], looks(chart.series)[entry.index]
        if series.joined:
            ET.SubElement(parent, "path", {"d": f"M{number(left)} {number(y)}h26", "fill": "none", **_stroke(look, series)})
            words(parent, left + 30.0, y + 4.0, look.letter, SIZE)
        else:
            _point(parent, left + 13.0, y, look)
    elif entry.what == "rule":
        _rule(parent, chart.rules[entry.index], left, y, left + 20.0, y)
        words(parent, left + 24.0, y + 4.0, entry.tag, SIZE)
    elif entry.what == "unsolved":
        words(parent, left + 13.0, y + 4.0, entry.tag, SIZE, "middle", _RULES["limit"][0])
    else:
        words(parent, left + 6.0, y + 4.0, entry.tag, SIZE)


def _point(parent: ET.Element, x: float, y: float, look: Look) -> None:
    shape = _SHAPES[look.mark % len(_SHAPES)]
    colour = hexadecimal(SERIES_RGB[look.hue])
    style = {"fill": "#ffffff" if shape in _HOLLOW else colour, "stroke": colour, "stroke-width": "1.5"}
    if shape in _CORNERS:
        corners = " ".join(f"{number(x + dx)},{number(y + dy)}" for dx, dy in _CORNERS[shape])
        ET.SubElement(parent, "polygon", {"points": corners, **style})
    else:
        ET.SubElement(parent, "circle", {"cx": number(x), "cy": number(y), "r": "4", **style})


def _rule(parent: ET.Element, rule: Rule, x0: float, y0: float, x1: float, y1: float) -> None:
    colour, width, dashes = _RULES[rule.kind]
    segment(parent, x0, y0, x1, y1, stroke=colour, stroke_width=width, **({"stroke_dasharray": dashes} if dashes else {}))


def draw_chart(root: ET.Element, chart: Chart, field: Field) -> None:
    """Rules, series, points without a solution and labelled points."""
    _draw_rules(group(root, "rules"), chart, field)
    own = group(root, "series")
    styles = looks(chart.series)
    for order, (series, look) in enumerate(zip(chart.series, styles, strict=True)):
        for run in runs(points(series), series.joined):
            path = [(field.at_x(x), field.at_y(y)) for x, y in run]
            if len(path) == 1:
                _point(own, *path[0], look)
                continue
            steps = "L".join(f"{number(x)} {number(y)}" for x, y in path)
            ET.SubElement(own, "path", {"d": f"M{steps}", "fill": "none", **_stroke(look, series)})
        _letter(own, series, look, field, (order + 0.5) / len(styles))
    marks = marks_of(u.status for u in chart.unsolved)
    missing = group(root, "unsolved")
    for one in chart.unsolved:
        if (x := drawable(one.x)) == x:
            words(missing, field.at_x(x), field.top + field.high + 4.0, marks[one.status], SIZE, "middle", _RULES["limit"][0])
    _draw_spots(group(root, "spots"), chart, field)


def _letter(parent: ET.Element, series: Series, look: Look, field: Field, share: float) -> None:
    """The letter of the legend beside the line, at a place of its own."""
    known = [p for p in points(series) if p[0] == p[0]]
    if look.letter and series.joined and known:
        x, y = known[int(share * len(known))]
        words(parent, field.at_x(x), field.at_y(y) - 5.0, look.letter, SIZE, "middle")


def _draw_rules(parent: ET.Element, chart: Chart, field: Field) -> None:
    for rule, tag in zip(chart.rules, tags(chart.rules), strict=True):
        value = drawable(rule.value)
        scale = field.x if rule.across == "x" else field.y
        if not scale.low <= value <= scale.high:
            continue
        if rule.across == "x":
            at = field.at_x(value)
            _rule(parent, rule, at, field.top, at, field.top + field.high)
            words(parent, at, field.top - 5.0, tag, SIZE, "middle")
        else:
            at = field.at_y(value)
            _rule(parent, rule, field.left, at, field.left + field.wide, at)
            words(parent, field.left + field.wide + 4.0, at + 4.0, tag, SIZE)


def _draw_spots(parent: ET.Element, chart: Chart, field: Field) -> None:
    for spot in chart.spots:
        x, y = drawable(spot.x), drawable(spot.y)
        if x == x and y == y:
            ET.SubElement(parent, "circle", {"cx": number(field.at_x(x)), "cy": number(field.at_y(y)), "r": "4", "fill": INK})
            words(parent, field.at_x(x) + 6.0, field.at_y(y) - 6.0, spot.label, SIZE)
