"""What a picture shows, as plain data: charts of series and maps of a grid. Values stand in the unit shown, never in hidden SI.

A value that does not exist is nan; why it does not is told by `Unsolved` or by the grid's `status`, never left out.
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from itertools import pairwise
from typing import Literal

Role = Literal["now", "pin", "plain"]
Kind = Literal["limit", "mode change", "place", "here", "pin"]
Numbers = tuple[float, ...]

NO_VALUE = "no value"
"""Status of a point that has neither a value nor a status of its own."""


@dataclass(frozen=True, slots=True)
class Axis:
    """One direction of a picture: label, unit ("" for a ratio), whether it is logarithmic, values it has to reach whatever
    the data are (0 for one that starts at nothing), and the names of its places 0, 1, 2 ... where these are no numbers."""

    label: str
    unit: str = ""
    log: bool = False
    include: Numbers = ()
    names: tuple[str, ...] = ()


@dataclass(frozen=True, slots=True)
class Series:
    """One line or cloud of points. label: as the legend says it. x, y: of one length, a gap wherever either is not finite.
    role: "now" is the walk in hand (solid, heaviest), "pin" the pinned one (dashed), "plain" any other. joined: whether
    neighbouring points are joined, in the order given (a path may turn back).

    Raises: ValueError where x and y differ in length.
    """

    label: str
    x: Numbers
    y: Numbers
    role: Role = "plain"
    joined: bool = True

    def __post_init__(self) -> None:
        if len(self.x) != len(self.y):
            raise ValueError(f"series {self.label!r}: {len(self.x)} x and {len(self.y)} y")


@dataclass(frozen=True, slots=True)
class Unsolved:
    """A point asked for that has no solution: its x, the word of its status, and the label of its series ("" for all)."""

    x: float
    status: str
    series: str = ""


@dataclass(frozen=True, slots=True)
class Rule:
    """A marked value of one axis, drawn across the picture with a tag that the legend explains.
    across: the axis whose value it is, so that "x" is a vertical line. words: what it is, with its value and unit."""

    across: Literal["x", "y"]
    value: float
    words: str
    kind: Kind = "limit"


@dataclass(frozen=True, slots=True)
class Spot:
    """A point with a short label beside it, such as the number of a station; the legend lists it where it has words."""

    x: float
    y: float
    label: str
    words: str = ""


@dataclass(frozen=True, slots=True)
class Chart:
    """Series over one pair of axes, with rules, spots, points without a solution, and notes that go below."""

    title: str
    x_axis: Axis
    y_axis: Axis
    series: tuple[Series, ...]
    rules: tuple[Rule, ...] = ()
    spots: tuple[Spot, ...] = ()
    unsolved: tuple[Unsolved, ...] = ()
    notes: tuple[str, ...] = ()


@dataclass(frozen=True, slots=True)
class Grid:
    """A map: a figure over a grid of two inputs.

    x, y: places of the grid along both axes, finite and rising. z: one row for each y, one value for each x, nan without a
    solution. status: of the shape of z, None where solved; () where no point has one. here, pin, cursor: (x, y) to be marked;
    the cursor is left out of a file.
    Raises: ValueError where the shapes differ or x or y do not rise.
    """

    title: str
    x_axis: Axis
    y_axis: Axis
    z_axis: Axis
    x: Numbers
    y: Numbers
    z: tuple[Numbers, ...]
    status: tuple[tuple[str | None, ...], ...] = ()
    here: tuple[float, float] | None = None
    pin: tuple[float, float] | None = None
    notes: tuple[str, ...] = ()
    cursor: tuple[float, float] | None = None

    def __post_init__(self) -> None:
        for name, places in (("x", self.x), ("y", self.y)):
            if not all(map(math.isfinite, places)) or any(b <= a for a, b in pairwise(places)):
                raise ValueError(f"grid: {name} is not finite and rising")
        for name, rows in (("z", self.z), ("status", self.status)):
            if (rows or name == "z") and (len(rows) != len(self.y) or any(len(row) != len(self.x) for row in rows)):
                raise ValueError(f"grid: {name} is not {len(self.y)} rows of {len(self.x)}")

    def why_not(self, row: int, column: int) -> str | None:
        """The status of a point without a value, None where it has one; a status stands before the value."""
        own = self.status[row][column] if self.status else None
        return own or (None if math.isfinite(self.z[row][column]) else NO_VALUE)
