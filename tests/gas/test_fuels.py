from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from cycle.constants import STANDARD_AIR
from cycle.gas.fuels import FUELS, parse_formula, user_fuel
from cycle.gas.species import evaluate, listed_rows


@pytest.mark.parametrize("name", ["hydrogen", "methane", "ethylene", "propane"])
def test_heating_value_against_cantera(name: str) -> None:
    import cantera as ct

    fuel = FUELS[name]
    names = [fuel.vapour, "O2", "CO2", "H2O", "N2"]
    gas = ct.Solution(thermo="ideal-gas", species=[s for s in ct.Species.list_from_file("nasa_gas.yaml") if s.name in names])
    gas.TP = 298.15, 1e5
    gas.set_equivalence_ratio(1.0, f"{fuel.vapour}:1", "O2:1")
    before, share = gas.h, gas.mass_fraction_dict()[fuel.vapour]
    gas.X = {"CO2": fuel.atoms.get("C", 0.0), "H2O": fuel.atoms["H"] / 2.0}
    # Cantera's own polynomials; ours are shifted by less than 6e-8 above 1000 K only
    assert fuel.lower_heating_value() == pytest.approx((before - gas.h) / share, rel=1e-9)


def test_kerosene_liquid_is_the_listed_one() -> None:
    import cantera as ct

    listed = {s.name: s for s in ct.Species.list_from_file("nasa_condensed.yaml")}["Jet-A(L)"]
    fuel = FUELS["kerosene"]
    # printed with the digits of the constants in the source
    assert fuel.formation_enthalpy == pytest.approx(listed.thermo.h(298.15) / 1e3, abs=0.01)
    assert fuel.standard_entropy == pytest.approx(listed.thermo.s(298.15) / 1e3, abs=1e-4)
    assert fuel.liquid_specific_heat == pytest.approx(listed.thermo.cp(298.15) / 1e3 / fuel.molar_mass, rel=1e-6)
    assert fuel.atoms == listed.composition


@pytest.mark.memory
def test_jp10_heating_value() -> None:
    # CRC Handbook of Aviation Fuel Properties, JP-10 typical, recalled: 42.1 MJ/kg, batch spread 0.2
    assert FUELS["jp-10"].lower_heating_value() == pytest.approx(42.1e6, abs=0.2e6)


@pytest.mark.parametrize("name", FUELS)
def test_vapour_carries_the_heat_of_vaporisation(name: str) -> None:
    fuel = FUELS[name]
    h, _, _ = evaluate(fuel.vapour_rows(), 298.15)
    liquid = fuel.total_enthalpy(298.15)
    assert float(h) / fuel.molar_mass - float(liquid) == pytest.approx(fuel.heat_of_vaporisation, abs=1e-3)


def test_gas_enthalpy_and_entropy_are_those_of_the_species() -> None:
    T = np.array([250.0, 300.0, 700.0])
    h, s, _ = evaluate(listed_rows("CH4"), T)
    fuel = FUELS["methane"]
    np.testing.assert_allclose(fuel.total_enthalpy(T), h / fuel.molar_mass, rtol=1e-14)
    np.testing.assert_allclose(fuel.entropy(T, 1e5), s / fuel.molar_mass, rtol=1e-14)
    np.testing.assert_allclose(fuel.entropy(T, 1e6), (s - 8.31446261815324 * np.log(10.0)) / fuel.molar_mass, rtol=1e-14)


def test_unknown_entropy_is_not_a_number() -> None:
    assert np.isnan(FUELS["jp-10"].entropy(np.array([300.0, 310.0]), 1e6)).all()


def test_stoichiometric_ratio_uses_up_the_oxygen() -> None:
    fuel = FUELS["kerosene"]
    air = {"N2": 0.7, "O2": np.array([0.2, 0.05]), "H2O": 0.1, "CO2": np.array([0.0, 0.15])}
    ratio = fuel.stoichiometric_ratio(air)
    mass = 0.7 * 28.014 + air["O2"] * 31.998 + 0.1 * 18.015 + air["CO2"] * 44.009
    np.testing.assert_allclose(ratio * mass / 1e3 / fuel.molar_mass * 17.75, air["O2"], rtol=1e-12)
    assert float(fuel.stoichiometric_ratio({"N2": 1.0})) == 0.0


@settings(deadline=None, max_examples=50)
@given(st.floats(5e6, 150e6), st.integers(1, 20), st.integers(0, 40), st.sampled_from(["gas", "liquid"]))
def test_heating_value_given_is_heating_value_found(value: float, c: int, h: int, phase: str) -> None:
    liquid = {"liquid_specific_heat": 2000.0, "heat_of_vaporisation": 3e5} if phase == "liquid" else {}
    fuel = user_fuel(f"C{c}H{h}", phase, heating_value=value, vapour_specific_heat=2500.0, **liquid)
    assert fuel.lower_heating_value() == pytest.approx(value, rel=1e-12)


@settings(deadline=None, max_examples=50)
@given(st.text(max_size=60))
def test_any_text_gives_a_formula_or_a_clear_refusal(text: str) -> None:
    try:
        atoms = dict(parse_formula(text))
    except ValueError as refusal:
        assert "fuel formula" in str(refusal)
    else:
        assert set(atoms) <= set("CHNO")
        assert all(0.0 < n <= 200.0 for n in atoms.values())


def test_formulas() -> None:
    assert parse_formula("C10H16") == (("C", 10.0), ("H", 16.0))
    assert parse_formula("CH3NO2CH2") == (("C", 2.0), ("H", 5.0), ("N", 1.0), ("O", 2.0))
    assert parse_formula("C12.3H22.1") == (("C", 12.3), ("H", 22.1))


@pytest.mark.parametrize("text", ["", "CO2", "H2O", "c10h16", "C10 H16", "C-1H4", "C1e5H2", "Fe2", "N2", "H" * 41, "C201H4", "H\n2"])
def test_formulas_refused(text: str) -> None:
    with pytest.raises(ValueError, match="fuel formula"):
        parse_formula(text)


@pytest.mark.parametrize(
    ("changes", "words"),
    [
        ({"formation_enthalpy": None}, "exactly one"),
        ({"heating_value": 42e6}, "exactly one"),
        ({"liquid_specific_heat": None}, "needs its specific heat"),
        ({"phase": "gas"}, "gaseous fuel"),
        ({"vapour_specific_heat": 0.0}, "vapour specific heat must be positive"),
        ({"heat_of_vaporisation": float("nan")}, "heat of vaporisation must be positive"),
    ],
)
def test_user_fuel_refusals(changes: dict[str, object], words: str) -> None:
    given_fuel = {
        "phase": "liquid",
        "formation_enthalpy": -1e5,
        "vapour_specific_heat": 2500.0,
        "liquid_specific_heat": 2000.0,
        "heat_of_vaporisation": 3e5,
    }
    with pytest.raises(ValueError, match=words):
        user_fuel("C10H16", **(given_fuel | changes))


def test_oxygen_in_the_fuel_lowers_its_need() -> None:
    methanol = user_fuel("CH4O", "gas", formation_enthalpy=-201e3, vapour_specific_heat=1400.0)
    # CH3OH + 1.5 O2 -> CO2 + 2 H2O
    assert methanol.oxygen_need() == 1.5
    assert float(methanol.stoichiometric_ratio(STANDARD_AIR)) == pytest.approx(0.2095 / 1.5 * 32.042 / 28.9644, rel=1e-4)
