"""Plots in terminal cells: size, what stands where, and that nothing is told by colour alone."""

from __future__ import annotations

import math
import subprocess
import sys
from pathlib import Path

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from rich.color import Color, ColorType

from tests.tui.plots_support import CHARTS, PICTURES, flat, slope, texts, widest
from tui.line import cells
from tui.plots import Axis, Chart, Grid, Rule, Series, Spot, Unsolved, depth_of_terminal, draw, glyphs_of
from tui.plots.paint import DEPTHS, lightness, paint, ramp

SIZES = st.tuples(st.integers(0, 130), st.integers(0, 40))
GLYPHS = st.sampled_from(("unicode", "ascii"))
KINDS = {"none": set(), "16": {ColorType.STANDARD}, "256": {ColorType.EIGHT_BIT}, "true": {ColorType.TRUECOLOR}}
LENGTH, HEIGHT = Axis("length", "m"), Axis("height", "km")


@settings(max_examples=150)
@given(PICTURES, SIZES, st.sampled_from(DEPTHS), GLYPHS)
def test_any_picture_has_the_size_asked_for(picture: Chart | Grid, size: tuple[int, int], depth: str, glyphs: str) -> None:
    lines = draw(picture, *size, depth, glyphs)
    assert len(lines) == size[1] and widest(lines) <= size[0]
    assert glyphs == "unicode" or all(text.isascii() for text in texts(lines))
    assert all(text.isprintable() for text in texts(lines))


@settings(max_examples=60)
@given(PICTURES | st.just(flat(5)) | st.just(slope(hole=(0, 0))), st.sampled_from(DEPTHS))
def test_a_picture_uses_the_colours_of_its_depth_only(picture: Chart | Grid, depth: str) -> None:
    styles = [style for line in draw(picture, 90, 30, depth) for _, style in line]
    found = {colour.type for style in styles for colour in (style.color, style.bgcolor) if colour is not None}
    assert found <= KINDS[depth]


@pytest.mark.parametrize("depth", ["16", "256", "true"])
@pytest.mark.parametrize("picture", [flat(3), slope()], ids=["chart", "map"])
def test_colour_is_used_where_there_is_some(picture: Chart | Grid, depth: str) -> None:
    styles = {style for line in draw(picture, 80, 24, depth) for _, style in line}
    assert len({s.color or s.bgcolor for s in styles} - {None}) >= 3


@given(CHARTS, st.sampled_from(DEPTHS))
@settings(max_examples=30)
def test_colour_changes_no_character_of_a_chart(chart: Chart, depth: str) -> None:
    assert texts(draw(chart, 80, 24, depth)) == texts(draw(chart, 80, 24))


def field(chart: Chart, glyphs: str = "unicode", columns: int = 80, lines: int = 24) -> dict[str, str]:
    """Tick label of y -> what stands in its row inside the axes."""
    rows = (text.partition("┤" if glyphs == "unicode" else "+") for text in texts(draw(chart, columns, lines, "none", glyphs)))
    return {label.strip(): inside for label, tick, inside in rows if tick and label.strip()}


@pytest.mark.parametrize("glyphs", ["unicode", "ascii"])
def test_lines_differ_without_colour(glyphs: str) -> None:
    """Level lines at 1, 2, 3, 4 each lie in the row of their tick, and no two are made alike."""
    rows = field(flat(4), glyphs)
    made = ["".join(c for c in rows[f"{n}.0"] if c not in "abcd") for n in (1, 2, 3, 4)]
    assert all(row.strip() for row in made)
    assert len(set(made)) == 4
    if glyphs == "unicode":
        assert all(rows[f"{n}.0"].count(letter) == 2 for n, letter in zip((1, 2, 3, 4), "abcd", strict=True))


def test_many_lines_have_a_letter_each_that_the_legend_explains() -> None:
    shown = texts(draw(flat(9), 80, 40))
    legend = "\n".join(shown)
    assert all(f" {letter} line {n}" in legend for n, letter in enumerate("abcdefghi", 1))


