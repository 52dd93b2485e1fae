"""Names are found as engineers type them, and equations are worked with the walk's own numbers."""

from __future__ import annotations

import math

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

import cycle
from cycle.explain import UnknownQuantityError, find, group_of, numbers, related, see_also
from cycle.quantities import GROUPS, INPUT, INPUTS, MODES, OUTPUT, OUTPUTS, STATUSES
from tests.tui.command_support import CHOKED, HOT, QUICK

WORKED = (
    "stream_thrust", "dynamic_pressure", "total_enthalpy", "density", "sound_speed", "mach", "area", "area_ratio", "thrust",
    "specific_thrust", "specific_impulse", "thrust_specific_fuel_consumption", "fuel_flow", "fuel_air_ratio", "equivalence_ratio",
    "overall_efficiency", "thermal_efficiency", "propulsive_efficiency", "thrust_coefficient", "captured_mass_fraction",
)  # fmt: skip
"""Outputs whose equation is arithmetic in emitted figures."""


@pytest.mark.parametrize("key", [*OUTPUT, *INPUT, *(g.name for g in GROUPS), *STATUSES, *MODES])
def test_every_declared_key_finds_its_own_entry_alone(key: str) -> None:
    (entry,) = find(key)
    assert key in (getattr(entry, "key", ""), getattr(entry, "name", ""))


@pytest.mark.parametrize("output", OUTPUTS, ids=lambda o: o.key)
def test_outputs_are_found_by_symbol_and_label(output: object) -> None:
    assert output in find(output.symbol)  # type: ignore[attr-defined]
    assert output in find(output.label.upper())  # type: ignore[attr-defined]


def test_a_symbol_may_mean_several_quantities() -> None:
    assert {e.key for e in find("F")} == {"stream_thrust", "thrust"}  # type: ignore[union-attr]


def test_the_last_part_of_an_input_is_enough() -> None:
    assert {e.key for e in find("burnt_fraction")} == {"combustor.burnt_fraction"}  # type: ignore[union-attr]


@settings(deadline=None, max_examples=50)
@given(st.text(max_size=100))
def test_any_text_finds_something_or_says_it_does_not(text: str) -> None:
    try:
        assert find(text)
    except UnknownQuantityError as error:
        assert error.given == text
        assert all(find(near) for near in error.near)


@pytest.mark.parametrize("key", WORKED)
def test_the_worked_equation_gives_the_emitted_figure(key: str) -> None:
    walk = cycle.solve(cycle.loads(HOT))
    for number in numbers(OUTPUT[key], walk):
        assert number.worked
        # Six digits are shown; the thrust is a difference of forces about ten times its size.
        worked = eval(number.worked.replace("^", "**"), {"sqrt": math.sqrt})
        assert worked == pytest.approx(number.value, rel=1e-4)


def test_words_are_not_worked_but_say_what_enters() -> None:
    walk = cycle.solve(cycle.loads(HOT))
    total = numbers(OUTPUT["total_pressure"], walk)[0]
    assert total.worked == ""
    assert [t.symbol for t in total.terms] == ["ht", "s"]


def test_an_equation_that_does_not_give_the_figure_is_not_shown() -> None:
    # With a divergence factor the stream thrust is no longer m u + p A of the emitted speed.
    walk = cycle.solve(cycle.loads(HOT.replace("velocity_coefficient", "divergence_factor = 0.98\nvelocity_coefficient")))
    found = {n.where: n for n in numbers(OUTPUT["stream_thrust"], walk)}
    assert found["4"].worked
    assert found["10"].worked == ""
    assert found["10"].value == walk.station["10"].stream_thrust


def test_a_figure_without_a_value_has_its_reason() -> None:
    walk = cycle.solve(cycle.loads(CHOKED))
    (number,) = numbers(OUTPUT["specific_impulse"], walk)
    assert math.isnan(number.value)
    assert number.reason == walk.why_not("specific_impulse") != ""


def test_relations_and_groups() -> None:
    assert [getattr(e, "key", "") for e in related(OUTPUT["mach"])] == ["flight.mach", "entry.mach"]
    group = group_of(INPUT["flight.mach"])
    assert group is not None
    assert group.name == "flight.velocity"
    assert group_of(INPUT["fuel.temperature"]) is None
    assert "fuel_flow" in see_also((OUTPUT["specific_impulse"],))
    assert set(see_also(tuple(INPUTS[:1]))) >= {"mach"}


def test_numbers_of_a_constant_gamma_walk_use_its_case() -> None:
    walk = cycle.solve(cycle.loads(QUICK))
    (number,) = numbers(OUTPUT["thrust_coefficient"], walk)
    assert {t.symbol for t in number.terms} == {"F", "q0", "Ac"}
    assert number.worked
