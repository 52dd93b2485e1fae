"""Names are found as engineers type them, and equations are worked with the walk's own numbers."""

from __future__ import annotations

import math

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

import cycle
from cycle.explain import UnknownQuantityError, find, group_of, numbers, related, see_also
from cycle.glossary import ENTRIES, ENTRY
from cycle.quantities import GROUPS, INPUT, INPUTS, MODES, OUTPUT, OUTPUTS, STATUSES, Output
from tests.tui.command_support import CHOKED, DUCT, HOT, QUICK, THROAT

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
    assert found["station 4"].worked
    assert found["station 10"].worked == ""
    assert found["station 10"].value == walk.station["10"].stream_thrust


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


@pytest.mark.parametrize("entry", ENTRIES, ids=lambda e: e.key)
def test_glossary_entries_are_found_by_key_and_last_part(entry: Output) -> None:
    assert find(entry.key) == (entry,)
    assert find(entry.key.replace("_", " ")) == (entry,)


@pytest.mark.parametrize("text", [HOT, DUCT, THROAT])
def test_every_margin_is_worked_from_its_two_sides(text: str) -> None:
    walk = cycle.solve(cycle.loads(text))
    for limit in walk.limits:
        (number,) = numbers(ENTRY[f"limit.{limit.key}"], walk)
        if math.isnan(limit.margin):
            assert (number.worked, number.reason) == ("", limit.restore)
            continue
        assert number.value == limit.margin
        # Six digits of each side are shown.
        assert eval(number.worked) == pytest.approx(limit.margin, abs=2e-5 * (1.0 + abs(limit.margin)))


def test_numbers_of_processes_accounts_and_ducts_are_those_of_the_walk() -> None:
    walk = cycle.solve(cycle.loads(DUCT))
    figures = {p.name: p.figures for p in walk.processes}
    found = {n.where: n for n in numbers(ENTRY["process.pressure_ratio"], walk)}
    assert found["burner 3 to 4"].value == figures["burner"]["pressure_ratio"]
    assert len(found) == len(walk.processes)
    (margin,) = numbers(ENTRY["process.separation_margin"], walk)
    assert margin.worked and margin.value == figures["isolator"]["separation_margin"]
    angles = numbers(ENTRY["process.wave_angle"], walk)
    assert [n.value for n in angles] == [figures["external compression"][f"wave_angle_{i}"] for i in (1, 2, 3)]
    assert {row.key: row.value for row in walk.losses} == {row.key: numbers(ENTRY[f"loss.{row.key}"], walk)[0].value for row in walk.losses}
    places = numbers(ENTRY["profile.pressure"], walk)
    assert max(n.value for n in places) == max(p for p in walk.profile["pressure"] if math.isfinite(p))
    assert (places[0].where, places[-1].where) == ("x 0 m", "x 1.2 m")
    (border,) = numbers(ENTRY["heat.unstart"], walk)
    assert border.value == walk.heat_limits["unstart"]


def test_a_walk_that_lacks_an_entry_has_no_number_or_a_reason() -> None:
    walk = cycle.solve(cycle.loads(HOT))
    assert numbers(ENTRY["process.train_length"], walk) == numbers(ENTRY["profile.mach"], walk) == numbers(ENTRY["heat.train"], walk) == ()
    (lost,) = numbers(ENTRY["loss.burner"], cycle.solve(cycle.loads(CHOKED)))
    assert (math.isnan(lost.value), lost.reason) == (True, "no solution")


def test_cells_and_columns_of_rows_are_found() -> None:
    (one,) = find("combustor.area.2.area_ratio")
    assert (one.key, one.label) == ("combustor.area.2.area_ratio", "duct section 2, area ratio")  # type: ignore[union-attr]
    (column,) = find("combustor.area.area_ratio")
    assert column.label == "duct section, area ratio"  # type: ignore[union-attr]


def test_numbers_of_a_constant_gamma_walk_use_its_case() -> None:
    walk = cycle.solve(cycle.loads(QUICK))
    (number,) = numbers(OUTPUT["thrust_coefficient"], walk)
    assert {t.symbol for t in number.terms} == {"F", "q0", "Ac"}
    assert number.worked
