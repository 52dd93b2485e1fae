"""Heat to a wall of stated temperature: the flow and the heat it loses, found in turn.

Reynolds analogy as Colburn wrote it, with the driving enthalpies of the reference-enthalpy method (Eckert, Journal of the
Aeronautical Sciences 22 (1955) 585, from memory): q = (Cf/2) rho u Pr^(-2/3) (h_r - h_w), h_r = h + Pr^(1/3) u^2/2. The
friction factor is the case's own, so the reference density of that method cancels. h_w is that of the gas at the wall's
temperature and the local pressure.
"""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from cycle.arrays import Array
from cycle.flow.duct.core import Core, core_at
from cycle.flow.duct.layout import Cooling, Duct, Mixture
from cycle.flow.duct.line import sonic
from cycle.flow.duct.march import Branch
from cycle.flow.duct.panels import STAGES, Lattice, lagrange, lattice
from cycle.gas.state import State

PRANDTL = 0.72
"""Of air and burnt gas; common practice."""

LATTICE_PANELS = 6
_FRICTION_TURNS = 3


def first_loss(duct: Duct) -> Duct:
    """The duct with the heat that a stream at Mach 1 everywhere would lose: near enough to decide whether it chokes."""
    grid = lattice(duct.edges, duct.edges, LATTICE_PANELS)
    mixture = duct.mixture(grid.segment, grid.x)
    at = sonic(mixture)
    rate = flux(mixture, at.state, at.velocity, duct.wall_temperature, mixture.mass_flow * mixture.drag)
    return replace(duct, cooling=Cooling(grid, grid.running(rate)))


def with_loss(duct: Duct, lost: Array) -> Duct:
    """The duct with the heat lost up to the rows of its lattice, W (P n, N)."""
    return replace(duct, cooling=Cooling(lattice(duct.edges, duct.edges, LATTICE_PANELS), lost))


def flux(mixture: Mixture, state: State, velocity: Array, wall: Array, exchange: Array) -> Array:
    """Heat to the wall a length, W/m (n, N). exchange: (Cf/2) rho u P, kg/(s m); wall: its temperature, K (N,)."""
    shape = velocity.shape
    T = np.broadcast_to(wall, shape).ravel()
    at_wall = mixture.gas.at("tp", T, state.pressure).enthalpy.reshape(shape)
    recovery = state.enthalpy.reshape(shape) + PRANDTL ** (1.0 / 3.0) * 0.5 * velocity**2
    rate: Array = exchange * PRANDTL ** (-2.0 / 3.0) * (recovery - at_wall)
    return rate


def of_branch(run: Branch, wall: Array) -> Array:
    """Heat to the wall a length at the nodes of a march, W/m (P, s, N)."""
    m, flow = run.mixture, run.flow
    rows = flux(m, flow.state, flow.u, wall, m.mass_flow * m.drag)
    return rows[1:].reshape(-1, STAGES, rows.shape[1])


def of_core(mixture: Mixture, core: Core, wall: Array) -> Array:
    """Heat to the wall a length of a separated core, W/m (n, N): its own friction drives it."""
    return flux(mixture, core.state, core.velocity, wall, core.friction / core.velocity)


def on_lattice(run: Branch, values: Array, grid: Lattice) -> Array:
    """Values at the nodes of a march (P, s, N) between them, at the rows of a lattice; outside the march the nearest end."""
    x, columns = grid.x, np.arange(values.shape[-1])
    start, length = run.panels.start, run.panels.length
    panel = np.maximum((np.sign(length)[:, None] * (x[None] - start[:, None]) > 0.0).sum(0) - 1, 0)
    size = length[panel, columns]
    part = np.clip((x - start[panel, columns]) / np.where(size == 0.0, 1.0, size), 0.0, 1.0)
    first, rest = run.rules[0], run.rules[-1]
    weights = np.where(panel == 0, lagrange(first.nodes, first.parameter(part)), lagrange(rest.nodes, part))
    found: Array = (weights * np.moveaxis(values[panel, :, columns], -1, 0)).sum(0)
    return found


def lost_heat(duct: Duct, runs: list[Branch], fill: Array, pressure: Array) -> Array:
    """Heat lost from the entry to each row of the duct's lattice, W (P n, N). runs: in the order of x; fill m (N,): the core
    at `pressure` Pa ahead of it."""
    assert duct.cooling is not None
    grid = duct.cooling.grid
    x, total = grid.x, np.zeros(grid.x.shape)
    for run in runs:
        low = np.minimum(run.x[0], run.x[-1])
        total = np.where(x >= low, on_lattice(run, of_branch(run, duct.wall_temperature), grid), total)
    if (fill > 0.0).any():
        mixture = duct.mixture(grid.segment, x)
        taken, state = np.zeros(x.shape), None
        for _ in range(_FRICTION_TURNS):
            core = core_at(duct, mixture, pressure, taken, state)
            taken, state = grid.running(core.friction), core.state
        total = np.where(x < fill, of_core(mixture, core, duct.wall_temperature), total)
    return grid.running(total)
