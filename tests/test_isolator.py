"""The isolator: its section, the boundary layer that enters it, the friction of its wall, and the range of its correlation."""

from __future__ import annotations

import math
from pathlib import Path
from typing import Any

import numpy as np
import pytest

import cycle
from cycle.evidence import checks
from cycle.flow import fanno, limits
from cycle.flowpath import isolator
from cycle.flowpath.stream import Stream, stream
from cycle.gas.constant import ConstantGas
from tests.random_flowpath import one_point

CASES = Path(__file__).parents[1] / "cases"
PLAIN = cycle.load(CASES / "tidegate.toml").replace({"isolator.shape": None, "isolator.width": None})
GAMMA = 1.4
CLIMB = np.array([4.2, 4.4, 4.6, 4.8])
"""Thermal throat twice, shock train, attached."""


RELEASED = 1e-6
"""The train stands in the stream whose held composition is released, 5e-8 of the Mach number beside station 2."""


def figures(walk: cycle.Walk, name: str = "isolator") -> Any:
    return next(p.figures for p in walk.processes if p.name == name)


def row(walk: cycle.Walk, key: str) -> Any:
    return next(limit for limit in walk.limits if limit.key == key)


def train_length(walk: cycle.Walk, height: float, exponent: float) -> float:
    """The correlation, written again: Waltrup and Billig (1973), Billig (1993), from memory."""
    two, told, theta = walk.station["2"], figures(walk), 0.5e-3
    rise = told.separated_pressure / two.pressure - 1.0
    reynolds = two.unit_reynolds_number * theta
    return math.sqrt(height * theta) * (50.0 * rise + 170.0 * rise**2) / ((two.mach**2 - 1.0) * reynolds**exponent)


# section


@pytest.mark.parametrize("side", ["width", "height"])
def test_a_rectangular_train_scales_with_the_height(side: str) -> None:
    case = PLAIN.replace({"isolator.shape": "rectangular", f"isolator.{side}": 0.3})
    walk = cycle.solve(case)
    height = 0.3 if side == "height" else walk.station["2"].area / 0.3
    assert figures(walk).isolator_height == pytest.approx(height, rel=1e-12)
    assert figures(walk).train_length == pytest.approx(train_length(walk, height, 0.2), rel=RELEASED)


def test_a_circular_train_scales_with_the_diameter_of_the_area() -> None:
    walk = cycle.solve(PLAIN)
    diameter = math.sqrt(4.0 * walk.station["2"].area / math.pi)
    assert figures(walk).train_length == pytest.approx(train_length(walk, diameter, 0.25), rel=RELEASED)
    assert not any(limit.key == "isolator_section" for limit in walk.limits)


def test_a_stated_diameter_that_is_not_that_of_the_area_is_flagged_and_not_used() -> None:
    plain, stated = cycle.solve(PLAIN), cycle.solve(PLAIN.replace({"isolator.hydraulic_diameter": 0.07}))
    assert figures(stated).train_length == figures(plain).train_length
    found = row(stated, "isolator_section")
    assert found.state == "over" and "0.07 m stated, 0.3158 m by shape and area" in found.restore
    near = cycle.solve(PLAIN.replace({"isolator.hydraulic_diameter": 0.32}))
    assert row(near, "isolator_section").margin > 0.0


def test_hydraulic_diameter_alone_gives_the_sides_of_a_rectangle() -> None:
    """Case files of before say a rectangle by it; the shorter side is the height."""
    area = cycle.solve(PLAIN).station["2"].area
    width = 0.6
    height = area / width
    walk = cycle.solve(PLAIN.replace({"isolator.shape": "rectangular", "isolator.hydraulic_diameter": 2.0 * area / (width + height)}))
    assert figures(walk).isolator_height == pytest.approx(height, rel=1e-9)
    assert row(walk, "isolator_section").actual == pytest.approx(1.0, rel=1e-9)


def test_a_rectangle_rounder_than_a_square_is_flagged() -> None:
    walk = cycle.solve(PLAIN.replace({"isolator.shape": "rectangular", "isolator.hydraulic_diameter": 0.3}))
    assert walk.status == "solved" and math.isnan(figures(walk).train_length)
    assert row(walk, "isolator_section").state == "over"


