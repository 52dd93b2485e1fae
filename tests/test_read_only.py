"""Whoever is handed an array of a solution cannot change the solution, and whoever gave one cannot either."""

from __future__ import annotations

import numpy as np
import pytest

import cycle
from cycle.case import check_batch
from tests.case_files import SHIPPED, case_file
from tests.whole_walk import bits, parts


def march_arrays(part: object) -> list[np.ndarray]:
    """Every array that can be reached from the march of a solution."""
    if isinstance(part, np.ndarray):
        return [part]
    if isinstance(part, (str, int, float, type(None))):
        return []
    if isinstance(part, (tuple, list)):
        inner = list(part)
    elif hasattr(part, "keys"):
        inner = list(part.values())  # type: ignore[attr-defined]
    else:
        inner = [getattr(part, name) for name in getattr(part, "__dataclass_fields__", None) or vars(part)]
    return [array for one in inner for array in march_arrays(one)]


@pytest.mark.parametrize("path", sorted(SHIPPED.glob("*.toml")), ids=lambda path: path.stem)
@pytest.mark.parametrize("batch", [False, True])
def test_no_array_that_a_solution_hands_out_can_be_written(path: object, batch: bool) -> None:
    """The march, and what is computed from it once it is read-only: stations, performance, processes, accounts, limits, words,
    profile, audit."""
    walk = cycle.solve(cycle.load(str(path)), {"combustor.burnt_fraction": [[0.7], [0.9]]} if batch else None)
    behind = march_arrays(walk.march)
    assert len(behind) > 50 and not any(array.flags.writeable for array in behind)
    arrays = {name: value for name, value in parts(walk, searched=False) if isinstance(value, np.ndarray)}
    assert len(arrays) > (200 if batch else 50)
    assert not [name for name, array in arrays.items() if array.flags.writeable]
    with pytest.raises(ValueError, match="read-only"):
        next(iter(arrays.values()))[...] = 1.0


def test_sensitivities_and_curves_hold_no_arrays() -> None:
    from cycle.sweep import curve

    case = cycle.load(case_file("plain"))
    row = cycle.sensitivities(case).rows[0]
    line = curve(case, {"flight.mach": [7.0, 8.0], "combustor.equivalence_ratio": [0.3, 0.6]}, limits=True)
    for table in (row.changes, line.figures, line.margins):
        assert table and not any(isinstance(value, np.ndarray) for value in table.values())


@pytest.mark.parametrize("shape", [(4,), (2, 2), (1, 4)])
def test_a_solution_keeps_no_hold_of_the_arrays_it_was_given(shape: tuple[int, ...]) -> None:
    """What the caller does with its arrays after solving changes nothing, asked for or not."""
    case = cycle.load(case_file("plain"))
    given = {
        "flight.mach": np.linspace(7.0, 8.0, 4).reshape(shape),
        "fuel.supply_pressure": np.full(shape, 2e6),
        "combustor.burnt_fraction": np.broadcast_to(np.array(0.9), shape),
        "fuel.temperature": np.array(300.0),
        "limits.gas_temperature": np.full((8,), 2500.0)[::2].reshape(shape),
    }
    walk, twin = cycle.solve(case, given), cycle.solve(case, {key: np.array(value) for key, value in given.items()})
    _, arrays = check_batch(case, given)
    for key, value in given.items():
        assert not np.shares_memory(value, arrays[key])
        assert not any(np.shares_memory(value, array) for array in march_arrays(walk.march))
        if value.flags.writeable:
            value[...] = np.nan
    assert bits(walk, searched=False) == bits(twin, searched=False)


def test_a_case_keeps_no_hold_of_what_it_was_given() -> None:
    fractions = {"N2": 0.79, "O2": 0.21}
    case = cycle.load(case_file("plain")).replace({"air.mole_fractions": fractions})
    fractions["N2"] = 5.0
    assert case.fractions["N2"] == 0.79
    for table in (case.numbers, case.choices, case.texts, case.fractions, case.studies, case.spelled):
        with pytest.raises(TypeError):
            table["flight.mach"] = 3.0  # type: ignore[index]