def test_the_walk_in_hand_is_solid_and_the_pinned_one_dashed() -> None:
    x = tuple(float(i) for i in range(101))
    chart = Chart("", LENGTH, HEIGHT, (Series("A", x, (1.0,) * 101, "pin"), Series("now", x, (2.0,) * 101, "now")))
    rows = field(chart)
    solid, dashed = (rows[label].replace("a", "").replace("b", "").strip() for label in ("2.0", "1.0"))
    assert " " not in solid and " " in dashed


@pytest.mark.parametrize(("glyphs", "mark"), [("unicode", "●"), ("ascii", "O")])
def test_a_point_stands_in_the_row_and_the_column_of_its_ticks(glyphs: str, mark: str) -> None:
    """The spot at (10, 3) stands right of the label 3, above the label 10 of the x axis."""
    chart = Chart("", LENGTH, HEIGHT, (Series("", (0.0, 20.0), (0.0, 4.0)),), spots=(Spot(10.0, 3.0, "4b"),))
    shown = texts(draw(chart, 80, 24, "none", glyphs))
    row = next(text for text in shown if mark in text)
    labels = next(text for text in shown if " 10 " in text)
    assert row.lstrip().startswith("3") and "4b" in row
    assert abs(row.index(mark) - labels.index("10")) <= 1


def test_points_without_a_solution_stand_on_the_axis_and_in_the_legend() -> None:
    missing = (*(Unsolved(x, "choked") for x in (9.0, 9.5, 10.0)), Unsolved(0.0, "unstarted"))
    shown = texts(draw(flat(1, unsolved=missing), 80, 24))
    axis = next(text for text in shown if "└" in text)
    assert axis.count("x") == 3 and axis.count("#") == 1
    assert axis.index("#") < axis.index("x") and axis.rstrip()[-1] == "x"
    assert any("x no solution: choked (3 points)" in text for text in shown)
    assert any("# no solution: unstarted (1 point)" in text for text in shown)


def test_rare_statuses_share_a_mark() -> None:
    missing = tuple(Unsolved(float(i), status) for i, status in enumerate(("p", "p", "q", "q", "r", "r", "s", "t")))
    shown = "\n".join(texts(draw(flat(1, unsolved=missing), 80, 30)))
    assert "? no solution: s (1), t (1)" in shown


@pytest.mark.parametrize("columns", [80, 120])
def test_the_legend_stands_outside_the_field(columns: int) -> None:
    """Below the axis at 80 columns, right of its end at 120."""
    shown = texts(draw(flat(3), columns, 30))
    axis = next(n for n, text in enumerate(shown) if "└" in text)
    end = max(map(shown[axis].rfind, "─┬"))
    places = [(n, text.index(label)) for label in ("line 1", "line 2", "line 3") for n, text in enumerate(shown) if label in text]
    assert len(places) == 3
    assert all(column > end if columns == 120 else row > axis for row, column in places)


def test_axes_carry_label_and_unit_and_the_title_stands_above() -> None:
    shown = texts(draw(flat(2), 80, 24))
    assert shown[0] == "level lines" and shown[1] == "height, km"
    assert any(text.strip() == "length, m" for text in shown)


def test_rules_are_tagged_and_one_outside_is_told_with_its_side() -> None:
    rules = (
        Rule("x", 5.0, "5 m", "here"), Rule("x", 100.0, "rich 100 m", "limit"), Rule("y", 1.5, "1.5 km", "limit"),
        Rule("x", 2.0, "scram to ram", "mode change"),
    )  # fmt: skip
    shown = texts(draw(flat(2, rules=rules), 80, 24))
    legend = "\n".join(shown)
    assert "O here: 5 m" in legend and "M mode change: scram to ram" in legend and "L2 limit: 1.5 km" in legend
    assert "L1 limit: rich 100 m (right of the picture)" in legend
    assert shown[2].split() == ["M", "O"]
    assert any(text.rstrip().endswith(" L2") for text in shown[3:15])


