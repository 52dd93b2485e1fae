"""What is found about N ducts: the modes and statuses by code, and the arrays that the modes fill in."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, fields
from typing import Any

import numpy as np

from cycle.arrays import Array, Codes, Flags
from cycle.flow.duct.layout import Duct
from cycle.flow.duct.panels import STAGES
from cycle.flow.duct.scan import Scan
from cycle.gas.state import State, scatter

MODES = ("none", "scramjet", "scramjet-shock-train", "ramjet-thermal-throat")
NONE, ATTACHED, TRAIN, THROAT = range(4)

STATUSES = ("solved", "choked", "unstarted", "mode-refused", "out-of-range", "not-converged", "no-mode")
SOLVED, CHOKED, UNSTARTED, REFUSED, OUTSIDE, LOST, NO_MODE = range(7)

TRIED = (
    "not tried", "stands", "chokes", "separates", "no such pressure", "core subsonic", "no throat", "unstarted",
    "no core meets it", "not converged",
)  # fmt: skip
NOT_TRIED, STANDS, CHOKES, SEPARATES, NO_PRESSURE, SUBSONIC, NO_THROAT, NO_START, NO_CORE, UNSETTLED = range(10)

_EVEN_ROWS = 9


def core_rows(duct: Duct) -> int:
    """Rows of a profile ahead of those of the marches, for the separated zone: evenly spaced ones and the duct's edges."""
    return _EVEN_ROWS + len(duct.edges) - 2


def core_places(duct: Duct, fill: Array) -> Array:
    """x of those rows, (rows, N), up to where the core fills the duct, m (N,)."""
    even = np.linspace(0.0, 1.0, _EVEN_ROWS)[:, None] * fill
    return np.sort(np.concatenate([even, np.minimum(duct.edges[1:-1], fill)]), axis=0)


@dataclass(eq=False)
class Solution:
    """What was found for N points, filled in as the modes are tried; each (N,), NaN where it has no meaning.

    mode, status, attached, train, throat: codes of `MODES`, `STATUSES`, `TRIED`; throat_kind: see `summits`, -1 none.
    places: where the core of a thermal throat may fill the duct, the first is taken.
    x_throat, x_fill m; pressure_3 Pa of the separated zone; peak: highest wall pressure Pa; needed: impulse that the
    critical flow asks at the entry, N; velocity m/s and state at the exit; total_enthalpy J/kg of the entering
    stream, behind the hand-over to the burner's pair; wall_force, friction N; error: estimate of the
    discretisation error of the exit impulse, over it; lost_heat: to a wall of stated temperature, at the rows of
    the duct's lattice, W, as the flow found would lose it; rows: profile by name, (R, N).
    """

    mode: Codes
    status: Codes
    attached: Codes
    train: Codes
    throat: Codes
    throat_kind: Codes
    places: Codes
    x_throat: Array
    x_fill: Array
    pressure_3: Array
    peak: Array
    attached_peak: Array
    needed: Array
    velocity: Array
    wall_force: Array
    friction: Array
    error: Array
    spare: Array
    state: State
    total_enthalpy: Array
    lost_heat: Array | None
    rows: dict[str, Array]


PROFILE = ("x", "pressure", "temperature", "velocity", "mach", "area", "core_area", "burnt", "ratio")


def nothing_yet(duct: Duct, scan: Scan, panels: int) -> Solution:
    """A solution of N points without a mode; panels of a march."""
    n, rows = duct.size, scan.segment.shape[0]
    state = scan.sonic.state.take(np.arange((rows - 1) * n, rows * n)).flagged(np.ones(n, np.bool_))
    most = core_rows(duct) + 2 * (1 + STAGES * panels + len(duct.edges) - 2)
    profile = {name: np.full((most, n), np.nan) for name in PROFILE}
    lost = None if duct.cooling is None else duct.cooling.lost.copy()
    mode, status, attached, train, throat, places = np.zeros((6, n), np.int64)
    a, b, c, d, e, f, g, h, i, j, k = np.full((11, n), np.nan)
    return Solution(
        mode,
        status,
        attached,
        train,
        throat,
        mode - 1,
        places,
        a,
        b,
        c,
        d,
        e,
        f,
        g,
        h,
        i,
        j,
        k,
        state,
        duct.total_enthalpy.copy(),
        lost,
        profile,
    )


def refuse(found: Solution, points: Flags) -> None:
    """Take back whatever was found for these points (N,): their stream is not one the modes are for."""
    for f in fields(Solution):
        values = getattr(found, f.name)
        if isinstance(values, np.ndarray):
            values[..., points] = np.nan if values.dtype.kind == "f" else 0
    for rows in found.rows.values():
        rows[:, points] = np.nan
    found.status[points], found.throat_kind[points] = REFUSED, -1


def merge(whole: Solution, index: Codes, part: Solution) -> None:
    """Replace the points `index` of `whole` by those of `part`, in order."""
    for f in fields(Solution):
        old, new = getattr(whole, f.name), getattr(part, f.name)
        if isinstance(old, State):
            whole.state = scatter(old, index, new)
        elif isinstance(old, dict):
            for name, values in old.items():
                values[:, index] = new[name]
        elif old is not None:
            old[..., index] = new


def side_by_side(parts: Sequence[Solution]) -> Solution:
    """Solutions of blocks of points as one."""
    if len(parts) == 1:
        return parts[0]
    return Solution(*(_beside([getattr(part, f.name) for part in parts]) for f in fields(Solution)))


def _beside(values: Sequence[Any]) -> Any:
    first = values[0]
    if first is None:
        return None
    if isinstance(first, State):
        return State(*(_beside(columns) for columns in zip(*(v.values() for v in values), strict=True)))
    if isinstance(first, dict):
        return {name: np.concatenate([v[name] for v in values], axis=-1) for name in first}
    return np.concatenate(values, axis=-1)
