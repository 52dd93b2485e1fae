"""Every input and output of the model, declared once as plain data.

The case schema, its messages, the form on the screen, the tables, JSON, CSV and the documents are made from these
declarations; nothing else states a unit, a bound, a default or a meaning. Nothing heavy is imported here.
"""

from __future__ import annotations

import re
from dataclasses import replace
from functools import lru_cache

from cycle.declarations import Group, Input, Member, Output
from cycle.inputs import GROUPS, INPUTS

__all__ = [
    "GROUP", "GROUPS", "HEADLINE", "INPUT", "INPUTS", "MODES", "OUTPUT", "OUTPUTS", "RESTORES", "SECTIONS", "STATUSES", "TABLES", "Group",
    "Input", "Member", "Output", "cell", "cell_key", "input_of", "split_cell",
]  # fmt: skip

_SUTHERLAND = "Sutherland's law for air, U.S. Standard Atmosphere 1976, eq. 51"

OUTPUTS: tuple[Output, ...] = (
    Output("mach", "M", "Mach number", "Speed over the sound speed of the gas model.", equation="u / a"),
    Output("pressure", "p", "pressure", "Static pressure.", "pressure"),
    Output("temperature", "T", "temperature", "Static temperature.", "temperature"),
    Output("density", "rho", "density", "Static density.", "density", equation="p W / (Ru T)"),
    Output("velocity", "u", "velocity", "Axial speed before the divergence factor.", "speed"),
    Output("sound_speed", "a", "sound speed", "Of the gas model: equilibrium or frozen.", "speed", equation="sqrt(gamma_s p / rho)"),
    Output("total_pressure", "pt", "total pressure", "Pressure of the isentropic rest of the gas model.", "pressure",
           equation="p at (ht, s)"),
    Output("total_temperature", "Tt", "total temperature", "Temperature of the isentropic rest of the gas model.", "temperature",
           equation="T at (ht, s)"),
    Output("enthalpy", "h", "enthalpy", "Elements in their reference state at 298.15 K; cp T at constant gamma.", "specific energy"),
    Output("total_enthalpy", "ht", "total enthalpy", "Enthalpy and kinetic energy.", "specific energy", equation="h + u^2 / 2"),
    Output("entropy", "s", "entropy", "Absolute at 1 bar; about 298.15 K and 1 bar at constant gamma.", "specific heat"),
    Output("area", "A", "flow area", "Area of the stream.", "area", equation="m / (rho u)"),
    Output("area_ratio", "A/A0", "area over capture", "Area over that of station 0 (of the entry, for a rig).", equation="A / A0"),
    Output("mass_flow", "m", "mass flow", "Mass flow of the stream.", "mass flow"),
    Output("stream_thrust", "F", "stream thrust", "Momentum and pressure force.", "force", equation="m u + p A"),
    Output("thrust_potential", "Phi", "thrust potential", "Thrust if the stream expanded from here isentropically to ambient pressure.",
           "force", equation="m u_e - m0 u0", source="Curran and Craig (1973); Riggins (1997)"),
    Output("dynamic_pressure", "q", "dynamic pressure", "Half the density times the square of the speed.", "pressure",
           equation="rho u^2 / 2"),
    Output("unit_reynolds_number", "Re/l", "unit Reynolds number", "Per length, viscosity of air.", "per length",
           equation="rho u / mu", source=_SUTHERLAND),
    Output("gamma_frozen", "gamma", "frozen gamma", "Ratio of frozen specific heats.", equation="cp,f / (cp,f - R)"),
    Output("isentropic_exponent", "gamma_s", "isentropic exponent", "(d ln p / d ln rho) at constant entropy of the model."),
    Output("specific_heat", "cp", "specific heat", "At constant pressure, of the gas model (reacting where it is equilibrium).",
           "specific heat"),
    Output("molar_mass", "W", "molar mass", "Mean molar mass of the stream.", "molar mass"),
    Output("critical_pressure", "p*", "critical pressure", "Pressure where this stream would be sonic, isentropically.", "pressure"),
    Output("critical_temperature", "T*", "critical temperature", "Temperature where this stream would be sonic, isentropically.",
           "temperature"),
    Output("critical_area_ratio", "A/A*", "area over critical", "Area over that of the sonic state of this stream.",
           equation="rho* a* / (rho u)"),
    Output("altitude", "z", "altitude", "Geometric altitude in the standard atmosphere.", "length", "performance",
           source="NOAA-S/T 76-1562"),
    Output("thrust", "F", "uninstalled thrust", "Positive forward; fuel momentum is internal.", "force", "performance",
           "(m u + p A)10 - (m u + p A)0 - p0 (A10 - A0)"),
    Output("installed_thrust", "Fi", "installed thrust", "Uninstalled thrust less additive and spill drag.", "force", "performance",
           "F - D_additive - D_spill"),
    Output("specific_thrust", "F/m0", "specific thrust", "Uninstalled thrust per captured air flow.", "specific thrust",
           "performance", "F / m0"),
    Output("specific_impulse", "Isp", "specific impulse", "Uninstalled thrust per weight flow of fuel, g0 = 9.80665 m/s2.", "time",
           "performance", "F / (g0 mf)"),
    Output("thrust_specific_fuel_consumption", "TSFC", "fuel consumption", "Fuel flow per uninstalled thrust.", "fuel consumption",
           "performance", "mf / F"),
    Output("fuel_flow", "mf", "fuel flow", "Mass flow of fuel.", "mass flow", "performance", "f m0"),
    Output("fuel_air_ratio", "f", "fuel-air ratio", "Fuel flow per captured air flow.", "ratio", "performance", "mf / m0"),
    Output("equivalence_ratio", "phi", "equivalence ratio", "Fuel-air ratio over the stoichiometric one.", "ratio", "performance",
           "f / f_st"),
    Output("stoichiometric_ratio", "f_st", "stoichiometric ratio", "Fuel-air ratio that the oxygen of the air burns completely.", "ratio",
           "performance"),
    Output("heating_value", "LHV", "lower heating value", "298.15 K, water as vapour, fuel as stored.", "specific energy", "performance"),
    Output("overall_efficiency", "eta_o", "overall efficiency", "Thrust power over the fuel's heating value.", "ratio", "performance",
           "F u0 / (mf LHV)"),
    Output("thermal_efficiency", "eta_th", "thermal efficiency", "Gain of kinetic energy over the fuel's heating value.", "ratio",
           "performance", "(m10 u10^2 - m0 u0^2) / (2 mf LHV)"),
    Output("propulsive_efficiency", "eta_p", "propulsive efficiency", "Overall over thermal; can exceed 1 off ambient pressure.", "ratio",
           "performance", "eta_o / eta_th"),
    Output("thrust_coefficient", "CF", "thrust coefficient", "Uninstalled thrust over dynamic pressure and capture area.", "ratio",
           "performance", "F / (q0 Ac)"),
    Output("captured_mass_fraction", "A0/Ac", "captured fraction", "Captured air over what the capture area would take.", "ratio",
           "performance", "A0 / Ac"),
    Output("total_temperature_rise_efficiency", "eta_dT", "temperature-rise efficiency",
           "Total-temperature rise of the burner over that of complete burning of the same fuel.", "ratio", "performance",
           "(Tt4 - Tt3) / (Tt4,complete - Tt3)"),
    Output("nozzle_thrust_coefficient", "Cfg", "nozzle gross thrust coefficient",
           "Gross thrust of the exit over that of isentropic expansion of the burner exit to ambient pressure.", "ratio", "performance",
           "(m u + (p - p0) A)10 / (m10 u_e4)"),
    Output("stream_thrust_gain", "dF", "stream-thrust gain", "Stream thrust at the end of the rig less that at its entry.", "force",
           "performance", "F_end - F_entry"),
    Output("throat_area", "A5", "throat area", "Area of the choked throat.", "area", "performance", "m / (rho* a*)"),
    Output("burner_exit_over_throat", "A4/A5", "burner exit over throat", "Burner exit area over the throat's.", "ratio", "performance",
           "A4 / A5"),
)  # fmt: skip

