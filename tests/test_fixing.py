"""A fixed case returns the sized walk at its design point, keeps its areas away from it, and is refused where there is nothing to keep."""

from __future__ import annotations

import math
from pathlib import Path
from typing import Any

import numpy as np
import pytest
import tomlkit
from hypothesis import assume, given, settings
from hypothesis import strategies as st

import cycle
from cycle.case import save
from cycle.fixing import fixed_case
from tests.case_files import case_file
from tests.random_cases import random_case, written

CASES = Path(__file__).parents[1] / "cases"
TOLERANCE = 1e-8
"""Areas are the walk's own to rounding; near Mach 1 an area tells the pressure with some hundred times its own error."""


def assert_same(sized: cycle.Walk, fixed: cycle.Walk, moved: tuple[str, ...] = ()) -> None:
    """Every figure of every station but `moved`, and the thrust; differences of large numbers are held to those."""
    assert fixed.status == "solved", fixed.reason
    assert set(sized.station) == set(fixed.station) and fixed.audit.ok
    first = next(iter(sized.station.values()))
    scales = {"enthalpy": first.velocity**2, "entropy": first.specific_heat, "thrust_potential": first.stream_thrust}
    for name in set(sized.station) - set(moved):
        for key, value in sized.station[name].items():
            allowed = TOLERANCE * max(abs(value), scales.get(key, 0.0))
            assert fixed.station[name][key] == pytest.approx(value, rel=0.0, abs=allowed, nan_ok=True), (name, key)
    thrust = sized.performance.thrust
    assert fixed.performance.thrust == pytest.approx(thrust, rel=TOLERANCE, abs=TOLERANCE * first.stream_thrust, nan_ok=True)


@settings(max_examples=50, deadline=None)
@given(st.integers(0, 100_000))
def test_random_case_is_fixed_to_its_own_walk_or_refused(seed: int) -> None:
    """Over every gas, inlet quality, end, burner but the one without a shape, and nozzle exit."""
    tables = random_case(seed)
    burner = tables["combustor"]
    if burner["process"] == "constant-pressure":
        burner["process"] = "constant-area"
    walk = cycle.solve(cycle.loads(written(tables), str(seed)))
    assume(walk.status == "solved")
    if walk.station["2"].mach <= 1.0:
        with pytest.raises(cycle.CaseError, match="only a supersonic end"):
            fixed_case(walk)
        return
    try:
        fixed = fixed_case(walk)
    except cycle.CaseError as error:
        far = walk.station["0"].area / walk.station["2"].area > 1e3
        assert "out of bounds" in str(error) if far else "another solution" in str(error) and "adiabatic_efficiency" in tables["inlet"]
        return
    assert fixed.choices["inlet.end"] == "contraction_ratio" and fixed.choices["nozzle.exit"] == "exit_area_over_capture"
    assert_same(walk, cycle.solve(fixed))


DUCT = {
    "process": "duct", "friction_coefficient": 0.002,
    "area": [{"x": 0.0, "area_ratio": 1.0}, {"x": 0.3, "area_ratio": 1.0}, {"x": 1.2, "area_ratio": 2.2}],
    "injector": [{"x": 0.05}],
}  # fmt: skip
PLANAR = {**DUCT, "section": "planar", "width": 0.7, "area": DUCT["area"][1:]}
THREE = {"ramp": [{"angle": "4 deg"}, {"angle": "5 deg"}, {"angle": "6 deg"}]}
LENGTHS = {"ramp": [{"angle": "4 deg", "length": 1.2}, {"angle": "5 deg", "length": 0.9}, {"angle": "6 deg"}]}
TWO = {"ramp": [{"angle": "4 deg"}, {"angle": "5 deg"}], "internal_contraction": 3.0}
OPEN = {"ramp": [{"angle": "4 deg"}, {"angle": "5 deg"}], "cowl_angle": 0.0}
CONE = {"cone": {"half_angle": "12 deg"}, "cowl_angle": "5 deg", "internal_contraction": 3.0}
BY_PERFORMANCE = {"kinetic_energy_efficiency": 0.97, "pressure_ratio": 40.0}
CONSTANT_AREA = {"process": "constant-area"}


