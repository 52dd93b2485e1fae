"""The peek: a figure along the input in hand or over two, its marks, its reasons, the study made of it; no screen here."""

from __future__ import annotations

import math
from dataclasses import replace
from itertools import pairwise

import pytest
from hypothesis import given
from hypothesis import strategies as st

import cycle
from cycle.case import Case, load
from cycle.declarations import Input
from cycle.quantities import input_of
from cycle.sweep import Axis, Curve, around, curve
from tests.case_files import case_file
from tests.tui.screen_support import CASES
from tui import figures, peek
from tui.peek import Peek
from tui.plots import Chart, Grid
from tui.session import Session, loaded, with_figures
from tui.sweeping import LINE_LEVELS, Piece, Span, Sweep, joined
from tui.views import peek as view

HEAT = "combustor.equivalence_ratio"


def session_of(name: str, station: str, key: str) -> Session:
    """A session with the walk of a shipped case, an input in hand."""
    now = loaded(Session(name), load(case_file(name)), None)
    assert now.case is not None
    now = with_figures(now, now.generation, figures.solve(now.case))
    return replace(now, station=station, focus="inputs", inputs={station: key})


def whole(one: Peek) -> Peek:
    """The peek with all that is due solved, as the worker would."""
    for _ in range(60):
        due = one.due
        if due is None:
            return one
        one = peek.took(one, due[1].piece())
    raise AssertionError("never done")


@pytest.fixture(scope="module")
def plain() -> Session:
    return session_of("plain", "4", HEAT)


@pytest.fixture(scope="module")
def drawn(plain: Session) -> Peek:
    start = peek.opened(plain)
    assert start is not None
    return whole(start)


def test_the_curve_holds_what_solving_one_by_one_gives(drawn: Peek, plain: Session) -> None:
    assert plain.case is not None and drawn.curve is not None
    assert len(drawn.curve.status) == 2 * LINE_LEVELS[-1] + 1
    for i in (0, 13, 40):
        walk = cycle.solve(plain.case.replace({HEAT: drawn.curve.axes[0].values[i]}))
        assert drawn.curve.figures["specific_impulse"][i] == pytest.approx(walk.performance.specific_impulse, rel=1e-10)
    picture = view.picture(drawn, None)
    assert isinstance(picture, Chart) and picture.series[0].y == drawn.curve.figures["specific_impulse"]  # s in both systems
    assert (picture.rules[0].kind, picture.rules[0].value) == ("here", 0.6)


def test_a_range_past_choking_shows_where_and_why(drawn: Peek) -> None:
    wide = whole(peek.widened(drawn, 4.0))
    picture = view.picture(wide, None)
    assert isinstance(picture, Chart) and wide.curve is not None
    lost = [u.x for u in picture.unsolved]
    assert lost and min(lost) > 1.0 and {u.status for u in picture.unsolved} == {"choked"}
    border = next(r for r in picture.rules if r.words.startswith("choked near"))
    assert max(x for x, s in zip(wide.curve.axes[0].values, wide.curve.status, strict=True) if s == "solved") < border.value < min(lost)
    told = view.under_cursor(peek.moved(wide, 0, 99))
    assert "choked: burner: the heat asked for exceeds" in told and "let the burner open" in told


def test_a_case_without_any_solution_is_drawn_as_marks_with_the_reason() -> None:
    start = peek.opened(session_of("narrows", "4", HEAT))
    assert start is not None
    close = whole(peek.widened(start, 0.25))
    picture = view.picture(close, None)
    assert isinstance(picture, Chart) and close.curve is not None
    assert len(picture.unsolved) == len(close.curve.status) and all(math.isnan(y) for y in picture.series[0].y)
    assert "choked" in view.under_cursor(close)


def test_limits_are_marked_where_they_are_crossed(drawn: Peek) -> None:
    """Gas temperature behind the burner against its limit, from the margins of the points."""
    hot = figures.solve(drawn.case).at("4", "temperature")
    limited = peek.of_case(drawn, drawn.case.replace({"limits.gas_temperature": hot - 5.0}), True)
    assert limited is not None
    wide = whole(peek.widened(limited, 2.0))
    picture = view.picture(wide, None)
    assert isinstance(picture, Chart) and wide.margins is not None and wide.margins.whole is not None
    found = wide.margins.whole
    marked = {key: sum(r.words.startswith(f"{found.labels[key]}, over") for r in picture.rules) for key in found.margins}
    for key, margins in found.margins.items():
        assert marked[key] == sum((a < 0.0) != (b < 0.0) for a, b in pairwise(margins) if a == a and b == b)
    assert marked["gas_temperature"] == 1


def test_a_limit_keeps_its_margin_where_its_words_change_from_piece_to_piece() -> None:
    """The shock with the least margin is named where all points of a batch agree on it; pieces need not."""
    case = cycle.load(CASES / "tidegate.toml")
    pieces = []
    for start, values in ((0, [6.0, 6.2]), (2, [6.4, 6.6])):
        found = curve(case, {"flight.mach": values}, limits=True)
        words = {**found.labels, "attached": f"attached inlet shocks, ramp {start}"}
        pieces.append(Piece(0, start, 4, replace(found, labels=words), 0.1))
    both = joined(tuple(pieces))
    assert both.labels["attached"] == "attached inlet shocks"
    assert all(len(margins) == 4 for margins in both.margins.values())
    assert not any(math.isnan(m) for m in both.margins["attached"])


