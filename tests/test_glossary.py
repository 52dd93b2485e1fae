"""Everything that a walk says beside stations and headline figures is declared, and no declaration is left over."""

from __future__ import annotations

from collections.abc import Iterator

import pytest

import cycle
from cycle.glossary import BOOKED, ENTRIES, ENTRY, HEAT, HEAT_WORDS, MARGINS, SHARED, mode_of, no_value, process_figure
from cycle.quantities import INPUT, MODES, OUTPUT
from cycle.result import Walk
from cycle.units import UNITS
from tests.tui.command_support import DUCT, DUCT_RIG, HOT, INTERNAL, QUICK, RAMJET, RIG, ROOT, THROAT

TEXTS = {
    "quick": QUICK,
    "hot": HOT,
    "ramjet": RAMJET,
    "rig": RIG,
    "duct": DUCT,
    "duct rig": DUCT_RIG,
    "internal": INTERNAL,
    "throat": THROAT,
}
TEXTS |= {path.stem: path.read_text(encoding="utf-8") for path in sorted((ROOT / "cases").glob("*.toml"))}
CONSTANT_PRESSURE = QUICK.replace("fuel_air_ratio", 'process = "constant-pressure"\nfuel_air_ratio')
SEVERAL_PAIRS = QUICK.replace('fuel_energy = "neglected"', 'fuel_energy = "neglected"\ncp_combustion = 1500')
TEXTS["shock in the nozzle"] = TEXTS["sandbar"].replace("exit_area_ratio = 2.4", "exit_area_ratio = 70.0")
TEXTS["viscous correlation"] = TEXTS["saltmarsh"].replace("kinetic_energy_efficiency = 0.98", "viscous_correlation = true")
TEXTS["viscous throat"] = TEXTS["breakwater"].replace("lip_x", "viscous_efficiency = 0.99\nlip_x")
TEXTS |= {"internal": INTERNAL, "constant pressure": CONSTANT_PRESSURE, "several pairs": SEVERAL_PAIRS}


def said(walk: Walk) -> Iterator[str]:
    """Keys of the glossary that a walk uses."""
    for process in walk.processes:
        yield from (f"process.{key}" for key in process.figures if not key.startswith("mode_"))
    yield from (f"profile.{key}" for key in walk.profile)
    yield from (f"limit.{limit.key}" for limit in walk.limits)
    yield from (f"heat.{key}" for key in walk.heat_limits)
    accounts = {"potential": walk.potentials, "loss": walk.losses, "exergy": walk.exergy}
    yield from (f"{name}.{row.key}" for name, rows in accounts.items() for row in rows)


@pytest.fixture(scope="module")
def walks() -> dict[str, Walk]:
    return {name: cycle.solve(cycle.loads(text, name)) for name, text in TEXTS.items()}


def test_every_key_is_declared_with_its_own_label(walks: dict[str, Walk]) -> None:
    for walk in walks.values():
        for key in said(walk):
            assert key in ENTRY or process_figure(key.removeprefix("process.")), key
        for name, rows in {"potential": walk.potentials, "loss": walk.losses, "exergy": walk.exergy}.items():
            assert [ENTRY[f"{name}.{row.key}"].label for row in rows] == [row.label for row in rows]
            assert [ENTRY[f"{name}.{row.key}"].unit for row in rows] == [row.unit for row in rows]


def test_every_declared_key_is_used_by_some_engine(walks: dict[str, Walk]) -> None:
    used = {key for walk in walks.values() for key in said(walk)} | {"process.wave_angle"}
    assert {entry.key for entry in ENTRIES} <= used


def test_declarations_are_whole_and_clash_with_nothing() -> None:
    assert len(ENTRY) == len(ENTRIES)
    assert not set(ENTRY) & {*INPUT, *OUTPUT}
    for entry in ENTRIES:
        assert entry.unit in UNITS
        assert entry.meaning.endswith(".") and entry.label and entry.source
    assert set(HEAT_WORDS) <= {entry.key.removeprefix("heat.") for entry in HEAT}
    assert all(process_figure(key) for key in (*SHARED, *BOOKED, *MARGINS))


def test_numbered_figures_carry_their_number() -> None:
    second = process_figure("wave_angle_2")
    assert second is not None
    assert (second.key, second.label, second.unit) == ("process.wave_angle", "wave angle 2", "angle")
    assert process_figure("mode_scramjet") is None
    assert process_figure("nonsense_3") is None


def test_the_flags_of_a_process_say_its_mode() -> None:
    assert mode_of({"mode_none": 0.0, "mode_scramjet": 1.0, "core_area_ratio": 1.0}) == "scramjet"
    assert mode_of({"mode_supercritical": 1.0}) == "ramjet-supercritical"
    assert mode_of({"mode_none": 1.0}) == mode_of({}) == ""


def test_modes_of_the_flags_are_modes_of_the_walk(walks: dict[str, Walk]) -> None:
    for name in ("duct", "throat"):
        isolator = next(p for p in walks[name].processes if p.name == "isolator")
        assert mode_of(isolator.figures) == walks[name].mode
        assert all(
            k.removeprefix("mode_") in (*MODES, "supercritical", "critical", "subcritical") for k in isolator.figures if "mode_" in k
        )


def test_every_missing_figure_has_its_own_reason() -> None:
    assert no_value("unstart_margin") == "no critical section"
    assert no_value("pressure_ratio") == "a state it needs is out of range"