HEADLINE: dict[str, tuple[str, ...]] = {
    "flight": ("thrust", "specific_impulse", "specific_thrust", "overall_efficiency"),
    "entry": ("stream_thrust_gain", "fuel_flow", "equivalence_ratio", "total_temperature_rise_efficiency"),
}
"""Where a case starts -> the figures of the performance by which it is judged, the first one first."""

STATUSES: dict[str, str] = {
    "solved": "every process has a solution",
    "over-compressed": "the compression asked for takes more than the stream's kinetic energy",
    "under-compressed": "the end of the compression asked for lies below the entering state or beyond its sonic limit",
    "choked": "the heat asked for exceeds what the burner passes at Mach 1",
    "no-fuel": "no fuel flow reaches the total temperature asked for",
    "stalled": "the burner stream comes to rest: friction or pressure leaves no momentum",
    "throat-mismatch": "the stream and the nozzle throat do not fit: subsonic without a throat, or supersonic with one",
    "under-expanded": "the exit asked for lies upstream of the nozzle's own entry or throat, or is too small for its losses",
    "back-pressured": "the ambient pressure drives the shock in the nozzle out of its entry or throat",
    "mode-refused": "the mode asked for does not fit the stream",
    "unstarted": "the inlet does not stay started: the burner asks for more impulse or isolator length than it is given",
    "no-mode": "no mode of the duct is consistent: the attached flow separates or chokes, no shock train and no thermal throat balances it",
    "detached": "the turn asked for is larger than an attached shock gives at this Mach number",
    "over-turned": "the isentropic ramp turns the stream past Mach 1",
    "waves-merge": "the waves of two ramps meet inside the captured stream",
    "lip-blocked": "the lip lies on or under the ramp",
    "over-contracted": "the inlet throat is smaller than the stream passes at Mach 1",
    "no-normal-shock": "the stream ahead of the terminal shock is not supersonic",
    "throat-too-large": "the choked throat passes more than the stream: no shock stands ahead of the burner",
    "area-step": "the duct's area at its entry is not that of the stream at station 2",
    "no-altitude": "no altitude of the standard atmosphere gives the dynamic pressure asked for at this speed",
    "overcooled": "the walls take more heat than the stream has to give",
    "out-of-range": "a state left the range of the data (150 to 6000 K; at constant gamma above 0 K)",
    "not-converged": "an iteration ended without an answer: a defect of the program, please report it",
}
"""Closed list of the statuses of a point, with the words for each."""

