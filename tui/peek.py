"""The state of a peek: what is drawn against what, how wide, where its cursor stands, and the sweeps that are under way.

Frozen plain data; the screen holds one and replaces it. Nothing here knows Textual.
"""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import TYPE_CHECKING, Any

from cycle.declarations import Input
from cycle.quantities import OUTPUT
from tui import rows
from tui.actions import ACTIONS, Action, key_of
from tui.items import Item, in_hand
from tui.session import Pin, Session, performance_keys, watched
from tui.sweeping import LIMIT_LEVELS, LINE_LEVELS, MAP_LEVELS, Piece, Span, Sweep
from tui.views.table import ROWS

if TYPE_CHECKING:
    from cycle.case import Case
    from cycle.sweep import Curve

WIDEST, NARROWEST = 4096.0, 1.0 / 64.0
"""Declared steps on each side of the middle, in units of the first ones."""

STEPS = 20.0
LIMITS_COST = 2.0
"""What a point with its limits costs, in points without."""


@dataclass(frozen=True, slots=True)
class Peek:
    """case: the one that is varied; system: of units; pin: the pinned walk, None where there is none that differs; figures: those
    that can be drawn; figure: the one that is; spans: of the first input and, in a map, of the second; place: where the cursor
    stands, one value for each span; sweep and other: the sweeps of the case and of the pinned one; margins: that of the limits."""

    case: Case
    system: str
    pin: Pin | None
    figures: tuple[str, ...]
    figure: str
    spans: tuple[Span, ...]
    place: tuple[float, ...]
    sweep: Sweep
    other: Sweep | None = None
    margins: Sweep | None = None

    @property
    def curve(self) -> Curve | None:
        """The finest sweep that is complete."""
        return self.sweep.whole

    @property
    def here(self) -> tuple[float, ...]:
        """Present values of the inputs."""
        return tuple(self.case.numbers[s.input.key] for s in self.spans)

    @property
    def due(self) -> tuple[str, Sweep] | None:
        """Which sweep has a piece to be solved, None where all is there."""
        known = (("sweep", self.sweep), ("other", self.other), ("margins", self.margins))
        return next(((name, sweep) for name, sweep in known if sweep is not None and not sweep.over), None)

    def at(self) -> int | None:
        """Index of the point under the cursor in the curve, row by row; None before there is one."""
        if self.curve is None or not self.curve.status:
            return None
        index = 0
        for axis, value in zip(self.curve.axes, reversed(self.place), strict=True):
            index = index * len(axis.values) + min(range(len(axis.values)), key=lambda i: abs(axis.values[i] - value))
        return index


def drawable(hand: Item | None, actions: tuple[Action, ...] = ACTIONS) -> str:
    """Why the input in hand cannot be drawn against, "" where it can. actions: those whose keys are named."""
    way, cycle, edit, why = (key_of(actions, name) for name in ("ways", "cycle", "edit", "why"))
    if hand is None:
        return "this station has no inputs of its own"
    if hand.input is None:
        return f"{hand.label}: choose a way to say it first ({way})"
    if hand.input.kind == "choice":
        return f"{hand.label} is a choice, no curve: {cycle} takes the next one, changes stand against the pin"
    if hand.input.kind != "number":
        return f"{hand.label} is no number and cannot be drawn"
    if hand.key.startswith("limits."):
        return f"{hand.label} moves its limit alone, no figure of the walk: {why} shows the limits"
    return "" if isinstance(hand.value, int | float) else f"{hand.label} has no value yet: {edit} gives it one"


def opened(session: Session) -> Peek | None:
    """A peek of the input in hand; None where it cannot be drawn."""
    hand, case = in_hand(session), session.case
    if drawable(hand) or hand is None or hand.input is None or case is None:
        return None
    figures = (*performance_keys(session), f"{session.station}.{ROWS[session.row]}")
    entry = case.declared(hand.key)
    assert entry is not None
    span = Span(entry, case.numbers[hand.key], STEPS)
    sweep = Sweep(case, (span,), figures[-1:])
    return _beside(Peek(case, session.system, session.pin, figures, watched(session), (span,), (span.centre,), sweep))


def _beside(peek: Peek) -> Peek:
    """The peek with the sweep of the pinned case along the same line, where that is another one, and with that of the limits."""
    pin, line = peek.pin, len(peek.spans) == 1
    margins = Sweep(peek.case, peek.spans, levels=LIMIT_LEVELS, limits=True) if line else None
    if pin is None or not line or not _differs(pin.case, peek.case, peek.spans[0].input.key):
        return replace(peek, other=None, margins=margins)
    return replace(peek, other=Sweep(pin.case, peek.spans, peek.sweep.figures, LINE_LEVELS[-1:]), margins=margins)


