"""Colours of a picture for what a terminal can show, and how what it can show is found out.

Colour never carries a meaning alone: series differ in dash pattern and letter, bands of a map in digits.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Literal, get_args

from rich.style import Style

from tui.line import BOLD, DIM, PLAIN
from tui.plots.chart import Kind

Depth = Literal["none", "16", "256", "true"]
Glyphs = Literal["unicode", "ascii"]
Rgb = tuple[int, int, int]

DEPTHS: tuple[Depth, ...] = get_args(Depth)
SERIES_RGB: tuple[Rgb, ...] = ((52, 148, 214), (214, 130, 30), (46, 158, 104), (190, 96, 176), (150, 138, 46), (206, 84, 84))
"""Hues of middle lightness, readable on dark and on light ground."""

LIMIT_RGB: Rgb = (206, 66, 66)
_RAMP: tuple[Rgb, ...] = ((26, 32, 78), (38, 86, 142), (62, 146, 152), (146, 190, 126), (244, 232, 150))
"""From deep water to sand: lightness rises all the way, so the order survives without hue."""

_SERIES_NAMES: tuple[str, ...] = ("cyan", "magenta", "green", "yellow", "blue", "red")
_BAND_NAMES = ("blue", "bright_blue", "cyan", "bright_cyan", "green", "bright_green", "yellow", "bright_yellow", "white", "bright_white")
_BAND_CODES = (17, 24, 31, 37, 72, 108, 150, 186, 222, 229)
"""The ramp in a 256-colour terminal, of rising lightness; the nearest colours of its cube would make neighbours one."""

_BLACK_FROM = 37
"""The first of these codes on which black reads better than white."""

_CUBE = (0, 95, 135, 175, 215, 255)
_DARK = 120.0


def ramp(bands: int) -> tuple[Rgb, ...]:
    """Colours of `bands` bands from the lowest to the highest."""
    out = []
    for band in range(bands):
        at = (len(_RAMP) - 1) * (band / (bands - 1) if bands > 1 else 0.5)
        left = min(int(at), len(_RAMP) - 2)
        part = at - left
        red, green, blue = (round(a + part * (b - a)) for a, b in zip(_RAMP[left], _RAMP[left + 1], strict=True))
        out.append((red, green, blue))
    return tuple(out)


def lightness(rgb: Rgb) -> float:
    """Luma of a colour, 0 to 255 (weights of ITU-R BT.601)."""
    return 0.299 * rgb[0] + 0.587 * rgb[1] + 0.114 * rgb[2]


def _cube(rgb: Rgb) -> str:
    """The nearest colour of the 6 x 6 x 6 cube of a 256-colour terminal."""
    red, green, blue = (min(range(6), key=lambda n: abs(_CUBE[n] - part)) for part in rgb)
    return f"color({16 + 36 * red + 6 * green + blue})"


def hexadecimal(rgb: Rgb) -> str:
    """A colour as #rrggbb."""
    return "#{:02x}{:02x}{:02x}".format(*rgb)


def ink(rgb: Rgb) -> str:
    """Black or white, whichever reads on a ground of this colour."""
    return "#000000" if lightness(rgb) > _DARK else "#ffffff"


@dataclass(frozen=True, slots=True)
class Paint:
    """Styles of one drawing: of the series by hue, of rules by kind, of marks of points without a solution."""

    depth: Depth
    series: tuple[Style, ...]
    rules: Mapping[Kind, Style]
    unsolved: Style

    def bands(self, count: int) -> tuple[tuple[str, str], ...]:
        """Ground and ink of at most 10 bands of a map, () without colour."""
        if self.depth == "none":
            return ()
        at = [round(n * 9 / max(1, count - 1)) for n in range(count)]
        if self.depth == "16":
            return tuple((_BAND_NAMES[n], "black" if n else "bright_white") for n in at)
        if self.depth == "256":
            return tuple((f"color({_BAND_CODES[n]})", "color(16)" if _BAND_CODES[n] >= _BLACK_FROM else "color(231)") for n in at)
        return tuple((hexadecimal(rgb), ink(rgb)) for rgb in ramp(count))


def paint(depth: Depth) -> Paint:
    """The styles for a colour depth; "none" uses weight only."""
    if depth == "none":
        plain: dict[Kind, Style] = {"limit": PLAIN, "mode change": DIM, "place": DIM, "here": BOLD, "pin": PLAIN}
        return Paint(depth, (PLAIN,) * len(SERIES_RGB), plain, BOLD)
    code = _cube if depth == "256" else hexadecimal
    names = _SERIES_NAMES if depth == "16" else tuple(map(code, SERIES_RGB))
    limit = "red" if depth == "16" else code(LIMIT_RGB)
    series = tuple(Style(color=name) for name in names)
    rules: dict[Kind, Style] = {"limit": Style(color=limit), "mode change": DIM, "place": DIM, "here": BOLD, "pin": series[1]}
    return Paint(depth, series, rules, Style(color=limit, bold=True))


def depth_of_terminal(environ: Mapping[str, str]) -> Depth:
    """What colours a terminal shows, as its environment says.

    environ: NO_COLOR, where not empty, means none (no-color.org); so does a TERM that is missing, "dumb" or a VT of one colour.
    COLORTERM "truecolor" or "24bit" and a TERM ending in "-direct" mean every colour, "256color" in TERM means 256, all else 16.
    """
    term = environ.get("TERM", "")
    if environ.get("NO_COLOR") or term in ("", "dumb", "unknown") or term.startswith(("vt1", "vt2", "vt3")) or term.endswith("-m"):
        return "none"
    if environ.get("COLORTERM", "").lower() in ("truecolor", "24bit") or term.endswith("-direct"):
        return "true"
    return "256" if "256color" in term else "16"


def glyphs_of(environ: Mapping[str, str], encoding: str = "") -> Glyphs:
    """Which characters a terminal shows.

    environ: the first of LC_ALL, LC_CTYPE and LANG that is set decides by its character set; the Linux console (TERM "linux") has
    no braille. encoding: that of the output, where no locale is set. Returns: "unicode" only for UTF-8.
    """
    locale = next((value for name in ("LC_ALL", "LC_CTYPE", "LANG") if (value := environ.get(name))), encoding)
    plain = locale.lower().replace("-", "")
    return "unicode" if "utf8" in plain and environ.get("TERM") != "linux" else "ascii"
