"""Flight, rig and fuels through the public solve: every pair of speed and place, humid and vitiated air, fuels of one's own."""

from __future__ import annotations

import math
from pathlib import Path

import CoolProp.CoolProp as coolprop
import numpy as np
import pytest

import cycle
from cycle.atmosphere import atmosphere
from cycle.flowpath.flight import saturation_pressure
from cycle.limit_solving import solve_for_limit

BODY = """
[gas]
model = "{model}"
[inlet]
kinetic_energy_efficiency = 0.97
pressure_ratio = 40.0
[fuel]
{fuel}
[combustor]
process = "constant-pressure"
equivalence_ratio = 0.5
burnt_fraction = {burnt}
[nozzle]
ideal = true
"""


def walk(flight: str, model: str = "equilibrium", fuel: str = 'name = "hydrogen"', air: str = "", burnt: float = 1.0) -> cycle.Walk:
    text = f"format = 1\n[flight]\n{flight}\n{air}\n" + BODY.format(model=model, fuel=fuel, burnt=burnt)
    found = cycle.solve(cycle.loads(text, "flight"))
    assert found.status == "solved", found.reason
    assert found.audit.ok, found.audit.worst
    return found


def test_every_pair_of_speed_and_place_finds_the_same_flight() -> None:
    """One flight said in all six ways: the state at station 0 is the same to the precision of the altitude search."""
    one = walk("mach = 7.0\naltitude = 28000.0")
    s = one.station["0"]
    speeds = (f"mach = {s.mach!r}", f"speed = {s.velocity!r}")
    places = (
        "altitude = 28000.0",
        f"dynamic_pressure = {s.dynamic_pressure!r}",
        f"pressure = {s.pressure!r}\ntemperature = {s.temperature!r}",
    )
    for speed in speeds:
        for place in places:
            other = walk(f"{speed}\n{place}")
            for key in ("mach", "pressure", "temperature", "velocity", "mass_flow"):
                assert other.station["0"][key] == pytest.approx(s[key], rel=1e-9), (speed, place, key)
            assert other.performance.thrust == pytest.approx(one.performance.thrust, rel=1e-8)
            assert math.isnan(other.performance.altitude) == ("temperature" in place)


def test_temperature_offset_leaves_the_pressure() -> None:
    standard, hot = (walk(f"mach = 6.0\naltitude = 25000.0\ntemperature_offset = {d}") for d in (0.0, 20.0))
    assert hot.station["0"].pressure == standard.station["0"].pressure == pytest.approx(float(atmosphere(25e3).pressure))
    assert hot.station["0"].temperature - standard.station["0"].temperature == pytest.approx(20.0, rel=1e-12)
    assert hot.station["0"].velocity > standard.station["0"].velocity


def test_no_altitude_has_a_reason_and_no_number() -> None:
    text = "format = 1\n[flight]\nmach = 0.3\ndynamic_pressure = 500000.0\n" + BODY.format(
        model="equilibrium", fuel='name = "hydrogen"', burnt=1.0
    )
    found = cycle.solve(cycle.loads(text, "flight"))
    assert found.status == "no-altitude" and found.station == {} and math.isnan(found.performance.thrust)
    assert "0 and 86 km" in found.reason and found.limits and found.audit.ok


@pytest.mark.published
def test_saturation_pressure_against_the_steam_formulation() -> None:
    """CoolProp (IAPWS-95) from the triple point to 330 K. Murphy and Koop state 0.05 % within their range; 0.1 % allowed."""
    T = np.linspace(273.2, 330.0, 30)
    steam = np.array([coolprop.PropsSI("P", "T", t, "Q", 0, "Water") for t in T])
    assert saturation_pressure(T) == pytest.approx(steam, rel=1e-3)


def test_humid_air_is_lighter_and_keeps_its_oxygen_ratio() -> None:
    dry, humid = (walk("mach = 5.0\naltitude = 1000.0", air=f"[air]\nrelative_humidity = {rh}") for rh in (0.0, 0.9))
    x = humid.station["0"].mole_fractions
    T, p = humid.station["0"].temperature, humid.station["0"].pressure
    assert x["H2O"] == pytest.approx(0.9 * float(saturation_pressure(np.array([T]))[0]) / p, rel=1e-9)
    assert x["O2"] / x["N2"] == pytest.approx(0.2095 / 0.7808, rel=1e-9)
    assert humid.station["0"].molar_mass < dry.station["0"].molar_mass
    assert humid.station["0"].sound_speed > dry.station["0"].sound_speed


