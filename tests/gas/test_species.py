from __future__ import annotations

import hashlib
import subprocess
import sys

import numpy as np
import pytest

from cycle.constants import GAS_CONSTANT, STANDARD_AIR
from cycle.gas.fuels import FUELS
from cycle.gas.referee import listed_data
from cycle.gas.species import (
    DATA_FILE,
    REACTING,
    atomic_mass,
    atoms_of,
    data_hash,
    evaluate,
    listed_rows,
    mass_of,
    species_data,
    species_table,
)
from cycle.gas.state import EXTRAPOLATED, INSIDE, OUT_OF_RANGE
from tests.gas.mixtures import frozen_air

AIR = tuple(STANDARD_AIR)
GASES = tuple(species_data()["species"])
SPECIES = (*GASES, "C(gr)")


@pytest.mark.parametrize("name", SPECIES)
def test_data_file_is_canteras_to_the_digit(name: str) -> None:
    entry = (species_data()["species"] | species_data()["condensed"])[name]
    assert (entry["atoms"], entry["low"], entry["high"]) == listed_data(name)


def test_atomic_weights_are_canteras() -> None:
    import cantera as ct

    for element, weight in species_data()["atomic_weight"].items():
        assert weight == ct.Element(element).weight


def test_reference_entropies_are_at_one_bar() -> None:
    # NIST-JANAF, 4th ed. (1998): S(298.15 K, 0.1 MPa) of N2 is 191.609 J/(mol K). At 1 atm it would be 0.110 lower;
    # the polynomial is within 0.004 of the table.
    assert abs(float(evaluate(listed_rows("N2"), 298.15)[1]) - 191.609) < 0.01


@pytest.mark.parametrize("name", SPECIES)
def test_polynomials_against_cantera(name: str) -> None:
    import cantera as ct

    atoms, low, high = listed_data(name)
    thermo = ct.NasaPoly2(200.0, 6000.0, 1e5, [1000.0, *high, *low])
    T = np.array([200.0, 250.0, 298.15, 700.0, 999.0, 1001.0, 2500.0, 5999.0])
    h, s, cp = evaluate(listed_rows(name), T)
    # the shift that makes h and s continuous at 1000 K is below 6e-8 of h, 5e-9 of s
    np.testing.assert_allclose(h, [thermo.h(t) / 1e3 for t in T], rtol=1e-9, atol=6e-8 * GAS_CONSTANT * 6e4)
    np.testing.assert_allclose(s, [thermo.s(t) / 1e3 for t in T], rtol=1e-8)
    np.testing.assert_allclose(cp, [thermo.cp(t) / 1e3 for t in T], rtol=1e-12)
    assert mass_of(atoms) == pytest.approx(ct.Species(name, atoms).molecular_weight / 1e3, rel=1e-12)


@pytest.mark.parametrize("name", SPECIES)
@pytest.mark.parametrize("joint", [200.0, 1000.0, 6000.0])
def test_enthalpy_and_entropy_are_continuous(name: str, joint: float) -> None:
    h, s, _ = evaluate(listed_rows(name), np.array([joint * (1.0 - 1e-12), joint * (1.0 + 1e-12)]))
    scale = GAS_CONSTANT * joint
    # rounding of terms of order 10-100 RT
    assert abs(h[1] - h[0]) < 1e-10 * (scale + abs(h[0]))
    assert abs(s[1] - s[0]) < 1e-10 * abs(s[0])


def test_heat_capacity_is_held_below_200_k() -> None:
    h, s, cp = evaluate(listed_rows("CO2"), np.array([150.0, 200.0]))
    assert cp[0] == pytest.approx(cp[1], rel=1e-12)
    assert h[1] - h[0] == pytest.approx(50.0 * cp[1], rel=1e-10)
    assert s[1] - s[0] == pytest.approx(cp[1] * np.log(200.0 / 150.0), rel=1e-10)


@pytest.mark.parametrize("name", SPECIES)
def test_heat_capacity_is_held_above_6000_k(name: str) -> None:
    h, _, cp = evaluate(listed_rows(name), np.array([6000.0, 20000.0]))
    assert cp[1] == pytest.approx(cp[0], rel=1e-12)
    assert h[1] - h[0] == pytest.approx(14000.0 * cp[0], rel=1e-10)


def test_ranges() -> None:
    gas = frozen_air(6)
    T = np.array([149.9, 150.0, 199.9, 200.0, 6000.0, 6000.1])
    expected = [OUT_OF_RANGE, EXTRAPOLATED, EXTRAPOLATED, INSIDE, INSIDE, OUT_OF_RANGE]
    assert gas.at("tp", T, 1e5).range.tolist() == expected


@pytest.mark.parametrize("fuel", [None, *FUELS])
def test_every_reacting_species_is_made_of_the_basis(fuel: str | None) -> None:
    table = species_table(AIR, None if fuel is None else FUELS[fuel])
    np.testing.assert_allclose(table.in_basis @ table.atoms[: table.basis], table.atoms[: table.reacting], atol=1e-12)
    np.testing.assert_array_equal(table.in_basis[: table.basis], np.eye(table.basis))
    np.testing.assert_allclose(table.atoms @ [atomic_mass(e) for e in table.elements], table.molar_mass, rtol=1e-14)


def test_reacting_set_follows_the_elements_of_the_choices() -> None:
    carbon = species_table(AIR, FUELS["methane"])
    assert set(carbon.names[: carbon.reacting]) == set(REACTING)
    assert carbon.names[:4] == ("H2O", "CO2", "N2", "O2")
    hydrogen = species_table(AIR, FUELS["hydrogen"])
    assert hydrogen.names[:3] == ("H2O", "N2", "O2")
    assert not any("C" in atoms_of(n) for n in hydrogen.names[: hydrogen.reacting])
    dry = species_table(AIR)
    assert set(dry.names) == {"N2", "O2", "O", "N", "NO", "NO2", "N2O", "Ar"}


def test_a_fuels_vapour_is_an_inert_row_of_its_own() -> None:
    table = species_table(AIR, FUELS["methane"])
    assert table.names[-1] == "unburnt methane"
    row = table.index["CH4"]
    assert row < table.reacting
    np.testing.assert_array_equal(table.h[-1], table.h[row])
    assert table.molar_mass[-1] == table.molar_mass[row]


def test_restricted_species() -> None:
    table = species_table(("CO2",), only=("CO2", "CO", "O2"))
    assert table.names == ("CO2", "O2", "CO")
    assert table.in_basis[2].tolist() == [1.0, -0.5]


def test_refusals() -> None:
    with pytest.raises(ValueError, match="no thermodynamic data for Unobtainium"):
        species_table(("N2", "Unobtainium"))
    with pytest.raises(ValueError, match="oxygen"):
        species_table(("N2",), FUELS["methane"])


def test_hash_is_that_of_the_shipped_file() -> None:
    assert data_hash() == hashlib.sha256(DATA_FILE.read_bytes()).hexdigest()


def test_no_cantera_to_solve() -> None:
    program = (
        "import sys, numpy as np\n"
        "from tests.gas.mixtures import reacting\n"
        "assert reacting('hydrogen', np.ones(2)).at('tp', 2000.0, 1e5).good.all()\n"
        "assert not {'cantera', 'scipy', 'pydantic'} & set(sys.modules), sorted(sys.modules)\n"
    )
    subprocess.run([sys.executable, "-c", program], check=True, cwd=DATA_FILE.parents[2])
