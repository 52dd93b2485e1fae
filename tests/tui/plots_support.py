"""Pictures for the tests of plots: any at all, and a few that are known."""

from __future__ import annotations

import math

from hypothesis import strategies as st

from tui.line import Line, width
from tui.plots import Axis, Chart, Grid, Rule, Series, Spot, Unsolved

ANY = st.one_of(st.floats(), st.floats(-1e3, 1e3), st.sampled_from((0.0, 1.0, -1.0, math.nan, math.inf, 5e-324, 1e300, 1.0 + 2e-16)))
WORDS = st.one_of(st.text(max_size=30), st.sampled_from(("thrust", "kN", "", "pin A", "<&>\"'", "漢字", "e\u0301", "\x1b[2J")))
AXES = st.builds(Axis, WORDS, WORDS, st.booleans(), st.lists(ANY, max_size=2).map(tuple))
ROLES = st.sampled_from(("now", "pin", "plain"))
KINDS = st.sampled_from(("limit", "mode change", "here", "pin"))
STATUS = st.sampled_from(("choked", "unstarted", "detached", "out-of-range", "no-fuel"))


@st.composite
def series(draw: st.DrawFn) -> Series:
    pairs = draw(st.lists(st.tuples(ANY, ANY), max_size=12))
    return Series(draw(WORDS), tuple(x for x, _ in pairs), tuple(y for _, y in pairs), draw(ROLES), draw(st.booleans()))


CHARTS = st.builds(
    Chart, WORDS, AXES, AXES,
    st.lists(series(), max_size=9).map(tuple),
    st.lists(st.builds(Rule, st.sampled_from("xy"), ANY, WORDS, KINDS), max_size=4).map(tuple),
    st.lists(st.builds(Spot, ANY, ANY, WORDS, WORDS), max_size=4).map(tuple),
    st.lists(st.builds(Unsolved, ANY, STATUS | WORDS), max_size=6).map(tuple),
    st.lists(WORDS, max_size=2).map(tuple),
)  # fmt: skip


@st.composite
def grids(draw: st.DrawFn) -> Grid:
    finite = st.floats(allow_nan=False, allow_infinity=False)
    x, y = (tuple(sorted(draw(st.sets(finite | st.floats(1.0, 9.0), max_size=5)))) for _ in range(2))
    z = tuple(tuple(draw(ANY) for _ in x) for _ in y)
    status = tuple(tuple(draw(st.none() | STATUS) for _ in x) for _ in y) if draw(st.booleans()) else ()
    place = st.none() | st.tuples(ANY, ANY)
    return Grid(draw(WORDS), draw(AXES), draw(AXES), draw(AXES), x, y, z, status, draw(place), draw(place), (draw(WORDS),))


PICTURES = CHARTS | grids()


def texts(lines: list[Line]) -> list[str]:
    return ["".join(text for text, _ in line) for line in lines]


def widest(lines: list[Line]) -> int:
    return max((sum(width(text) for text, _ in line) for line in lines), default=0)


def flat(count: int, **more: object) -> Chart:
    """Level lines at y = 1 ... count over x from 0 to 10."""
    x = tuple(i / 10 for i in range(101))
    lines = tuple(Series(f"line {n}", x, (float(n),) * len(x)) for n in range(1, count + 1))
    return Chart("level lines", Axis("length", "m"), Axis("height", "km"), lines, **more)  # type: ignore[arg-type]


def slope(columns: int = 11, rows: int = 6, hole: tuple[int, int] | None = None) -> Grid:
    """A map whose value is x, from 0 to 10, with one point (row, column) unsolved."""
    x, y = (tuple(10.0 * i / (n - 1) for i in range(n)) for n in (columns, rows))
    z = tuple(tuple(math.nan if hole == (j, i) else a for i, a in enumerate(x)) for j in range(rows))
    status = tuple(tuple("choked" if hole == (j, i) else None for i in range(columns)) for j in range(rows))
    return Grid("a slope", Axis("length", "m"), Axis("height", "km"), Axis("depth", "mm"), x, y, z, status)
