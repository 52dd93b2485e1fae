from __future__ import annotations

from collections.abc import Mapping

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.optimize import minimize

from cycle.evidence import Check
from cycle.flow import isentropic, limits, shocks
from tests.evidence_support import Solver, assert_met, number, numbers, parametrised, unmapped


def _ram_recovery(check: Check) -> Mapping[str, float]:
    return {key: float(limits.ram_recovery(float(key.rsplit("=", 1)[1]))) for key in check.expected}


def _contraction(check: Check) -> Mapping[str, float]:
    m, g = number(check, "M_i"), number(check, "gamma")
    starting = limits.starting_contraction_limit(m, g)
    return {
        "CR_Kantrowitz": starting,
        "CR_isentropic": limits.isentropic_contraction_limit(m, g),
        "Ath/Ai_Kantrowitz": 1.0 / starting,
    }


def _contraction_at_infinity(check: Check) -> Mapping[str, float]:
    limit = limits.starting_contraction_limit(np.inf, number(check, "gamma"))
    return {"CR_Kantrowitz_limit": limit, "Ath/Ai_Kantrowitz_limit": 1.0 / limit}


def _self_start(check: Check) -> Mapping[str, float]:
    g = number(check, "gamma")
    return {
        "CR_Kantrowitz at M 3": limits.starting_contraction_limit(3.0, g),
        "CR_Kantrowitz at M 6": limits.starting_contraction_limit(6.0, g),
        "CR_isentropic at M 6": limits.isentropic_contraction_limit(6.0, g),
    }


def _overspeed(check: Check) -> Mapping[str, float]:
    m, g = number(check, "M_D"), number(check, "gamma")
    area = limits.isentropic_contraction_limit(m, g)
    behind = isentropic.subsonic_mach(area, g)
    return {"A1/Ath": area, "M_y": behind, "M_overspeed": shocks.mach_ahead(behind, g)}


def _pitot_inlet(check: Check) -> Mapping[str, float]:
    m, g = number(check, "M0"), number(check, "gamma")
    deeper = isentropic.supersonic_mach(isentropic.area_ratio(m, g) * number(check, "A_shock/A_lip"), g)
    return {
        "pt2/pt0_critical": shocks.normal_shock(m, g).total_pressure_ratio,
        "M_shock_supercritical": deeper,
        "pt2/pt0_supercritical": shocks.normal_shock(deeper, g).total_pressure_ratio,
    }


def _oswatitsch(check: Check) -> Mapping[str, float]:
    count = int(number(check, "oblique_shocks"))
    best = limits.best_equal_strength_shocks(number(check, "M0"), count, number(check, "gamma"))
    return {f"theta{i + 1}": turn for i, turn in enumerate(best.turns)} | {
        "pt_recovery_max": best.total_pressure_ratio,
        "M_n_each_oblique": best.normal_mach,
        "M_before_normal_shock": best.last_mach,
    }


def _kinetic_energy(check: Check) -> Mapping[str, float]:
    m, g = number(check, "M0"), number(check, "gamma")
    return {"eta_KE": limits.kinetic_energy_efficiency(number(check, "pi_c"), m, g)}


def _recovery(check: Check) -> Mapping[str, float]:
    m, g = number(check, "M0"), number(check, "gamma")
    return {"pi_c": limits.total_pressure_ratio(number(check, "eta_KE"), m, g)}


def _adiabatic(check: Check) -> Mapping[str, float]:
    done = limits.adiabatic_compression(*(number(check, key) for key in ("psi=T3/T0", "eta_c", "M0", "gamma")))
    return {
        "p3/p0": done.pressure_ratio,
        "pt3/pt0": done.total_pressure_ratio,
        "eta_KE": done.kinetic_energy_efficiency,
        "M3": done.mach,
    }


def _mach_loss(check: Check) -> Mapping[str, float]:
    return {"eta_KE": limits.mach_loss_efficiency(number(check, "M0"), number(check, "M3"))}