RESTORES: dict[str, str] = {
    "over-compressed": "compress less or fly faster",
    "under-compressed": "compress more",
    "choked": "add less heat, compress less, or let the burner open",
    "no-fuel": "ask for a temperature between that of the entering stream and that of complete burning",
    "stalled": "less friction",
    "throat-mismatch": "nozzle.throat = sized for a subsonic burner, none for a supersonic one",
    "under-expanded": "a larger exit area or a lower exit pressure",
    "back-pressured": "a smaller exit, more compression or heat, or a lower ambient pressure",
    "mode-refused": "engine.mode = auto, or a supersonic burner entry",
    "unstarted": "less heat, heat further downstream, a duct that opens more, or a longer isolator",
    "no-mode": "less or more heat",
    "detached": "a smaller turn or a faster flight",
    "over-turned": "less turning or a faster flight",
    "waves-merge": "longer ramps, or a flight nearer the design Mach number",
    "lip-blocked": "a higher lip or less turning",
    "over-contracted": "less internal contraction, less turning or a faster flight",
    "no-normal-shock": "less compression ahead of the shock, or no terminal shock",
    "throat-too-large": "a smaller throat or more heat",
    "area-step": "area_ratio = 1 in the first row, or the area of the inlet throat",
    "no-altitude": "a dynamic pressure that this speed has between 0 and 86 km",
    "overcooled": "less wall heat or more fuel",
    "out-of-range": "less heat, less compression or a warmer stream",
    "not-converged": "a slightly different input",
}
"""What gives a point of each status its solution back."""

MODES: dict[str, str] = {
    "scramjet": "supersonic through the burner, no shock train",
    "scramjet-shock-train": "an oblique shock train ahead of a burner that stays supersonic",
    "ramjet-thermal-throat": "subsonic burner, choked by its heat",
    "ramjet-supercritical": "subsonic burner, a normal shock in the diffuser ahead of it",
    "ramjet-critical": "subsonic burner, the throat just passes its flow",
    "ramjet-subcritical": "subsonic burner, the throat passes less than the inlet takes: air is spilled",
    "rig": "direct-connect rig, no flight thrust",
    "none": "not found: the walk has no solution",
}
"""Closed list of the engine modes that are found."""

CAUSES: dict[str, str] = {
    "separation": "separation",
    "choking": "thermal choking",
    "impulse": "impulse at burner entry",
    "isolator-length": "isolator length",
    "no-mode": "no consistent mode",
    "out-of-range": "range of the gas data",
}
"""What sets the heat at which a mode of a duct ends, with the words for each; another one is a status."""

INPUT = {i.key: i for i in INPUTS}
GROUP = {g.name: g for g in GROUPS}
OUTPUT = {o.key: o for o in OUTPUTS}
SECTIONS = tuple(dict.fromkeys(i.section for i in INPUTS))
"""Tables of a case file that hold inputs, sub-tables as "table.sub-table"."""
TABLES = tuple(section for section in SECTIONS if "." not in section)

_CELL = re.compile(r"(.+)\.([1-9][0-9]{0,3})\.([^.]+)")


def cell_key(table: str, row: int, column: str) -> str:
    """Key of one cell. Parameters: table, key of an input of kind "rows"; row, counted from 1; column, its key."""
    return f"{table}.{row}.{column}"


def split_cell(key: str) -> tuple[Input, int, Input] | None:
    """Table, row (from 1) and column that the key of a cell means, None where it is no such key."""
    match = _CELL.fullmatch(key)
    table = INPUT.get(match[1]) if match else None
    if match is None or table is None:
        return None
    column = next((c for c in table.columns if c.key == match[3]), None)
    return None if column is None else (table, int(match[2]), column)


@lru_cache(maxsize=4096)
def cell(table: str, row: int, column: str) -> Input:
    """The declaration of one cell, with a key and a label of its own. Parameters: as for `cell_key`. Errors: KeyError."""
    declared = {c.key: c for c in INPUT[table].columns}[column]
    label = f"{INPUT[table].label} {row}, {declared.label}"
    return replace(declared, key=cell_key(table, row, column), label=label, when=INPUT[table].when)


def input_of(key: str) -> Input | None:
    """The declaration of an input or of a cell of one, None for another key. Parameters: key."""
    found = split_cell(key)
    return INPUT.get(key) if found is None else cell(found[0].key, found[1], found[2].key)
