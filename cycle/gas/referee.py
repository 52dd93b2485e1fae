"""Cantera as referee: the same species data, an independent equilibrium solver, one point at a time.

The phase is generated from the case's species table, so a difference is one of solving and not of data. That the data
file itself is Cantera's is a test of its own (`listed_data`). Only this module needs Cantera; it is imported on use.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import lru_cache
from typing import TYPE_CHECKING, Any

import numpy as np

from cycle.arrays import Array, Codes
from cycle.constants import GAS_CONSTANT, REFERENCE_PRESSURE
from cycle.gas.equilibrium import EquilibriumGas
from cycle.gas.frozen import FrozenGas
from cycle.gas.kernel import kernel_of
from cycle.gas.species import HIGHEST, LOWEST, MIDDLE, SpeciesTable, species_data
from cycle.gas.start import absent
from cycle.gas.state import State

if TYPE_CHECKING:
    from cycle.gas.base import Gas

ATTEMPTS = (("vcs", 1e-12), ("element_potential", 1e-12), ("vcs", 1e-9))
"""Cantera's solvers and relative tolerances, in turn until one succeeds."""

SOUND_STEP = 1e-3
"""Half-width in ln p of the central difference for the equilibrium sound speed; its error is about the square."""

FOREIGN = "U"
"""An element nothing else holds: unburnt fuel is made of it, so that it has its mass and cannot react."""


@dataclass(frozen=True)
class Recomputed:
    """What Cantera finds for N points: temperature K (N,), pressure Pa (N,), mole_fractions (S, N), sound_speed m/s
    (N,); NaN where it found nothing or the point is outside 200-6000 K."""

    temperature: Array
    pressure: Array
    mole_fractions: Array
    sound_speed: Array


@dataclass(frozen=True)
class Deviation:
    """Largest differences over the points compared: temperature K, mole_fraction, sound_speed (relative), and how many
    points were compared in full and how many were not (flagged, below 200 K, or not solved by the referee)."""

    temperature: float
    mole_fraction: float
    sound_speed: float
    compared: int
    left_out: int


def listed_data(species: str) -> tuple[dict[str, float], list[float], list[float]]:
    """Atoms, lower and upper coefficients of a species in Cantera's nasa_gas.yaml or nasa_condensed.yaml; KeyError if in neither."""
    names: dict[str, str] = species_data()["listed_as"]  # type: ignore[assignment]
    listed = _listing()[names.get(species, species)]
    coefficients = [float(c) for c in listed.thermo.coeffs]
    single = coefficients[0] >= HIGHEST
    low = coefficients[8:15]
    return dict(listed.composition), low, low if single else coefficients[1:8]


@lru_cache(maxsize=1)
def _listing() -> dict[str, Any]:
    import cantera as ct

    files = ("nasa_condensed.yaml", "nasa_gas.yaml")
    return {species.name: species for file in files for species in ct.Species.list_from_file(file)}


def _coefficients(h: Array, s: Array, cp: Array) -> list[float]:
    """Seven NASA coefficients of one range from its factors of [1 1/t ln t t t2 t3 t4]."""
    a = cp[[0, 3, 4, 5, 6]] / 1e3 ** np.arange(5)
    return [*a, h[1] * 1e3, s[0] - cp[0] * np.log(1e3)]


@lru_cache(maxsize=16)
def phase(table: SpeciesTable, rows: tuple[int, ...]) -> Any:
    """A Cantera ideal-gas phase with these rows of the table, in their order, at 1 bar reference pressure."""
    import cantera as ct

    members = []
    for i in rows:
        name = table.names[i]
        atoms = {e: n for e, n in zip(table.elements, table.atoms[i], strict=True) if n}
        if table.fuel is not None and i == len(table.names) - 1:
            atoms = {FOREIGN: table.molar_mass[i] * 1e3 / ct.Element(FOREIGN).weight}
        species = ct.Species(name.replace(" ", "_"), atoms)
        high, low = (_coefficients(table.h[i, p], table.s[i, p], table.cp[i, p]) for p in (slice(7, 14), slice(0, 7)))
        species.thermo = ct.NasaPoly2(LOWEST, HIGHEST, REFERENCE_PRESSURE, [MIDDLE, *high, *low])
        members.append(species)
    return ct.Solution(thermo="ideal-gas", species=members)


def _present(gas: FrozenGas | EquilibriumGas, point: int) -> tuple[int, ...]:
    """Rows of the species that can exist at a point: Cantera's solvers stumble over elements of zero amount."""
    table = gas.table
    if isinstance(gas, FrozenGas):
        return tuple(range(len(table.names)))
    gone = absent(kernel_of(table), gas.basis[:, [point]])[:, 0]
    reacting = np.flatnonzero(~(table.in_basis[:, gone] != 0.0).any(1))
    inert = table.reacting + np.flatnonzero(gas.inert[:, point] > 0.0)
    return tuple(int(i) for i in [*reacting, *inert])


def _equilibrate(gas: Any, kind: str) -> bool:
    """Equilibrate in place; false where no attempt succeeds."""
    import cantera as ct

    for solver, tolerance in ATTEMPTS:
        try:
            gas.equilibrate(kind, solver=solver, rtol=tolerance, max_steps=1000)
        except ct.CanteraError:
            continue
        return True
    return False


