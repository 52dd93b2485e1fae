"""Units at the edge, with pint as the oracle."""

from __future__ import annotations

import math

import numpy as np
import pint
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from cycle.errors import UnitError
from cycle.quantities import INPUT, INPUTS, OUTPUT, OUTPUTS
from cycle.units import DISPLAY, DISPLAY_BY_KEY, UNITS, display_unit, format_number, read, respell, show, si_unit

PAIRS = [(dimension, label) for dimension, table in UNITS.items() for label in table]
ORACLE_NAMES = {
    "": "dimensionless",
    "%": "percent",
    "psia": "psi",
    "psf": "lbf/ft^2",
    "degF": "degF",
    "kft": "kilofoot",
    "kft/s": "kilofoot/s",
    "kt": "knot",
    "nmi": "nautical_mile",
    "mph": "mile/hour",
    "klbf": "kilolbf",
    "hp": "hp",
    "Btu/s": "Btu_it/s",
    "Btu/lbm": "Btu_it/lb",
    "Btu/(lbm degR)": "Btu_it/(lb delta_degF)",
    "ft lbf/(lbm degR)": "ft*lbf/(lb delta_degF)",
    "lbm/lbmol": "g/mol",
    "lbm/s": "lb/s",
    "lbm/ft^3": "lb/ft^3",
    "lbm/(lbf h)": "lb/(lbf*hour)",
    "lbf s/lbm": "lbf*s/lb",
    "g/(kN s)": "g/(kN*s)",
    "kg/(N h)": "kg/(N*hour)",
    "kg/h": "kg/hour",
    "km/h": "km/hour",
    "h": "hour",
}
DIFFERENCES = {"degC": "delta_degC", "degF": "delta_degF", "degR": "delta_degF"}


@pytest.fixture(scope="module")
def oracle() -> pint.UnitRegistry:
    registry = pint.UnitRegistry()
    registry.define("Btu_it = 1055.05585262 J")
    return registry


@pytest.mark.parametrize(("dimension", "label"), PAIRS)
def test_every_unit_agrees_with_pint(oracle: pint.UnitRegistry, dimension: str, label: str) -> None:
    name = DIFFERENCES.get(label, label) if dimension == "temperature difference" else ORACLE_NAMES.get(label, label)
    target = ORACLE_NAMES.get(si_unit(dimension), si_unit(dimension))
    if dimension == "temperature difference":
        target = "delta_degC"
    expected = oracle.Quantity(3.7, name).to(target).magnitude
    # both are products of a few doubles: some units in the last place
    assert read(f"3.7 {label}", dimension) == pytest.approx(expected, rel=4e-15)


def test_every_dimension_of_the_declarations_has_units_and_a_display() -> None:
    used = {entry.unit for entry in (*INPUTS, *OUTPUTS)}
    assert used <= set(UNITS)
    assert set(UNITS) == set(DISPLAY)
    for dimension, systems in DISPLAY.items():
        assert set(systems) == {"si", "us"}
        assert all(label in UNITS[dimension] for label in systems.values() if UNITS[dimension])
    for key, systems in DISPLAY_BY_KEY.items():
        entry = INPUT[key] if "." in key else OUTPUT[key]
        assert all(label in UNITS[entry.unit] for label in systems.values())


def test_the_first_unit_of_each_dimension_is_the_si_one() -> None:
    for dimension, table in UNITS.items():
        if table:
            assert read(f"2.5 {si_unit(dimension)}", dimension) == 2.5
            assert read(2.5, dimension) == 2.5
            assert read("2.5", dimension) == 2.5


@pytest.mark.parametrize(
    ("text", "dimension", "value"),
    [
        ("85 kft", "length", 25908.0),
        ("85kft", "length", 25908.0),
        (" 27  km ", "length", 27000.0),
        ("-40 degF", "temperature", 233.15),
        ("-40 degC", "temperature", 233.15),
        ("0 degC", "temperature", 273.15),
        ("0.6 mm", "length", 0.0006),
        (".5 m", "length", 0.5),
        ("5 %", "ratio", 0.05),
        ("97.5%", "ratio", 0.975),
        ("1e-3 m^2", "area", 1e-3),
        ("3 m2", "area", 3.0),
        ("3 m**2", "area", 3.0),
        ("2 kg/m3", "density", 2.0),
        ("1004.5 J/kg/K", "specific heat", 1004.5),
        ("1004.5 J/(kg*K)", "specific heat", 1004.5),
        ("10 N*s/kg", "specific thrust", 10.0),
        (8, "ratio", 8.0),
    ],
)
def test_ways_of_writing_a_value(text: str | int, dimension: str, value: float) -> None:
    # exact: factors are fractions, so text reads as the nearest double of what it says
    assert read(text, dimension) == value