def test_a_rectangle_without_a_side_is_refused() -> None:
    with pytest.raises(cycle.CaseError, match=r"isolator.shape: a rectangle has one side stated: given none; allowed isolator.width or"):
        PLAIN.replace({"isolator.shape": "rectangular"})


def test_shipped_climb_keeps_its_modes() -> None:
    walk = cycle.solve(cycle.load(CASES / "tidegate.toml"), {"flight.mach": np.array([4.0, *CLIMB])})
    throat = "ramjet-thermal-throat"
    assert [walk.status[0], *walk.mode[1:]] == ["unstarted", throat, throat, "scramjet-shock-train", "scramjet"]
    assert (figures(walk).isolator_margin[1:] > 0.0).all()


# range of the correlation


def test_correlation_beyond_its_data_is_flagged() -> None:
    walk = cycle.solve(PLAIN, {"flight.mach": CLIMB, "isolator.momentum_thickness": np.array([5e-4, 2e-4, 5e-4, 5e-4])})
    data = limits.SHOCK_TRAIN_DATA["circular"]
    assert "memory" in data.source
    mach, reynolds = row(walk, "train_mach"), row(walk, "train_reynolds")
    assert list(mach.state) == ["near", "near", "over", "not assessed"]
    assert mach.allowed[:3] == pytest.approx(data.mach.high) and mach.actual[2] > data.mach.high
    assert list(reynolds.state) == ["ok", "over", "ok", "not assessed"]
    assert reynolds.allowed[1] == pytest.approx(data.reynolds.low) and reynolds.actual[1] < data.reynolds.low


def test_recalled_checks_lie_in_the_data() -> None:
    recalled = [check for check in checks("f") if check.id.startswith("waltrup-billig")]
    assert recalled
    for check in recalled:
        data = limits.SHOCK_TRAIN_DATA["circular"]
        assert data.mach.low <= float(check.inputs["M_u"].value) <= data.mach.high
        assert data.reynolds.low <= float(check.inputs["Re_theta"].value) <= data.reynolds.high


# boundary layer


def supersonic(mach: float, n: int = 1) -> Stream:
    gas = ConstantGas(np.full(n, 287.0 * GAMMA / (GAMMA - 1.0)), np.full(n, 287.0))
    state = gas.at("tp", np.full(n, 500.0), np.full(n, 4e4))
    velocity = mach * state.sound_speed
    return stream(gas, state, velocity, 0.05 * state.density * velocity)


def test_flat_plate_is_that_of_the_books() -> None:
    """Schlichting: theta = 0.037 x Re^-0.2 where the stream is slow; faster, the plate is that of the reference temperature."""
    slow = supersonic(0.01)
    reynolds = slow.flux / isolator.viscosity(slow.state.temperature)
    assert isolator.plate_momentum_thickness(slow, np.ones(1)) == pytest.approx(0.037 * reynolds**-0.2, rel=1e-4)
    fast = supersonic(3.0)
    hot = 1.0 + 0.72 * 0.89 * 0.2 * 9.0
    mu = [1.458e-6 * t**1.5 / (t + 110.4) for t in (500.0, 500.0 * hot)]
    cold = 0.037 * (fast.flux / mu[0]) ** -0.2
    ratio = hot**-0.8 * (mu[1] / mu[0]) ** 0.2
    assert isolator.plate_momentum_thickness(fast, np.ones(1)) == pytest.approx(cold * ratio, rel=1e-12)


def test_run_length_is_another_way_to_say_the_thickness() -> None:
    run = cycle.solve(PLAIN.replace({"isolator.boundary_layer_length": 1.8}))
    theta = figures(run).momentum_thickness
    assert 5e-4 < theta < 5e-3
    assert figures(cycle.solve(PLAIN.replace({"isolator.momentum_thickness": theta}))).train_length == pytest.approx(
        figures(run).train_length, rel=1e-12
    )
    with pytest.raises(cycle.CaseError, match="boundary layer at isolator entry is stated more than once"):
        cycle.loads(PLAIN.text.replace("momentum_thickness", "boundary_layer_length = 1.0\nmomentum_thickness"))


# friction


