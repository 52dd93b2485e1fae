"""Units at the edge: text as an engineer types it to SI, and SI to what a screen or table shows.

A short list of allowed units per dimension; text is matched against it and never evaluated. Factors are exact fractions,
so that a value reads back as the nearest double of what was typed.
Sources: BIPM, The International System of Units (2019); NIST Special Publication 811 (2008), appendix B
(international foot, avoirdupois pound, thermochemical calorie, International Table Btu).
"""

from __future__ import annotations

import difflib
import math
import re
from dataclasses import dataclass
from fractions import Fraction

from cycle.errors import UnitError, printable, shown

LONGEST = 64
"""Characters read of a value with a unit."""


@dataclass(frozen=True, slots=True)
class Unit:
    """si = shown * factor + offset, with the shown number in `label`."""

    label: str
    factor: float
    offset: float = 0.0
    exact: Fraction = Fraction(1)
    exact_offset: Fraction = Fraction(0)


def _unit(label: str, factor: str | int | Fraction, offset: str | int | Fraction = 0) -> Unit:
    scale, shift = Fraction(factor), Fraction(offset)
    return Unit(label, float(scale), float(shift), scale, shift)


def _table(**factors: str | int | Fraction) -> dict[str, Unit]:
    return _units(*factors.items())


def _units(*pairs: tuple[str, str | int | Fraction]) -> dict[str, Unit]:
    return {label: _unit(label, factor) for label, factor in pairs}


_FT, _IN, _LBM = Fraction("0.3048"), Fraction("0.0254"), Fraction("0.45359237")
_G0 = Fraction("9.80665")
_LBF = _LBM * _G0
_PSI = _LBF / _IN**2
_PSF = _LBF / _FT**2
_NINE = Fraction(5, 9)
_BTU = Fraction("1055.05585262")
_DEGREE = Fraction(math.pi) / 180

UNITS: dict[str, dict[str, Unit]] = {
    "none": {},
    "ratio": _units(("", 1), ("%", Fraction(1, 100))),
    "pressure": {
        **_table(Pa=1, hPa=100, kPa=1000, MPa=10**6, GPa=10**9, mbar=100, bar=10**5, atm=101325, psi=_PSI, psia=_PSI, psf=_PSF),
        **_units(("lbf/in^2", _PSI), ("lbf/ft^2", _PSF)),
    },
    "temperature": {
        "K": _unit("K", 1),
        "degC": _unit("degC", 1, "273.15"),
        "degF": _unit("degF", _NINE, Fraction("459.67") * _NINE),
        "degR": _unit("degR", _NINE),
    },
    "temperature difference": _table(K=1, degC=1, degF=_NINE, degR=_NINE),
    "length": _table(m=1, mm="0.001", cm="0.01", km=1000, ft=_FT, kft=1000 * _FT, nmi=1852, **{"in": _IN}),
    "area": _units(("m^2", 1), ("mm^2", "1e-6"), ("cm^2", "1e-4"), ("ft^2", _FT**2), ("in^2", _IN**2)),
    "speed": _units(
        ("m/s", 1), ("km/s", 1000), ("km/h", Fraction(5, 18)), ("ft/s", _FT), ("kft/s", 1000 * _FT), ("kt", Fraction(1852, 3600)),
        ("mph", 5280 * _FT / 3600),
    ),
    "specific thrust": _units(("N s/kg", 1), ("m/s", 1), ("kN s/kg", 1000), ("lbf s/lbm", _G0)),
    "mass flow": _units(("kg/s", 1), ("g/s", "0.001"), ("kg/min", Fraction(1, 60)), ("kg/h", Fraction(1, 3600)), ("lbm/s", _LBM)),
    "specific energy": _units(
        ("J/kg", 1), ("kJ/kg", 1000), ("MJ/kg", 10**6), ("J/g", 1000), ("kJ/g", 10**6), ("Btu/lbm", _BTU / _LBM)
    ),
    "specific heat": _units(
        ("J/(kg K)", 1), ("kJ/(kg K)", 1000), ("J/(g K)", 1000), ("Btu/(lbm degR)", _BTU / _LBM / _NINE),
        ("ft lbf/(lbm degR)", _FT * _G0 / _NINE),
    ),
    "molar energy": _units(("J/mol", 1), ("kJ/mol", 1000), ("kJ/kmol", 1), ("MJ/kmol", 1000), ("cal/mol", "4.184"), ("kcal/mol", 4184)),
    "molar entropy": _units(("J/(mol K)", 1), ("kJ/(kmol K)", 1), ("kJ/(mol K)", 1000), ("cal/(mol K)", "4.184")),
    "power": _units(("W", 1), ("kW", 1000), ("MW", 10**6), ("Btu/s", _BTU), ("hp", 550 * _FT * _LBF)),
    "angle": _units(("rad", 1), ("mrad", "0.001"), ("deg", _DEGREE)),
    "force": _table(N=1, kN=1000, MN=10**6, lbf=_LBF, klbf=1000 * _LBF),
    "time": _table(s=1, ms="0.001", min=60, h=3600),
    "density": _units(("kg/m^3", 1), ("g/cm^3", 1000), ("lbm/ft^3", _LBM / _FT**3), ("slug/ft^3", _LBF / _FT**4)),
    "per length": _units(("1/m", 1), ("1/mm", 1000), ("1/cm", 100), ("1/ft", 1 / _FT), ("1/in", 1 / _IN)),
    "molar mass": _units(("kg/mol", 1), ("g/mol", "0.001"), ("kg/kmol", "0.001"), ("lbm/lbmol", "0.001")),
    "fuel consumption": _units(
        ("kg/(N s)", 1), ("g/(kN s)", "1e-6"), ("mg/(N s)", "1e-6"), ("kg/(N h)", Fraction(1, 3600)), ("lbm/(lbf h)", 1 / _G0 / 3600)
    ),
}  # fmt: skip
"""Allowed units by dimension; the first one of each is the SI unit in which the model works."""

