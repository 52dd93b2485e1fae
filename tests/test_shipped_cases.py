"""What the shipped cases are for: the first one is safe to play with; each other one shows one thing and violates nothing else."""

from __future__ import annotations

from functools import cache
from pathlib import Path

import numpy as np
import pytest

import cycle
from cycle.case import differences, template
from cycle.declarations import Optimistic
from cycle.inputs import FLATTERED, OPTIMISTIC
from cycle.quantities import INPUT
from tui import shipped

CASES = Path(__file__).resolve().parents[1] / "cases"
FIRST = CASES / f"{shipped.FIRST}.toml"
CLOSE = 0.1
"""Margin below which a limit is close: common practice of this program, restated here."""


def box() -> list[tuple[float, float]]:
    """Mach number and equivalence ratio: the corners and edges of +-1 and +-30 % about the first case, and places inside."""
    case = cycle.load(FIRST)
    mach, phi = case.value("flight.mach"), case.value("combustor.equivalence_ratio")
    corners = [(mach + a, phi * (1.0 + b)) for a in (-1.0, 0.0, 1.0) for b in (-0.3, 0.0, 0.3)]
    inside = np.random.default_rng(20).uniform((-1.0, -0.3), (1.0, 0.3), (8, 2))
    return corners + [(mach + a, phi * (1.0 + b)) for a, b in inside]


@cache
def first(mach: float, phi: float) -> cycle.Walk:
    return cycle.solve(cycle.load(FIRST).replace({"flight.mach": mach, "combustor.equivalence_ratio": phi}))


@pytest.mark.parametrize(("mach", "phi"), box())
def test_the_first_case_stays_lit_and_breaks_no_limit_about_its_point(mach: float, phi: float) -> None:
    walk = first(mach, phi)
    assert (walk.status, walk.mode) == ("solved", "scramjet")
    assert walk.audit.ok
    margins = {row.key: row.margin for row in walk.limits if row.margin is not None}
    assert {"ignition_temperature", "ignition_pressure", "thermal_choking", "corridor_low", "corridor_high"} <= set(margins)
    assert walk.station["3"].temperature > 1000.0
    assert [key for key, margin in margins.items() if margin < 0.0] == []
    close = {key for key, margin in margins.items() if margin <= CLOSE}
    # both speak of self-ignition: by temperature, and by the pressure above which hydrogen lights slowly
    assert "ignition_temperature" in close and close <= {"ignition_temperature", "slow_ignition"}


@pytest.mark.parametrize(("mach", "phi"), box())
def test_the_first_case_keeps_its_shock_train_in_the_burner(mach: float, phi: float) -> None:
    """A constant-area burner holds a pressure rise of 1 + 0.3 M3^2 up to Mach 4.5 and of 0.17 M3^2.5 above: from memory."""
    walk = first(mach, phi)
    before, behind = walk.station["3"], walk.station["4"]
    held = 1.0 + 0.3 * before.mach**2 if before.mach <= 4.5 else 0.17 * before.mach**2.5
    assert behind.pressure / before.pressure < (1.0 - CLOSE) * held


def test_the_first_case_has_the_losses_of_a_real_engine() -> None:
    case = cycle.load(FIRST)
    assert case.value("combustor.equivalence_ratio") == 0.5
    assert case.value("combustor.friction_area_ratio") > 0.0
    assert case.value("combustor.wall_heat") > 0.0
    assert case.value("nozzle.velocity_coefficient") == 0.98
    assert case.value("nozzle.divergence_factor") == 0.99
    assert first(*box()[4]).station["3"].temperature == pytest.approx(1100.0, abs=30.0)


SHOWS: dict[str, tuple[str, str, set[str]]] = {
    "bench-three": ("solved", "rig", set()),
    "heron": ("solved", "scramjet", {"ignition_temperature"}),
    "lantern": ("solved", "scramjet", set()),
    "lighthouse": ("solved", "ramjet-supercritical", set()),
    "narrows": ("choked", "none", {"thermal_choking"}),
    "saltmarsh": ("solved", "scramjet", set()),
    "sandbar": ("solved", "ramjet-critical", set()),
    "breakwater": ("solved", "scramjet", {"start"}),
    "tidegate": ("solved", "ramjet-thermal-throat", {"start"}),
}
"""Shipped case -> its status, its mode, and the limits it violates: what it is about, and nothing else."""


def test_the_table_has_every_shipped_case() -> None:
    assert set(SHOWS) == set(shipped.names())


@pytest.mark.parametrize("name", SHOWS)
def test_a_shipped_case_violates_only_what_it_is_about(name: str) -> None:
    status, mode, violated = SHOWS[name]
    walk = cycle.solve(cycle.load(CASES / f"{name}.toml"))
    assert (walk.status, walk.mode) == (status, mode)
    assert {row.key for row in walk.limits if row.margin is not None and row.margin < 0.0} == violated


@pytest.mark.parametrize("name", [name for name, (_, _, violated) in SHOWS.items() if violated])
def test_the_notes_say_which_limit_is_violated(name: str) -> None:
    words = {
        "ignition_temperature": "self-ignition is the only limit violated",
        "start": "does not start by itself, the only limit violated",
        "thermal_choking": "Thermal choking is the only limit violated",
    }
    notes = " ".join(cycle.load(CASES / f"{name}.toml").notes.split())
    for key in SHOWS[name][2]:
        assert words[key] in notes


@pytest.mark.parametrize("told", OPTIMISTIC, ids=lambda told: told.key)
def test_how_far_a_default_flatters_is_computed_to_the_second_shown(told: Optimistic) -> None:
    assert FLATTERED == shipped.FIRST
    case = cycle.load(FIRST)
    default, usual = (cycle.solve(case.replace({told.key: value})) for value in (told.default, told.usual))
    assert default.status == usual.status == "solved"
    assert round(usual.performance.specific_impulse - default.performance.specific_impulse) == told.change
    assert INPUT[told.key].default == told.default


@pytest.mark.parametrize("told", OPTIMISTIC, ids=lambda told: told.key)
def test_the_template_says_which_defaults_are_optimistic_and_by_how_much(told: Optimistic) -> None:
    words = " ".join(template().replace("\n#", " ").split())
    said = f"{told.default} is optimistic: with {told.usual} the specific impulse of saltmarsh is {-told.change} s lower."
    assert words.count(said) == 1


def test_a_new_case_begins_where_the_first_one_stands() -> None:
    new, first = cycle.loads(template()), cycle.load(FIRST)
    assert [(key, one, other) for key, one, other in differences(new, first)] == []
