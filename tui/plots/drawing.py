"""A picture in so many columns and lines, whatever it shows and however little room there is."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace
from functools import partial

from tui.line import BOLD, PLAIN, Line, clean, fit, line, wrap
from tui.plots.chart import Axis, Chart, Grid
from tui.plots.curves import lay_chart
from tui.plots.levels import extent, levels_of, statuses
from tui.plots.maps import lay_map
from tui.plots.paint import Depth, Glyphs, paint
from tui.plots.reading import Across, counted, held, refusal
from tui.plots.scale import heading

Picture = Chart | Grid


def draw(picture: Picture, columns: int, lines: int, depth: Depth = "none", glyphs: Glyphs = "unicode") -> list[Line]:
    """A chart or a map in terminal cells.

    Parameters: picture; columns, lines, the room; depth, the colours; glyphs, the characters. Returns: exactly `lines` lines,
    none wider than `columns`. A picture that cannot be drawn says why, one without room says how far its values reach.
    """
    if columns < 1 or lines < 1:
        return [()] * max(0, lines)
    picture = told(picture, spoken if glyphs == "unicode" else plain)
    why = refusal(picture)
    if why:
        out = _words(picture.title, [why, *picture.notes], columns, lines)
    else:
        lay = partial(lay_map, picture) if isinstance(picture, Grid) else partial(lay_chart, picture)
        made = lay(columns, lines, paint(depth), glyphs)
        out = made or _words(picture.title, ranges(picture), columns, lines)
    return [*out, *[()] * (lines - len(out))]


def spoken(text: str) -> str:
    """A text without control characters."""
    return clean(text)


def plain(text: str) -> str:
    """A text in ASCII, a question mark for each other character."""
    return clean(text).encode("ascii", "replace").decode()


def told(picture: Picture, say: Callable[[str], str]) -> Picture:
    """The picture with all its words passed through `say`."""
    picture = replace(
        picture,
        title=say(picture.title),
        x_axis=_named(picture.x_axis, say),
        y_axis=_named(picture.y_axis, say),
        notes=tuple(map(say, picture.notes)),
    )
    if isinstance(picture, Grid):
        status = tuple(tuple(None if s is None else say(s) for s in row) for row in picture.status)
        return replace(picture, z_axis=_named(picture.z_axis, say), status=status)
    return replace(
        picture,
        series=tuple(replace(s, label=say(s.label)) for s in picture.series),
        rules=tuple(replace(r, words=say(r.words)) for r in picture.rules),
        spots=tuple(replace(s, label=say(s.label), words=say(s.words)) for s in picture.spots),
        unsolved=tuple(replace(u, status=say(u.status), series=say(u.series)) for u in picture.unsolved),
    )


def _named(axis: Axis, say: Callable[[str], str]) -> Axis:
    return replace(axis, label=say(axis.label), unit=say(axis.unit))


def ranges(picture: Picture) -> list[str]:
    """How far the values of a picture reach, the dependent one first, and how many points have no solution."""
    if isinstance(picture, Grid):
        levels = levels_of(picture)
        known = [(picture.z_axis, [levels.least, levels.most]), (picture.x_axis, list(picture.x)), (picture.y_axis, list(picture.y))]
        missing = statuses(picture)
    else:
        sides: tuple[tuple[Axis, Across], ...] = ((picture.y_axis, "y"), (picture.x_axis, "x"))
        known = [(axis, held(picture, across)) for axis, across in sides]
        missing = [u.status for u in picture.unsolved]
    out = [f"{heading(axis)}: {extent(min(values), max(values))}" for axis, values in known]
    return [*out, "no solution: " + ", ".join(f"{s} {n}" for s, n in counted(missing))] if missing else out


def _words(title: str, sentences: list[str], columns: int, lines: int) -> list[Line]:
    """A title, where there is room for it, and sentences."""
    body = [line((text, PLAIN)) for words in sentences for text in wrap(words.split(), columns)]
    if len(body) < lines or lines > 3:
        body.insert(0, line((fit(title, columns), BOLD)))
    return body[:lines]
