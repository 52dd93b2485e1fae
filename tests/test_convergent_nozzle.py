"""Nozzles that only narrow, or widen by next to nothing: every random one has an exit or a named status, and losses end it where a
closed form says."""

from __future__ import annotations

import numpy as np
import pytest

import cycle
from cycle.arrays import Array
from cycle.quantities import STATUSES

ENGINE = """format = 1
title = "convergent nozzle, invented"
[flight]
mach = 3.0
pressure = "20 kPa"
temperature = "216 K"
[gas]
model = "{model}"
[inlet]
total_pressure_recovery = 0.8
exit_mach = 0.15
[fuel]
name = "hydrogen"
[combustor]
process = "constant-pressure"
exit_total_temperature = "1600 K"
[nozzle]
throat = "sized"
{nozzle}
"""
POINTS = 820
GASES = ("constant-gamma", "frozen", "equilibrium")
EXITS = {
    "exit": ("exit_area_ratio = 1.0", "nozzle.exit_area_ratio", "10"),
    "internal": ("exit_pressure = 20e3\ninternal_area_ratio = 1.0", "nozzle.internal_area_ratio", "9"),
}
QUALITIES = ("velocity_coefficient", "expansion_efficiency", "expansion_efficiency_from_total")


def family(size: int) -> dict[str, Array]:
    rng = np.random.default_rng(20)
    return {
        "flight.mach": rng.uniform(1.5, 4.0, size),
        "inlet.total_pressure_recovery": rng.uniform(0.4, 1.0, size),
        "combustor.exit_total_temperature": rng.uniform(1300.0, 2300.0, size),
    }


def hardly_wider(size: int) -> Array:
    """Area ratios of 1, and above it by anything from rounding to a third."""
    excess = 10.0 ** np.random.default_rng(21).uniform(-16.0, -0.5, size)
    excess[::4] = 0.0
    return 1.0 + excess


def solved(model: str, nozzle: str, changes: dict[str, Array]) -> cycle.Walk:
    return cycle.solve(cycle.loads(ENGINE.format(model=model, nozzle=nozzle)), changes)


@pytest.mark.parametrize("model", GASES)
@pytest.mark.parametrize("end", EXITS)
def test_lossless_nozzle_of_any_area_ratio_has_an_exit(model: str, end: str) -> None:
    """At ratio 1 the exit is the throat itself, at Mach 1; above it the exit fills its area. Only the ambient pressure ends one."""
    nozzle, key, station = EXITS[end]
    ratio = hardly_wider(POINTS)
    walk = solved(model, nozzle, family(POINTS) | {key: ratio})
    assert set(walk.status.tolist()) <= {"solved", "back-pressured"} and walk.audit.ok
    back = walk.status == "back-pressured"
    assert back.mean() < 0.02 and np.all(walk.station["5"].pressure[back] < 20.1e3)
    out, throat = walk.station[station], walk.station["5"]
    assert np.abs(out.area / throat.area / ratio - 1.0)[~back].max() < 1e-12
    same = ~back & (ratio == 1.0)
    for figure in ("pressure", "temperature", "velocity", "mach"):
        assert np.abs(out[figure] / throat[figure] - 1.0)[same].max() < 1e-11  # the speed is a root of a difference of enthalpies
    assert np.abs(out.mach[same] - 1.0).max() < 1e-10
    assert out.mach[~back].min() > 1.0 - 1e-10


@pytest.mark.parametrize("model", GASES)
@pytest.mark.parametrize("end", EXITS)
@pytest.mark.parametrize("quality", QUALITIES)
def test_lossy_nozzle_has_an_exit_or_is_too_small_for_its_losses(model: str, end: str, quality: str) -> None:
    """Losses from rounding to a fifth. A drop counted from the throat leaves ratio 1 possible; one counted from rest does not."""
    nozzle, key, station = EXITS[end]
    loss = 10.0 ** np.random.default_rng(22).uniform(-14.0, -0.7, POINTS)
    loss[::5] = 0.0
    ratio = hardly_wider(POINTS)
    changes = family(POINTS) | {key: ratio, f"nozzle.{quality}": 1.0 - loss}
    walk = solved(model, f"{nozzle}\n{quality} = 0.9", changes)
    assert set(walk.status.tolist()) <= {"solved", "back-pressured", "under-expanded"} and walk.audit.ok
    small = walk.status == "under-expanded"
    assert not small[loss == 0.0].any() and small.any() == (quality != "expansion_efficiency")
    assert small[(ratio - 1.0 < 1e-6) & (loss > 1e-5)].all() or quality == "expansion_efficiency"
    full = walk.status == "solved"
    assert np.abs(walk.station[station].area / walk.station["5"].area / ratio - 1.0)[full].max() < 2e-9