@pytest.mark.parametrize(
    ("chart", "words"),
    [
        (Chart("t", LENGTH, HEIGHT, (), unsolved=(Unsolved(1.0, "choked"), Unsolved(2.0, "choked"), Unsolved(3.0, "detached"))),
         "no solved point: choked 2, detached 1"),
        (Chart("t", LENGTH, HEIGHT, (Series("", (1.0,), (math.nan,)),)), "no point to draw"),
        (Chart("t", LENGTH, Axis("height", log=True), (Series("", (1.0, 2.0, 3.0), (0.0, -1.0, 1.0)),)),
         "no log axis: height has 2 values at or below zero"),
        (Grid("t", LENGTH, HEIGHT, HEIGHT, (1.0, 2.0), (1.0,), ((math.nan, 5.0),), ((None, "choked"),)),
         "no solved point: choked 1, no value 1"),
    ],
)  # fmt: skip
def test_what_cannot_be_drawn_is_said(chart: Chart | Grid, words: str) -> None:
    shown = texts(draw(chart, 60, 20))
    assert words in shown and not any("└" in text for text in shown)


def test_a_small_window_says_how_far_values_reach() -> None:
    shown = texts(draw(flat(3, unsolved=(Unsolved(1.0, "choked"),)), 24, 5))
    assert "height, km: 1 to 3" in shown and "length, m: 0 to 10" in shown and "no solution: choked 1" in shown


@pytest.mark.parametrize("y", [(0.0,), (7.0, 7.0), (1e-280, 1e-280), (101325.0, 101325.0 * (1 + 1e-12)), (-1e299, 1e299)])
def test_one_value_and_extreme_values_have_an_axis(y: tuple[float, ...]) -> None:
    rows = field(Chart("", LENGTH, HEIGHT, (Series("", tuple(map(float, range(len(y)))), y),)))
    assert len(rows) >= 2


def test_contours_stand_where_the_value_is_reached() -> None:
    """The map's value is x: the first digit n of every row stands at the first column whose x reaches the n-th contour."""
    shown = texts(draw(slope(), 100, 24))
    levels = {text.split("= ")[0][-2]: float(text.split("= ")[1]) for text in shown if "= " in text}
    assert len(levels) >= 4
    axis = next(text for text in shown if "└" in text)
    start, end = axis.index("└") + 1, axis.rindex("─")
    end = max(end, axis.rindex("┬"))
    for text in shown[3:10]:
        for digit, level in levels.items():
            at = text.index(digit, start) - start
            assert 10.0 * (at - 1) / (end - start) < level <= 10.0 * at / (end - start) + 1e-9


@pytest.mark.parametrize("depth", DEPTHS)
def test_an_unsolved_point_of_a_map_is_marked_as_far_as_it_is_nearest(depth: str) -> None:
    """The middle one of 3 x 3 points is unsolved: the middle half of every side is marked, the corners are not."""
    inside = [text[text.index("│") + 1 :] if "│" in text else "" for text in texts(draw(slope(3, 3, (1, 1)), 50, 30, depth))]
    marked = [row.strip() for row in inside if row.count("x") > 5]
    whole = sum(bool(row) for row in inside) + 3
    assert 0.4 * whole < len(marked) < 0.65 * whole
    assert "xx" not in inside[2]


def test_digits_name_the_bands_of_a_coloured_map() -> None:
    for glyphs in ("unicode", "ascii"):
        shown = texts(draw(slope(), 100, 24, "true", glyphs))
        digits = {c for text in shown[2:18] for c in text[4:60] if c.isdigit()}
        assert {"1", "2", "3", "4"} <= digits


def test_here_and_pin_stand_on_a_map() -> None:
    grid = slope()
    grid = Grid(grid.title, grid.x_axis, grid.y_axis, grid.z_axis, grid.x, grid.y, grid.z, here=(5.0, 5.0), pin=(0.0, 0.0))
    shown = texts(draw(grid, 80, 24))
    assert any("O here: 5, 5" in text for text in shown) and any("A pin: 0, 0" in text for text in shown)
    assert sum("O" in text.partition("│")[2][:50] or "O" in text.partition("┤")[2][:50] for text in shown) == 1


