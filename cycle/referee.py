"""The referee's report on a walk: its states recomputed by Cantera, and its burner closed by Cantera alone."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from cycle.arrays import Codes
from cycle.gas.equilibrium import EquilibriumGas
from cycle.gas.referee import burner, deviation
from cycle.walk import March

SAMPLE = 3
"""Points of a batch that are recomputed, spread evenly over the solved ones."""

LIMITS = {"temperature": 1e-3, "mole fraction": 1e-7, "sound speed": 1e-5}
"""Deviations above which the report says that the referee disagrees: K, 1, relative."""


@dataclass(frozen=True, slots=True)
class Row:
    """Largest deviations at one place: temperature K, mole_fraction, sound_speed relative; NaN where not compared."""

    where: str
    temperature: float
    mole_fraction: float
    sound_speed: float


@dataclass(frozen=True, slots=True)
class Report:
    """Rows by station and the burner's; agrees where every deviation is within `LIMITS`; words say it in one line."""

    rows: tuple[Row, ...]
    compared: int
    agrees: bool
    words: str


def report(march: March) -> Report:
    """Recompute every station of up to `SAMPLE` solved points; slow, and it imports cantera."""
    if march.setting.constant_gamma:
        return Report((), 0, True, "Cantera check: constant gamma has closed forms, nothing to recompute")
    solved = march.solved
    if not solved.size:
        return Report((), 0, True, "Cantera check: no solved point")
    points = solved[np.unique(np.linspace(0, solved.size - 1, min(SAMPLE, solved.size)).astype(int))]
    rows, compared, left_out = [], 0, 0
    for name, record in march.stations().items():
        stream = record.taken(points).stream
        found = deviation(stream.gas, stream.state, "sp" if name in ("2", "5", "10") else "hp")
        compared, left_out = compared + found.compared, left_out + found.left_out
        value = (found.temperature, found.mole_fraction, found.sound_speed) if found.compared else (np.nan,) * 3
        rows.append(Row(f"station {name}", *value))
    rows += _burner_rows(march, points)
    return Report(tuple(rows), compared, *_judged(rows, compared, left_out))


def _burner_rows(march: March, points: Codes) -> list[Row]:
    """The constant-area burner of the first point, by Cantera from impulse, mass flux and total enthalpy alone."""
    record = march.named("burner")
    if record is None or march.setting.choices["combustor.process"] != "constant-area":
        return []
    stream = record.taken(points[:1]).stream
    if not isinstance(stream.gas, EquilibriumGas):
        return []
    flux = float(stream.flux[0])
    impulse = float(stream.state.pressure[0] + flux * stream.velocity[0])
    T, _, _ = burner(stream.gas, stream.state, 0, impulse, flux, float(stream.total_enthalpy[0]))
    return [Row("burner, closed by the referee", abs(T - float(stream.state.temperature[0])), np.nan, np.nan)]


def _judged(rows: list[Row], compared: int, left_out: int) -> tuple[bool, str]:
    worst = Row(
        "",
        *(
            max((v for r in rows if np.isfinite(v := getattr(r, f))), default=np.nan)
            for f in ("temperature", "mole_fraction", "sound_speed")
        ),
    )
    if not compared:
        return True, f"Cantera check: no state compared ({left_out} outside 200-6000 K or not solved by it)"
    agrees = (
        not worst.temperature > LIMITS["temperature"]
        and not worst.mole_fraction > LIMITS["mole fraction"]
        and not worst.sound_speed > LIMITS["sound speed"]
    )
    verdict = "agrees" if agrees else "DEVIATES"
    note = f"; {left_out} not compared" if left_out else ""
    return agrees, (
        f"Cantera check {verdict}: T within {worst.temperature:.1e} K, mole fractions {worst.mole_fraction:.1e}, "
        f"sound speed {worst.sound_speed:.1e}, {compared} states{note}"
    )