def built(inlet: Any, burner: Any, mach: float, phi: float, model: str = "equilibrium", nozzle: Any = None) -> cycle.Case:
    tables = {
        "format": 1, "title": "invented for a test", "flight": {"mach": mach, "dynamic_pressure": 5e4}, "gas": {"model": model},
        "inlet": inlet, "fuel": {"name": "hydrogen"}, "combustor": {"equivalence_ratio": phi, **burner},
        "nozzle": {"ideal": True, "velocity_coefficient": 0.98, **(nozzle or {})}, "engine": {"capture_area": 0.4},
    }  # fmt: skip
    return cycle.loads(tomlkit.dumps(tables))


GEOMETRIES = {
    "ramps": (built(THREE, CONSTANT_AREA, 8.0, 0.5), "scramjet"),
    "ramps, duct": (built(THREE, DUCT, 6.0, 0.5), "scramjet"),
    "ramps, shock train": (built(THREE, DUCT, 6.0, 0.5, "constant-gamma"), "scramjet-shock-train"),
    "ramps of given lengths": (built(LENGTHS, DUCT, 8.0, 0.4), "scramjet"),
    "contraction, planar duct": (built(TWO, PLANAR, 8.0, 0.5), "scramjet"),
    "lip along the ramp, shock train": (built(OPEN, DUCT, 6.0, 0.7), "scramjet-shock-train"),
    "cone": (built({"cone": {"half_angle": "12 deg"}}, DUCT, 7.0, 0.4, "frozen"), "scramjet"),
    "cone, cowl": (built(CONE, CONSTANT_AREA, 8.0, 0.5), "scramjet"),
    "performance, duct": (built(BY_PERFORMANCE, DUCT, 7.0, 0.4), "scramjet"),
    "stated loss": (built(BY_PERFORMANCE, {"process": "pressure-loss", "pressure_ratio": 0.6, "exit_mach": 2.0}, 8.0, 0.4), "scramjet"),
}


@pytest.mark.parametrize("name", GEOMETRIES)
def test_flowpath_returns_its_sized_walk(name: str) -> None:
    case, mode = GEOMETRIES[name]
    sized = cycle.solve(case)
    fixed = cycle.solve(fixed_case(sized))
    assert sized.mode == fixed.mode == mode
    assert_same(sized, fixed)
    areas = {"combustor.area.2.area_ratio", "combustor.area.3.area_ratio", "combustor.exit_mach", "inlet.pressure_ratio", "nozzle.ideal"}
    assert not areas & set(fixed.case.numbers) and fixed.case.choices["nozzle.exit"] == "exit_area_over_capture"


def test_thermal_throat_of_a_shipped_case() -> None:
    """Fixed but for its throat and the duct's ratios; the walk is a ramjet with a thermal throat."""
    sized = cycle.solve(cycle.load(CASES / "tidegate.toml"))
    assert sized.mode == "ramjet-thermal-throat"
    fixed = fixed_case(sized)
    assert_same(sized, cycle.solve(fixed))
    assert fixed.numbers["combustor.area.3.area"] == pytest.approx(2.2 * sized.station["2"].area, rel=1e-14)
    assert fixed.numbers["combustor.area.1.area_ratio"] == 1.0 and "combustor.area.3.area_ratio" not in fixed.numbers


TERMINAL = {"ramp": [{"angle": "3 deg"}, {"angle": "3 deg"}], "terminal_shock": True}


