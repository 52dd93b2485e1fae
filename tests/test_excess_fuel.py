"""Fuel beyond the oxygen: what the burnt fraction means above equivalence ratio 1, in every gas model, as the case chooses."""

from __future__ import annotations

from pathlib import Path

import cantera as ct
import numpy as np
import pytest

import cycle
from cycle.case import template
from cycle.quantities import INPUT

CASES = Path(__file__).parents[1] / "cases"
SIMPLE = """format = 1
title = "rich burner, invented"
[entry]
mach = 0.3
pressure = "300 kPa"
temperature = "900 K"
area = 0.01
[gas]
model = "equilibrium"
[air]
mole_fractions = { N2 = 0.79, O2 = 0.21 }
[fuel]
name = "hydrogen"
[combustor]
process = "constant-pressure"
equivalence_ratio = 1.8
burnt_fraction = 0.9
"""


def both(case: cycle.Case, changes: dict[str, object]) -> tuple[cycle.Walk, cycle.Walk]:
    reacts, inert = (cycle.solve(case.replace({"combustor.excess_fuel": how}), changes) for how in ("reacts", "inert"))
    return reacts, inert


@pytest.mark.parametrize("name", ["bench-three", "saltmarsh", "tidegate", "breakwater"])
def test_both_choices_agree_to_rounding_up_to_stoichiometric(name: str) -> None:
    """Vitiated air, simple burners and ducts; random equivalence ratios up to 1."""
    rng = np.random.default_rng(8)
    phi = np.concatenate([rng.uniform(0.0, 1.0, 12), [0.0, 1.0]])
    case = cycle.load(CASES / f"{name}.toml").replace({"combustor.process": "constant-pressure"} if name == "saltmarsh" else {"notes": "x"})
    reacts, inert = both(case, {"combustor.equivalence_ratio": phi})
    assert (reacts.status == inert.status).all() and (reacts.status == "solved").sum() > 1
    for station, figures in reacts.station.items():
        assert np.allclose(figures.temperature, inert.station[station].temperature, rtol=1e-9, equal_nan=True), station


def _cantera(species: list[str], moles: dict[str, float], inert: float, enthalpy: float, pressure: float) -> float:
    """Temperature, K, of the equilibrium of `species` beside inert H2, J/kg and Pa given: H2 that is made of a foreign element."""
    listed = {s.name: s for s in ct.Species.list_from_file("nasa_gas.yaml")}
    alien = ct.Species("alien", {"U": 2.0 * ct.Element("H").weight / ct.Element("U").weight})
    alien.thermo = listed["H2"].thermo
    every = [*(listed[n] for n in species), alien]
    for one in every:  # the file's polynomials hold at 1 bar
        one.thermo = ct.NasaPoly2(one.thermo.min_temp, one.thermo.max_temp, 1e5, one.thermo.coeffs)
    gas = ct.Solution(thermo="ideal-gas", species=every)
    gas.TPX = 2500.0, pressure, {**moles, "alien": inert}
    gas.HP = enthalpy, pressure
    gas.equilibrate("HP", rtol=1e-11)
    return float(gas.T)


@pytest.mark.parametrize(("phi", "burnt"), [(1.8, 0.9), (1.2, 1.0), (3.0, 0.75), (0.8, 0.9)])
def test_inert_excess_is_a_stoichiometric_burner_with_more_inert_fuel(phi: float, burnt: float) -> None:
    """Balances at constant pressure written out here, equilibrium by Cantera's own solver and files."""
    walk = cycle.solve(
        cycle.loads(SIMPLE).replace(
            {"combustor.equivalence_ratio": phi, "combustor.burnt_fraction": burnt, "combustor.excess_fuel": "inert"}
        )
    )
    assert walk.status == "solved" and walk.audit.ok
    before, after = walk.station["3"], walk.station["4"]
    air = ct.Solution("air.yaml")
    air.TPX = 900.0, 3e5, {"N2": 0.79, "O2": 0.21}
    listed = {s.name: s for s in ct.Species.list_from_file("nasa_gas.yaml") if s.name in ("N2", "O2", "H2")}
    hydrogen = 2.0 * 0.21 * phi  # mol a mol of air
    reacting = burnt * min(hydrogen, 0.42)
    masses = {name: ct.Solution(thermo="ideal-gas", species=[listed[name]]).mean_molecular_weight / 1e3 for name in listed}
    air_mass, fuel_mass = 0.79 * masses["N2"] + 0.21 * masses["O2"], hydrogen * masses["H2"]
    enthalpy = {name: listed[name].thermo.h(T) / 1e3 for name, T in (("N2", 900.0), ("O2", 900.0), ("H2", 300.0))}
    brought = 0.79 * enthalpy["N2"] + 0.21 * enthalpy["O2"] + hydrogen * enthalpy["H2"]
    u = before.velocity * air_mass / (air_mass + fuel_mass)
    total = (brought + 0.5 * air_mass * before.velocity**2) / (air_mass + fuel_mass)
    moles = {"N2": 0.79, "O2": 0.21, "H2": reacting}
    species = [name for name in after.mole_fractions if not name.startswith("unburnt")]
    assert {"H", "OH", "O", "NO", "HO2"} <= set(species)
    expected = _cantera(species, moles, hydrogen - reacting, total - 0.5 * u**2, 3e5)
    # atomic masses are rounded differently, and the joint of the polynomials at 1000 K is closed
    assert after.temperature == pytest.approx(expected, abs=0.03)
    assert after.mole_fractions["unburnt hydrogen"] > 0.0


def test_inert_excess_burns_what_the_frozen_gas_burns() -> None:
    """Elements bound in inert fuel above equivalence ratio 1: the same in both gases, for simple burners and ducts, staged too."""
    phi = np.array([0.7, 1.0, 1.3, 2.0, 3.0])
    for name in ("bench-three", "tidegate"):
        case = cycle.load(CASES / f"{name}.toml").replace({"combustor.burnt_fraction": 0.6})
        case = case.replace({"flight.mach": 7.0} if name == "tidegate" else {"combustor.process": "constant-pressure"})
        _, inert = both(case, {"combustor.equivalence_ratio": phi})
        other = {"gas.model": "frozen"} | ({"inlet.chemistry": None, "nozzle.chemistry": None} if name == "tidegate" else {})
        frozen = cycle.solve(case.replace(other), {"combustor.equivalence_ratio": phi})
        left = [w.station["4"].mole_fractions[f"unburnt {case.choices['fuel.name']}"] / w.station["4"].molar_mass for w in (inert, frozen)]
        known = (inert.status == "solved") & (frozen.status == "solved")
        assert known.sum() >= 3 and np.abs(left[0] / left[1] - 1.0)[known].max() < 1e-9


def test_choice_stands_where_it_means_something_and_is_said() -> None:
    rich = cycle.loads(SIMPLE)
    assert rich.choices["combustor.excess_fuel"] == "reacts"
    assert "combustor.excess_fuel" in INPUT["combustor.burnt_fraction"].meaning
    with pytest.raises(cycle.CaseError, match=r"excess_fuel: not used with gas\.model = frozen"):
        rich.replace({"gas.model": "frozen", "combustor.excess_fuel": "inert"})
    assert "excess_fuel" in template("flight")
    hot, cool = (cycle.solve(rich.replace({"combustor.excess_fuel": how})).station["4"].mole_fractions["H2"] for how in ("reacts", "inert"))
    assert hot > 3.0 * cool
