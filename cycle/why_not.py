"""Why a figure or an account of a walk has no value, in words."""

from __future__ import annotations

import numpy as np

from cycle import account
from cycle.arrays import Array
from cycle.gas.species import COLDEST, HIGHEST
from cycle.gas.state import OUT_OF_RANGE, State
from cycle.walk import March, Record


def no_figure(march: March, key: str, fuel_flow: Array) -> str:
    """Why a figure of the performance has no value at a solved point. Parameters: march; key of the figure; fuel_flow, kg/s (N,)."""
    choices = march.setting.choices
    if march.chain[0] == "entry" and key != "stream_thrust_gain":
        return _RIG
    if key == "total_temperature_rise_efficiency":
        return _PAIRS if not account.one_pair(march) else "complete burning would not raise the total temperature"
    if key in ("equivalence_ratio", "stoichiometric_ratio") and choices["fuel.identity"] == "heating_value":
        return "the fuel has no formula"
    return _ALWAYS.get(key) or ("no fuel" if np.any(fuel_flow == 0.0) else _RANGE)


def no_station_figure(march: March, record: Record, key: str, state: State | None) -> str:
    """Why a figure of a station that was reached has no value. Parameters: march; record of the station; key of the figure; state, of rest
    or of Mach 1, that it is read from at the points of the record, None where it is read from neither."""
    if key == "thrust_potential":
        return _RIG if march.chain[0] == "entry" else _RANGE
    if state is None:
        return _RANGE
    name = f"{'total' if key.startswith('total') else 'sonic'} temperature"
    at = int(np.flatnonzero(~state.good)[0]) if not state.good.all() else 0
    warmer = _warmest_enthalpy(record)[at] < record.stream.total_enthalpy[at]
    if state.temperature[at] > HIGHEST or (np.isnan(state.temperature[at]) and warmer):
        return f"above the data: {name} over {HIGHEST:.0f} K"
    if state.range[at] == OUT_OF_RANGE:
        return f"below the data: {name} under {COLDEST:.0f} K"
    return f"the iteration for the {name} ended without an answer"


def _warmest_enthalpy(record: Record) -> Array:
    """Enthalpy of each stream at its pressure and the highest temperature of the data, J/kg."""
    stream = record.stream
    return stream.gas.at("tp", np.full(stream.velocity.shape, HIGHEST), stream.state.pressure).enthalpy


def no_rows(march: March, key: str) -> str:
    """Why an account has no rows. Parameters: march; key, "losses" or "exergy"."""
    if not march.solved.size:
        return "no solution"
    if march.chain[0] == "entry":
        return _RIG
    if not account.one_pair(march):
        return _PAIRS
    return "needs fuel.supply_pressure, above the burner's, and the fuel's standard entropy" if key == "exergy" else _RANGE


_RIG = "a rig has no flight thrust"
_PAIRS = "several constant-gamma pairs have no common datum"
_RANGE = "a state it needs is out of range"
_ALWAYS = {
    "installed_thrust": "additive and spill drag need the inlet's lip",
    "altitude": "pressure and temperature are given, not a place in the standard atmosphere",
    "throat_area": "the engine has no throat",
    "burner_exit_over_throat": "the engine has no throat",
    "stream_thrust_gain": "for a rig only",
}
"""Figures that lack a value for one reason only, in a flight with fuel."""