DISPLAY: dict[str, dict[str, str]] = {
    "none": {"si": "", "us": ""},
    "ratio": {"si": "", "us": ""},
    "pressure": {"si": "kPa", "us": "psi"},
    "temperature": {"si": "K", "us": "degR"},
    "temperature difference": {"si": "K", "us": "degR"},
    "length": {"si": "m", "us": "ft"},
    "area": {"si": "m^2", "us": "ft^2"},
    "speed": {"si": "m/s", "us": "ft/s"},
    "specific thrust": {"si": "N s/kg", "us": "lbf s/lbm"},
    "mass flow": {"si": "kg/s", "us": "lbm/s"},
    "specific energy": {"si": "MJ/kg", "us": "Btu/lbm"},
    "specific heat": {"si": "J/(kg K)", "us": "Btu/(lbm degR)"},
    "molar energy": {"si": "kJ/mol", "us": "kJ/mol"},
    "molar entropy": {"si": "J/(mol K)", "us": "J/(mol K)"},
    "power": {"si": "kW", "us": "Btu/s"},
    "angle": {"si": "deg", "us": "deg"},
    "force": {"si": "kN", "us": "lbf"},
    "time": {"si": "s", "us": "s"},
    "density": {"si": "kg/m^3", "us": "lbm/ft^3"},
    "per length": {"si": "1/m", "us": "1/ft"},
    "molar mass": {"si": "kg/kmol", "us": "lbm/lbmol"},
    "fuel consumption": {"si": "g/(kN s)", "us": "lbm/(lbf h)"},
}
"""Unit shown for a dimension in each system."""

_ALTITUDE = {"si": "km", "us": "kft"}
_DYNAMIC = {"si": "kPa", "us": "psf"}
DISPLAY_BY_KEY: dict[str, dict[str, str]] = {
    "flight.altitude": _ALTITUDE,
    "altitude": _ALTITUDE,
    "flight.dynamic_pressure": _DYNAMIC,
    "flight.pressure": _DYNAMIC,
    "limits.dynamic_pressure_low": _DYNAMIC,
    "limits.dynamic_pressure_high": _DYNAMIC,
    "dynamic_pressure": _DYNAMIC,
}
"""Unit shown for single quantities that the trade shows otherwise than their dimension, by input or output key."""

_NUMBER = re.compile(r"([+-]?(?:\d+\.?\d*|\.\d+)(?:[eE][+-]?\d{1,3})?)(?![\d.])\s*(.*)", re.ASCII | re.DOTALL)
_SPACE = re.compile(r"\s+")


def si_unit(dimension: str) -> str:
    """The SI unit of a dimension.

    Parameters: dimension, a key of `UNITS`. Returns: its label, "" for ratio and none. Errors: KeyError for another name.
    """
    return next(iter(UNITS[dimension]), "")


def _allowed(dimension: str) -> str:
    labels = [label for label in UNITS[dimension] if label]
    if not labels:
        return "a number"
    first = "a number" if dimension == "ratio" else f"a number in {si_unit(dimension)}"
    return f"{first}, or text with one of {', '.join(labels)}"


def _refuse(text: str, given: object, dimension: str) -> UnitError:
    return UnitError(text, shown(given), dimension, _allowed(dimension))


def _canonical(label: str) -> str:
    """One spelling for the ways people write a compound unit."""
    text = _SPACE.sub(" ", label.strip()).replace("**", "^").replace("*", " ")
    text = re.sub(r"(?<=[a-zA-Z])([23])(?![\d])", r"^\1", text)
    top, *under = [part.strip() for part in text.split("/")]
    if len(under) > 1 and not any("(" in part for part in under):
        return f"{top}/({' '.join(under)})"
    return "/".join([top, *under])


