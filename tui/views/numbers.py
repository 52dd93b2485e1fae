"""Figures and their changes as text, in the unit system of the session."""

from __future__ import annotations

from cycle import noise
from cycle.quantities import OUTPUT
from cycle.units import display_unit, format_number, show

LIMIT_FIGURES = {"corridor_low": "dynamic_pressure", "corridor_high": "dynamic_pressure"}
"""Limits whose figure has a unit of its own among those of its dimension: key of the limit -> key of the figure."""


def unit(key: str, system: str) -> str:
    """Display unit of an output, "" where it has none."""
    spec = OUTPUT[key]
    return show(1.0, spec.unit, system, key)[1]


def figure(key: str, value: float, system: str, digits: int = 4) -> str:
    """An output in its display unit, without the unit; "-" where there is no value."""
    return format_number(show(value, OUTPUT[key].unit, system, key)[0], digits)


def difference(key: str, value: float, base: float, system: str, digits: int = 3) -> str:
    """Change of an output against a base, signed, in its display unit; "-" where either has no value."""
    spec = OUTPUT[key]
    change = show(value, spec.unit, system, key)[0] - show(base, spec.unit, system, key)[0]
    if change != change:
        return "-"
    if noise.change(value, base) == 0.0:
        return "+0"
    return f"{'+' if change > 0 else ''}{format_number(change, digits)}"


def offset(change: float, dimension: str, system: str, key: str = "", digits: int = 3) -> str:
    """A change of a value, signed, with its display unit; "-" where there is none. Unlike a value it has no datum."""
    unit = display_unit(dimension, system, key)
    text = format_number(change / unit.factor, digits)
    return text if change != change else f"{'+' if change >= 0.0 else ''}{text} {unit.label}".rstrip()


def percent(value: float, base: float) -> str:
    """Change against a base in percent, signed; "-" where there is none to tell."""
    if value != value or base != base or base == 0.0:
        return "-"
    change = 100.0 * noise.change(value, base) / abs(base)
    return f"{'+' if change >= 0.0 else ''}{format_number(change, 3)}"


def quantity(value: float, dimension: str, system: str, digits: int = 4, key: str = "") -> str:
    """A value with its display unit."""
    shown, label = show(value, dimension, system, key)
    return f"{format_number(shown, digits)} {label}".strip() if shown == shown else "-"
