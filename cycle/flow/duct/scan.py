"""Sonic states all along a duct.

The flow is critical where F touches its minimum F*. Since F* depends on x alone, the throat is found without marching:
d(F* - B)/dx = p* A' - m u* k there (the march's own balance at Mach 1), falling through from + to -.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from cycle.arrays import Array, Codes, Flags
from cycle.flow.duct.layout import Duct, Mixture
from cycle.flow.duct.line import Sonic, sonic
from cycle.flow.duct.panels import NODES, Lattice, lattice
from cycle.gas.state import State

PANELS = 5


@dataclass(frozen=True, eq=False)
class Scan:
    """Sonic states of N ducts on a lattice. segment (P n, N) and mixture: of its rows."""

    grid: Lattice
    segment: Codes
    mixture: Mixture
    sonic: Sonic

    def sonic_at(self, segment: Codes, x: Array) -> tuple[Array, Array]:
        """F* N and u* m/s between the points, each (n, N)."""
        panel, fraction = self.grid.locate(segment, x)
        interpolated = self.grid.interpolated
        return interpolated(self.sonic.impulse, panel, fraction), interpolated(self.sonic.velocity, panel, fraction)

    def near(self, segment: Codes, x: Array) -> State:
        """Sonic states next to places (n, N), flattened: compositions to start from."""
        panel, fraction = self.grid.locate(segment, x)
        node = np.rint(np.arccos(1.0 - 2.0 * fraction) * ((NODES - 1) / np.pi)).astype(np.int64)
        n = x.shape[1]
        return self.sonic.state.take(((panel * NODES + node) * n + np.arange(n)).ravel())

    def take(self, index: Codes | Flags) -> Scan:
        """The scan of the chosen points."""
        index = np.arange(self.segment.shape[1])[index]
        return Scan(self.grid.take(index), self.segment[:, index], self.mixture.take(index), self.sonic.take(index))


def scan_of(duct: Duct, count: int = PANELS) -> Scan:
    """Sonic states of a duct on at least `count` panels, to the third order of a first guess: what is decided by them is refined."""
    grid = lattice(duct.edges, duct.grades, count)
    mixture = duct.mixture(grid.segment, grid.x)
    return Scan(grid, grid.segment, mixture, sonic(mixture, rounds=1))
