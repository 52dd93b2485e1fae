"""Topic h: nozzle examples, as rigs through `cycle.solve` where the example is a nozzle, by the divergence law otherwise."""

from __future__ import annotations

import math

import numpy as np
import pytest

import cycle
from cycle.constants import STANDARD_AIR
from cycle.evidence import Check
from cycle.flow import states
from cycle.gas.frozen import air_gas
from cycle.gas.fuels import FUELS
from cycle.gas.species import species_table
from tests.evidence_support import Solver, assert_met, number, parametrised, unmapped

ENTRY_MACH = 0.02


def rig(Tt: float, pt: float, cp: float, R: float, nozzle: dict[str, object], mass_flow: float = 1.0) -> cycle.Walk:
    """A constant-gamma stream all but at rest, nothing burnt, through a choked throat."""
    g = cp / (cp - R)
    warm = 1.0 + 0.5 * (g - 1.0) * ENTRY_MACH**2
    keys = "\n".join(f"{k} = {v!r}".replace("'", '"') for k, v in nozzle.items())
    text = f"""
format = 1
[entry]
station = "3"
mach = {ENTRY_MACH}
pressure = {pt / warm ** (g / (g - 1.0))!r}
temperature = {Tt / warm!r}
mass_flow = {mass_flow!r}
[gas]
model = "constant-gamma"
cp_compression = {cp!r}
gas_constant = {R!r}
fuel_energy = "neglected"
fuel_mass = "neglected"
[fuel]
heating_value = 1e7
[combustor]
process = "constant-area"
fuel_air_ratio = 0.0
[nozzle]
throat = "sized"
{keys}
"""
    walk = cycle.solve(cycle.loads(text, "nozzle"))
    assert walk.status == "solved", walk.reason
    assert walk.audit.ok
    return walk


def losses_of_total_pressure(check: Check) -> dict[str, float]:
    """Total-pressure losses lower the pressure that the isentropic expansion starts from."""
    cp, g, Tt = number(check, "cp"), number(check, "gamma"), number(check, "Tt")
    R, p0 = cp * (g - 1.0) / g, 2e4

    def speed(loss: float) -> float:
        return rig(Tt, number(check, "pt7/p0") * loss * p0, cp, R, {"exit_pressure": p0}).station["10"].velocity

    throat, after = number(check, "pt8/pt7"), number(check, "pt9/pt8")
    real, ideal, first = speed(throat * after), speed(1.0), speed(throat)
    return {"V9": real, "V9_ideal": ideal, "V9_throat_loss_only": first, "C_V": real / first}


def rocket_like(check: Check) -> dict[str, float]:
    g, R = number(check, "gamma"), number(check, "R")
    one = rig(number(check, "Tt"), number(check, "pt"), g * R / (g - 1.0), R, {"exit_pressure": number(check, "pe")})
    flow = number(check, "A*") / one.station["5"].area
    s = rig(number(check, "Tt"), number(check, "pt"), g * R / (g - 1.0), R, {"exit_pressure": number(check, "pe")}, flow).station
    # the source's thrust at ideal expansion is m u; its exit plane meets ambient pressure
    return {"mdot": flow, "F": flow * s["10"].velocity, "Ae": s["10"].area}


def with_efficiency(check: Check) -> dict[str, float]:
    """The discharge coefficient is a larger ideal flow: mass flow over it."""
    g, cp = number(check, "gamma"), number(check, "cp")
    flow = number(check, "mdot") / number(check, "C_d")
    nozzle = {"exit_pressure": number(check, "p2"), "expansion_efficiency_from_total": number(check, "eta_n")}
    s = rig(number(check, "Tt"), number(check, "pt"), cp, cp * (g - 1.0) / g, nozzle, flow).station
    return {"At": s["5"].area, "A2": s["10"].area}


def divergence(check: Check) -> dict[str, float]:
    """The factor that the program uses is the ratio of axial to full exit momentum of a solved rig."""
    found = {}
    for shape, name in (("conical", "conical"), ("planar", "two-dimensional")):
        angle = {"exit_pressure": 2e4, "divergence_angle": number(check, "alpha"), "divergence_shape": shape}
        s = rig(1500.0, 5e5, 1200.0, 287.0, angle).station["10"]
        found[name] = (s.stream_thrust - s.pressure * s.area) / (s.mass_flow * s.velocity)
    return found


def air_expansion(check: Check) -> dict[str, float]:
    gas = air_gas(species_table(tuple(STANDARD_AIR), None), STANDARD_AIR, "frozen", 1)
    pt = np.array([1e6])
    out, u = states.from_reservoir(gas, np.array([number(check, "Tt")]), pt, pt / number(check, "pt/p"))
    return {"T": out.temperature[0], "u": u[0], "M": (u / out.sound_speed)[0]}


def fuel_expansion(check: Check) -> dict[str, float]:
    """From equilibrium at station 4: frozen and shifting, through the nozzle's own conversion of the gas."""
    air = {"O2": 1.0, "N2": 3.76}
    fuel = FUELS[{"H2": "hydrogen", "C2H4": "ethylene"}[str(check.inputs["fuel"].value)]]
    table = species_table(tuple(air), fuel)
    one = np.ones(1)
    ratio = number(check, "phi") * fuel.stoichiometric_ratio(air) * one
    gas = air_gas(table, air, "equilibrium", 1).fuelled(fuel, ratio, one)
    burnt = gas.at("tp", number(check, "T4") * one, number(check, "p4") * one)
    u4 = number(check, "u4")
    total = burnt.enthalpy + 0.5 * u4**2
    found = {"W4": burnt.molar_mass[0] * 1e3}
    for name, model in (("frozen", gas.frozen(burnt)), ("shifting", gas)):
        out = model.at("sp", burnt.entropy, burnt.pressure / number(check, "p4/p"))
        u = states.velocity(total, out)
        found |= {
            f"T_{name}": out.temperature[0],
            f"u_{name}": u[0],
            f"A/A4_{name}": (burnt.density * u4 / (out.density * u))[0],
            f"W_{name}": out.molar_mass[0] * 1e3,
        }
    return found


SOLVERS: dict[str, Solver] = {
    "FAR-5.7": losses_of_total_pressure,
    "AN-10.4": rocket_like,
    "MUR-2.22": with_efficiency,
    "divergence": divergence,
    "expansion-": fuel_expansion,
    "air-expansion": air_expansion,
}


def test_every_check_of_the_topic_is_reached() -> None:
    assert unmapped("h", SOLVERS) == set()


@parametrised("h", SOLVERS)
def test_nozzle(check: Check, solver: Solver) -> None:
    assert_met(check, solver(check))


def test_planar_factor_is_the_mean_of_the_cosine() -> None:
    """sin(a)/a is the mean of cos over the angle: derived here, not read."""
    a = 0.3
    mean = np.mean(np.cos(np.linspace(-a, a, 200001)))
    assert mean == pytest.approx(math.sin(a) / a, rel=1e-6)