def least_ratio(c: float, g: float) -> float:
    """Least area over the throat's that a velocity coefficient c leaves, at constant gamma: the largest rho c u_s(p) over p. Its
    derivative vanishes at M_s^2 = 1/(g - c^2 (g - 1) T_s/T), T/T_s = 1 + (1 - c^2)(g - 1)/2 M_s^2."""
    square = 1.0
    for _ in range(200):
        hotter = 1.0 + (1.0 - c**2) * 0.5 * (g - 1.0) * square
        square = 1.0 / (g - c**2 * (g - 1.0) / hotter)
    rest = 1.0 + 0.5 * (g - 1.0) * square
    flux = c * np.sqrt(square) * rest ** (-0.5 * (g + 1.0) / (g - 1.0)) / (1.0 + (1.0 - c**2) * 0.5 * (g - 1.0) * square)
    return float((2.0 / (g + 1.0)) ** (0.5 * (g + 1.0) / (g - 1.0)) / flux)


@pytest.mark.parametrize("quality", ["velocity_coefficient", "expansion_efficiency_from_total"])
def test_loss_ends_the_nozzle_where_the_closed_form_says(quality: str) -> None:
    """Just above the least area ratio there is an exit, just below it the status says that the exit is too small; no value jumps."""
    cp, gas_constant = 1004.5, 287.0
    gamma = cp / (cp - gas_constant)
    c = np.array([0.9, 0.95, 0.98, 0.999, 0.9999])
    least = np.array([least_ratio(x, gamma) for x in c])
    given = c if quality == "velocity_coefficient" else c**2
    near = np.array([-1e-6, 3e-9, 1e-7, 1e-4])[:, None]
    walk = solved(
        "constant-gamma", f"exit_area_ratio = 1.0\n{quality} = 0.9",
        {f"nozzle.{quality}": given * np.ones_like(near), "nozzle.exit_area_ratio": least * (1.0 + near)},
    )  # fmt: skip
    assert walk.status[0].tolist() == ["under-expanded"] * 5
    assert (walk.status[1:] == "solved").all()
    pressure = walk.station["10"].pressure
    assert np.abs(pressure[1] / pressure[2] - 1.0).max() < 1e-3 and np.all(pressure[3] < pressure[2])


def test_exit_given_by_its_area_is_that_given_by_its_pressure() -> None:
    """The two ends of an expansion with losses are one: the area of an exit of given pressure gives that pressure back."""
    changes = family(POINTS)
    first = solved("constant-gamma", "exit_pressure = 20e3\nvelocity_coefficient = 0.97", changes)
    ratio = first.station["10"].area / first.station["5"].area
    known = (first.status == "solved") & (first.station["10"].mach > 1.0)
    again = solved(
        "constant-gamma", "exit_area_ratio = 1.0\nvelocity_coefficient = 0.97",
        {k: v[known] for k, v in changes.items()} | {"nozzle.exit_area_ratio": ratio[known]},
    )  # fmt: skip
    assert known.sum() > 400 and (again.status == "solved").all()
    assert np.abs(again.station["10"].pressure / 20e3 - 1.0).max() < 1e-6


@pytest.mark.parametrize("place", ['freeze_station = "5"', "freeze_area_ratio = 1.0", "freeze_mach = 1.0"])
@pytest.mark.parametrize("quality", ["velocity_coefficient", "expansion_efficiency"])
def test_composition_kept_from_the_throat_fills_the_exit_asked_for(place: str, quality: str) -> None:
    """The kept composition is a little subsonic there. The exit has the area asked for, or none."""
    ratio = hardly_wider(200)
    walk = solved(
        "equilibrium", f'exit_area_ratio = 1.0\nchemistry = "frozen-after"\n{place}\n{quality} = 0.9',
        family(200) | {"nozzle.exit_area_ratio": ratio, f"nozzle.{quality}": np.where(np.arange(200) % 2, 1.0, 0.97)},
    )  # fmt: skip
    assert set(walk.status.tolist()) <= set(STATUSES) - {"not-converged"} and walk.audit.ok
    full = walk.status == "solved"
    assert full.sum() > 90
    assert np.abs(walk.station["10"].area / walk.station["5"].area / ratio - 1.0)[full].max() < 2e-9


def test_internal_nozzle_behind_a_throat_that_keeps_its_composition() -> None:
    walk = solved(
        "equilibrium", 'exit_pressure = 20e3\ninternal_area_ratio = 1.0\nchemistry = "frozen-after"\nfreeze_station = "5"',
        family(40) | {"nozzle.internal_area_ratio": hardly_wider(40)},
    )  # fmt: skip
    assert (walk.status == "solved").all() and walk.audit.ok


def test_shock_limit_of_a_sonic_exit_does_not_flip_on_rounding() -> None:
    """A shock at Mach 1 changes nothing: the ambient pressure stands against that of the exit."""
    walk = solved("constant-gamma", "exit_area_ratio = 1.0", family(POINTS))
    row = next(limit for limit in walk.limits if limit.key == "nozzle_shock")
    known = walk.status == "solved"
    assert np.abs(row.actual / (20e3 / walk.station["10"].pressure) - 1.0)[known].max() < 1e-12