def _shock_train(height: str, section: str) -> Solver:
    def solve(check: Check) -> Mapping[str, float]:
        given_values = (number(check, key) for key in ("M_u", "p_d/p_u", "theta", "Re_theta", height))
        return {"s": limits.shock_train_length(*given_values, section=section)}

    return solve


def _ramps(check: Check) -> Mapping[str, float]:
    m, g = number(check, "M0"), number(check, "gamma")
    found, pressure, temperature, recovery = {}, 1.0, 1.0, 1.0
    for i, turn in enumerate(numbers(check, "ramp_turns")):
        shock = shocks.oblique_shock(m, turn, g)
        found[f"beta{i + 1}"], m = shock.wave_angle, shock.mach
        pressure, temperature = pressure * shock.pressure_ratio, temperature * shock.temperature_ratio
        recovery *= shock.total_pressure_ratio
    return found | {"M_out": m, "p_out/p0": pressure, "T_out/T0": temperature, "pt_out/pt0": recovery}


def _critical(check: Check) -> Mapping[str, float]:
    critical = isentropic.critical_ratios(number(check, "gamma"))
    return {"p*/pt": critical.pressure, "T*/Tt": critical.temperature, "rho*/rhot": critical.density}


SOLVERS: dict[str, Solver] = {
    "mil5008b-": _ram_recovery,
    "kantrowitz-M": _contraction,
    "kantrowitz-Minf": _contraction_at_infinity,
    "FAR-5.1": _overspeed,
    "FAR-5.4": _pitot_inlet,
    "oswatitsch-": _oswatitsch,
    "eke-M": _kinetic_energy,
    "eke-inv-": _recovery,
    "eke-waltrup-": _mach_loss,
    "etac-": _adiabatic,
    "waltrup-billig-M2.0-cylindrical": _shock_train("D", "circular"),
    "waltrup-billig-M2.5-rectangular": _shock_train("H", "rectangular"),
    "ramps-": _ramps,
}
PRACTICE_SOLVERS: dict[str, Solver] = {"critical-ratios-": _critical, "self-start-": _self_start}
RANGES_OF_PRACTICE = {
    "corridor": "the usual band of flight dynamic pressure: a default threshold, no formula",
    "efficiencies": "usual ranges of input efficiencies: nothing is computed",
}


@parametrised("f", SOLVERS)
def test_inlet_and_isolator_formulas(check: Check, solver: Solver) -> None:
    assert_met(check, solver(check))


@parametrised("i", PRACTICE_SOLVERS)
def test_facts_of_practice(check: Check, solver: Solver) -> None:
    assert_met(check, solver(check))


def test_no_inlet_check_is_left_out_but_ranges() -> None:
    assert unmapped("f", SOLVERS) == set()
    assert unmapped("i", PRACTICE_SOLVERS) == set(RANGES_OF_PRACTICE)


@pytest.mark.parametrize(("mach", "count"), [(2.0, 1), (3.0, 2), (2.5, 3)])
def test_equal_strength_is_the_best_of_all_ramp_angles(mach: float, count: int) -> None:
    best = limits.best_equal_strength_shocks(mach, count, 1.4)

    def lost(turns: np.ndarray) -> float:
        m, recovery = mach, 1.0
        for turn in turns:
            shock = shocks.oblique_shock(m, turn, 1.4)
            m, recovery = float(shock.mach), recovery * float(shock.total_pressure_ratio)
        whole = recovery * float(shocks.normal_shock(m, 1.4).total_pressure_ratio)
        return 1.0 if np.isnan(whole) else 1.0 - whole

    start = np.full(count, np.radians(8.0))
    free = minimize(lost, start, method="Nelder-Mead", options={"xatol": 1e-7, "fatol": 1e-13, "maxiter": 4000})
    # the peak is flat: angles free to move one by one end within 1e-4 rad of equal strength, the recovery within 1e-9
    assert abs((1.0 - free.fun) - best.total_pressure_ratio) < 1e-9
    np.testing.assert_allclose(free.x, best.turns, atol=1e-4)


