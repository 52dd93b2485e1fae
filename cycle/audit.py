"""The audit: conservation and the second law, recomputed from the figures a walk emits.

Nothing of the solver is used: densities, enthalpies and entropies are evaluated afresh, species by species, from the
emitted temperature, pressure, composition, speed and area. A residual is relative to the size of what is balanced. Enthalpy and
entropy count from a datum and may vanish: p/rho, the flow work, and R stand beside them, which do not.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass

import numpy as np

from cycle.arrays import Array
from cycle.constants import GAS_CONSTANT, REFERENCE_PRESSURE, REFERENCE_TEMPERATURE, STANDARD_GRAVITY
from cycle.gas.species import COLDEST, LOWEST, MIDDLE, SpeciesTable

LIMIT = 1e-9
"""Largest relative residual that passes."""

Figures = Mapping[str, Array]


@dataclass(frozen=True, slots=True)
class Emitted:
    """What a walk emits, for the audit: per station the figures by key, `x` mole fractions (S, N) and, at constant
    gamma, `cp` and `R`; all of the same N points.

    table: the species of the rows of x, None at constant gamma.
    """

    stations: Mapping[str, Figures]
    fractions: Mapping[str, Array]
    table: SpeciesTable | None
    processes: Sequence[Crossing]
    performance: Figures


@dataclass(frozen=True, slots=True)
class Crossing:
    """A process between two emitted stations and what crosses its surface; arrays (N,). `fuel_atoms` mol/kg by element.

    change: (cp before, cp after) where the constant-gamma pair changes at the start of the process.
    """

    name: str
    start: str
    end: str
    mass_added: Array
    energy_added: Array
    impulse_added: Array
    fuel_entropy: Array
    wall_heat: Array
    fuel_atoms: Mapping[str, float]
    balances_momentum: bool
    adiabatic: bool
    cp_start: Array | None = None


@dataclass(frozen=True, slots=True)
class Residual:
    """One law at one place: worst relative residual, (N,)."""

    law: str
    where: str
    value: Array


def _species_sums(table: SpeciesTable, T: Array, x: Array) -> tuple[Array, Array]:
    """h J/mol and s J/(mol K) at 1 bar of the mixture, summed species by species (mixing entropy not included)."""
    t = T / 1e3
    polynomial = np.stack([np.ones_like(t), 1.0 / t, np.log(t), t, t**2, t**3, t**4])
    h, s = np.zeros_like(T), np.zeros_like(T)
    for j in range(x.shape[0]):
        for sums, row in ((h, table.h[j]), (s, table.s[j])):
            low, high = row[:7] @ polynomial, row[7:14] @ polynomial
            cold = row[14:17] @ polynomial[:3]
            sums += x[j] * np.where(T >= MIDDLE, high, np.where(T >= LOWEST, low, cold))
    return h * GAS_CONSTANT * T, s * GAS_CONSTANT


@dataclass(frozen=True, slots=True)
class _Fresh:
    """Density, specific enthalpy and entropy of a station, evaluated afresh."""

    density: Array
    enthalpy: Array
    entropy: Array


def _fresh(emitted: Emitted, name: str, cp: Array | None = None) -> _Fresh:
    f = emitted.stations[name]
    T, p = f["temperature"], f["pressure"]
    if emitted.table is None:
        R, c = f["gas_constant"], f["specific_heat"] if cp is None else cp
        return _Fresh(p / (R * T), c * T, c * np.log(T / REFERENCE_TEMPERATURE) - R * np.log(p / REFERENCE_PRESSURE))
    x = emitted.fractions[name]
    W = emitted.table.molar_mass @ x
    h, s0 = _species_sums(emitted.table, np.maximum(T, COLDEST), x)
    mixing = np.where(x > 0.0, x * np.log(np.maximum(x, 1e-300)), 0.0).sum(0)
    s = s0 - GAS_CONSTANT * (mixing + np.log(p / REFERENCE_PRESSURE))
    return _Fresh(p * W / (GAS_CONSTANT * T), h / W, s / W)


def _relative(value: Array, *parts: Array) -> Array:
    size = np.zeros_like(value)
    for part in parts:
        size = size + np.abs(part)
    return np.abs(value) / np.maximum(size, 1e-300)


def check(emitted: Emitted) -> tuple[Residual, ...]:
    """All residuals of the emitted points, station laws first, then processes, then the performance."""
    fresh = {name: _fresh(emitted, name) for name in emitted.stations}
    rows: list[Residual] = []
    for name in emitted.stations:
        rows += _station(emitted.stations[name], fresh[name], name)
        if emitted.table is not None:
            rows.append(Residual("mole fractions", f"station {name}", np.abs(emitted.fractions[name].sum(0) - 1.0)))
    for crossing in emitted.processes:
        rows += _process(emitted, fresh, crossing)
    return (*rows, *_thrust(emitted))


def _specific_gas_constant(f: Figures, fresh: _Fresh) -> Array:
    """R = p/(rho T), J/(kg K)."""
    constant: Array = f["pressure"] / (fresh.density * f["temperature"])
    return constant


def _station(f: Figures, fresh: _Fresh, name: str) -> list[Residual]:
    """Each emitted figure of a station against what the others make it."""
    where = f"station {name}"
    u, m, A, p = f["velocity"], f["mass_flow"], f["area"], f["pressure"]
    kinetic = 0.5 * u**2
    thrust = f["axial_factor"] * m * u + p * A
    q = fresh.density * kinetic
    energy = kinetic + np.abs(fresh.enthalpy) + p / fresh.density
    pairs = (
        ("mass", fresh.density * u * A - m, m),
        ("density", f["density"] - fresh.density, fresh.density),
        ("molar mass", f["molar_mass"] * p - fresh.density * GAS_CONSTANT * f["temperature"], f["molar_mass"] * p),
        ("enthalpy", f["enthalpy"] - fresh.enthalpy, energy),
        ("entropy", f["entropy"] - fresh.entropy, np.abs(fresh.entropy) + _specific_gas_constant(f, fresh)),
        ("total enthalpy", f["total_enthalpy"] - fresh.enthalpy - kinetic, energy),
        ("Mach number", f["mach"] * f["sound_speed"] - u, u),
        ("sound speed", f["sound_speed"] ** 2 - f["isentropic_exponent"] * p / fresh.density, f["sound_speed"] ** 2),
        ("stream thrust", f["stream_thrust"] - thrust, thrust),
        ("dynamic pressure", f["dynamic_pressure"] - q, q),
    )
    return [Residual(law, where, _relative(value, size)) for law, value, size in pairs]


def _process(emitted: Emitted, fresh: Mapping[str, _Fresh], c: Crossing) -> list[Residual]:
    a, b = emitted.stations[c.start], emitted.stations[c.end]
    first = fresh[c.start] if c.cp_start is None else _fresh(emitted, c.start, c.cp_start)
    last = fresh[c.end]
    where = f"{c.name} {c.start} to {c.end}"
    m1, m2 = first.density * a["velocity"] * a["area"], last.density * b["velocity"] * b["area"]
    e1, e2 = m1 * (first.enthalpy + 0.5 * a["velocity"] ** 2), m2 * (last.enthalpy + 0.5 * b["velocity"] ** 2)
    kinetic, work = 0.5 * m2 * b["velocity"] ** 2, m2 * b["pressure"] / last.density
    rows = [
        Residual("mass", where, _relative(m2 - m1 - c.mass_added, m2)),
        Residual("energy", where, _relative(e2 - e1 - c.energy_added, e1, e2, kinetic, c.energy_added, work)),
    ]
    if c.balances_momentum:
        f1, f2 = m1 * a["velocity"] + a["pressure"] * a["area"], m2 * b["velocity"] + b["pressure"] * b["area"]
        rows.append(Residual("momentum", where, _relative(f2 - f1 - c.impulse_added, f1, f2)))
    if emitted.table is not None:
        rows.append(Residual("elements", where, _elements(emitted, c, m1, m2)))
    made = m2 * last.entropy - m1 * first.entropy - c.mass_added * c.fuel_entropy
    made = made + c.wall_heat / np.minimum(a["temperature"], b["temperature"])
    if emitted.table is not None or c.adiabatic:
        size = np.abs(m2 * last.entropy) + np.abs(m1 * first.entropy) + m2 * _specific_gas_constant(b, last)
        lost = np.where(np.isnan(made), 0.0, np.maximum(-made, 0.0))
        rows.append(Residual("second law", where, _relative(lost, size)))
    return rows


def _elements(emitted: Emitted, c: Crossing, m1: Array, m2: Array) -> Array:
    table = emitted.table
    assert table is not None
    worst = np.zeros_like(m1)
    x1, x2 = emitted.fractions[c.start], emitted.fractions[c.end]
    n1, n2 = m1 / (table.molar_mass @ x1), m2 / (table.molar_mass @ x2)
    everything = n2 * (table.atoms.T @ x2).sum(0)
    for column, element in enumerate(table.elements):
        before = n1 * (table.atoms[:, column] @ x1) + c.mass_added * c.fuel_atoms.get(element, 0.0)
        after = n2 * (table.atoms[:, column] @ x2)
        worst = np.maximum(worst, np.abs(after - before) / everything)
    return worst


def _thrust(emitted: Emitted) -> list[Residual]:
    """Thrust and what follows from it, against the emitted stations 0 and 10."""
    f = emitted.performance
    if "thrust" not in f:
        return []
    free, out = emitted.stations["0"], emitted.stations["10"]
    p0 = free["pressure"]
    end = out["axial_factor"] * out["mass_flow"] * out["velocity"] + out["pressure"] * out["area"]
    start = free["mass_flow"] * free["velocity"] + p0 * free["area"]
    force = end - start - p0 * (out["area"] - free["area"])
    fuel = f["fuel_flow"]
    pairs = [
        ("thrust", f["thrust"] - force, end + start),
        ("specific thrust", f["specific_thrust"] * free["mass_flow"] - f["thrust"], np.abs(f["thrust"]) + 1e-6 * start),
    ]
    rows = [Residual(law, "performance", _relative(value, size)) for law, value, size in pairs]
    impulse = np.where(fuel > 0.0, f["specific_impulse"] * STANDARD_GRAVITY * fuel - f["thrust"], 0.0)
    return [*rows, Residual("specific impulse", "performance", _relative(impulse, np.abs(f["thrust"]) + 1e-6 * start))]
