"""Collocation on panels: where the nodes of a march stand, and how a panel integrates and interpolates.

A march is cut into panels, each inside one smooth segment of the duct. On a panel the balances hold at the right Radau
points (Radau IIA collocation, order 2s - 1 at the panel ends: Hairer and Wanner, Solving Ordinary Differential Equations
II, section IV.5), found by sweeps with the lower triangular factor of the integration matrix (Weiser, BIT 55 (2015)
1219, from memory). Scans use Chebyshev points with both panel ends.
"""

from __future__ import annotations

from dataclasses import dataclass, replace
from functools import lru_cache

import numpy as np

from cycle.arrays import Array, Codes

STAGES = 4
"""Radau points a panel."""


@dataclass(frozen=True, eq=False)
class Rule:
    """Integration on 0..1. nodes: (s,); integral: (s, s), from 0 to each node; sweep: its lower triangular factor, whose
    rows times the stages are solved one after another; rest: integral - sweep; graded: x = t^2 on the panel, t the nodes."""

    nodes: Array
    integral: Array
    sweep: Array
    graded: bool

    @property
    def rest(self) -> Array:
        """What the sweeps take from their last values."""
        return self.integral - self.sweep

    @property
    def places(self) -> Array:
        """Fraction of the panel's length at each node, (s,)."""
        return self.nodes**2 if self.graded else self.nodes

    def parameter(self, fraction: Array) -> Array:
        """The variable in which the panel is a polynomial, from the fraction of its length (any shape)."""
        return np.sqrt(np.maximum(fraction, 0.0)) if self.graded else fraction


def _monomials(points: Array, count: int) -> Array:
    return np.vander(points, count, increasing=True)


def _lower_factor(matrix: Array) -> Array:
    """Transposed upper factor of the LU decomposition of the transposed matrix."""
    upper = matrix.T.copy()
    for i in range(len(upper)):
        for j in range(i + 1, len(upper)):
            upper[j] -= upper[i] * (upper[j, i] / upper[i, i])
    return upper.T


@lru_cache
def radau(graded: bool, stages: int = STAGES) -> Rule:
    """Right Radau points of a panel, t in 0..1. Graded: the points crowd at the start of the panel, x = t^2, so that a
    flow that leaves a sonic point like the square root of x is smooth in t."""
    legendre = np.polynomial.legendre
    poly = np.zeros(stages + 1)
    poly[stages], poly[stages - 1] = 1.0, -1.0
    nodes = np.sort((1.0 + np.real(legendre.legroots(poly))) / 2.0)
    nodes[-1] = 1.0
    powers = np.arange(1, stages + 1)
    integral = (nodes[:, None] ** powers / powers) @ np.linalg.inv(_monomials(nodes, stages))
    if graded:
        integral = integral * (2.0 * nodes)
    return Rule(nodes, integral, _lower_factor(integral), graded)


def lagrange(nodes: Array, t: Array) -> Array:
    """Values of the polynomials of `nodes` (s,) at t (...): (s, ...)."""
    return np.stack([np.prod([(t - b) / (a - b) for j, b in enumerate(nodes) if j != i], axis=0) for i, a in enumerate(nodes)])


def integral_to(rule: Rule, t: Array) -> Array:
    """Weights (s, ...) of the integral over the fraction of the panel up to the parameter t (...)."""
    count = len(rule.nodes)
    terms = np.stack([t**k / k for k in range(1, count + 1)])
    weights: Array = np.tensordot(np.linalg.inv(_monomials(rule.nodes, count)).T, terms, axes=1)
    if rule.graded:
        weights = weights * (2.0 * rule.nodes).reshape(-1, *(1,) * t.ndim)
    return weights


