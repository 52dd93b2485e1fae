"""Rules that join several values of a case."""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass

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


def _lip(facts: Facts) -> Iterator[Fault]:
    """The lip's place against the corners: known where every ramp but the last has a length."""
    ramps = facts.rows("inlet.ramp")
    if facts.choices.get("inlet.lip") != "lip" or facts.choices.get("inlet.compression") != "ramp":
        return
    for row in (i for i, ramp in enumerate(ramps[:-1], 1) if "length" not in ramp):
        yield Fault("", place("inlet.ramp", row, "length"), "needed with inlet.lip_x and inlet.lip_y", "none", "the ramp's length")


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
        parse_formula(text)
    except ValueError as error:
        yield Fault("", "fuel.formula", str(error))


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


JOINT_RULES = (_fractions, _throat, _given_throat, _freezing, _mode, _lip, _rows, _perimeter, _fuel, _formula, corridor, _in_flight)
"""Rules that join several values; each takes Facts and yields faults."""