@pytest.mark.parametrize("model", ["equilibrium", "frozen", "constant-gamma"])
def test_sized_throat_becomes_an_area_and_the_shock_finds_its_place(model: str) -> None:
    """Station 2 lies ahead of the shock now, station 3 behind it as before."""
    sized = cycle.solve(built(TERMINAL, CONSTANT_AREA, 5.0, 0.15, model, {"throat": "sized"}))
    fixed = fixed_case(sized)
    assert fixed.numbers["nozzle.throat_area"] == sized.station["5"].area
    assert "nozzle.throat" not in fixed.choices and fixed.choices["inlet.terminal"] == "none"
    walk = cycle.solve(fixed)
    assert_same(sized, walk, moved=("2",))
    assert walk.mode == "ramjet-critical" and walk.station["2"].mach > 1.0 > sized.station["2"].mach
    assert walk.station["2"].area == pytest.approx(sized.station["2"].area, rel=1e-12)


def test_design_condition_puts_the_waves_on_the_lip() -> None:
    """Full capture and no additive drag there; slower flight spills, and the inlet throat keeps its area while it does."""
    sized = cycle.solve(built(THREE, CONSTANT_AREA, 8.0, 0.3))
    assert math.isnan(sized.performance.installed_thrust)
    fixed = fixed_case(sized)
    walk = cycle.solve(fixed, {"flight.mach": np.array([6.5, 7.0, 7.5, 8.0])})
    captured = walk.performance.captured_mass_fraction
    assert captured[-1] == pytest.approx(1.0, abs=1e-12)
    assert walk.performance.installed_thrust[-1] == pytest.approx(sized.performance.thrust, rel=1e-9)
    assert (np.diff(captured) > 0.01).all() and (walk.performance.installed_thrust[:-1] < walk.performance.thrust[:-1]).all()
    # the captured stream between last ramp and lip has the height that the lip leaves it: geometry, to rounding
    assert walk.station["2"].area == pytest.approx(sized.station["2"].area, rel=1e-12)
    assert walk.audit.ok


def test_lip_is_as_wide_as_the_duct_or_square_and_round_for_a_cone() -> None:
    planar = fixed_case(cycle.solve(GEOMETRIES["contraction, planar duct"][0]))
    square = fixed_case(cycle.solve(GEOMETRIES["ramps"][0]))
    cone = fixed_case(cycle.solve(GEOMETRIES["cone, cowl"][0]))
    assert planar.numbers["inlet.lip_y"] * 0.7 == pytest.approx(0.4, rel=1e-15)
    assert square.numbers["inlet.lip_y"] ** 2 == pytest.approx(0.4, rel=1e-15)
    assert math.pi * cone.numbers["inlet.lip_y"] ** 2 == pytest.approx(0.4, rel=1e-15)


def test_rig_is_fixed_by_its_entry_area_and_exit_ratio() -> None:
    rig = cycle.loads("""format = 1
[entry]
station = "3"
mach = 2.2
pressure = "60 kPa"
temperature = "900 K"
mass_flow = "3 kg/s"
[fuel]
name = "hydrogen"
[combustor]
equivalence_ratio = 0.1
[nozzle]
exit_pressure = "20 kPa"
""")
    sized = cycle.solve(rig)
    fixed = fixed_case(sized)
    assert fixed.choices["entry.size"] == "area" and fixed.choices["nozzle.exit"] == "exit_area_ratio"
    assert_same(sized, cycle.solve(fixed))


