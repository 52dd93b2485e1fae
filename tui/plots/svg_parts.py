"""Parts that charts and maps share in an SVG document."""

from __future__ import annotations

import xml.etree.ElementTree as ET
from collections.abc import Callable, Mapping
from dataclasses import dataclass

from tui.plots.scale import Scale

INK = "#222222"
SIZE = 13.0
_FACE = "Helvetica, Arial, DejaVu Sans, sans-serif"

Sample = Callable[[ET.Element, float, float], None]
"""Draws the sample of a legend line: parent, left end, middle line."""


@dataclass(frozen=True, slots=True)
class Key:
    """A line of the legend: its sample (None for words alone) and the words."""

    sample: Sample | None
    words: str


@dataclass(frozen=True, slots=True)
class Field:
    """The field of a picture: scales, left and top edge, width and height in user units."""

    x: Scale
    y: Scale
    left: float
    top: float
    wide: float
    high: float

    def at_x(self, value: float) -> float:
        """Where a value of x lies."""
        return self.left + self.x.share(value) * self.wide

    def at_y(self, value: float) -> float:
        """Where a value of y lies."""
        return self.top + (1.0 - self.y.share(value)) * self.high

    def holds(self, x: float, y: float) -> bool:
        """Whether a point lies in the field."""
        return self.x.low <= x <= self.x.high and self.y.low <= y <= self.y.high


def number(value: float) -> str:
    """A coordinate to a hundredth."""
    return f"{value:.2f}".rstrip("0").rstrip(".")


def group(parent: ET.Element, name: str, attributes: Mapping[str, str] | None = None) -> ET.Element:
    """A group of the class `name`."""
    return ET.SubElement(parent, "g", {"class": name, **(attributes or {})})


def segment(parent: ET.Element, x0: float, y0: float, x1: float, y1: float, **attributes: str) -> None:
    """A straight line; underscores in attribute names stand for hyphens."""
    ends = {"x1": number(x0), "y1": number(y0), "x2": number(x1), "y2": number(y1)}
    ET.SubElement(parent, "line", ends | {k.replace("_", "-"): v for k, v in attributes.items()})


def words(parent: ET.Element, x: float, y: float, text: str, size: float, anchor: str = "start", fill: str = "") -> None:
    """A line of text from (x, y), its base line; anchor: "start", "middle" or "end"."""
    attributes = {"x": number(x), "y": number(y), "font-family": _FACE, "font-size": number(size), "text-anchor": anchor}
    ET.SubElement(parent, "text", attributes | ({"fill": fill} if fill else {})).text = text