def test_bands_are_told_apart_and_rise_in_lightness() -> None:
    for count in range(2, 11):
        light = [lightness(rgb) for rgb in ramp(count)]
        assert light == sorted(light)
        for depth in ("16", "256", "true"):
            assert len({ground for ground, _ in paint(depth).bands(count)}) == count
        light = [lightness(Color.parse(ground).get_truecolor()) for ground, _ in paint("256").bands(count)]
        assert light == sorted(light)


@pytest.mark.parametrize(
    ("environ", "depth"),
    [
        ({}, "none"), ({"TERM": "dumb"}, "none"), ({"TERM": "vt100"}, "none"), ({"TERM": "xterm"}, "16"),
        ({"TERM": "xterm-256color"}, "256"), ({"TERM": "tmux-256color", "COLORTERM": "truecolor"}, "true"),
        ({"TERM": "xterm-256color", "COLORTERM": "truecolor", "NO_COLOR": "1"}, "none"), ({"TERM": "xterm", "NO_COLOR": ""}, "16"),
        ({"TERM": "dumb", "COLORTERM": "truecolor"}, "none"), ({"TERM": "xterm-direct"}, "true"),
    ],
)  # fmt: skip
def test_depth_of_a_terminal(environ: dict[str, str], depth: str) -> None:
    assert depth_of_terminal(environ) == depth


@pytest.mark.parametrize(
    ("environ", "encoding", "glyphs"),
    [
        ({"LANG": "en_GB.UTF-8"}, "", "unicode"), ({"LANG": "C"}, "utf-8", "ascii"), ({}, "utf-8", "unicode"), ({}, "", "ascii"),
        ({"LC_ALL": "C", "LANG": "C.utf8"}, "", "ascii"), ({"LC_ALL": "", "LANG": "C.utf8"}, "", "unicode"),
        ({"LANG": "en_GB.UTF-8", "TERM": "linux"}, "utf-8", "ascii"), ({"LANG": "de_DE.ISO-8859-1"}, "utf-8", "ascii"),
    ],
)  # fmt: skip
def test_glyphs_of_a_terminal(environ: dict[str, str], encoding: str, glyphs: str) -> None:
    assert glyphs_of(environ, encoding) == glyphs


def test_wide_characters_take_two_cells() -> None:
    chart = Chart("漢字" * 30, Axis("長さ", "m"), Axis("高さ", "km"), flat(2).series, spots=(Spot(5.0, 1.5, "漢"),))
    lines = draw(chart, 60, 20)
    assert widest(lines) <= 60 and all(len(cells(line, 60)) == 60 for line in lines)


def test_plots_need_neither_numbers_nor_a_screen() -> None:
    code = "import tui.plots, tui.plots.svg, tui.plots.csv_of, sys; print(*sys.modules)"
    root = Path(__file__).parents[2]
    run = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True, cwd=root)
    assert not set(run.stdout.split()) & {"numpy", "scipy", "cantera", "pydantic", "textual"}


@pytest.mark.parametrize(
    "make",
    [
        lambda: Series("a", (1.0,), ()),
        lambda: Grid("", LENGTH, HEIGHT, HEIGHT, (2.0, 1.0), (1.0,), ((1.0, 2.0),)),
        lambda: Grid("", LENGTH, HEIGHT, HEIGHT, (1.0, math.inf), (1.0,), ((1.0, 2.0),)),
        lambda: Grid("", LENGTH, HEIGHT, HEIGHT, (1.0, 2.0), (1.0,), ((1.0,),)),
        lambda: Grid("", LENGTH, HEIGHT, HEIGHT, (1.0, 2.0), (1.0,), ((1.0, 2.0),), (("choked",),)),
    ],
)
def test_shapes_that_do_not_fit_are_refused(make: object) -> None:
    with pytest.raises(ValueError):
        make()  # type: ignore[operator]
