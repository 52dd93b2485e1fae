"""Sweeps for the screen: a figure along one input or over two, coarse first, then finer, in pieces short enough to wait for.

A piece is solved in the worker; the rest here is plain data. Nothing knows Textual.
"""

from __future__ import annotations

from dataclasses import dataclass, replace
from itertools import takewhile
from time import perf_counter
from typing import TYPE_CHECKING

from cycle.declarations import Input

if TYPE_CHECKING:
    from cycle.case import Case
    from cycle.sweep import Curve

LINE_LEVELS, MAP_LEVELS, LIMIT_LEVELS = (5, 20), (3, 5, 10), (10,)
"""Points on each side of the middle, level by level: a line has twice as many and one, a map the square of that. Margins change
smoothly and need fewer."""

PIECE = 0.25
"""Seconds that a piece should take at most."""

FEWEST = 14
"""Points that a piece has at least: fewer cost nearly as much."""

DEAREST = 6.0
"""Seconds that a finer level may be expected to take; a dearer one is left out."""


@dataclass(frozen=True, slots=True)
class Span:
    """The part of an input that is drawn: `steps` of its declared steps on each side of `centre` (SI), inside its bounds."""

    input: Input
    centre: float
    steps: float = 20.0


@dataclass(frozen=True, slots=True)
class Piece:
    """What a job solved: rows of a level from `start` on, how many rows the level has, and the seconds it took."""

    level: int
    start: int
    rows: int
    curve: Curve
    seconds: float


@dataclass(frozen=True, slots=True)
class Sweep:
    """A sweep under way. spans: of the input, and of the second one of a map; figures: keys beyond the headline; limits: whether their
    margins are wanted; level: the one being solved, counted from 0; parts: its pieces so far; whole: the finest level that is complete;
    cost: seconds a point of the last piece."""

    case: Case
    spans: tuple[Span, ...]
    figures: tuple[str, ...] = ()
    levels: tuple[int, ...] = LINE_LEVELS
    limits: bool = False
    level: int = 0
    parts: tuple[Piece, ...] = ()
    whole: Curve | None = None
    cost: float = 0.0

    @property
    def over(self) -> bool:
        """Whether nothing is left to be solved."""
        return self.level >= len(self.levels)

    @property
    def done(self) -> tuple[int, int]:
        """Rows of the level under way that are solved, and all of them (0 where none is)."""
        return sum(p.curve.shape[0] for p in self.parts), self.parts[-1].rows if self.parts else 0

    def piece(self) -> Piece:
        """Solve the next piece. Slow: call it in the worker."""
        half = self.levels[self.level]
        across = 2 * half + 1 if len(self.spans) > 1 else 1
        count = max(1, int(PIECE / (self.cost * across)), -(-FEWEST // across)) if self.cost else 2 * half + 1
        return solve(self, self.done[0], count)

    def took(self, piece: Piece) -> Sweep:
        """The sweep with a piece more; the same one where it is not the one that was due."""
        if self.over or (piece.level, piece.start) != (self.level, self.done[0]):
            return self
        parts, cost = (*self.parts, piece), piece.seconds / max(1, len(piece.curve.status))
        if piece.start + piece.curve.shape[0] < piece.rows:
            return replace(self, parts=parts, cost=cost)
        level = self.level + 1
        if level < len(self.levels) and cost * (2 * self.levels[level] + 1) ** len(self.spans) > DEAREST:
            level = len(self.levels)
        return replace(self, parts=(), whole=joined(parts), level=level, cost=cost)


def solve(sweep: Sweep, start: int, count: int) -> Piece:
    """Rows of the level under way.

    Parameters: sweep; start, the first row (a point of a line, a value of the second input of a map); count, rows at most.
    Returns: the piece.
    """
    from cycle.sweep import around, curve

    began = perf_counter()
    half = sweep.levels[sweep.level]
    values = {s.input.key: around(s.input, s.centre, s.steps / half, half) for s in reversed(sweep.spans)}
    outer = next(iter(values))
    rows = len(values[outer])
    axes = {**values, outer: values[outer][start : start + count]}
    found = curve(sweep.case, axes, sweep.figures, sweep.limits)
    return Piece(sweep.level, start, rows, found, perf_counter() - began)


def joined(parts: tuple[Piece, ...]) -> Curve:
    """One curve from the pieces of a level, in order."""
    curves = [p.curve for p in parts]
    first = curves[0]
    if len(curves) == 1:
        return first
    outer = replace(first.axes[0], values=tuple(v for c in curves for v in c.axes[0].values))
    reasons: dict[str, str] = {}
    for one in curves:
        reasons = {**one.reasons, **reasons}
    return replace(
        first,
        axes=(outer, *first.axes[1:]),
        shape=(len(outer.values), *first.shape[1:]),
        figures={key: tuple(v for c in curves for v in c.figures[key]) for key in first.figures},
        margins={key: tuple(v for c in curves for v in _of(c, key)) for c in curves for key in c.margins},
        labels={key: _label([c.labels[key] for c in curves if key in c.labels]) for c in curves for key in c.labels},
        status=tuple(s for c in curves for s in c.status),
        mode=tuple(m for c in curves for m in c.mode),
        reasons=reasons,
    )


def _of(curve: Curve, key: str) -> tuple[float, ...]:
    """Margins of a limit, nan where a piece does not have it."""
    return curve.margins.get(key, (float("nan"),) * len(curve.status))


def _label(said: list[str]) -> str:
    """Words that hold for all pieces: which shock or station has the least margin may change from one to the next."""
    parts = zip(*(words.split(", ") for words in said), strict=False)
    return ", ".join(part[0] for part in takewhile(lambda part: len(set(part)) == 1, parts)) or said[0]
