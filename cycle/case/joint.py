"""Rules that join several values of a case."""

from __future__ import annotations

import math
from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass
from typing import Any

from cycle.case.rows import ROW_RULES, TABLES, place
from cycle.case.rules import Choices, bounds, in_case, outside
from cycle.errors import Fault
from cycle.quantities import INPUT
from cycle.units import format_number, si_unit


@dataclass(frozen=True, slots=True)
class Facts:
    """A resolved case with its values, for the rules that join several of them."""

    choices: Choices
    values: Mapping[str, object]

    def number(self, key: str) -> float | None:
        """Value of a number input: as given, else its default."""
        value = self.values.get(key, INPUT[key].default)
        return float(value) if isinstance(value, (int, float)) else None

    def rows(self, key: str) -> Sequence[Mapping[str, float]]:
        """Rows of a table, SI; none where it is not given or faulty."""
        value = self.values.get(key)
        return value if isinstance(value, list) else []


def _fractions(facts: Facts) -> Iterator[Fault]:
    values = facts.values.get("air.mole_fractions")
    if not isinstance(values, Mapping):
        return
    total = sum(values.values())
    if abs(total - 1.0) > 1e-6:
        yield Fault("", "air.mole_fractions", "mole fractions do not sum to 1", f"a sum of {total:.9g}", "1 within 1e-6")
    if not values.get("O2", 0.0) > 0.0:
        yield Fault("", "air.mole_fractions", "the stream has no oxygen", "O2 = 0 or none", "O2 above 0")
        return
    from cycle.gas.fuels import oxygen_need
    from cycle.gas.species import atoms_of

    left = -sum(oxygen_need(atoms_of(name)) * share for name, share in values.items())
    if not left > LEAST_OXYGEN:
        text = "the stream's own combustibles leave no oxygen for the fuel"
        yield Fault("", "air.mole_fractions", text, f"{left:.4g} mol of O2 left a mol", f"above {LEAST_OXYGEN:g}")


LEAST_OXYGEN = 1e-6
"""Free oxygen of a stream, mol of O2 a mol, below which there is none: as exact as its fractions are held to sum to 1."""


def _throat(facts: Facts) -> Iterator[Fault]:
    """A throat is there where it is sized or given; where a fault leaves that open nothing is said."""
    if facts.choices.get("nozzle.throat", "") != "none" and facts.choices.get("nozzle.throat_size", "") != "":
        return
    asking = {
        "combustor.exit_area_over_throat": facts.choices.get("combustor.exit") == "exit_area_over_throat",
        "nozzle.freeze_station": facts.choices.get("nozzle.freeze_station") == "5",
        "engine.mode": facts.choices.get("engine.mode") == "geometric-throat",
    }
    given = "nozzle.throat = none" if "nozzle.throat" in facts.choices else "no nozzle"
    for key in (k for k, asks in asking.items() if asks):
        yield Fault("", key, "there is no throat", given, 'nozzle.throat = "sized" or nozzle.throat_area')


def _given_throat(facts: Facts) -> Iterator[Fault]:
    """A given throat is matched by a shock between stations 2 and 3 and a burner of constant area."""
    if facts.choices.get("nozzle.throat_size") != "throat_area":
        return
    if facts.choices.get("combustor.process") == "duct":
        yield Fault(
            "", "nozzle.throat_area", "a duct finds its own throat", "combustor.process = duct", "another process, or no throat_area"
        )
    if facts.choices.get("entry.station") == "3":
        yield Fault("", "nozzle.throat_area", "a rig at station 3 has no diffuser to match it", "entry.station = 3", "entry.station = 2")


def _freezing(facts: Facts) -> Iterator[Fault]:
    """The freezing plane and the end of the internal nozzle are solved one at a time."""
    if facts.choices.get("nozzle.freeze") in ("freeze_mach", "freeze_area_ratio") and "nozzle.internal_area_ratio" in facts.values:
        yield Fault(
            "", "nozzle.internal_area_ratio", "not with a freezing plane inside the nozzle", "both", "one of the two, or freeze_station"
        )


def _mode(facts: Facts) -> Iterator[Fault]:
    process = facts.choices.get("combustor.process")
    if facts.choices.get("engine.mode") == "thermal-throat" and process not in ("duct", None):
        yield Fault("", "engine.mode", "a thermal throat needs a duct", f"combustor.process = {process}", "combustor.process = duct")
    if facts.choices.get("engine.mode") == "geometric-throat" and process == "duct":
        allowed = "another process, or engine.mode = auto, supersonic or thermal-throat"
        yield Fault("", "engine.mode", "a duct finds its own throat", "combustor.process = duct", allowed)