LOSS = {"process": "pressure-loss", "pressure_ratio": 0.2, "exit_mach": 0.5}
LOST = {"ramp": [{"angle": "4 deg", "length": 1.2}, {"angle": "5 deg", "length": 0.6}, {"angle": "6 deg"}]}
PART = {"ramp": [{"angle": "4 deg", "length": 1.2}, {"angle": "5 deg"}, {"angle": "6 deg"}]}
PLAIN = case_file("plain").read_text(encoding="utf-8")
REFUSED = {
    "the area of a constant-pressure burner follows its heat": built(BY_PERFORMANCE, {"process": "constant-pressure"}, 8.0, 0.3),
    "a curved ramp has no lip": built({"isentropic_ramp": {"turning": "12 deg"}}, CONSTANT_AREA, 7.0, 0.2),
    "some ramps have a length and others none: given 1 of 2": built(PART, CONSTANT_AREA, 8.0, 0.3),
    "no solution at its own design point: .*waves of two ramps meet": built(LOST, CONSTANT_AREA, 8.0, 0.3),
    "the burner passes Mach 1 on the way": built(BY_PERFORMANCE, LOSS, 8.0, 0.4, nozzle={"throat": "sized"}),
    "only a supersonic end": cycle.load(CASES / "sandbar.toml"),
    "at its own area the ambient pressure drives a shock": cycle.loads(
        PLAIN.replace("exit_area_over_capture = 1.5", 'exit_pressure = "8 Pa"')
    ),
    "there is no walk to fix: burner: the heat": cycle.load(CASES / "narrows.toml"),
}


@pytest.mark.parametrize("reason", REFUSED)
def test_what_cannot_be_fixed_is_refused_in_one_line(reason: str) -> None:
    walk = cycle.solve(REFUSED[reason])
    with pytest.raises(cycle.CaseError, match=reason) as caught:
        fixed_case(walk)
    assert all(len(str(fault).splitlines()) == 1 for fault in caught.value.faults)


def test_throat_of_a_rig_cannot_be_given() -> None:
    """A rig says its own Mach number at 3; a throat's area would say it once more."""
    rig = cycle.loads("""format = 1
[entry]
mach = 0.3
pressure = "200 kPa"
temperature = "800 K"
area = 0.02
[fuel]
name = "hydrogen"
[combustor]
equivalence_ratio = 0.1
[nozzle]
throat = "sized"
exit_pressure = "20 kPa"
""")
    walk = cycle.solve(rig)
    assert walk.status == "solved"
    with pytest.raises(cycle.CaseError, match="behind a supersonic inlet throat: given a rig"):
        fixed_case(walk)


def test_another_solution_at_the_design_point_is_not_passed_off_as_the_sized_one() -> None:
    """At one adiabatic efficiency the contraction has a greatest value over pressure; this walk lies beyond it, where an area finds
    the other pressure."""
    inlet = {"adiabatic_efficiency": 0.86, "pressure_ratio": 15.0}
    walk = cycle.solve(built(inlet, CONSTANT_AREA, 3.5, 0.0, "constant-gamma"))
    assert walk.status == "solved" and walk.station["2"].mach > 1.1
    with pytest.raises(cycle.CaseError, match="another solution at its design point: given pressure at 2"):
        fixed_case(walk)


def test_several_points_are_refused() -> None:
    walk = cycle.solve(cycle.load(case_file("plain")), {"flight.mach": np.array([7.0, 8.0])})
    with pytest.raises(cycle.CaseError, match="fixed at one point: given 2 points"):
        fixed_case(walk)


def test_fixed_case_is_a_new_file_with_the_old_comments(tmp_path: Path) -> None:
    case = cycle.load(case_file("plain"))
    fixed = fixed_case(cycle.solve(case))
    assert fixed.path is None and fixed.stamp is None and fixed.name == "plain-fixed"
    assert fixed.title == f"{case.title} (fixed)" and fixed.notes.startswith(case.notes.rstrip())
    assert "(plain), sized at Mach 8, " in fixed.notes and "# invented, for the tests" in fixed.text
    target = tmp_path / "new.toml"
    save(fixed, target)
    assert target.read_text(encoding="utf-8") == fixed.text and cycle.load(target) == fixed


def test_fixed_case_has_nothing_left_to_fix() -> None:
    fixed = fixed_case(cycle.solve(cycle.load(CASES / "breakwater.toml")))
    assert fixed_case(cycle.solve(fixed)) is fixed


def test_long_title_stays_within_its_bound() -> None:
    case = cycle.load(case_file("plain")).replace({"title": "t" * 200})
    title = fixed_case(cycle.solve(case)).title
    assert title.endswith("t (fixed)") and len(title) == 200
