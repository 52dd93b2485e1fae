"""A picture as a self-contained SVG 1.1 document: the same ticks, legend, dashes and marks as on the terminal."""

from __future__ import annotations

import xml.etree.ElementTree as ET
from dataclasses import dataclass

from tui.line import fit, wrap
from tui.plots.chart import Chart, Grid
from tui.plots.drawing import Picture, ranges, spoken, told
from tui.plots.levels import levels_of
from tui.plots.reading import reached, refusal
from tui.plots.scale import Scale, heading, scale_of
from tui.plots.svg_chart import chart_keys, draw_chart
from tui.plots.svg_map import draw_map, map_keys
from tui.plots.svg_parts import INK, SIZE, Field, Key, group, segment, words
from tui.text import CAUTION

_LEFT, _TOP, _SIDE, _BELOW = 84.0, 78.0, 260.0, 62.0
_LETTER = 0.56
"""Mean width of a letter over its size, on the safe side for sans-serif faces."""

_LEADING = 1.35
_SMALL = 11.0
_LEAST_WIDTH, _LEAST_HEIGHT = 520, 320
_TICKS_APART = 60.0, 45.0


@dataclass(frozen=True, slots=True)
class _Text:
    """Lines of text that share a place: letters to a line and the step between lines follow from the size."""

    lines: list[str]
    size: float

    @property
    def height(self) -> float:
        return len(self.lines) * self.size * _LEADING


def _set(text: str, room: float, size: float) -> _Text:
    return _Text(wrap(text.split(), max(4, int(room / (_LETTER * size)))), size)


def svg(picture: Picture, width: int = 900, height: int = 560, caution: str = CAUTION) -> str:
    """A chart or a map as an SVG document.

    Parameters: picture; width, height, in user units, at least 520 by 320 (a long legend or long notes make it higher); caution, the
    line at the foot. Returns: the text of the document. A picture that cannot be drawn says why in its place.
    """
    picture = told(picture, spoken)
    width, height = max(width, _LEAST_WIDTH), max(height, _LEAST_HEIGHT)
    why = refusal(picture)
    keys, scales = ([], None) if why else _keys(picture, width, height)
    beside = [(key, _set(key.words, _SIDE - 70.0, SIZE)) for key in keys]
    foot = [_set(text, width - 40.0, _SMALL) for text in (*picture.notes, caution) if text]
    feet = sum(t.height for t in foot) + 16.0
    need = _TOP + sum(t.height + 4.0 for _, t in beside)
    height = round(max(height, need + feet, 230.0 + feet))
    root = ET.Element("svg", {"xmlns": "http://www.w3.org/2000/svg", "version": "1.1", "role": "img"})
    root.attrib |= {"width": str(width), "height": str(height), "viewBox": f"0 0 {width} {height}"}
    ET.SubElement(root, "title").text = picture.title
    ET.SubElement(root, "desc").text = why or "; ".join(ranges(picture))
    ET.SubElement(root, "rect", {"width": str(width), "height": str(height), "fill": "#ffffff"})
    text = group(root, "title", {"font-weight": "bold"})
    size = SIZE + 3.0
    words(text, 20.0, 30.0, fit(picture.title, int((width - 40.0) / (_LETTER * size))), size)
    if scales is None:
        _paragraph(group(root, "refusal"), _set(why, width - 40.0, SIZE), 20.0, _TOP)
    else:
        field = Field(*scales, _LEFT, _TOP, width - _LEFT - _SIDE - 20.0, height - _TOP - _BELOW - feet)
        _axes(root, picture, field)
        draw = draw_map if isinstance(picture, Grid) else draw_chart
        draw(root, picture, field)  # type: ignore[arg-type]
        _legend(root, beside, width - _SIDE)
    down = height - feet + _SMALL
    for part in foot:
        down = _paragraph(group(root, "foot", {"fill": "#555555"}), part, 20.0, down)
    return '<?xml version="1.0" encoding="UTF-8"?>\n' + ET.tostring(root, encoding="unicode") + "\n"


def _keys(picture: Picture, width: int, height: int) -> tuple[list[Key], tuple[Scale, Scale]]:
    across = max(2, int((width - _LEFT - _SIDE) / _TICKS_APART[0]))
    up = max(2, int((height - _TOP - _BELOW) / _TICKS_APART[1]))
    if isinstance(picture, Chart):
        x, y = scale_of(picture.x_axis, reached(picture, "x"), across), scale_of(picture.y_axis, reached(picture, "y"), up)
        return chart_keys(picture, {"x": (x.low, x.high), "y": (y.low, y.high)}), (x, y)
    x, y = scale_of(picture.x_axis, picture.x, across, tight=True), scale_of(picture.y_axis, picture.y, up, tight=True)
    return map_keys(picture, levels_of(picture)), (x, y)


def _paragraph(parent: ET.Element, text: _Text, x: float, y: float) -> float:
    """Writes lines below each other. Returns: where the next line stands."""
    for n, part in enumerate(text.lines):
        words(parent, x, y + n * text.size * _LEADING, part, text.size)
    return y + text.height


def _axes(root: ET.Element, picture: Picture, field: Field) -> None:
    own = group(root, "axes", {"stroke": INK, "stroke-width": "1"})
    left, bottom = field.left, field.top + field.high
    segment(own, left, field.top, left, bottom)
    segment(own, left, bottom, left + field.wide, bottom)
    for value in field.x.fewer(int(field.wide / 6.0)):
        segment(own, field.at_x(value), bottom, field.at_x(value), bottom + 3.0)
    for value in field.y.fewer(int(field.high / 6.0)):
        segment(own, left - 3.0, field.at_y(value), left, field.at_y(value))
    text = group(root, "ticks")
    for tick in field.x.ticks:
        segment(own, field.at_x(tick.value), bottom, field.at_x(tick.value), bottom + 6.0)
        words(text, field.at_x(tick.value), bottom + 20.0, tick.text, SIZE, "middle")
    for tick in field.y.ticks:
        segment(own, left - 6.0, field.at_y(tick.value), left, field.at_y(tick.value))
        words(text, left - 9.0, field.at_y(tick.value) + 4.0, tick.text, SIZE, "end")
    words(text, left + field.wide / 2.0, bottom + 42.0, heading(picture.x_axis, field.x.power), SIZE, "middle")
    words(text, 20.0, field.top - 26.0, heading(picture.y_axis, field.y.power), SIZE)


def _legend(root: ET.Element, keys: list[tuple[Key, _Text]], left: float) -> None:
    own = group(root, "legend")
    down = _TOP + 4.0
    for key, text in keys:
        if key.sample is not None:
            key.sample(own, left, down - 4.0)
        _paragraph(own, text, left + (48.0 if key.sample is not None else 0.0), down)
        down += text.height + 4.0