@dataclass(frozen=True, eq=False)
class Spectral:
    """Chebyshev points of 0..1 with both ends, (n,): derivative and integral-from-0 matrices (n, n), and the matrix that
    gives the coefficients of the powers of 2 t - 1."""

    nodes: Array
    derivative: Array
    integral: Array
    coefficients: Array

    def at(self, values: Array, t: Array) -> Array:
        """Polynomial through values (n, ...) at t (...)."""
        found: Array = (lagrange(self.nodes, t) * values).sum(0)
        return found

    def fall(self, values: Array, steps: int = 40) -> Array:
        """Where the polynomial through values (n, N), positive at 0 and negative at 1, falls through zero, (N,); an end
        where it does not change sign."""
        c = np.tensordot(self.coefficients, values, axes=1)
        low, high = np.zeros(values.shape[1]), np.ones(values.shape[1])
        x = 0.5 * (low + high)
        for _ in range(steps):
            t = 2.0 * x - 1.0
            y, dy = np.zeros_like(x), np.zeros_like(x)
            for ck in c[::-1]:
                dy = dy * t + y
                y = y * t + ck
            low, high = np.where(y > 0.0, x, low), np.where(y > 0.0, high, x)
            aimed = x - y / np.minimum(2.0 * dy, -1e-300)
            new = np.where((aimed >= low) & (aimed <= high), aimed, 0.5 * (low + high))
            if np.array_equal(new, x):
                break
            x = new
        return np.where(values[0] <= 0.0, 0.0, np.where(values[-1] >= 0.0, 1.0, x))


@lru_cache
def chebyshev(count: int) -> Spectral:
    """The points and matrices for `count` nodes."""
    nodes = (1.0 - np.cos(np.pi * np.arange(count) / (count - 1))) / 2.0
    back: Array = np.linalg.inv(_monomials(2.0 * nodes - 1.0, count)).astype(np.float64)
    powers = np.arange(1, count)
    slope = np.zeros((count, count))
    slope[:, 1:] = 2.0 * powers * _monomials(2.0 * nodes - 1.0, count)[:, :-1]
    k = np.arange(1, count + 1)
    area = ((2.0 * nodes[:, None] - 1.0) ** k - (-1.0) ** k) / (2.0 * k)
    derivative: Array = slope @ back
    integral: Array = area @ back
    return Spectral(nodes, derivative, integral, back)


@dataclass(frozen=True, eq=False)
class Panels:
    """Panels of N marches in the order they are marched. start, length: (P, N) m, lengths negative upstream; segment: of
    the duct, (P, N)."""

    start: Array
    length: Array
    segment: Codes

    @property
    def count(self) -> int:
        """P."""
        return int(self.start.shape[0])

    def take(self, index: Codes) -> Panels:
        """The panels of the chosen points."""
        return Panels(self.start[:, index], self.length[:, index], self.segment[:, index])

    def places(self, fractions: Array) -> Array:
        """x at the fractions (s,) of every panel, (P, s, N)."""
        return self.start[:, None] + fractions[:, None] * self.length[:, None]


def allot(edges: Array, grades: Array, begin: Array, end: Array, count: int) -> Panels:
    """`count` panels from begin to end (N,), m, that never reach across a grade (G + 1, N); end may lie upstream.

    grades: the edges (K + 1, N) of the segments and the places between them where the duct bends. Every stretch between grades on the
    way gets a panel, the others go where panels are longest. A march of no length gets panels of none.
    """
    panels = _over(grades, begin, end, count)
    middle = panels.start + 0.5 * panels.length
    return replace(panels, segment=(middle[:, None] > edges[None, 1:-1]).sum(1))


