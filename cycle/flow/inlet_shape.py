"""Plane geometry of external compression: corners, the lip, which waves reach it, and what the lip captures.

A plane inlet starts at (0, 0); x runs with the flight stream, y toward the lip. Ramp k turns the stream by its turn from the
direction before it; its wave leaves corner k as a straight line. Between waves the stream is uniform and parallel to the ramp,
so the streamline that reaches the lip is traced back as straight pieces. An axisymmetric inlet is a cone with its apex
at (0, 0), and y is the radius. Angles are in radians.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from cycle.arrays import Array, Flags

_NEAR = 1e-9
"""A lip this close to a wave, as a share of the lip height, is on it."""


@dataclass(frozen=True, slots=True)
class Shape:
    """A plane inlet: corner_x, corner_y (n, N) m where each ramp starts, lip_x, lip_y (N,) m."""

    corner_x: Array
    corner_y: Array
    lip_x: Array
    lip_y: Array


@dataclass(frozen=True, slots=True)
class Capture:
    """What the lip captures, (N,) each.

    fraction: height of the captured stream far ahead over the lip height, 1. additive_pressure: additive drag over lip
    area, Pa. inside: (n, N) whether each wave passes behind the lip, into the cowl. merged: whether waves meet inside the captured
    stream; fraction and additive_pressure are NaN there.
    """

    fraction: Array
    additive_pressure: Array
    inside: Flags
    merged: Flags


def corners(turns: Array, lengths: Array) -> tuple[Array, Array]:
    """Where each ramp starts.

    turns: (n, N), rad. lengths: of the ramps along their surface, (n - 1, N) or more rows, m; the last ramp needs none.
    Returns x and y, each (n, N), m. Source: plane geometry.
    """
    along = np.cumsum(turns, axis=0)[:-1]
    used = lengths[: turns.shape[0] - 1]
    start = np.zeros((1, turns.shape[1]))
    x = np.concatenate([start, np.cumsum(used * np.cos(along), axis=0)])
    y = np.concatenate([start, np.cumsum(used * np.sin(along), axis=0)])
    return x, y


def shape_of_lengths(turns: Array, lengths: Array, lip_x: Array, lip_y: Array) -> Shape:
    """A plane inlet of given ramp lengths and lip position.

    turns: (n, N), rad. lengths: (n - 1, N) or more rows, m. lip_x, lip_y: (N,), m. Returns `Shape`. Source: plane geometry.
    """
    return Shape(*corners(turns, lengths), lip_x, lip_y)


@np.errstate(all="ignore")
def shape_on_lip(turns: Array, waves: Array, lip_height: Array) -> Shape:
    """The plane inlet whose waves all meet at the lip: what a design Mach number asks for.

    turns, waves: (n, N), rad, the wave angles from the stream ahead of each. lip_height: (N,), m. Returns `Shape`; NaN where a
    wave is missing. Source: plane geometry; corner k is where the ramp before it meets the line of wave k through the lip.
    """
    along = np.cumsum(turns, axis=0)
    line = waves + along - turns
    lip_x = lip_height / np.tan(line[0])
    x, y = [np.zeros_like(lip_height)], [np.zeros_like(lip_height)]
    for k in range(1, turns.shape[0]):
        ramp, wave = along[k - 1], line[k]
        length = ((lip_x - x[-1]) * np.sin(wave) - (lip_height - y[-1]) * np.cos(wave)) / np.sin(wave - ramp)
        x, y = [*x, x[-1] + length * np.cos(ramp)], [*y, y[-1] + length * np.sin(ramp)]
    return Shape(np.array(x), np.array(y), lip_x, lip_height)


@np.errstate(all="ignore")
def lip_of_waves(turns: Array, lengths: Array, waves: Array) -> tuple[Array, Array]:
    """Where the first wave of given ramps meets the next one: the lip of full capture that leaves no waves crossing under it.

    turns, waves: (n, N), rad, n at least 2. lengths: (n - 1, N) or more rows, m. Returns x and y, each (N,), m; NaN where the first
    wave meets none. Source: plane geometry.
    """
    x, y = corners(turns, lengths)
    line = waves + np.cumsum(turns, axis=0) - turns
    along = (x[1:] * np.sin(line[1:]) - y[1:] * np.cos(line[1:])) / np.sin(line[1:] - line[0])
    nearest = np.min(np.where(along > 0.0, along, np.inf), axis=0)
    nearest = np.where(np.isfinite(nearest), nearest, np.nan)
    return nearest * np.cos(line[0]), nearest * np.sin(line[0])


def ramp_lengths(shape: Shape) -> Array:
    """Lengths of the ramps between the corners of a shape, (n - 1, N), m.

    shape: `Shape`. Source: plane geometry.
    """
    return np.hypot(np.diff(shape.corner_x, axis=0), np.diff(shape.corner_y, axis=0))


def clearance(shape: Shape, turns: Array) -> Array:
    """Distance of the lip from the nearest ramp, across the stream along that ramp, (N,), m; negative under a ramp.

    shape: `Shape`. turns: (n, N), rad, none negative, so that the ramps are the highest of their own lines wherever the lip stands.
    Source: plane geometry.
    """
    along = np.cumsum(turns, axis=0)
    across: Array = np.min((shape.lip_y - shape.corner_y) * np.cos(along) - (shape.lip_x - shape.corner_x) * np.sin(along), axis=0)
    return across


@np.errstate(all="ignore")
def shoulder(shape: Shape, turns: Array, cowl_wave: Array) -> tuple[Array, Array]:
    """Where the shock from the lip meets the last ramp: the shoulder that leaves a uniform stream in the throat.

    shape: `Shape`. turns: (n, N), rad. cowl_wave: angle of the lip's shock from the stream ahead of it, (N,), rad.
    Returns x and y, each (N,), m; NaN where the two lines do not meet downstream. Source: plane geometry.
    """
    ramp = turns.sum(0)
    toward = ramp - cowl_wave
    off = (shape.lip_x - shape.corner_x[-1]) * np.sin(toward) - (shape.lip_y - shape.corner_y[-1]) * np.cos(toward)
    length = -off / np.sin(cowl_wave)
    length = np.where(length > 0.0, length, np.nan)
    return shape.corner_x[-1] + length * np.cos(ramp), shape.corner_y[-1] + length * np.sin(ramp)


@np.errstate(all="ignore")
def capture(shape: Shape, turns: Array, waves: Array, pressures: Array, ambient: Array) -> Capture:
    """What the lip of a plane inlet captures, and the additive drag of what it spills.

    shape: `Shape`. turns, waves: (n, N), rad. pressures: behind each wave, (n, N), Pa. ambient: (N,), Pa. Returns `Capture`.
    Additive drag is the integral of p - p0 over the streamwise projection of the streamline that reaches the lip.
    Source: plane geometry; the definition of additive drag as in Sibulkin, NACA RM E51B13 (1951) (from memory).
    """
    along = np.cumsum(turns, axis=0)
    line = waves + along - turns
    scale = _NEAR * shape.lip_y
    x, y = shape.lip_x, shape.lip_y
    force, merged = np.zeros_like(y), np.zeros(y.shape, np.bool_)
    inside = np.zeros(turns.shape, np.bool_)
    passed = np.zeros(y.shape, np.bool_)
    for k in range(turns.shape[0] - 1, -1, -1):
        behind = (x - shape.corner_x[k]) * np.sin(line[k]) - (y - shape.corner_y[k]) * np.cos(line[k])
        inside[k] = ~passed & (behind < -scale)
        # a streamline behind wave k + 1 that is ahead of wave k has met them after they met each other
        merged |= passed & (behind < -scale)
        passed |= behind >= -scale
        back = np.where(passed, behind / np.sin(line[k] - along[k]), 0.0)
        step = back * np.sin(along[k])
        force += (pressures[k] - ambient) * step
        x, y = x - back * np.cos(along[k]), y - step
    fraction = np.where(merged, np.nan, y / shape.lip_y)
    return Capture(fraction, np.where(merged, np.nan, force / shape.lip_y), inside, merged)