def _lip(facts: Facts) -> Iterator[Fault]:
    """The lip's place against the corners: known where every ramp but the last has a length."""
    ramps = facts.rows("inlet.ramp")
    if facts.choices.get("inlet.lip") != "lip" or facts.choices.get("inlet.compression") != "ramp":
        return
    for row in (i for i, ramp in enumerate(ramps[:-1], 1) if "length" not in ramp):
        yield Fault("", place("inlet.ramp", row, "length"), "needed with inlet.lip_x and inlet.lip_y", "none", "the ramp's length")


LIP_CIRCLE = 0.01
"""Relative difference of the capture area from the circle of the lip that typed digits explain; common practice."""
_LIP_KEYS = ("inlet.lip_y", "engine.capture_area")


def has_lip_circle(choices: Choices) -> bool:
    """Whether the capture area is the circle of a cone's lip. Parameters: choices of a case."""
    return choices.get("inlet.lip") == "lip" and choices.get("inlet.compression") == "cone"


def lip_circle(choices: Choices, radius: Any, area: Any) -> Iterator[Fault]:
    """The fault of a capture area that is not the circle of the cone's lip.

    Parameters: choices of a case; radius of the lip, m, and capture area, m2, numbers or arrays. A half cone and other parts of
    a circle are no inlet of this model.
    """
    circle = math.pi * radius**2
    wrong = abs(area - circle) > LIP_CIRCLE * circle
    if not has_lip_circle(choices) or not (wrong.any() if hasattr(wrong, "any") else wrong):
        return
    if hasattr(wrong, "any"):
        given, allowed = "some points", "pi inlet.lip_y^2 at every point"
    else:
        given = f"{area:.5g} m2 with inlet.lip_y = {radius:.5g} m"
        allowed = f"{circle:.5g} m2, or inlet.lip_y = {math.sqrt(area / math.pi):.5g} m"
    yield Fault("", "engine.capture_area", "not the circle of the cone's lip", given, allowed)


def _cone_lip(facts: Facts) -> Iterator[Fault]:
    radius, area = (facts.number(key) for key in _LIP_KEYS)
    if radius is not None and area is not None and _LIP_KEYS[1] in facts.values:
        yield from lip_circle(facts.choices, radius, area)


def _isolator(facts: Facts) -> Iterator[Fault]:
    """A rectangle has two sides: the area at station 2 gives one of them. A diffuser's shock has no friction."""
    sides = ("isolator.width", "isolator.height", "isolator.hydraulic_diameter")
    if facts.choices.get("isolator.shape") == "rectangular" and not any(key in facts.values for key in sides):
        yield Fault("", "isolator.shape", "a rectangle has one side stated", "none", "isolator.width or isolator.height")
    friction = facts.number("isolator.friction_coefficient")
    if facts.choices.get("nozzle.throat_size") == "throat_area" and friction is not None and friction > 0.0:
        allowed = "0 with nozzle.throat_area"
        yield Fault("", "isolator.friction_coefficient", "a diffuser with a shock in it has no friction here", f"{friction:.6g}", allowed)


def _perimeter(facts: Facts) -> Iterator[Fault]:
    stated = [key for key in ("combustor.section", "combustor.width") if key in facts.values]
    if stated and any("perimeter" in row for row in facts.rows("combustor.area")):
        yield Fault("", stated[0], "the perimeter is stated more than once", "perimeters in combustor.area", "one of the two")


def _rows(facts: Facts) -> Iterator[Fault]:
    tables = {key: facts.rows(key) for key in TABLES}
    for rule in ROW_RULES:
        yield from rule(tables)


def _fuel(facts: Facts) -> Iterator[Fault]:
    identity, model = facts.choices.get("fuel.identity"), facts.choices.get("gas.model")
    real = model in ("frozen", "equilibrium")
    if identity == "heating_value" and real:
        text = "a heating value alone does not say what the fuel burns to"
        yield Fault("", "fuel.heating_value", text, f"gas.model = {model}", "fuel.name or fuel.formula, or gas.model = constant-gamma")
    if identity == "heating_value" and facts.choices.get("combustor.heat") == "equivalence_ratio":
        text = "a fuel given by its heating value alone has no stoichiometric ratio"
        yield Fault("", "combustor.equivalence_ratio", text, "fuel.heating_value", "fuel_air_ratio or exit_total_temperature")
    if identity == "formula" and real and "fuel.vapour_specific_heat" not in facts.values:
        allowed = bounds(INPUT["fuel.vapour_specific_heat"])
        yield Fault("", "fuel.vapour_specific_heat", f"needed with fuel.formula and gas.model = {model}", "none", allowed)


