"""Where the difference between two cases comes from: shares by groups of inputs, swapped over all orders.

The share of a group is what swapping it adds, averaged over all orders in which the groups can be swapped: the shares add
up to the difference, equal groups have equal ones, and a group that changes nothing has none. Orders that pass a combination
without a solution are left out of the average; which combination that is, is said.
Source: Shapley, A value for n-person games, Annals of Mathematics Studies 28 (1953) 307.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Generator, Iterable, Mapping, Sequence
from dataclasses import dataclass
from itertools import combinations
from typing import TYPE_CHECKING, cast

import numpy as np

from cycle.case import INPUT_GROUPS, Case, differences, taking
from cycle.case.difference import group_of
from cycle.errors import CaseError
from cycle.flowpath.setting import why_fixed
from cycle.quantities import HEADLINE, INPUTS
from cycle.result import solve

if TYPE_CHECKING:
    from cycle.arrays import ArrayLike

Groups = frozenset[str]
"""Names of the groups that are taken from the second case."""


@dataclass(frozen=True, slots=True)
class Part:
    """What one group of inputs, or several that are taken together, has of the difference.

    groups: names of `INPUT_GROUPS`; keys: inputs and groups that differ in them; shares: output -> share of the difference, SI.
    """

    groups: tuple[str, ...]
    keys: tuple[str, ...]
    shares: Mapping[str, float]


@dataclass(frozen=True, slots=True)
class Shares:
    """What `shares` found. outputs: headline figures that both cases have; first and second: their values, SI; notes: which groups are
    taken together and why, which combinations have no solution and how many orders are left; why_not: why nothing is shared out, or ""."""

    parts: tuple[Part, ...]
    outputs: tuple[str, ...]
    first: Mapping[str, float]
    second: Mapping[str, float]
    notes: tuple[str, ...] = ()
    why_not: str = ""


@dataclass(frozen=True, slots=True)
class _Corner:
    """One combination: its figures, or why it has none; case: whether it is a case at all."""

    figures: Mapping[str, float]
    why: str = ""
    case: bool = True


def shares(a: Case, b: Case, names: tuple[str, str] | None = None) -> Shares:
    """Where the headline figures of b less those of a come from, found at once; see `shares_in_steps`.

    Parameters: a, b, two cases; names, what sentences call them. Returns: `Shares`.
    """
    steps = shares_in_steps(a, b, 1 << len(INPUT_GROUPS), names)
    while True:
        try:
            next(steps)
        except StopIteration as done:
            return cast(Shares, done.value)


def shares_in_steps(a: Case, b: Case, most: int = 8, names: tuple[str, str] | None = None) -> Generator[None, None, Shares]:
    """Where the headline figures of b less those of a come from, in steps between which something else may be done.

    Parameters: a, b, two cases; most, combinations that a step solves at most; names, what sentences call the cases, their own names
    for None.
    Returns: `Shares`; groups that differ are swapped in every combination, 256 at most. Groups of which a combination is no case
    are taken together. Where a combination has no solution the shares are averaged over the orders that do not pass it; where no
    order is left, groups are taken together until none is lost. The notes say so; where nothing is left to share out `why_not` does.
    """
    if a.choices["start"] != b.choices["start"]:
        return Shares((), (), {}, {}, (), "a flight and a rig have no headline figure in common")
    keys, called = _keys(a, b), names or (a.name, b.name)
    groups = [group for group in INPUT_GROUPS if group in keys]
    outputs = HEADLINE[a.choices["start"]]
    corners = yield from _corners(a, b, groups, outputs, most)
    first, second = corners[frozenset()], corners[frozenset(groups)]
    shown = tuple(key for key in outputs if not any(math.isnan(end.figures.get(key, math.nan)) for end in (first, second)))
    why = _nothing(called, groups, first, second, shown)
    lost = {} if why else _lost(corners, shown)
    players, notes = ([(group,) for group in groups], []) if why else _players(groups, corners, lost, _Namer(*called, keys))
    if not why and len(players) == 1 < len(groups):
        why, notes = f"no group can be swapped without the others: {notes[0]}", notes[1:-1]
    found = {} if why else {key: _of(players, corners, lost, key) for key in shown}
    parts = (Part(p, tuple(k for g in p for k in keys[g]), {key: found[key][i] for key in found}) for i, p in enumerate(players))
    return Shares(tuple(parts), shown, dict(first.figures), dict(second.figures), tuple(notes), why)


@dataclass(frozen=True, slots=True)
class _Namer:
    """Says which inputs a combination takes from where. first and second: names of the cases; keys: of each group that differ."""

    first: str
    second: str
    keys: Mapping[str, Sequence[str]]

    def told(self, taken: Groups, why: str) -> str:
        """A combination in words, and why it is lost."""
        own = _and([f"{group} ({', '.join(_few(keys))})" for group, keys in self.keys.items() if group in taken])
        return f"with {own} of {self.second} and all else of {self.first} there is {why}"


def _few(keys: Sequence[str], most: int = 3) -> list[str]:
    return [*keys[:most], *([f"{len(keys) - most} more"] if len(keys) > most else [])]


_TOLD = 3
"""Combinations without a solution that are told at most."""


def _players(
    groups: Sequence[str], corners: Mapping[Groups, _Corner], lost: Mapping[Groups, str], names: _Namer
) -> tuple[list[tuple[str, ...]], list[str]]:
    """Groups that are swapped as one each, and notes on what is lost."""
    players, notes = _together(groups, {taken: why for taken, why in lost.items() if not corners[taken].case})
    there = _exists(players, lost)
    (before, _), all_of = _orders(len(players), there), frozenset(range(len(players)))
    gaps = [t for t in _joint(players) if t in lost]
    if not gaps:
        return players, notes
    least = [t for t in gaps if not any(other < t for other in gaps)]
    told = [names.told(t, lost[t]) for t in least[:_TOLD]]
    if before[all_of]:
        others = len(gaps) - len(told)
        more = f", nor with {others} other{'s' * (others > 1)}" if others else ""
        count = f"the shares are means over the {before[all_of]} of {math.factorial(len(players))} orders without such a step"
        return players, [*notes, *told[:-1], told[-1] + more, count]
    joined, why = _together(groups, lost)
    return joined, [*notes, *told, *why]


def _joint(players: Sequence[tuple[str, ...]]) -> list[Groups]:
    """Every combination of players as groups, those of few players first."""
    sets = (chosen for size in range(len(players) + 1) for chosen in combinations(players, size))
    return [frozenset(group for player in chosen for group in player) for chosen in sets]


def _exists(players: Sequence[tuple[str, ...]], lost: Mapping[Groups, str]) -> Callable[[frozenset[int]], bool]:
    return lambda taken: frozenset(group for i in taken for group in players[i]) not in lost


def _of(players: Sequence[tuple[str, ...]], corners: Mapping[Groups, _Corner], lost: Mapping[Groups, str], key: str) -> tuple[float, ...]:
    def value(taken: frozenset[int]) -> float:
        return corners[frozenset(group for i in taken for group in players[i])].figures[key]

    return shapley(len(players), value, _exists(players, lost))


Set = frozenset[int]


def _orders(count: int, exists: Callable[[Set], bool]) -> tuple[dict[Set, int], dict[Set, int]]:
    """Of every set of players, in how many orders they can come before the others, and the others behind them, where no set on the way
    is lost."""
    sets = [frozenset(chosen) for size in range(count + 1) for chosen in combinations(range(count), size)]
    before, behind = {sets[0]: 1}, {sets[-1]: 1}
    for taken in sets[1:]:
        before[taken] = sum(before[taken - {i}] for i in taken) if exists(taken) else 0
    for taken in reversed(sets[:-1]):
        behind[taken] = sum(behind[taken | {i}] for i in sets[-1] - taken) if exists(taken) else 0
    return before, behind


def shapley(count: int, value: Callable[[Set], float], exists: Callable[[Set], bool] = lambda taken: True) -> tuple[float, ...]:
    """Shapley's shares of a game, averaged over the orders in which every set of players on the way exists.

    Parameters: count, number of players; value, of every set of players that exists; exists, whether one does; no set and all players
    always do. Returns: the share of each; they sum to the value of all less that of none, to rounding. NaN where no order is left.
    """
    before, behind = _orders(count, exists)
    every = before[frozenset(range(count))]
    if not every:
        return (math.nan,) * count
    values = {taken: value(taken) for taken in before if before[taken] and behind[taken]}

    def terms(i: int) -> Iterable[float]:
        for taken in values:
            weight = before[taken] * behind.get(taken | {i}, 0) / every if i not in taken else 0.0
            if weight:
                yield from (weight * values[taken | {i}], -weight * values[taken])

    return tuple(math.fsum(terms(i)) for i in range(count))


def _keys(a: Case, b: Case) -> dict[str, list[str]]:
    """Group -> the inputs of it that differ."""
    found: dict[str, list[str]] = {}
    for key, _, _ in differences(a, b):
        found.setdefault(group_of(key), []).append(key)
    return found


def _nothing(names: tuple[str, str], groups: Sequence[str], first: _Corner, second: _Corner, shown: Sequence[str]) -> str:
    """Why there is no difference to share out; "" where there is."""
    for name, corner in zip(names, (first, second), strict=True):
        if corner.why:
            return f"{name}: {corner.why}"
    if not groups:
        return "the inputs do not differ"
    return "" if shown else "no headline figure has a value on both sides"


def _lost(corners: Mapping[Groups, _Corner], shown: Iterable[str]) -> dict[Groups, str]:
    """Combinations without a value of every figure, and why."""
    gaps = {taken: [key for key in shown if math.isnan(corner.figures.get(key, math.nan))] for taken, corner in corners.items()}
    words = {taken: corners[taken].why or (f"no value of {missing[0]}" if missing else "") for taken, missing in gaps.items()}
    return {taken: why for taken, why in words.items() if why}


def _corners(a: Case, b: Case, groups: Sequence[str], outputs: Sequence[str], most: int) -> Generator[None, None, dict[Groups, _Corner]]:
    """Every combination of groups taken from b, solved: in one batch those that share their choices, `most` at once."""
    found: dict[Groups, _Corner] = {}
    alike: dict[object, list[tuple[Groups, Case]]] = {}
    every = (frozenset(chosen) for size in range(len(groups) + 1) for chosen in combinations(groups, size))
    for number, taken in enumerate(every, 1):
        if number % most == 0:
            yield
        try:
            mixed = {0: a, len(groups): b}.get(len(taken)) or taking(a, b, taken)
        except CaseError as error:
            found[taken] = _Corner({}, f"no case, {error.faults[0].text}", case=False)
            continue
        alike.setdefault(_likeness(mixed), []).append((taken, mixed))
    for same in alike.values():
        for part in (same[i : i + most] for i in range(0, len(same), most)):
            found.update(zip((taken for taken, _ in part), _solved([case for _, case in part], outputs), strict=True))
            yield
    return found


def _likeness(case: Case) -> object:
    """What cases must have in common to be solved in one batch."""
    fixed = tuple(value for key, value in sorted(case.numbers.items()) if why_fixed(key, case.choices))
    parts = (case.choices, case.texts, case.fractions)
    return (*(tuple(sorted(part.items())) for part in parts), frozenset(case.numbers), fixed)


def _solved(cases: Sequence[Case], outputs: Sequence[str]) -> list[_Corner]:
    """Cases that differ in numbers only."""
    first = cases[0]
    varying = {key for key in first.numbers if len({case.numbers[key] for case in cases}) > 1}
    for entry in INPUTS:
        if entry.follows in varying and entry.key in first.numbers:
            varying.add(entry.key)  # else it would follow in the batch where some of the cases give it
    arrays: dict[str, ArrayLike] = {key: np.array([case.numbers[key] for case in cases]) for key in first.numbers if key in varying}
    walk = solve(first, arrays)
    # a swap may change nothing in a combination: then one walk stands for all
    figures = {key: np.broadcast_to(walk.performance[key], len(cases)).tolist() for key in outputs}
    status, place = (np.broadcast_to(np.array(words, dtype=object), len(cases)) for words in (walk.status, walk.failed_process))
    whys = ("" if found == "solved" else f"no solution, {found} ({where})" for found, where in zip(status, place, strict=True))
    return [_Corner({key: figures[key][i] for key in outputs}, why) for i, why in enumerate(whys)]


def _together(groups: Sequence[str], lost: Mapping[Groups, str]) -> tuple[list[tuple[str, ...]], list[str]]:
    """The finest way to join groups so that no combination of them is lost, and why each that is joined is."""
    masks = {sum(1 << groups.index(group) for group in taken): why for taken, why in lost.items()}
    blocks = next(blocks for blocks in sorted(_partitions(len(groups)), key=len, reverse=True) if not any(_whole(m, blocks) for m in masks))
    notes: list[str] = []
    for block in (b for b in blocks if b.bit_count() > 1):
        torn = min((m for m in masks if m & block not in (0, block)), key=lambda m: (m.bit_count(), m))
        alone = _and(_named(groups, torn))
        notes.append(f"{_and(_named(groups, block))} are taken together: with {alone} alone swapped there is {masks[torn]}")
    return [_named(groups, block) for block in blocks], notes


def _partitions(count: int) -> list[tuple[int, ...]]:
    """Every way to divide players among blocks; a block is the sum of 2**i over its players."""
    found: list[tuple[int, ...]] = [()]
    for i in range(count):
        new = [(*blocks, 1 << i) for blocks in found]
        joined = [(*blocks[:k], blocks[k] | 1 << i, *blocks[k + 1 :]) for blocks in found for k in range(len(blocks))]
        found = [*new, *joined]
    return found


def _whole(mask: int, blocks: Sequence[int]) -> bool:
    """Whether a combination tears no block apart."""
    return all(mask & block in (0, block) for block in blocks)


def _named(groups: Sequence[str], mask: int) -> tuple[str, ...]:
    return tuple(group for i, group in enumerate(groups) if mask >> i & 1)


def _and(names: Sequence[str]) -> str:
    return names[0] if len(names) == 1 else f"{', '.join(names[:-1])} and {names[-1]}"
