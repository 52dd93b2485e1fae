"""Fuel heated for nothing: flagged with what it adds to specific impulse, and only where no wall pays for it."""

from __future__ import annotations

import json
from pathlib import Path
from types import SimpleNamespace
from typing import Any

import numpy as np
import pytest

import cycle
from cycle import result
from cycle.record import dumps, record
from tests.case_files import case_file
from tui.figures import assess, take
from tui.tables import as_text
from tui.text import walk_blocks
from tui.views import margins

CASES = Path(__file__).parents[1] / "cases"
SALTMARSH, TIDEGATE, BREAKWATER = (cycle.load(case_file(name)) for name in ("plain", "tidegate", "breakwater"))


def hot(temperature: float = 900.0, **changes: object) -> cycle.Case:
    return SALTMARSH.replace({"fuel.temperature": temperature, **{k.replace("__", "."): v for k, v in changes.items()}})


def test_heat_from_nowhere_is_flagged_with_what_it_adds() -> None:
    """The gain is that of the same case with the fuel as stored, solved apart."""
    walk = cycle.solve(hot())
    (note,) = walk.notes
    cold = cycle.solve(hot(298.15))
    assert note.gain == pytest.approx(walk.performance.specific_impulse - cold.performance.specific_impulse, rel=1e-12)
    assert note.gain > 10.0 and not cold.notes
    words = note.words()
    assert words.startswith("The fuel enters at 900 K, stored it has 298.15 K") and f"adds {note.gain:.4g} s" in words


@pytest.mark.parametrize(
    ("case", "why"),
    [
        (SALTMARSH, "300 K is within the allowance"),
        (hot(315.0), "a hot day"),
        (hot(250.0), "colder than stored"),
        (hot(combustor__wall_heat="1 MW"), "a wall gives it"),
        (hot(combustor__equivalence_ratio=0.0), "no fuel"),
        (hot(combustor__equivalence_ratio=3.0), "no solution"),
        (BREAKWATER, "a wall of stated temperature"),
        (cycle.load(CASES / "bench-three.toml").replace({"fuel.temperature": 900.0}), "a rig's fuel may come from a heater"),
    ],
)
def test_fuel_that_needs_no_note(case: cycle.Case, why: str) -> None:
    assert cycle.solve(case).notes == (), why


def test_balance_without_the_fuels_enthalpy_has_no_note() -> None:
    textbook = {"gas.model": "constant-gamma", "inlet.chemistry": None, "nozzle.chemistry": None, "combustor.equivalence_ratio": 0.3}
    for balance, count in (("full", 1), ("mass-only", 0), ("neglected", 0)):
        assert len(cycle.solve(hot().replace({**textbook, "gas.fuel_energy": balance})).notes) == count


def test_note_says_so_where_the_stored_fuel_has_no_solution() -> None:
    """An exit temperature that only hot fuel reaches."""
    case = hot(900.0).replace({"combustor.process": "constant-pressure", "combustor.exit_total_temperature": 3000.0})
    grid = np.linspace(2800.0, 4000.0, 200)
    both = [
        cycle.solve(case.replace({"fuel.temperature": T}), {"combustor.exit_total_temperature": grid}).status == "solved"
        for T in (900.0, 298.15)
    ]
    only = np.flatnonzero(both[0] & ~both[1])
    assert only.size
    (note,) = cycle.solve(case.replace({"combustor.exit_total_temperature": float(grid[only[0]])})).notes
    assert note.words().endswith("as stored there is no solution, no-fuel.")


def test_note_is_shown_in_text_json_and_on_the_screen() -> None:
    walk = cycle.solve(hot())
    (note,) = walk.notes
    assert note.words() in " ".join(as_text(walk_blocks(walk, "si", False)).split())
    assert note.words("us") in " ".join(as_text(walk_blocks(walk, "us", False)).split()) and "1620 degR" in note.words("us")
    told = json.loads(dumps(record(walk)))["notes"]
    assert told == [{"key": "heated_fuel", "words": note.words(), "value": note.gain, "unit": "s"}]
    shown = assess(take(walk))
    assert shown.notes == (note,)
    session: Any = SimpleNamespace(figures=shown, referee="not asked", system="si", actions=())
    assert note.words() in " ".join("".join(text for text, _ in one).strip() for one in margins.head(session, 60))
    assert json.loads(dumps(record(cycle.solve(SALTMARSH))))["notes"] == []


def test_note_is_solved_for_only_when_it_is_asked_for(monkeypatch: pytest.MonkeyPatch) -> None:
    made: list[cycle.Case] = []
    honest = result.solve
    walk = cycle.solve(hot())
    monkeypatch.setattr(result, "solve", lambda case, changes=None: made.append(case) or honest(case, changes))
    take(walk)
    assert walk.limits and walk.audit.ok and not made
    assert walk.notes and walk.notes and len(made) == 1
    batch = honest(hot(), {"flight.mach": [7.0, 8.0]})
    assert batch.notes == () and len(made) == 1


def test_duct_without_a_cooled_wall_is_flagged_too() -> None:
    (note,) = cycle.solve(TIDEGATE).notes
    assert note.temperature == 450.0 and note.status == "solved" and abs(note.gain) < 0.1 * note.impulse
