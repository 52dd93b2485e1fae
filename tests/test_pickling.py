"""A solution that is pickled, or copied, says the same to the last bit, also what was not asked for before."""

from __future__ import annotations

import copy
import dataclasses
import pickle

import numpy as np
import pytest

import cycle
from cycle.flowpath.setting import setting
from tests.case_files import SHIPPED, case_file
from tests.whole_walk import bits, differing, random_walks


def solved(name: str) -> cycle.Walk:
    return cycle.solve(cycle.load(case_file(name)))


def test_every_shipped_case_says_the_same_in_a_fresh_process() -> None:
    """As one point and as a batch; of every second one all is asked for before it is pickled."""
    cases = [cycle.load(path) for path in sorted(SHIPPED.glob("*.toml"))]
    walks = [cycle.solve(case) for case in cases]
    walks += [cycle.solve(case, {"combustor.burnt_fraction": [[0.7, 0.8], [0.9, 1.0]]}) for case in cases[::2]]
    for walk in walks[::2]:
        bits(walk, searched=False)
    assert not differing(walks, searched=False)


@pytest.mark.parametrize("seed", [3, 14, 159])
def test_random_cases_say_the_same_in_a_fresh_process(seed: int) -> None:
    assert not differing(random_walks(seed), searched=False)


@pytest.mark.parametrize("name", ["plain", "tidegate"])
def test_copies_say_the_same_and_share_nothing_that_can_change(name: str) -> None:
    walk = cycle.solve(cycle.load(case_file(name)), {"combustor.burnt_fraction": [0.9, 1.0]})
    own = bits(walk, searched=False)
    for other in (copy.deepcopy(walk), copy.copy(walk), pickle.loads(pickle.dumps(walk))):
        assert bits(other, searched=False) == own
        assert other.case == walk.case
        with pytest.raises(ValueError, match="read-only"):
            other.performance.thrust[0] = 1.0
        with pytest.raises(ValueError, match="read-only"):
            other.march.records[0].stream.velocity[0] = 1.0


def test_figures_of_a_solution_can_be_pickled_alone() -> None:
    walk = solved("plain")
    for figures in (walk.performance, walk.station["4"], walk.processes[2].figures):
        for again in (pickle.loads(pickle.dumps(figures)), copy.deepcopy(figures)):
            assert repr(dict(again)) == repr(dict(figures))
    assert pickle.loads(pickle.dumps(walk.station["4"])).mole_fractions == walk.station["4"].mole_fractions
    for part in (walk.losses, walk.limits, walk.audit, walk.notes, walk.profile):
        assert repr(pickle.loads(pickle.dumps(part))) == repr(part)


def test_what_was_searched_for_goes_with_a_pickled_solution() -> None:
    """The heat limits of a duct take a search: a copy has them where the original does, and its limits show them."""
    walk = solved("tidegate")
    before = repr(walk.limits_so_far)
    assert repr(pickle.loads(pickle.dumps(walk)).limits_so_far) == before
    assert walk.heat_limits
    assert repr(pickle.loads(pickle.dumps(walk)).limits_so_far) == repr(walk.limits_so_far) != before


def test_limits_of_a_batch_do_not_depend_on_what_was_asked_first() -> None:
    """Those that were read before the heat limits do not hide them."""
    walk = cycle.solve(cycle.load(case_file("tidegate")), {"combustor.burnt_fraction": [0.9, 1.0]})
    before = {row.key: row for row in walk.limits}["unstart_heat"]
    largest = walk.heat_limits["unstart"]
    after = {row.key: row for row in walk.limits}["unstart_heat"]
    assert np.isnan(before.allowed).all() and np.array_equal(after.allowed, largest)
    assert walk.limits is walk.limits
    tables = (walk.heat_limits, walk.heat_limit_causes)
    assert all(array.shape == (2,) and not array.flags.writeable for table in tables for array in table.values())


def test_a_pickled_solution_is_no_larger_than_its_march() -> None:
    """About 10 kB for one point, 30 kB of a duct; a batch 1.6 kB a point, and no more where dear figures were asked for."""
    assert len(pickle.dumps(solved("plain"))) < 20e3
    assert len(pickle.dumps(solved("tidegate"))) < 50e3
    walk = cycle.solve(cycle.load(case_file("plain")), {"flight.mach": np.linspace(7.0, 9.0, 2000)})
    size = len(pickle.dumps(walk))
    assert size < 1.8e3 * 2000
    assert np.isfinite(walk.station["4"].critical_pressure).any() and walk.losses and walk.limits
    assert len(pickle.dumps(walk)) == size


def test_species_tables_are_known_again() -> None:
    """A table made for a pickled solution is the one that is there: what is kept by table is found."""
    table = solved("plain").march.setting.table
    assert table is not None and pickle.loads(pickle.dumps(table)) is table is copy.deepcopy(table)
    part = table.part(np.arange(table.basis))
    again = pickle.loads(pickle.dumps(part))
    assert again.names == part.names and np.array_equal(again.h, part.h) and not again.whole


def test_a_case_is_the_same_once_pickled_or_copied() -> None:
    for path in sorted(SHIPPED.glob("*.toml")):
        case = cycle.load(path)
        for again in (pickle.loads(pickle.dumps(case)), copy.deepcopy(case), copy.copy(case)):
            assert again == case and hash(again) == hash(case)
            for field in dataclasses.fields(case):
                mine, other = getattr(case, field.name), getattr(again, field.name)
                assert mine == other and type(mine) is type(other), field.name
            assert setting(again.numbers, again.choices, again.texts, again.fractions, {}, 1).size == 1