def _find(label: str, given: str, dimension: str) -> Unit:
    units = UNITS[dimension]
    unit = units.get(label) or units.get(_canonical(label))
    if unit is not None:
        return unit
    name = printable(label, 24)
    homes = [home for home, table in UNITS.items() if label in table or _canonical(label) in table]
    if homes:
        raise _refuse(f"{name} is a unit of {homes[0]}, not of {dimension}", given, dimension)
    lower = {unit_label.lower(): unit_label for unit_label in units if unit_label}
    near = difflib.get_close_matches(label.lower(), list(lower), 1, 0.6)
    hint = f" (did you mean {lower[near[0]]}?)" if near else ""
    raise _refuse(f"unknown unit {name}{hint}", given, dimension)


def _read_text(text: str, dimension: str) -> float:
    if len(text) > LONGEST:
        raise _refuse(f"longer than {LONGEST} characters", text, dimension)
    if not text.isascii():
        raise _refuse("not plain ASCII text", text, dimension)
    match = _NUMBER.fullmatch(text.strip())
    if match is None:
        raise _refuse("not a number with a unit", text, dimension)
    number, label = match.groups()
    if not label:
        return float(number)
    if not UNITS[dimension]:
        raise _refuse("takes no unit", text, dimension)
    unit = _find(label, text, dimension)
    if not math.isfinite(float(number)):
        return math.inf
    try:
        return float(Fraction(number) * unit.exact + unit.exact_offset)
    except OverflowError:
        return math.inf


def read(value: float | int | str, dimension: str) -> float:
    """SI value of a number or of text with a unit.

    Parameters: value, a number (SI) or text such as "27 km", "1500 psf", "-40 degC", "5 %" (at most 64 ASCII characters; text
    without a unit is SI); dimension, a key of `UNITS`.
    Returns: the finite value in the dimension's SI unit.
    Errors: UnitError with what was given and what is allowed; KeyError for an unknown dimension.
    """
    if isinstance(value, str):
        result = _read_text(value, dimension)
    elif isinstance(value, (int, float)) and not isinstance(value, bool):
        try:
            result = float(value)
        except OverflowError:
            result = math.inf
    else:
        raise _refuse("not a number", value, dimension)
    if not math.isfinite(result):
        raise _refuse("not a finite number", value, dimension)
    return result


def display_unit(dimension: str, system: str, key: str = "") -> Unit:
    """Unit in which a quantity is shown; shown = (si - offset) / factor, for arrays too.

    Parameters: dimension, a key of `UNITS`; system, "si" or "us"; key, of an input or output, for those shown in a unit of their own.
    Returns: the Unit. Errors: KeyError for an unknown dimension or system.
    """
    label = DISPLAY_BY_KEY.get(key, DISPLAY[dimension])[system]
    return UNITS[dimension][label] if UNITS[dimension] else Unit("", 1.0)


def show(value: float, dimension: str, system: str, key: str = "") -> tuple[float, str]:
    """A value as it is shown.

    Parameters: value, SI; dimension, system and key as for `display_unit`. Returns: the number and the unit's label.
    """
    unit = display_unit(dimension, system, key)
    return (value - unit.offset) / unit.factor, unit.label


def format_number(x: float, digits: int = 4, trim: bool = True) -> str:
    """A number as compact plain text, with an exponent only below 1e-4 or from 1e7.

    Parameters: x, any float; digits, significant digits (whole digits before the point are never dropped); trim, drop zeros behind
    the point. Returns: the text, "-" for NaN.
    """
    if math.isnan(x):
        return "-"
    if x == 0.0 or math.isinf(x):
        return {0.0: "0", math.inf: "inf", -math.inf: "-inf"}[x]
    mantissa, exponent = f"{x:.{digits - 1}e}".split("e")
    power = int(exponent)
    if -4 <= power < 7:
        text, tail = f"{x:.{max(0, digits - 1 - power)}f}", ""
    else:
        text, tail = mantissa, f"e{power}"
    if trim and "." in text:
        text = text.rstrip("0").rstrip(".")
    return text + tail


def respell(value: float, like: object, dimension: str) -> str | float:
    """A new value written in the unit of an old spelling.

    Parameters: value, SI; like, the old spelling (text with a unit, or anything else); dimension, a key of `UNITS`.
    Returns: text with the old unit that reads back as exactly `value`, else the value itself.
    """
    match = _NUMBER.fullmatch(like.strip()) if isinstance(like, str) else None
    if match is None or not match.group(2):
        return value
    label = match.group(2)
    unit = _find(label, label, dimension)
    number = float((Fraction(value) - unit.exact_offset) / unit.exact)
    space = "" if label == "%" and " %" not in str(like) else " "
    for digits in (6, 9, 12, 15, 17):
        text = f"{number:.{digits}g}{space}{label}"
        if read(text, dimension) == value:
            return text
    return value
