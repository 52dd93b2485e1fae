"""The text of a new case: every key with unit, bounds, default and meaning, ready to solve."""

from __future__ import annotations

import textwrap

from cycle.case.checking import FORMAT
from cycle.case.rules import bounds, by_fuel, section_of, ways
from cycle.inputs import FLATTERED, OPTIMISTIC
from cycle.quantities import GROUPS, INPUTS, SECTIONS, Input

_WIDTH = 100

_FLIGHT: dict[str, str] = {
    "flight.mach": "9.5",
    "flight.dynamic_pressure": '"60 kPa"',
    "gas.model": '"equilibrium"',
    "inlet.kinetic_energy_efficiency": "0.98",
    "inlet.temperature_ratio": "4.75",
    "fuel.name": '"hydrogen"',
    "fuel.temperature": '"300 K"',
    "fuel.supply_pressure": '"2 MPa"',
    "combustor.process": '"constant-area"',
    "combustor.equivalence_ratio": "0.5",
    "combustor.burnt_fraction": "0.9",
    "combustor.friction_area_ratio": "0.06",
    "combustor.wall_heat": '"1.5 MW"',
    "nozzle.chemistry": '"shifting"',
    "nozzle.exit_area_over_capture": "2.0",
    "nozzle.velocity_coefficient": "0.98",
    "nozzle.divergence_factor": "0.99",
    "engine.capture_area": '"0.4 m^2"',
}
_ENTRY: dict[str, str] = {
    "entry.station": '"3"',
    "entry.mach": "2.6",
    "entry.pressure": '"100 kPa"',
    "entry.temperature": '"1100 K"',
    "entry.area": '"60 cm^2"',
    "gas.model": '"equilibrium"',
    "fuel.name": '"hydrogen"',
    "fuel.temperature": '"300 K"',
    "combustor.process": '"constant-area"',
    "combustor.equivalence_ratio": "0.25",
    "combustor.burnt_fraction": "0.9",
}
_VALUES = {"flight": _FLIGHT, "entry": _ENTRY}
_TITLES = {"flight": "New case: a hydrogen scramjet", "entry": "New case: a direct-connect hydrogen burner"}
_HEAD = """\
# A case for ductwalk. The figures are invented, for demonstration; replace them by your own.
# A value is a number in SI or text with a unit, such as "27 km", "1500 psf" or "15 deg".
# A line that begins with # is not read; take the # away to use it. Where several keys say the same
# thing, exactly one of them is given. Some defaults are optimistic; each says by how much.
"""


def template(start: str = "flight") -> str:
    """Text of a new case, with every key in it: those of the example in force, the others as comments.

    Parameters: start, "flight" for an engine in flight, "entry" for a direct-connect rig.
    Returns: TOML that loads as it is. Errors: KeyError for another start.
    """
    values = _VALUES[start]
    parts = [f'{_HEAD}\nformat = {FORMAT}\ntitle = "{_TITLES[start]}"\nnotes = ""\n']
    parts.extend(_section(section, values) for section in SECTIONS)
    return "\n".join(parts) + _STUDY


_STUDY = """
# A study varies inputs; any number of them may stand here.
# [study.burner]
# outputs = ["specific_impulse", "thrust"]
# [[study.burner.vary]]
# input = "combustor.equivalence_ratio"
# from = 0.2
# to = 0.6
# points = 41
"""


def _section(section: str, values: dict[str, str]) -> str:
    entries = [i for i in INPUTS if i.section == section]
    used = any(i.key in values for i in entries)
    groups = [_comment(ways(g)) for g in GROUPS if section_of(g) == section]
    keys = [_entry(i, values) for i in entries if i.kind != "rows"]
    # a key behind an array of tables would be read as one of its columns
    tables = [_rows(i) for i in entries if i.kind == "rows"]
    return "\n".join([f"{'' if used else '# '}[{section}]", *groups, *keys, *tables]) + "\n"


def _rows(entry: Input) -> str:
    columns = [_entry(column, {}) for column in entry.columns]
    words = f"{entry.meaning} {entry.fewest} to {entry.most} tables.{_only(entry)}"
    return "\n".join([_comment(words), f"# [[{entry.key}]]", *columns])


def _comment(text: str) -> str:
    return textwrap.fill(text, _WIDTH, initial_indent="# ", subsequent_indent="#   ", break_long_words=False, break_on_hyphens=False)


def _entry(entry: Input, values: dict[str, str]) -> str:
    symbol = f"{entry.symbol}: " if entry.symbol else ""
    words = f"{symbol}{entry.meaning} [{bounds(entry)}; {_default(entry)}]{_only(entry)}{_flattery(entry)}"
    line = f"{entry.name} = {values[entry.key]}" if entry.key in values else f"# {entry.name} = {_sample(entry)}"
    return f"{_comment(words)}\n{line}"


def _only(entry: Input) -> str:
    """The conditions of an input as sentences."""
    return "".join(f" Only with {name} = {' or '.join(tag or 'none' for tag in tags)}." for name, tags in entry.when if name != "start")


def _flattery(entry: Input) -> str:
    """How far the default of an input flatters, "" where it does not."""
    told = next((one for one in OPTIMISTIC if one.key == entry.key), None)
    if told is None:
        return ""
    return f" {told.default} is optimistic: with {told.usual} the specific impulse of {FLATTERED} is {-told.change} s lower."


def _default(entry: Input) -> str:
    if entry.default is not None:
        return f"default {entry.default}"
    if entry.by_fuel:
        return f"default {by_fuel(entry)}"
    if entry.follows:
        return f"default that of {entry.follows}"
    return "no default"


def _sample(entry: Input) -> str:
    """A value as it would be written; "..." where there is no default to show."""
    if entry.kind == "flag":
        return "true"
    if entry.kind == "fractions":
        return "{ N2 = 0.62, O2 = 0.21, H2O = 0.17 }"
    if entry.default is None:
        return "..."
    return f'"{entry.default}"' if isinstance(entry.default, str) else str(entry.default)