@pytest.mark.parametrize(
    ("given", "dimension", "words"),
    [
        ("27 kPa", "length", 'kPa is a unit of pressure, not of length: given "27 kPa"; allowed a number in m, or text with one of m, mm'),
        ("3 Kpa", "pressure", r"unknown unit Kpa (did you mean kPa?)"),
        ("30 000 m", "length", "unknown unit 000 m"),
        ("1,5 m", "length", "unknown unit ,5 m"),
        ("9**9**9 m", "length", "unknown unit **9**9 m"),
        ("3 R", "temperature", "unknown unit R"),
        ("__import__('os')", "length", "not a number with a unit"),
        ("", "length", "not a number with a unit"),
        ("m", "length", "not a number with a unit"),
        ("nan m", "length", "not a number with a unit"),
        ("1e999 m", "length", "not a finite number"),
        ("1e308 km", "length", "not a finite number"),
        ("1e400", "length", "not a finite number"),
        (math.nan, "ratio", "not a finite number: given nan"),
        (math.inf, "ratio", "not a finite number: given inf"),
        (10**400, "ratio", "not a finite number: given an integer beyond the range of numbers"),
        (True, "ratio", "not a number: given true"),
        ("\uff15 m", "length", "not plain ASCII text"),
        ("1 \x1b[2Jm", "length", r"unknown unit \x1b[2Jm"),
        ("1" * 65, "length", "longer than 64 characters"),
        ("3 m", "none", "takes no unit"),
    ],
)
def test_refused_values_say_what_was_given_and_what_is_allowed(given: object, dimension: str, words: str) -> None:
    with pytest.raises(UnitError) as caught:
        read(given, dimension)  # type: ignore[arg-type]
    assert words in str(caught.value)
    assert "allowed a number" in str(caught.value)
    assert str(caught.value).isprintable()


@settings(deadline=None, max_examples=50)
@given(st.floats(1e-6, 1e9), st.sampled_from(PAIRS))
def test_respelling_in_any_unit_reads_back_exactly(value: float, pair: tuple[str, str]) -> None:
    dimension, label = pair
    text = respell(value, f"1 {label}", dimension)
    assert read(text, dimension) == value


def test_respelling_keeps_the_unit_and_stays_short() -> None:
    assert respell(51000.0, "50 kPa", "pressure") == "51 kPa"
    assert respell(0.97, "98%", "ratio") == "97%"
    assert respell(0.97, "98 %", "ratio") == "97 %"
    assert respell(7.5, 8.0, "ratio") == 7.5
    assert respell(7.5, "8", "ratio") == 7.5


@settings(deadline=None, max_examples=50)
@given(st.floats(1e-3, 1e6), st.sampled_from([d for d in UNITS if d != "none"]), st.sampled_from(["si", "us"]))
def test_shown_values_read_back(value: float, dimension: str, system: str) -> None:
    number, label = show(value, dimension, system)
    # a division, a product and, for temperatures, a shift: a few units in the last place
    assert read(f"{number!r} {label}", dimension) == pytest.approx(value, rel=1e-14)


def test_display_by_key_and_of_arrays() -> None:
    assert show(30480.0, "length", "us", "flight.altitude") == (pytest.approx(100.0, rel=1e-15), "kft")
    assert show(30480.0, "length", "si", "flight.altitude") == (30.48, "km")
    assert show(1.0, "none", "si") == (1.0, "")
    unit = display_unit("temperature", "us")
    np.testing.assert_allclose((np.array([5.0, 10.0]) - unit.offset) / unit.factor, [9.0, 18.0], rtol=1e-15)


@pytest.mark.parametrize(
    ("x", "text"),
    [
        (0.0, "0"), (8.0, "8"), (17312.4, "17312"), (0.074038, "0.07404"), (1.2345e-5, "1.234e-5"), (3.2e6, "3200000"),
        (1.23e7, "1.23e7"), (-0.5, "-0.5"), (9.99996, "10"), (99999.6, "100000"), (math.nan, "-"), (-math.inf, "-inf"),
        (0.000123456, "0.0001235"), (1e22, "1e22"),
    ],
)  # fmt: skip
def test_numbers_as_plain_text(x: float, text: str) -> None:
    assert format_number(x) == text


def test_numbers_keep_their_zeros_on_request() -> None:
    assert format_number(8.0, 3, trim=False) == "8.00"
    assert format_number(0.6, 3, trim=False) == "0.600"