@settings(deadline=None, max_examples=50)
@given(st.floats(1.1, 15.0), st.floats(0.001, 1.0), st.floats(1.1, 1.6))
def test_recovery_and_kinetic_energy_efficiency_are_inverse(m: float, ratio: float, g: float) -> None:
    efficiency = limits.kinetic_energy_efficiency(ratio, m, g)
    # one minus the efficiency times M^2 is what the pressure ratio depends on
    assert abs(limits.total_pressure_ratio(efficiency, m, g) / ratio - 1.0) < 1e-14 * (1.0 + m**2) * g / (g - 1.0)


@settings(deadline=None, max_examples=50)
@given(st.floats(2.0, 15.0), st.floats(0.0, 0.95), st.floats(0.5, 1.0), st.floats(1.1, 1.6))
def test_compression_is_consistent_with_its_own_total_state(m: float, part: float, efficiency: float, g: float) -> None:
    psi = 1.0 + part * 0.5 * (g - 1.0) * m**2
    done = limits.adiabatic_compression(psi, efficiency, m, g)
    rest = isentropic.pressure_ratio(m, g) / isentropic.pressure_ratio(done.mach, g)
    assert abs(done.pressure_ratio * rest / done.total_pressure_ratio - 1.0) < 1e-10
    assert abs(limits.kinetic_energy_efficiency(done.total_pressure_ratio, m, g) - done.kinetic_energy_efficiency) < 1e-11


@settings(deadline=None, max_examples=50)
@given(st.floats(1.01, 20.0), st.floats(1.05, 1.67))
def test_a_contraction_that_starts_also_passes(m: float, g: float) -> None:
    assert 1.0 <= limits.starting_contraction_limit(m, g) <= limits.isentropic_contraction_limit(m, g)
    # the shock's loss is the ratio of the two limits
    loss = shocks.normal_shock(m, g).total_pressure_ratio
    both = limits.starting_contraction_limit(m, g) / limits.isentropic_contraction_limit(m, g)
    assert abs(both / loss - 1.0) < 1e-10


@pytest.mark.memory
def test_separation_criterion_as_recalled() -> None:
    # Korkegi, AIAA Journal 13 (1975) 534: 1 + 0.3 M^2 to M 4.5, then 0.17 M^2.5; M 4.5 gives 7.075 and 7.303
    np.testing.assert_allclose(limits.separation_pressure_ratio([2.0, 4.5, 4.500001, 6.0]), [2.2, 7.075, 7.303, 14.991], atol=5e-4)


def test_without_a_solution_there_is_no_value() -> None:
    assert np.isnan(limits.separation_pressure_ratio([1.0, 0.5, np.nan])).all()
    assert np.isnan(limits.ram_recovery([-1.0, np.nan])).all()
    assert np.isnan(limits.isentropic_contraction_limit(0.9, 1.4))
    assert np.isnan(limits.starting_contraction_limit(0.9, 1.4))
    assert np.isnan(limits.shock_train_length([0.9, 2.0], [2.0, 0.9], 1e-3, 1e4, 0.1, "circular")).all()
    assert np.isnan(limits.mach_loss_efficiency(2.0, 3.0))
    # below T0, and above the total temperature of Mach 2 (1.8 T0)
    assert np.isnan(limits.adiabatic_compression([0.9, 1.81], 0.9, 2.0, 1.4).pressure_ratio).all()
    assert np.isnan(limits.kinetic_energy_efficiency([0.0, 0.5], [2.0, 0.0], 1.4)).all()
    assert np.isnan(limits.equal_strength_shocks(2.0, 2.1, 1, 1.4).total_pressure_ratio)
    assert limits.shock_train_length(2.0, 1.0, 1e-3, 1e4, 0.1, "rectangular") == 0.0
    with pytest.raises(KeyError, match="oval"):
        limits.shock_train_length(2.0, 2.0, 1e-3, 1e4, 0.1, "oval")
