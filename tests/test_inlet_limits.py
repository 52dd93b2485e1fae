"""Limits of inlets by geometry: attached shocks and separation, the throat that starts, the speed that the lip was placed for."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from cycle.flow import limits, shocks
from cycle.flowpath import inlet_limits
from cycle.flowpath.inlet_geometry import Inlet, Internal, cone, ramps
from cycle.flowpath.stream import Stream
from tests.test_inlet_geometry import AS_IT_IS, MODELS, column, designed, faults, flying


@pytest.mark.parametrize("model", MODELS)
def test_bounds_of_ramps(model: str) -> None:
    flight = flying(model, [7.0, 5.0])
    inlet = ramps(flight, column([6.0, 8.0], 2), Internal(throat_area=np.full(2, 0.018)))
    found = inlet_limits.bounds(inlet)
    assert [(b.key, b.stage) for b in found] == [
        ("attached", "ramp 1"), ("attached", "ramp 2"), ("attached", "cowl shock"),
        ("separation", "ramp 2"), ("separation", "cowl shock"), ("start", ""), ("contraction", ""),
    ]  # fmt: skip
    # turned just short of the largest turn a ramp stays attached, just beyond it not
    most = found[1].allowed
    for change, solved in ((-1e-4, True), (1e-4, False)):
        turns = np.array([column([6.0], 2)[0], most + change])
        assert (ramps(flight, turns, AS_IT_IS).fault == 0).all() == solved
    assert found[3].actual == pytest.approx(inlet.stages[1].stream.state.pressure / inlet.stages[0].stream.state.pressure)
    assert found[3].allowed == pytest.approx(limits.separation_pressure_ratio(inlet.stages[0].stream.mach))
    assert found[5].actual == pytest.approx(inlet.lip.area / 0.018, rel=1e-9)
    assert inlet_limits.smallest_margin(found, "attached") == pytest.approx(np.min([b.margin for b in found[:3]], axis=0))
    assert np.all(found[5].allowed < found[6].allowed)
    if model == "constant":
        assert found[5].allowed == pytest.approx(limits.starting_contraction_limit(inlet.lip.mach, 1.4), rel=1e-8)


def test_least_throat_that_starts_has_no_margin_left() -> None:
    flight = flying("frozen", [6.0])
    inlet = ramps(flight, column([4.0, 5.0]), AS_IT_IS)
    least = inlet_limits.starting_throat_area(inlet)
    at_least = ramps(flight, column([4.0, 5.0]), Internal(np.zeros(1), throat_area=least))
    start = next(b for b in inlet_limits.bounds(at_least) if b.key == "start")
    assert start.margin == pytest.approx(0.0, abs=1e-8)


@pytest.mark.parametrize("model", ["constant", "frozen"])
def test_starting_mach_of_a_fixed_inlet(model: str) -> None:
    """With the lip on the first ramp's stream the entry grows with speed less than the limit does: one speed starts it."""
    shape, throat = designed(model, 7.0, [6.0, 8.0]), np.array([0.045])

    def build(flight: Stream) -> Inlet:
        return ramps(flight, column([6.0, 8.0]), Internal(np.zeros(1), throat_area=throat), shape)

    flight = flying(model, [5.0])
    found = inlet_limits.starting_mach(build, flight, np.array([3.0]), np.array([9.0]))
    margins = [
        (inlet_limits.starting_contraction(i) / inlet_limits.internal_contraction(i) - 1.0)[0]
        for i in (build(inlet_limits.at_speed(flight, found * k)) for k in (0.999, 1.0, 1.001))
    ]
    assert margins[1] == pytest.approx(0.0, abs=1e-8) and margins[0] * margins[2] < 0.0
    assert np.isnan(inlet_limits.starting_mach(build, flight, np.array([3.0]), np.array([3.2]))[0])


@settings(max_examples=15, deadline=None)
@given(st.floats(2.5, 10.0), st.floats(3.0, 20.0), st.sampled_from(MODELS), st.booleans())
def test_lip_mach_is_the_speed_that_the_lip_was_placed_for(mach: float, degrees: float, model: str, conical: bool) -> None:
    flight, half = flying(model, [mach]), np.radians([degrees])
    inlet = cone(flight, half, AS_IT_IS) if conical else ramps(flight, half[:, None], AS_IT_IS)
    if faults(inlet) != ["solved"]:
        assert np.radians(degrees) > 0.9 * float(shocks.detachment(mach, 1.4).deflection)
        return
    search = inlet_limits.cone_lip_mach if conical else inlet_limits.ramp_lip_mach
    found = search(flying(model, [3.0]), half, np.ones(1), np.tan(inlet.stages[0].angle))
    # at high speed the wave angle hardly moves with it
    assert found[0] == pytest.approx(mach, rel=1e-5)


def test_no_speed_puts_the_shock_under_the_ramp() -> None:
    flight = flying("constant", [5.0])
    for search in (inlet_limits.ramp_lip_mach, inlet_limits.cone_lip_mach):
        assert np.isnan(search(flight, np.radians([12.0]), np.ones(1), np.tan(np.radians([11.0])))[0])