def _formula(facts: Facts) -> Iterator[Fault]:
    text = facts.values.get("fuel.formula")
    if not isinstance(text, str):
        return
    from cycle.gas.fuels import parse_formula

    try:
        atoms = parse_formula(text)
    except ValueError as error:
        yield Fault("", "fuel.formula", str(error))
    else:
        yield from _burns(facts, dict(atoms))


HOTTEST_FLAME = 3000.0
"""About the hottest static temperature of a flame with air, K; common practice."""


def _burns(facts: Facts, atoms: Mapping[str, float]) -> Iterator[Fault]:
    """The stated data of a fuel: burning must give heat, and must raise entropy even where that heat is given off as hot as a flame."""
    from cycle.gas.fuels import entropy_of_burning, molar_heat

    energy = "heating_value" if "fuel.heating_value" in facts.values else "formation_enthalpy"
    given = facts.number(f"fuel.{energy}")
    if given is None:
        return
    heat = molar_heat(atoms, **{energy: given})
    if not heat > 0.0:
        text = f"this fuel takes {-heat:.4g} J/mol to burn"
        yield Fault("", f"fuel.{energy}", text, f"{given:.6g} {si_unit(INPUT[f'fuel.{energy}'].unit)}", "a fuel that gives heat")
    entropy = facts.number("fuel.standard_entropy")
    most = heat / HOTTEST_FLAME + entropy_of_burning(atoms)
    if heat > 0.0 and entropy is not None and entropy > most:
        text = "a fuel with so much entropy breaks the second law when it burns"
        yield Fault("", "fuel.standard_entropy", text, f"{entropy:.6g} J/(mol K)", f"at most {most:.5g} J/(mol K)")


LEAST_EXPONENT, LARGEST_EXPONENT = 1.05, 5.0 / 3.0
"""Ratio of specific heats of a constant-gamma pair: below that of any burnt stream, dissociating ones included (common practice); that of
atoms (kinetic theory)."""
PAIRS = ("gas.cp_compression", "gas.cp_combustion", "gas.cp_expansion")


def pairs(values: Mapping[str, Any], constant: Any) -> Iterator[Fault]:
    """The faults of constant-gamma pairs that are no gas: gamma = cp/(cp - R) out of bounds.

    Parameters: values, key of a specific heat -> J/(kg K); constant, R; numbers or arrays.
    """
    lowest, highest = (g / (g - 1.0) for g in (LARGEST_EXPONENT, LEAST_EXPONENT))
    for key, cp in values.items():
        share = cp / constant
        wrong = (share < lowest * (1.0 - 1e-9)) | (share > highest * (1.0 + 1e-9))
        if not (wrong.any() if hasattr(wrong, "any") else wrong):
            continue
        given = "some points" if hasattr(wrong, "any") else f"cp = {cp:.6g} with R = {constant:.6g} J/(kg K)"
        allowed = f"cp from {lowest:.4g} R to {highest:.4g} R: gamma from {LEAST_EXPONENT:.4g} to {LARGEST_EXPONENT:.4g}"
        yield Fault("", key, "no gas has this ratio of specific heats", given, allowed)


def _pairs(facts: Facts) -> Iterator[Fault]:
    if facts.choices.get("gas.model") == "constant-gamma":
        constant = facts.number("gas.gas_constant")
        stated = {key: facts.number(key) for key in PAIRS if key in facts.values or key == PAIRS[0]}
        if constant is not None:
            yield from pairs({key: cp for key, cp in stated.items() if cp is not None}, constant)


def corridor(facts: Facts) -> Iterator[Fault]:
    """The lowest and the highest dynamic pressure of the corridor. Parameters: facts."""
    low, high = facts.number("limits.dynamic_pressure_low"), facts.number("limits.dynamic_pressure_high")
    if low is not None and high is not None and low > high:
        given = f"{low:.6g} Pa, above the highest {high:.6g} Pa"
        yield Fault("", "limits.dynamic_pressure_low", "the corridor is upside down", given, "at most limits.dynamic_pressure_high")


def _in_flight(facts: Facts) -> Iterator[Fault]:
    """Bounds that a flight case has and a rig has not."""
    for key, value in facts.values.items():
        entry = INPUT.get(key)
        if entry is None or entry.flight_upper is None or not isinstance(value, (int, float)):
            continue
        bounded = in_case(entry, facts.choices)
        if outside(bounded, value):
            yield Fault("", key, "out of bounds in flight", f"{format_number(value, 8)} {si_unit(entry.unit)}", bounds(bounded))


JOINT_RULES = (
    _fractions, _throat, _given_throat, _freezing, _mode, _lip, _cone_lip, _isolator, _rows, _perimeter, _fuel, _formula, _pairs,
    corridor, _in_flight,
)  # fmt: skip
"""Rules that join several values; each takes Facts and yields faults."""