def _differs(pinned: Case, case: Case, key: str) -> bool:
    """Whether a pinned case has a line of its own along an input: it has that input, and differs in something else."""
    if pinned.value(key) is None or not pinned.applies(key):
        return False
    mine, theirs = ({k: v for k, v in c.numbers.items() if k != key} for c in (case, pinned))
    return mine != theirs or (case.choices, case.texts, case.fractions) != (pinned.choices, pinned.texts, pinned.fractions)


def _afresh(peek: Peek, spans: tuple[Span, ...]) -> Peek:
    """The peek over other spans: what was drawn goes, the cursor stays where it can."""
    levels = LINE_LEVELS if len(spans) == 1 else MAP_LEVELS
    sweep = Sweep(peek.case, spans, peek.sweep.figures, levels, cost=peek.sweep.cost)
    return _beside(replace(peek, spans=spans, sweep=sweep))


def widened(peek: Peek, factor: float) -> Peek:
    """The peek over a range `factor` times as wide."""
    steps = [min(max(s.steps * factor, STEPS * NARROWEST), STEPS * WIDEST) for s in peek.spans]
    return _afresh(peek, tuple(replace(s, steps=n) for s, n in zip(peek.spans, steps, strict=True)))


def shifted(peek: Peek, part: float) -> Peek:
    """The peek with the first input's range moved by `part` of its half width; its middle stays inside the bounds."""
    first, *others = peek.spans
    centre = float(f"{first.centre + part * first.steps * first.input.step:.12g}")
    low = first.input.lower if first.input.lower is not None else first.input.above
    high = first.input.upper if first.input.upper is not None else first.input.below
    if (low is not None and centre <= low) or (high is not None and centre >= high):
        return peek
    moved = _afresh(peek, (replace(first, centre=centre), *others))
    return replace(moved, place=(centre, *peek.place[1:]))


def with_second(peek: Peek, key: str) -> Peek:
    """The map over a second input as well; the line again where key is ""."""
    first = peek.spans[0]
    if not key:
        return replace(_afresh(peek, (first,)), place=peek.place[:1])
    entry = peek.case.declared(key)
    assert entry is not None
    span = Span(entry, peek.case.numbers[key], STEPS)
    return replace(_afresh(peek, (first, span)), place=(peek.place[0], span.centre))


def of_case(peek: Peek, case: Case, again: bool) -> Peek | None:
    """The peek of an edited case; None where its inputs are gone. again: whether its line has to be solved anew."""
    if any(case.value(s.input.key) is None for s in peek.spans):
        return None
    return _afresh(replace(peek, case=case), peek.spans) if again else replace(peek, case=case)


def took(peek: Peek, piece: Piece) -> Peek:
    """The peek with the piece that was due."""
    due = peek.due
    if due is None:
        return peek
    grown: dict[str, Any] = {due[0]: due[1].took(piece)}
    return _weighed(replace(peek, **grown))


def _weighed(peek: Peek) -> Peek:
    """The peek with what a point costs told to the sweeps that have not begun, so that their pieces are short from the first one."""
    cost = peek.sweep.cost
    other = replace(peek.other, cost=cost) if peek.other is not None and not peek.other.cost else peek.other
    margins = replace(peek.margins, cost=LIMITS_COST * cost) if peek.margins is not None and not peek.margins.cost else peek.margins
    return replace(peek, other=other, margins=margins)


def next_figure(peek: Peek) -> Peek:
    """The peek of the next figure."""
    at = peek.figures.index(peek.figure)
    return replace(peek, figure=peek.figures[(at + 1) % len(peek.figures)])


def moved(peek: Peek, along: int, steps: int) -> Peek:
    """The cursor `steps` points further along an axis: 0 the first input, 1 the second."""
    curve = peek.curve
    if curve is None or along >= len(peek.spans):
        return peek
    values = curve.axes[len(peek.spans) - 1 - along].values
    now = min(range(len(values)), key=lambda i: abs(values[i] - peek.place[along]))
    place = list(peek.place)
    place[along] = values[max(0, min(now + steps, len(values) - 1))]
    return replace(peek, place=tuple(place))


def others(peek: Peek) -> list[Input]:
    """Inputs that can be the second one of a map: numbers and cells with a value, but for the first."""
    first = peek.spans[0].input.key
    known = (s for s in peek.case.inputs() if s.input.kind == "number" and isinstance(s.value, int | float))
    return [s.input for s in known if s.input.key != first and not rows.hidden(peek.case, s.input.key) and "limits." not in s.input.key]


def named(figure: str) -> tuple[str, str, str]:
    """Key, label and dimension of a figure: of the performance, or of a station ("4.temperature")."""
    station, _, key = figure.rpartition(".")
    spec = OUTPUT[key]
    return key, f"{spec.label} at {station}" if station else spec.label, spec.unit
