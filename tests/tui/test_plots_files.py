"""Plots as SVG and CSV: well formed, inside their frame, complete, and readable by others."""

from __future__ import annotations

import csv
import io
import math
import xml.etree.ElementTree as ET

from hypothesis import given, settings

from tests.tui.plots_support import CHARTS, PICTURES, flat, grids, slope
from tui.plots import Axis, Chart, Grid, Rule, Series, Spot, Unsolved
from tui.plots.csv_of import csv_text
from tui.plots.svg import svg
from tui.text import CAUTION

SVG = "{http://www.w3.org/2000/svg}"
PLACES = ("x", "y", "x1", "x2", "y1", "y2", "cx", "cy")


def said(text: str) -> str:
    return " ".join("".join(e.itertext()) for e in ET.fromstring(text).iter(f"{SVG}text"))


@settings(max_examples=60)
@given(PICTURES)
def test_any_svg_is_well_formed_and_keeps_inside_its_frame(picture: Chart | Grid) -> None:
    root = ET.fromstring(svg(picture))
    wide, high = float(root.attrib["width"]), float(root.attrib["height"])
    for element in root.iter():
        for name in PLACES:
            if name in element.attrib:
                assert 0.0 <= float(element.attrib[name]) <= (wide if "x" in name else high), (element.tag, element.attrib)
        for pair in element.attrib.get("d", "").removeprefix("M").split("h")[0].split("L"):
            if pair:
                x, y = map(float, pair.split())
                assert 0.0 <= x <= wide and 0.0 <= y <= high


def test_svg_says_what_the_terminal_says() -> None:
    x = tuple(i / 10 for i in range(101))
    chart = Chart(
        "a < b & \"c\"", Axis("length", "m"), Axis("height", "km"),
        (Series("now", x, x, "now"), Series("A", x, x[::-1], "pin"), Series("measured", (3.0,), (4.0,), joined=False)),
        (Rule("x", 5.0, "5 m", "here"), Rule("x", 500.0, "far", "limit")), (Spot(2.0, 2.0, "4b"),), (Unsolved(9.0, "choked"),), ("a note",),
    )  # fmt: skip
    text = svg(chart)
    root, words = ET.fromstring(text), said(text)
    assert root.find(f"{SVG}title").text == chart.title
    assert root.find(f"{SVG}desc").text == "height, km: 0 to 10; length, m: 0 to 10; no solution: choked 1"
    for part in ("length, m", "height, km", "now", "measured", "here: 5 m", "4b", "choked (1 point)", "a note", CAUTION.split(";")[0]):
        assert part in words
    assert "right of the picture" in words.replace("  ", " ")
    lines = [e for e in root.iter(f"{SVG}path") if "L" in e.attrib["d"]]
    assert len(lines) == 2 and [("stroke-dasharray" in e.attrib) for e in lines] == [False, True]


def test_svg_places_values_between_its_ticks() -> None:
    """The line through (0, 0) and (10, 10) starts at the ticks 0 and ends at the ticks 10."""
    x = tuple(map(float, range(11)))
    root = ET.fromstring(svg(Chart("", Axis("u"), Axis("v"), (Series("", x, x),))))
    path = next(e for e in root.iter(f"{SVG}path") if "L" in e.attrib["d"]).attrib["d"].removeprefix("M").split("L")
    (x0, y0), (x1, y1) = (tuple(map(float, p.split())) for p in (path[0], path[-1]))
    ticks = next(g for g in root.iter(f"{SVG}g") if g.attrib["class"] == "ticks").findall(f"{SVG}text")
    below = {t.text: float(t.attrib["x"]) for t in ticks if t.attrib["text-anchor"] == "middle"}
    beside = {t.text: float(t.attrib["y"]) - 4.0 for t in ticks if t.attrib["text-anchor"] == "end"}
    assert (x0, x1) == (below["0"], below["10"]) and (y0, y1) == (beside["0"], beside["10"])


def test_svg_of_a_map_marks_what_is_unsolved() -> None:
    text = svg(slope(hole=(0, 0)))
    root = ET.fromstring(text)
    marks = next(g for g in root.iter(f"{SVG}g") if g.attrib["class"] == "unsolved")
    assert [t.text for t in marks] == ["x"]
    assert "no solution: choked (1 point)" in said(text).replace("  ", " ") and "depth, mm:" in said(text)


def test_svg_says_why_there_is_no_picture() -> None:
    text = svg(Chart("t", Axis("u"), Axis("v"), (), unsolved=(Unsolved(1.0, "choked"),)))
    assert "no solved point: choked 1" in said(text) and not list(ET.fromstring(text).iter(f"{SVG}line"))


def rows(text: str) -> list[list[str]]:
    return list(csv.reader(io.StringIO(text, newline=""), strict=True))


@settings(max_examples=60)
@given(CHARTS)
def test_csv_of_a_chart_gives_every_point_back(chart: Chart) -> None:
    head, *body = rows(csv_text(chart))
    assert len(head) == 4 and all(len(row) == 4 for row in body)
    wanted = [(s.label, x, y) for s in chart.series for x, y in zip(s.x, s.y, strict=True)]
    for (label, x, y), row in zip(wanted, body, strict=False):
        assert row[0] == label
        assert all((float(cell) == v) if math.isfinite(v) else cell == "" for cell, v in zip(row[1:3], (x, y), strict=True))
        assert (row[3] == "solved") == (math.isfinite(x) and math.isfinite(y))
    told = [row[3] for row in body]
    assert all(told.count(s) >= 1 for s in {u.status for u in chart.unsolved})


@settings(max_examples=40)
@given(grids())
def test_csv_of_a_map_gives_every_point_back(grid: Grid) -> None:
    _, *body = rows(csv_text(grid))
    assert [(float(r[0]), float(r[1])) for r in body] == [(x, y) for y in grid.y for x in grid.x]
    values = [z for row in grid.z for z in row]
    for n, row in enumerate(body):
        why = grid.why_not(*divmod(n, len(grid.x)))
        assert row[3] == (why or "solved")
        assert row[2] == "" if why else float(row[2]) == values[n]


def test_csv_names_units_and_tells_why_a_value_is_missing() -> None:
    chart = flat(1, unsolved=(Unsolved(11.0, "choked"),))
    chart = Chart(
        chart.title, chart.x_axis, chart.y_axis, (Series("a, b", (1.0, 2.0), (3.0, math.nan)),), unsolved=(Unsolved(2.0, "choked"),)
    )
    text = csv_text(chart)
    assert text == 'series,"length, m","height, km",status\r\n"a, b",1.0,3.0,solved\r\n"a, b",2.0,,choked\r\n'
