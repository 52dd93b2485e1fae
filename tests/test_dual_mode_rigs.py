"""Mode and exit impulse of dual-mode ducts agree with an independent march that finds the thermal throat in another way, by shooting."""

from __future__ import annotations

import math

import pytest

import cycle
from tests import dual_mode_rigs, scalar_gas, scalar_march, scalar_modes
from tests.random_flowpath import Case, loaded

CONSTANT = (4, 5, 13, 14, 16, 22, 29, 31, 34, 35)
FROZEN = (2, 7, 12, 32, 38)
EQUILIBRIUM = (8, 26)
"""Seeds of all modes and of the unstarted; `python -m tests.dual_mode_rigs 0 500` compares many."""

NAMED = (
    (dual_mode_rigs.ethylene_engine, 0.64, "scramjet-shock-train"),
    (dual_mode_rigs.ethylene_engine, 0.66, "ramjet-thermal-throat"),
    (dual_mode_rigs.ethylene_engine, 0.75, "ramjet-thermal-throat"),
    (dual_mode_rigs.ethylene_engine, 0.90, "ramjet-thermal-throat"),
    (dual_mode_rigs.ethylene_engine, 0.94, "ramjet-thermal-throat"),
    (dual_mode_rigs.hydrogen_engine, 6.0, "ramjet-thermal-throat"),
    (dual_mode_rigs.hydrogen_engine, 6.5, "ramjet-thermal-throat"),
    (dual_mode_rigs.hydrogen_engine, 7.0, "ramjet-thermal-throat"),
    (dual_mode_rigs.direct_connect_rig, 0.41, "scramjet-shock-train"),
    (dual_mode_rigs.direct_connect_rig, 0.42, "scramjet-shock-train"),
)  # fmt: skip


def _agrees(case: Case) -> dual_mode_rigs.Comparison:
    found = dual_mode_rigs.compare(cycle.solve(loaded(case)))
    assert found.outcome == "agrees", str(found)
    return found


@pytest.mark.parametrize("seed", (*CONSTANT, *FROZEN, *EQUILIBRIUM))
def test_random_rig_agrees_with_a_plain_march(seed: int) -> None:
    """Mode, exit impulse to 1e-3, and why there is no mode."""
    _agrees(dual_mode_rigs.dual_mode_rig(seed))


def test_random_rigs_hold_every_mode_and_gas() -> None:
    cases = {seed: dual_mode_rigs.dual_mode_rig(seed)["gas"]["model"] for seed in (*CONSTANT, *FROZEN, *EQUILIBRIUM)}
    expected = dict.fromkeys(CONSTANT, "constant-gamma") | dict.fromkeys(FROZEN, "frozen") | dict.fromkeys(EQUILIBRIUM, "equilibrium")
    assert cases == expected


@pytest.mark.parametrize(("case", "value", "mode"), NAMED)
def test_named_duct_agrees_with_a_plain_march(case, value: float, mode: str) -> None:  # type: ignore[no-untyped-def]
    assert _agrees(case(value)).own == mode


def _perfect(sections: tuple[tuple[float, float], ...], ratio: float, friction: float = 0.0) -> scalar_march.Duct:
    """A duct of cp 1004.5 J/(kg K), R 287 J/(kg K) at Mach 2.4; its fuel has neither enthalpy nor impulse of its own."""
    gas = scalar_gas.Perfect(1004.5, 287.0, 120e6)
    T, p, area = 620.0, 33e3, 0.05
    u = 2.4 * math.sqrt(1.4 * 287.0 * T)
    return scalar_march.Duct(
        gas, p, T, u, 2.4, p / (287.0 * T) * u * area, tuple((x, A * area) for x, A in sections),
        (scalar_march.Injection(0.0, 1.0, 0.0, 3.0, 1.0),), ratio, 0.92, 300.0, friction,
    )  # fmt: skip


def test_plain_march_meets_the_normal_shock_and_the_isentropic_area() -> None:
    """Closed forms of gamma 1.4: p2/p1 = (2 gamma M^2 - gamma + 1)/(gamma + 1); A/A* of the exit over that of the entry."""
    duct = _perfect(((0.0, 1.0), (1.2, 2.4)), 0.0)
    assert duct.normal_shock() / duct.pressure == pytest.approx((2.8 * 2.4**2 - 0.4) / 2.4, rel=1e-12)
    flow = scalar_modes.verdict(duct).flow

    def over_sonic(M: float) -> float:
        return ((1.0 + 0.2 * M * M) / 1.2) ** 3 / M

    assert flow is not None
    assert over_sonic(flow.mach) / over_sonic(2.4) == pytest.approx(2.4, rel=1e-7)
