"""Where a curve along the duct, known at the points of a grid with its slope, has its summits."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from cycle.arrays import Array, Codes, Flags
from cycle.flow.duct.panels import NODES, Lattice

SMOOTH, CORNER, ENTRY, EXIT = range(4)
"""What a summit is: inside a smooth segment, at an edge between two, at the entry, at the exit."""

_FLAT = 1e-9
"""Slopes below this fraction of the curve's range over the duct's length are none."""


@dataclass(frozen=True, eq=False)
class Summits:
    """Summits of N curves from the highest down, each (C, N): place m, segment, kind, and whether there is one."""

    x: Array
    segment: Codes
    kind: Codes
    there: Flags


def summits(grid: Lattice, value: Array, slope: Array, scale: Array, count: int) -> Summits:
    """The `count` highest summits of curves given with their slopes at the grid's rows (P n, N).

    scale: size of the curve (N,), against which a slope is none. A plateau's summit is its downstream end. The curve may jump between
    panels; a summit at an edge belongs to the segment where the curve is higher.
    """
    y, g = grid.by_panel(value), grid.by_panel(slope)
    length = grid.panels.start[-1] + grid.panels.length[-1]
    g = np.where(np.abs(g) * length < _FLAT * scale, 0.0, g)
    x = grid.by_panel(grid.x)
    y = y + _FLAT * scale * x / length
    inside = _inside(x, y, g)
    edge = _edges(grid, x, y, g)
    heights = np.concatenate([inside[0], edge[0]])
    order = np.argsort(-heights, axis=0, kind="stable")[:count]
    segment = np.repeat(grid.panels.segment, NODES - 1, axis=0)
    kinds = np.zeros(inside[0].shape, np.int64)
    there = np.isfinite(np.take_along_axis(heights, order, 0))
    place = np.take_along_axis(np.concatenate([inside[1], edge[1]]), order, 0)
    segments = np.take_along_axis(np.concatenate([segment, edge[2]]), order, 0)
    return Summits(place, segments, np.take_along_axis(np.concatenate([kinds, edge[3]]), order, 0), there)


def _inside(x: Array, y: Array, g: Array) -> tuple[Array, Array]:
    """Height (-inf: none) and place of the summit in each interval between points, (P (n - 1), N)."""
    before, after = g[:, :-1], g[:, 1:]
    there = (before > 0.0) & (after <= 0.0) & (before > after)
    part = np.where(there, before / np.where(there, before - after, 1.0), 0.0)
    place = x[:, :-1] + part * (x[:, 1:] - x[:, :-1])
    height = np.where(there, np.maximum(y[:, :-1], y[:, 1:]) + 0.25 * before * part * (x[:, 1:] - x[:, :-1]), -np.inf)
    n = x.shape[-1]
    return height.reshape(-1, n), place.reshape(-1, n)


def _edges(grid: Lattice, x: Array, y: Array, g: Array) -> tuple[Array, Array, Codes, Codes]:
    """Height, place, segment and kind of the summit at each panel edge, (P + 1, N)."""
    n = x.shape[-1]
    nothing = np.full((1, n), -np.inf)
    left_y, right_y = np.concatenate([nothing, y[:, -1]]), np.concatenate([y[:, 0], nothing])
    left_g, right_g = np.concatenate([np.full((1, n), np.inf), g[:, -1]]), np.concatenate([g[:, 0], np.full((1, n), -np.inf)])
    jump = np.abs(left_y - right_y) > 1e-9 * np.abs(left_y)
    higher_left = left_y > right_y
    level = (left_g >= 0.0) & (right_g <= 0.0) & (left_g > right_g)
    there = np.where(jump, np.where(higher_left, left_g >= 0.0, right_g <= 0.0), level)
    segments = grid.panels.segment
    left_s, right_s = np.concatenate([segments[:1], segments]), np.concatenate([segments, segments[-1:]])
    kind = np.where(left_s == right_s, SMOOTH, CORNER)
    kind[0], kind[-1] = ENTRY, EXIT
    place = np.concatenate([x[:, 0], x[-1:, -1]])
    height = np.where(there, np.maximum(left_y, right_y), -np.inf)
    return height, place, np.where(jump & higher_left, left_s, right_s), kind


def window(edges: Array, segment: Codes, x: Array, width: Array, fractions: Array) -> tuple[Array, Array]:
    """Places (n, N) spread as `fractions` (n,) over a window about x (N,) inside its segment, and the window's size (N,)."""
    low = np.take_along_axis(edges, segment[None], 0)[0]
    high = np.take_along_axis(edges, segment[None] + 1, 0)[0]
    size = np.minimum(width, high - low)
    start = np.clip(x - 0.5 * size, low, high - size)
    return start + fractions[:, None] * size, size