def test_modes_of_a_duct_change_where_its_borders_say() -> None:
    start = peek.opened(session_of("tidegate", "4", HEAT))
    assert start is not None
    first = replace(start, other=None, margins=None)
    coarse = peek.took(first, first.sweep.piece())
    picture = view.picture(coarse, {"train": 0.73})
    assert isinstance(picture, Chart)
    words = [r.words for r in picture.rules if r.kind == "mode change"]
    assert any(w.endswith("ramjet-thermal-throat at 0.73") for w in words)
    assert any(w.startswith("scramjet to scramjet-shock-train near") for w in words)


def test_the_pinned_case_has_a_line_of_its_own_where_it_differs_elsewhere(plain: Session) -> None:
    assert plain.case is not None
    same = peek.opened(replace(plain, case=plain.case.replace({HEAT: 0.7})))
    other = peek.opened(replace(plain, case=plain.case.replace({"inlet.pressure_ratio": 60.0})))
    assert same is not None and same.other is None and other is not None and other.other is not None
    picture = view.picture(whole(other), None)
    assert isinstance(picture, Chart) and [s.role for s in picture.series] == ["now", "pin"]
    marks = {r.kind: r.value for r in getattr(view.picture(whole(same), None), "rules", ())}
    assert (marks["here"], marks["pin"]) == (0.7, 0.6)


def test_the_next_figure_is_there_at_once_and_the_row_in_hand_is_among_them(drawn: Peek) -> None:
    one, seen = drawn, []
    for _ in drawn.figures:
        one = peek.next_figure(one)
        seen.append(view.title(one).split(" against")[0])
        assert one.due is None
    assert seen[-1] == "specific impulse" and "Mach number at 4" in seen and len(set(seen)) == 5


def test_a_map_is_row_by_row_the_lines_it_is_made_of(drawn: Peek, plain: Session) -> None:
    assert plain.case is not None
    one = whole(peek.with_second(drawn, "flight.mach"))
    picture = view.picture(one, None)
    assert isinstance(picture, Grid) and picture.here == (0.6, 8.0) and picture.cursor is None
    assert len(picture.x) == len(picture.y) == 21
    assert one.curve is not None
    j = 5
    alone = curve(plain.case.replace({"flight.mach": picture.y[j]}), {HEAT: one.curve.axes[1].values})
    assert [s or "solved" for s in picture.status[j]] == list(alone.status)
    solved = [i for i, s in enumerate(alone.status) if s == "solved"]
    assert [picture.z[j][i] for i in solved] == pytest.approx([alone.figures["specific_impulse"][i] for i in solved], rel=1e-9)
    moved = peek.moved(peek.moved(one, 0, 3), 1, -2)
    assert view.under_cursor(moved).startswith("equivalence ratio 0.66, Mach number 7.6:")
    assert peek.with_second(one, "").spans == one.spans[:1]


@pytest.mark.parametrize(
    ("station", "key", "words"),
    [
        ("0", "gas.model", "is a choice"),
        ("0", "air.moisture", "choose a way"),
        ("4", "limits.gas_temperature", "moves its limit alone"),
        ("10", "nozzle.internal_area_ratio", "no value yet"),
    ],
)
def test_what_cannot_be_drawn_says_so(plain: Session, station: str, key: str, words: str) -> None:
    now = replace(plain, station=station, inputs={station: key})
    assert peek.opened(now) is None and words in peek.drawable(peek.in_hand(now))


@given(st.integers(0, 40), st.integers(1, 9), st.sampled_from([HEAT, "flight.mach", "flight.altitude"]))
def test_pieces_put_together_are_the_whole(at: int, count: int, key: str) -> None:
    """Whatever the pieces, the joined curve has every point once, in order. The solver is left out."""
    entry = input_of(key)
    assert entry is not None
    case: Case = load(CASES / "bench-three.toml")
    sweep = Sweep(case, (Span(entry, max(entry.lower or 0.0, 1.0), 20.0),), levels=(20,))
    values = around(entry, sweep.spans[0].centre, 1.0, 20)
    parts = []
    for start in range(0, len(values), count):
        cut = values[start : start + count]
        parts.append(_piece(entry, cut, start, len(values)))
    found = joined(tuple(parts))
    assert found.axes[0].values == values and found.shape == (len(values),)
    assert found.figures["thrust"] == tuple(2.0 * v for v in values)
    assert found.reasons == {"choked": f"at {values[0]}"}


def _piece(entry: Input, values: tuple[float, ...], start: int, rows: int) -> Piece:
    made = {"thrust": tuple(2.0 * v for v in values)}
    one = Curve(
        (Axis(entry, values),), (len(values),), made, ("choked",) * len(values), ("none",) * len(values), {"choked": f"at {values[0]}"}
    )
    return Piece(0, start, rows, one, 0.01)


def test_a_piece_that_is_not_due_changes_nothing(drawn: Peek) -> None:
    fresh = peek.widened(drawn, 2.0)
    piece = fresh.sweep.piece()
    ahead = fresh.sweep.took(piece)
    assert ahead.level == 1 and ahead.took(piece) is ahead
    assert not drawn.sweep.took(piece).parts


@given(st.lists(st.sampled_from([0.5, 2.0, "left", "right"]), max_size=12))
def test_however_the_range_is_moved_it_stays_inside_the_bounds(moves: list[float | str]) -> None:
    session = session_of_bench()
    one = peek.opened(session)
    assert one is not None
    for move in moves:
        one = peek.widened(one, move) if isinstance(move, float) else peek.shifted(one, -0.5 if move == "left" else 0.5)
    span = one.spans[0]
    values = around(span.input, span.centre, span.steps / 5, 5)
    assert values and (span.input.lower is None or min(values) >= span.input.lower)


def session_of_bench() -> Session:
    """A session on a rig, without its walk."""
    now = loaded(Session("bench-three"), load(CASES / "bench-three.toml"), None)
    return replace(now, station="4", inputs={"4": HEAT})
