"""How much heat a solution takes: where a simple burner chokes, and where the modes of a duct end."""

from __future__ import annotations

from collections.abc import Mapping

import numpy as np

from cycle import limits
from cycle.account import spread
from cycle.arrays import Array, Codes
from cycle.flow import roots
from cycle.flowpath import assembly, choking, combustor, duct_limits, isolator
from cycle.flowpath.setting import Setting
from cycle.flowpath.stream import STATUS_NAMES, Stream
from cycle.quantities import INPUT
from cycle.walk import March, Record

_SEARCH = {"combustor.equivalence_ratio": 3.0, "combustor.fuel_air_ratio": 0.5, "combustor.exit_total_temperature": 5000.0}
"""Where the search for the largest heat ends, SI."""


def ends_of_modes(walked: March) -> dict[str, tuple[Array, Codes]]:
    """The heat input, SI, at which each mode of the duct ends, (N,), and what sets it, codes of `duct_limits.CAUSES` (N,). NaN where it is
    not known, as where the heat is no fuel ratio; {} where no point reached the duct."""
    record, size = walked.reached("2") or walked.reached("3"), walked.setting.size
    if record is None or not record.index.size:
        return {}
    key, setting = limits.heat_key(walked.setting), walked.setting.take(record.index)
    unit = _unit(setting)
    if unit is None or not (record.stream.mach > 1.0).any():
        return dict.fromkeys(duct_limits.ENDS, (np.full(size, np.nan), np.zeros(size, np.int64)))
    found = assembly.heat_limits(_entering(record, setting), setting, _SEARCH[key] * unit)
    causes = {name: np.zeros(size, np.int64) for name in found}
    for name, end in found.items():
        causes[name][record.index] = end.cause
    return {name: (spread(walked, record.index, end.ratio / unit), causes[name]) for name, end in found.items()}


def _unit(setting: Setting) -> Array | None:
    """Fuel-air ratio of one unit of the heat input, (N,); None where that is no fuel ratio."""
    units = {"equivalence_ratio": setting.stoichiometric_ratio, "fuel_air_ratio": np.ones(setting.size)}
    return units.get(setting.choices["combustor.heat"])


def _entering(record: Record, setting: Setting) -> Stream:
    """The stream that a duct takes in: that of station 2 with the gas that burns, behind the isolator's friction."""
    entering = record.stream if setting.constant_gamma else combustor.burner_gas(record.stream, setting)
    worn = isolator.worn(entering, setting)
    return entering if worn is None else worn.stream


def starts_again(walked: March) -> float:
    """The heat, SI, above that of one point without a mode from which its duct has one again, to about 1e-4; NaN where none does."""
    record, key = walked.reached("2") or walked.reached("3"), limits.heat_key(walked.setting)
    unit = _unit(walked.setting)
    if record is None or unit is None:
        return np.nan
    same = np.zeros(_STEPS, np.int64)
    stream, setting = _entering(record, walked.setting).take(same), walked.setting.take(same)
    low, high = float(walked.setting[key][0]), 2.0 * float(walked.setting[key][0])
    for _ in range(3):
        tried = low + (high - low) * np.arange(1, _STEPS + 1) / _STEPS
        runs = np.flatnonzero(assembly.flow_of(stream, setting, tried * unit[0]).status == 0)
        if not runs.size:
            return np.nan
        low, high = (tried[runs[0] - 1] if runs[0] else low), float(tried[runs[0]])
    return high


_STEPS = 40


def words(walked: March, ends: Mapping[str, float], causes: Mapping[str, str]) -> str:
    """The heat of a duct without a solution against that at which it has one, and what sets the limit. One point."""
    label, _ = limits.heat_words(walked.setting)
    most, cause = ends["unstart"], causes["unstart"]
    if not most > 0.0:
        return "no heat below the search's end starts it" if most == 0.0 else "the heat at which it starts is not known"
    here = float(walked.setting[limits.heat_key(walked.setting)][0])
    why = {"impulse": "impulse at burner entry", "isolator-length": "the shock train is longer than the isolator"}.get(cause, cause)
    again = starts_again(walked) if STATUS_NAMES[walked.status[0]] == "no-mode" else np.nan
    if np.isfinite(again):
        return f"{label} {here:.4g}, at most {most:.4g} or at least {again:.4g}: no mode is consistent between"
    return f"{label} {here:.4g}, at most {most:.4g} ({why})" if here > most else f"{label} {here:.4g}, at least {most:.4g}"


_SCAN = 25
_JUST = 1e-7
"""How far below the choking ratio the exit total temperature is read, over it."""


def largest_before_choking(walked: March) -> float:
    """Largest heat input of one point before the burner chokes.

    walked: a march of one point that reached the burner. NaN where nothing chokes below the end of the search. The
    room left before choking is scanned over the fuel ratio in one batch; its first change of sign is then a root. An exit
    total temperature is that of the root.
    """
    entry, key = walked.stations()["3"], limits.heat_key(walked.setting)
    before, bound = combustor.burner_gas(entry.stream, walked.setting), INPUT[key].upper
    assert bound is not None
    unit = _unit(walked.setting)
    ceiling = _SEARCH["combustor.fuel_air_ratio"] if unit is None else min(bound, _SEARCH[key]) * float(unit[0])

    def many(values: Array) -> tuple[Stream, Setting]:
        points = np.zeros(values.size, np.int64)
        return before.take(points), walked.setting.take(points)

    def room(values: Array) -> Array:
        return choking.choking_room(*many(values), values)

    tried = np.linspace(0.0, ceiling, _SCAN)
    left = room(tried)
    choked = np.flatnonzero(left < 0.0)
    if not choked.size or choked[0] == 0 or not left[choked[0] - 1] >= 0.0:
        return np.nan
    low, high = tried[choked[0] - 1], tried[choked[0]]
    root = roots.bracketed(room, np.array([low]), np.array([high]), 1e-9)
    if unit is not None:
        return float((root / unit)[0])
    most = float(combustor.exit_total_temperature(*many(root), root * (1.0 - _JUST))[0])
    return most if most <= _SEARCH[key] else np.nan
