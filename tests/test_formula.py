"""Equations with numbers in them: the arithmetic shown is the arithmetic done."""

from __future__ import annotations

import math

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from cycle.formula import NoNumbersError, spread, symbols, work
from cycle.quantities import OUTPUTS

NUMBERS = {"m": 52.0, "u": 2736.0, "p": 3180.0, "A": 0.6, "rho": 0.4, "p0": 1120.0, "A0": 0.4, "A10": 0.6, "g0": 9.80665}


def evaluated(text: str) -> float:
    """What the shown arithmetic comes to, by Python itself."""
    assert set(text) <= set("0123456789.e+-*/^() sqrt")
    return float(eval(text.replace("^", "**"), {"sqrt": math.sqrt}))


@pytest.mark.parametrize(
    ("equation", "shown"),
    [
        ("m u + p A", "52 * 2736 + 3180 * 0.6"),
        ("rho u^2 / 2", "0.4 * 2736^2 / 2"),
        ("m / (rho u)", "52 / (0.4 * 2736)"),
        ("p0 (A10 - A0)", "1120 * (0.6 - 0.4)"),
        ("sqrt(p / rho)", "sqrt(3180 / 0.4)"),
        ("m - (p - A)", "52 - (3180 - 0.6)"),
    ],
)
def test_neighbours_multiply_and_the_text_is_the_arithmetic(equation: str, shown: str) -> None:
    worked = work(equation, NUMBERS.get)
    assert worked.text == shown
    # Every number here has at most six digits, so text and value agree to rounding.
    assert worked.value == pytest.approx(evaluated(shown), rel=1e-14)


def test_a_station_behind_a_bracket_goes_to_each_symbol() -> None:
    assert spread("(m u + p A)10 - (m u)0") == "(m10 u10 + p10 A10) - (m0 u0)"
    assert symbols("(m u + p A)10 - p0 (A10 - A0)") == ("m10", "u10", "p10", "A10", "p0", "A0")


def test_division_binds_from_the_left() -> None:
    assert work("m / u / p", NUMBERS.get).value == pytest.approx(52.0 / 2736.0 / 3180.0, rel=1e-15)
    assert work("m - u - p", NUMBERS.get).value == 52.0 - 2736.0 - 3180.0


@pytest.mark.parametrize("equation", ["p at (ht, s)", "m u_e - m0 u0", "m /", "(m u", "m u)", "", "m / 0", "sqrt(p - m u)", "rho* a*"])
def test_words_unknown_symbols_and_broken_equations_have_no_numbers(equation: str) -> None:
    with pytest.raises(NoNumbersError):
        work(equation, NUMBERS.get)


def test_nan_is_no_number() -> None:
    with pytest.raises(NoNumbersError, match="'u'"):
        work("m u", {"m": 1.0, "u": math.nan}.get)


def test_every_declared_equation_can_be_read() -> None:
    for output in OUTPUTS:
        assert isinstance(symbols(output.equation), tuple)


@settings(deadline=None, max_examples=50)
@given(st.dictionaries(st.sampled_from("abcd"), st.floats(-1e6, 1e6).filter(lambda x: abs(x) > 1e-3), min_size=4, max_size=4))
def test_shown_arithmetic_agrees_with_the_value(numbers: dict[str, float]) -> None:
    worked = work("a b + c (d - a) / 3", numbers.get)
    # Six digits are shown, so each product of the sum is off by up to three half units in the sixth digit.
    size = abs(numbers["a"] * numbers["b"]) + abs(numbers["c"]) * (abs(numbers["d"]) + abs(numbers["a"]))
    assert abs(worked.value - evaluated(worked.text)) <= 2e-5 * size