def _sound_speed(gas: Any) -> float:
    """Equilibrium sound speed at the present state, m/s: central difference along the isentrope."""
    s, p, density = gas.s, gas.P, []
    x, T = gas.X, gas.T
    for sign in (-1.0, 1.0):
        gas.TPX = T, p, x
        gas.SP = s, p * np.exp(sign * SOUND_STEP)
        if not _equilibrate(gas, "SP"):
            return float("nan")
        density.append(gas.density)
    gas.TPX = T, p, x
    exponent = 2.0 * SOUND_STEP / np.log(density[1] / density[0])
    return float(np.sqrt(exponent * p / gas.density))


def recompute(gas: Gas, state: State, kind: str = "hp", points: Codes | None = None) -> Recomputed:
    """Solve the points of a state again with Cantera, from its (h, p) or (s, p), so that T is an outcome.

    gas: the FrozenGas or EquilibriumGas of the state; kind: "hp" or "sp"; points: indices, default all. TypeError for
    other gases.
    """
    if not isinstance(gas, (FrozenGas, EquilibriumGas)):
        raise TypeError("the referee knows frozen and equilibrium gases only")
    chosen = np.arange(gas.size) if points is None else points
    nothing = np.full((len(gas.species) + 3, chosen.size), np.nan)
    found = Recomputed(nothing[0], nothing[1], nothing[3:], nothing[2])
    comparable = state.good & (state.temperature >= LOWEST)
    for to, i in enumerate(chosen):
        if comparable[i]:
            _recompute_one(gas, state, kind, int(i), found, to)
    return found


def _recompute_one(gas: FrozenGas | EquilibriumGas, state: State, kind: str, i: int, found: Recomputed, to: int) -> None:
    reacting = isinstance(gas, EquilibriumGas)
    rows = list(_present(gas, i))
    solver = phase(gas.table, tuple(rows))
    solver.TPX = 1.05 * state.temperature[i], state.pressure[i], state.moles[rows, i]
    setattr(solver, kind.upper(), ({"hp": state.enthalpy, "sp": state.entropy}[kind][i], state.pressure[i]))
    if reacting and not _equilibrate(solver, kind.upper()):
        return
    found.temperature[to], found.pressure[to] = solver.T, solver.P
    found.mole_fractions[:, to] = 0.0
    found.mole_fractions[rows, to] = solver.X
    found.sound_speed[to] = _sound_speed(solver) if reacting else _frozen_sound_speed(solver)


def _frozen_sound_speed(gas: Any) -> float:
    return float(np.sqrt(gas.cp / gas.cv * GAS_CONSTANT * 1e3 / gas.mean_molecular_weight * gas.T))


def deviation(gas: Gas, state: State, kind: str = "hp", points: Codes | None = None) -> Deviation:
    """Largest differences between a state and what `recompute` finds; same parameters."""
    chosen = np.arange(gas.size) if points is None else points
    found, ours = recompute(gas, state, kind, points), state.take(chosen)
    x = ours.moles / ours.moles.sum(0)
    complete = np.isfinite(found.temperature) & np.isfinite(found.sound_speed)
    return Deviation(
        _largest(found.temperature - ours.temperature), _largest(found.mole_fractions - x),
        _largest(found.sound_speed / ours.sound_speed - 1.0), int(complete.sum()), int((~complete).sum()),
    )  # fmt: skip


def _largest(difference: Array) -> float:
    """Largest magnitude of the finite entries, 0 if there is none."""
    return float(np.max(np.abs(difference[np.isfinite(difference)]), initial=0.0))


def burner(
    gas: EquilibriumGas, state: State, point: int, impulse: float, mass_flux: float, total_enthalpy: float
) -> tuple[float, float, float]:
    """T K, p Pa, u m/s of one point of a constant-area burner solved by Cantera alone.

    impulse: F = p + rho u^2, Pa; mass_flux: G, kg/(m2 s); total_enthalpy: ht, J/kg. p is bracketed between the sonic
    point, p* = F / (1 + exponent), and vacuum or F, on the side of M = 1 that `state` is on; each trial pressure is one
    (h, p) equilibrium. NaN where Cantera fails or there is no root.
    """
    from scipy.optimize import brentq

    rows = list(_present(gas, point))
    cantera_gas = phase(gas.table, tuple(rows))
    supersonic = mass_flux / state.density[point] > state.sound_speed[point]
    moles = state.moles[rows, point]

    def excess(p: float) -> float:
        u = (impulse - p) / mass_flux
        cantera_gas.TPX = 1500.0, p, moles
        cantera_gas.HP = total_enthalpy - 0.5 * u * u, p
        return cantera_gas.density * u / mass_flux - 1.0 if _equilibrate(cantera_gas, "HP") else float("nan")

    sonic = impulse / 2.2
    for _ in range(6):
        excess(sonic)
        sonic = impulse / (1.0 + _sound_speed(cantera_gas) ** 2 * cantera_gas.density / sonic)
    far = 0.05 * sonic if supersonic else 0.98 * impulse
    if not excess(far) * excess(sonic) < 0.0:
        return (float("nan"),) * 3
    p = float(brentq(excess, far, sonic, xtol=1e-9, rtol=1e-13))
    excess(p)
    return float(cantera_gas.T), p, (impulse - p) / mass_flux
