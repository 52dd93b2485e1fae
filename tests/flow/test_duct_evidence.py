"""Topic b of the evidence: Rayleigh and Fanno flow, tables and worked duct examples."""

from __future__ import annotations

from collections.abc import Mapping

import numpy as np

from cycle.evidence import Check
from cycle.flow import fanno, isentropic, rayleigh
from tests.evidence_support import Solver, assert_met, number, parametrised, unmapped


def _rayleigh(check: Check) -> Mapping[str, float]:
    m, g = number(check, "M"), number(check, "gamma")
    return {
        "p/p*": rayleigh.pressure_ratio(m, g),
        "T/T*": rayleigh.temperature_ratio(m, g),
        "Tt/Tt*": rayleigh.total_temperature_ratio(m, g),
        "pt/pt*": rayleigh.total_pressure_ratio(m, g),
        "V/V*": rayleigh.velocity_ratio(m, g),
    }


def _fanno(check: Check) -> Mapping[str, float]:
    m, g = number(check, "M"), number(check, "gamma")
    return {
        "p/p*": fanno.pressure_ratio(m, g),
        "T/T*": fanno.temperature_ratio(m, g),
        "pt/pt*": fanno.total_pressure_ratio(m, g),
        "V/V*": fanno.velocity_ratio(m, g),
        "I/I*": fanno.impulse_ratio(m, g),
        "4fLmax/D": fanno.longest_duct(m, g),
    }


def _hottest(check: Check) -> Mapping[str, float]:
    g = number(check, "gamma")
    hottest = rayleigh.hottest_point(g)
    return {
        "M_maxT": hottest.mach,
        "T/T*": hottest.temperature_ratio,
        "Tt/Tt*": rayleigh.total_temperature_ratio(hottest.mach, g),
        "p/p*": rayleigh.pressure_ratio(hottest.mach, g),
    }


def _rayleigh_limit(check: Check) -> Mapping[str, float]:
    limit = rayleigh.hypersonic_total_temperature_ratio(number(check, "gamma"))
    return {"Tt/Tt*_limit": limit, "max_Tt_ratio_to_choke_from_M_inf": 1.0 / limit}


def _fanno_limit(check: Check) -> Mapping[str, float]:
    return {"4fLmax/D_limit": fanno.hypersonic_longest_duct(number(check, "gamma"))}


def _choking(check: Check) -> Mapping[str, float]:
    return {"Tt*/Tt": rayleigh.largest_heat_ratio(number(check, "M"), number(check, "gamma"))}


def _heated(m1: float, t1: float, p1: float, tt2: float, g: float) -> dict[str, float]:
    """A stream heated to a total temperature, on the branch it comes from."""
    tt1 = t1 / isentropic.temperature_ratio(m1, g)
    m2 = rayleigh.mach_from_total_temperature(rayleigh.total_temperature_ratio(m1, g) * tt2 / tt1, g, supersonic=m1 > 1.0)
    p2 = p1 * rayleigh.pressure_ratio(m2, g) / rayleigh.pressure_ratio(m1, g)
    t2 = t1 * rayleigh.temperature_ratio(m2, g) / rayleigh.temperature_ratio(m1, g)
    pt2 = p2 / isentropic.pressure_ratio(m2, g)
    return {"M1": m1, "Tt1": tt1, "Tt2": tt2, "M2": m2, "p2": p2, "T2": t2, "pt2": pt2}


def _burner_from_speed(check: Check) -> Mapping[str, float]:
    g, r, cp, t1 = (number(check, key) for key in ("gamma", "R", "cp", "T1"))
    m1 = number(check, "V1") / np.sqrt(g * r * t1)
    heat = number(check, "heating_value") / number(check, "air_fuel_ratio")
    tt2 = t1 / isentropic.temperature_ratio(m1, g) + heat / cp
    found = _heated(m1, t1, number(check, "p1"), tt2, g)
    return found | {"V2": found["M2"] * np.sqrt(g * r * found["T2"])}


def _burner_from_heat(check: Check) -> Mapping[str, float]:
    g, m1, t1 = (number(check, key) for key in ("gamma", "M1", "T1"))
    tt2 = t1 / isentropic.temperature_ratio(m1, g) + number(check, "q") / number(check, "cp")
    return _heated(m1, t1, number(check, "p1"), tt2, g)


def _choked(check: Check) -> Mapping[str, float]:
    g, r, m1, tt1 = (number(check, key) for key in ("gamma", "R", "M1", "Tt1"))
    tt2 = tt1 * rayleigh.largest_heat_ratio(m1, g)
    heat = g * r / (g - 1.0) * (tt2 - tt1)
    return {"Tt2_choked": tt2, "q_to_choke": heat, "pt_loss_fraction": 1.0 - 1.0 / rayleigh.total_pressure_ratio(m1, g)}


def _choked_hydrogen(check: Check) -> Mapping[str, float]:
    found = dict(_choked(check))
    return found | {"f_to_choke": found["q_to_choke"] / number(check, "heating_value")}


SOLVERS: dict[str, Solver] = {
    "ray-tab-": _rayleigh,
    "ray-M": _rayleigh,
    "fan-tab-": _fanno,
    "fan-M": _fanno,
    "ray-maxT-": _hottest,
    "ray-Minf-": _rayleigh_limit,
    "fan-Minf-": _fanno_limit,
    "ray-choke-": _choking,
    "ray-CB-17-15": _burner_from_speed,
    "ray-MUR-4.2": _burner_from_heat,
    "ray-FAR-2.6": _choked,
    "ray-FAR-2.7": _choked_hydrogen,
}


@parametrised("b", SOLVERS)
def test_duct_flow_tables(check: Check, solver: Solver) -> None:
    assert_met(check, solver(check))


def test_no_duct_flow_check_is_left_out() -> None:
    assert unmapped("b", SOLVERS) == set()