def test_vitiated_air_carries_its_water_through() -> None:
    air = "[air]\nmole_fractions = { N2 = 0.55, O2 = 0.21, H2O = 0.24 }"
    found = walk("mach = 6.0\naltitude = 26000.0", air=air)
    assert found.station["0"].mole_fractions["H2O"] == pytest.approx(0.24, rel=1e-12)
    assert found.station["4"].mole_fractions["H2O"] > 0.24


@pytest.mark.parametrize("station", ["2", "3"])
def test_rig_enters_at_its_station_by_area_or_mass_flow(station: str) -> None:
    def rig(size: str) -> cycle.Walk:
        text = f'format = 1\n[entry]\nstation = "{station}"\nmach = 2.6\npressure = "90 kPa"\ntemperature = "900 K"\n{size}\n'
        text += '[fuel]\nname = "ethylene"\n[combustor]\nequivalence_ratio = 0.2\n'
        return cycle.solve(cycle.loads(text, "rig"))

    by_area = rig('area = "40 cm^2"')
    by_flow = rig(f"mass_flow = {by_area.station[station].mass_flow!r}")
    assert by_area.status == "solved" and by_area.mode == "rig"
    assert list(by_area.station) == (["2", "3", "4"] if station == "2" else ["3", "4"])
    assert by_flow.station["4"].area == pytest.approx(4e-3, rel=1e-9)
    assert by_area.station["3"].mach == pytest.approx(2.6, rel=1e-12)


def test_fuel_of_ones_own_equals_the_listed_one_with_the_same_data() -> None:
    """Ethylene by formula and formation enthalpy (52.5 kJ/mol, NASA TM-4513) burns like the listed ethylene at 298.15 K."""
    listed = walk("mach = 6.0\naltitude = 26000.0", fuel='name = "ethylene"\ntemperature = 298.15')
    from cycle.gas.fuels import FUELS

    own = f'formula = "C2H4"\nphase = "gas"\nformation_enthalpy = {FUELS["ethylene"].formation_enthalpy!r}\n'
    own += "vapour_specific_heat = 1500.0\ntemperature = 298.15"
    mine = walk("mach = 6.0\naltitude = 26000.0", fuel=own)
    assert mine.performance.heating_value == pytest.approx(listed.performance.heating_value, rel=1e-9)
    assert mine.performance.specific_impulse == pytest.approx(listed.performance.specific_impulse, rel=1e-6)


def test_heating_value_and_formation_enthalpy_say_the_same() -> None:
    base = (
        'formula = "C10H16"\nphase = "liquid"\nvapour_specific_heat = 2500.0\nliquid_specific_heat = 1600.0\nheat_of_vaporisation = 3.5e5\n'
    )
    first = walk("mach = 6.0\naltitude = 26000.0", fuel=base + 'formation_enthalpy = "-122.8 kJ/mol"', burnt=0.9)
    again = walk("mach = 6.0\naltitude = 26000.0", fuel=base + f"heating_value = {first.performance.heating_value!r}", burnt=0.9)
    assert again.performance.thrust == pytest.approx(first.performance.thrust, rel=1e-9)
    assert first.station["4"].mole_fractions["unburnt C10H16"] > 0.0


def test_fuel_numbers_cannot_vary_within_a_batch() -> None:
    base = 'formula = "C2H4"\nphase = "gas"\nvapour_specific_heat = 1500.0\nformation_enthalpy = 52467.0'
    case = walk("mach = 6.0\naltitude = 26000.0", fuel=base).case
    with pytest.raises(cycle.CaseError, match="cannot vary within a batch"):
        cycle.solve(case, {"fuel.formation_enthalpy": np.array([5.2e4, 5.3e4])})


def test_slices_cannot_vary_within_a_batch() -> None:
    """All ducts of a batch are cut alike: with two numbers of slices one of them would not be the case asked for."""
    case = cycle.load(Path(__file__).parents[1] / "cases" / "tidegate.toml")
    with pytest.raises(cycle.CaseError, match="slices cannot vary within a batch"):
        cycle.solve(case, {"combustor.slices": np.array([16.0, 48.0])})
    assert cycle.solve(case, {"combustor.slices": np.array([48.0, 48.0])}).status.tolist() == ["solved", "solved"]
    found = solve_for_limit(case, "unstart", "combustor.slices")
    assert found.kind == "none" and "slices cannot vary" in found.words


@pytest.mark.parametrize("model", ["frozen", "equilibrium"])
def test_models_agree_where_the_gas_is_cool(model: str) -> None:
    """Below 1200 K nothing dissociates: frozen and equilibrium compression give the same station 2 to 1e-5."""
    found, other = (walk("mach = 5.0\naltitude = 24000.0", model=m) for m in (model, "equilibrium"))
    for key in ("temperature", "velocity", "area"):
        assert found.station["2"][key] == pytest.approx(other.station["2"][key], rel=1e-5)