RIG = """
format = 1
[entry]
station = "2"
mach = 3.0
pressure = "40 kPa"
temperature = "500 K"
area = "0.01 m^2"
[gas]
model = "constant-gamma"
[isolator]
length = "0.5 m"
friction_coefficient = 0.003
[fuel]
heating_value = "120 MJ/kg"
[combustor]
process = "constant-area"
fuel_air_ratio = 0.0
"""


@pytest.mark.parametrize("cf", [0.0005, 0.003, 0.008])
def test_friction_ahead_of_a_burner_is_that_of_fanno(cf: float) -> None:
    """Closed Fanno line; the mean of the shear at both ends is a trapezoid: its error goes with the square of 4 Cf L/D."""
    walk = cycle.solve(cycle.loads(RIG).replace({"isolator.friction_coefficient": cf}))
    g = 1004.5 / (1004.5 - 287.0)
    length = 4.0 * cf * 0.5 / math.sqrt(4.0 * 0.01 / math.pi)
    left = float(fanno.longest_duct(3.0, g)) - length
    mach = float(fanno.mach_from_length(left, g, True))
    assert walk.station["3"].mach == pytest.approx(mach, rel=0.5 * length**2 + 1e-9)
    assert walk.station["3"].mach < 3.0 - 0.5 * (3.0 - mach)
    lost = walk.station["2"].stream_thrust - walk.station["3"].stream_thrust
    assert lost == pytest.approx(figures(walk).friction, rel=1e-9)
    assert figures(walk).entropy_rise > 0.0 and one_point(walk) == []


def test_friction_lowers_the_stream_thrust_in_every_mode_and_the_audit_closes() -> None:
    case = cycle.load(CASES / "tidegate.toml").replace({"isolator.friction_coefficient": 0.002, "isolator.length": 2.0})
    walk = cycle.solve(case, {"flight.mach": np.array([4.4, 4.5, 4.7, 5.2])})
    plain = cycle.solve(case.replace({"isolator.friction_coefficient": 0.0}), {"flight.mach": np.array([4.4, 4.5, 4.7, 5.2])})
    assert set(walk.mode) == {"ramjet-thermal-throat", "scramjet-shock-train", "scramjet"} and walk.audit.ok
    two, told = walk.station["2"], figures(walk)
    height, width = told.isolator_height, 0.67
    shear = 0.5 * 0.002 * two.density * two.velocity**2 * 2.0 * (width + height) * 2.0
    assert ((told.friction < shear) & (told.friction > 0.9 * shear)).all()
    assert (walk.performance.thrust < plain.performance.thrust).all()
    attached = walk.mode == "scramjet"
    lost = two.stream_thrust - walk.station["3"].stream_thrust
    assert lost[attached] == pytest.approx(told.friction[attached], rel=1e-9)
    closed = lost - (told.friction - told.wall_force)
    assert np.abs(closed).max() < 1e-9 * two.stream_thrust.max()


def test_a_fault_of_the_friction_fails_the_audit() -> None:
    case = cycle.load(CASES / "tidegate.toml").replace({"isolator.friction_coefficient": 0.002})
    walk = cycle.solve(case)
    found = walk.emitted()
    changed = {**found.stations["3"], "velocity": found.stations["3"]["velocity"] * (1.0 + 1e-6)}
    assert walk.audit.ok and not walk.judge(type(found)(**{**_fields(found), "stations": {**found.stations, "3": changed}})).ok


def _fields(found: Any) -> dict[str, Any]:
    return {name: getattr(found, name) for name in found.__slots__}


def test_friction_takes_from_the_heat_before_unstart() -> None:
    case = cycle.load(CASES / "tidegate.toml")
    rough = case.replace({"isolator.friction_coefficient": 0.003})
    assert cycle.solve(rough).heat_limits["unstart"] < cycle.solve(case).heat_limits["unstart"] - 0.01


def test_friction_that_chokes_the_isolator_is_a_named_status() -> None:
    walk = cycle.solve(cycle.loads(RIG).replace({"isolator.friction_coefficient": 0.05, "isolator.length": 5.0}))
    assert walk.status == "unstarted" and walk.failed_process == "isolator"


def test_friction_of_a_diffuser_is_refused() -> None:
    case = cycle.load(CASES / "lighthouse.toml")
    with pytest.raises(cycle.CaseError, match="a diffuser with a shock in it has no friction here"):
        case.replace({"isolator.length": 0.5, "isolator.friction_coefficient": 0.002})
