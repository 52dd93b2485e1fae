"""Topic a of the evidence: isentropic flow, shocks, Prandtl-Meyer (NACA Report 1135 and textbook tables)."""

from __future__ import annotations

from collections.abc import Mapping

import numpy as np

from cycle.evidence import Check
from cycle.flow import isentropic as isen
from cycle.flow import prandtl_meyer as pm
from cycle.flow import shocks
from tests.evidence_support import Solver, assert_met, number, parametrised, unmapped


def _isentropic(check: Check) -> Mapping[str, float]:
    m, g = number(check, "M"), number(check, "gamma")
    p, t = isen.pressure_ratio(m, g), isen.temperature_ratio(m, g)
    return {
        "p/pt": p,
        "T/Tt": t,
        "pt/p": 1.0 / p,
        "Tt/T": 1.0 / t,
        "rho/rhot": isen.density_ratio(m, g),
        "A/A*": isen.area_ratio(m, g),
        "q/pt": isen.dynamic_pressure_ratio(m, g),
        "V/a*": isen.critical_velocity_ratio(m, g),
    }


def _area(check: Check) -> Mapping[str, float]:
    area, g = number(check, "A/A*"), number(check, "gamma")
    slow, fast = isen.subsonic_mach(area, g), isen.supersonic_mach(area, g)
    return {
        "M_sub": slow,
        "M_sup": fast,
        "p/pt": isen.pressure_ratio(fast, g),
        "T/Tt": isen.temperature_ratio(fast, g),
        "p/pt_sub": isen.pressure_ratio(slow, g),
        "p/pt_sup": isen.pressure_ratio(fast, g),
    }


def _normal(check: Check) -> Mapping[str, float]:
    m, g = number(check, "M1"), number(check, "gamma")
    shock = shocks.normal_shock(m, g)
    total = shock.total_pressure_ratio / isen.pressure_ratio(m, g)
    return {
        "M2": shock.mach,
        "p2/p1": shock.pressure_ratio,
        "rho2/rho1": shock.density_ratio,
        "T2/T1": shock.temperature_ratio,
        "pt2/pt1": shock.total_pressure_ratio,
        "pt2/p1": total,
        "p1/pt2": 1.0 / total,
    }


def _oblique(check: Check) -> Mapping[str, float]:
    m, g = number(check, "M1"), number(check, "gamma")
    shock = shocks.oblique_shock(m, number(check, "theta"), g)
    return {
        "beta": shock.wave_angle,
        "M2": shock.mach,
        "p2/p1": shock.pressure_ratio,
        "rho2/rho1": shock.density_ratio,
        "T2/T1": shock.temperature_ratio,
        "pt2/pt1": shock.total_pressure_ratio,
        "Cp": (shock.pressure_ratio - 1.0) / (0.5 * g * m**2),
    }


def _oblique_both(check: Check) -> Mapping[str, float]:
    m, g, p1, theta = (number(check, key) for key in ("M1", "gamma", "p1", "theta"))
    found = {}
    for name, strong in (("weak", False), ("strong", True)):
        shock = shocks.oblique_shock(m, theta, g, strong=strong)
        found |= {f"beta_{name}": shock.wave_angle, f"p2_{name}": p1 * shock.pressure_ratio, f"M2_{name}": shock.mach}
    return found


def _oblique_with_temperatures(check: Check) -> Mapping[str, float]:
    m, g, t1 = (number(check, key) for key in ("M1", "gamma", "T1"))
    shock = shocks.oblique_shock(m, number(check, "theta"), g)
    t2 = t1 * shock.temperature_ratio
    return dict(_oblique(check)) | {
        "T2": t2,
        "Tt2": t2 / isen.temperature_ratio(shock.mach, g),
        "pt2/p1": shock.pressure_ratio / isen.pressure_ratio(shock.mach, g),
    }


def _detachment(check: Check) -> Mapping[str, float]:
    limit = shocks.detachment(number(check, "M1"), number(check, "gamma"))
    return {"theta_max": limit.deflection, "beta_at_theta_max": limit.wave_angle}


def _prandtl_meyer(check: Check) -> Mapping[str, float]:
    m, g = number(check, "M"), number(check, "gamma")
    return {"nu": pm.angle(m, g), "mu": pm.mach_angle(m)}


def _largest_turn(check: Check) -> Mapping[str, float]:
    return {"nu_max": pm.largest_angle(number(check, "gamma"))}


def _turn(check: Check) -> Mapping[str, float]:
    after = pm.turn(number(check, "M1"), number(check, "turn"), number(check, "gamma"))
    return {"M2": after.mach, "p2/p1": after.pressure_ratio}


SOLVERS: dict[str, Solver] = {
    "isen": _isentropic,
    "naca1135-isen-": _isentropic,
    "area-": _area,
    "naca1135-ns-": _normal,
    "ns-": _normal,
    "obl-": _oblique,
    "obl-CB-17-11": _oblique_both,
    "obl-AN-9.2": _oblique_with_temperatures,
    "obl-thmax-": _detachment,
    "pm-": _prandtl_meyer,
    "pm-max": _largest_turn,
    "pm-turn-": _turn,
}


@parametrised("a", SOLVERS)
def test_perfect_gas_tables(check: Check, solver: Solver) -> None:
    assert_met(check, solver(check))


def test_no_perfect_gas_check_is_left_out() -> None:
    assert unmapped("a", SOLVERS) == set()


def test_tables_hold_in_one_call_over_all_points() -> None:
    # the same function on an array gives what it gives point by point
    m = np.array([1.2, 2.0, 5.0, 10.0])
    together = shocks.normal_shock(m, 1.4)
    for i, each in enumerate(m):
        np.testing.assert_array_equal([part[i] for part in together], shocks.normal_shock(each, 1.4))