def _over(edges: Array, begin: Array, end: Array, count: int) -> Panels:
    low, high = np.minimum(begin, end), np.maximum(begin, end)
    left, right = np.clip(edges[:-1], low, high), np.clip(edges[1:], low, high)
    size = right - left
    number = (size > 0.0).astype(np.int64)
    columns = np.arange(low.size)
    nothing = ~number.any(0)
    at_begin = np.clip((edges[1:-1] <= low).sum(0), 0, size.shape[0] - 1)
    number[at_begin[nothing], columns[nothing]] = 1
    for _ in range(count - 1):
        short = number.sum(0) < count
        if not short.any():
            break
        longest = (size / np.maximum(number, 1) - (number == 0)).argmax(0)
        number[longest, columns] += short
    last = number.cumsum(0)
    order = np.arange(count)[:, None]
    segment = (order[:, None] >= last[None]).sum(1)
    pick = segment, columns
    share = size[pick] / number[pick]
    first = left[pick] + share * (order - (last - number)[pick])
    if (end < begin).any():
        back = end < begin
        first = np.where(back, (first + share)[::-1], first)
        share = np.where(back, -share[::-1], share)
        segment = np.where(back, segment[::-1], segment)
    return Panels(first, share, segment)


NODES = 6
"""Chebyshev points of a panel of a lattice."""


@dataclass(frozen=True, eq=False)
class Lattice:
    """Chebyshev points on panels of whole ducts, by rows (P n, N): panel after panel, both ends of each."""

    panels: Panels

    @property
    def rule(self) -> Spectral:
        """Points and matrices of a panel."""
        return chebyshev(NODES)

    @property
    def x(self) -> Array:
        """m, (P n, N)."""
        return self.panels.places(self.rule.nodes).reshape(-1, self.panels.start.shape[1])

    @property
    def segment(self) -> Codes:
        """(P n, N)."""
        return np.repeat(self.panels.segment, NODES, axis=0)

    def take(self, index: Codes) -> Lattice:
        """The lattices of the chosen points."""
        return Lattice(self.panels.take(index))

    def by_panel(self, rows: Array) -> Array:
        """(P n, N) as (P, n, N)."""
        return rows.reshape(-1, NODES, rows.shape[1])

    def derivative(self, rows: Array) -> Array:
        """d/dx of rows panel by panel."""
        slope: Array = np.einsum("ij,pjn->pin", self.rule.derivative, self.by_panel(rows)) / self.panels.length[:, None]
        return slope.reshape(rows.shape)

    def running(self, rows: Array) -> Array:
        """Integral of rows from the entry to each."""
        inside = np.einsum("ij,pjn->pin", self.rule.integral, self.by_panel(rows)) * self.panels.length[:, None]
        before = np.cumsum(inside[:, -1], axis=0) - inside[:, -1]
        total: Array = (inside + before[:, None]).reshape(rows.shape)
        return total

    def locate(self, segment: Codes, x: Array) -> tuple[Codes, Array]:
        """Panel and fraction of it for places (n, N) of the duct."""
        start, last = self.panels.start, self.panels.count - 1
        panel = (x[:, None] > start[None, 1:]).sum(1)
        panel = np.minimum(panel + (np.take_along_axis(self.panels.segment, panel, 0) < segment), last)
        panel = np.maximum(panel - (np.take_along_axis(self.panels.segment, panel, 0) > segment), 0)
        at = np.take_along_axis(start, panel, 0)
        return panel, np.clip((x - at) / np.take_along_axis(self.panels.length, panel, 0), 0.0, 1.0)

    def interpolated(self, rows: Array, panel: Codes, fraction: Array) -> Array:
        """Rows between the points, at (panel, fraction), each (n, N)."""
        coefficients = np.einsum("ij,pjn->ipn", self.rule.coefficients, self.by_panel(rows))
        t, value = 2.0 * fraction - 1.0, np.zeros(fraction.shape)
        for c in coefficients[::-1]:
            value = value * t + np.take_along_axis(c, panel, 0)
        return value


def lattice(edges: Array, grades: Array, count: int) -> Lattice:
    """`count` panels on ducts of these edges and grades (see `allot`), at least one between two grades."""
    return Lattice(allot(edges, grades, edges[0], edges[-1], max(count, grades.shape[0] - 1)))
