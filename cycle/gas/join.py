"""Solve the same closure for several gases at once: stations of one walk become one batch."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass
from functools import singledispatch

import numpy as np

from cycle.arrays import Array
from cycle.gas.base import Gas
from cycle.gas.constant import ConstantGas
from cycle.gas.equilibrium import EquilibriumGas
from cycle.gas.frozen import FrozenGas
from cycle.gas.state import State


@dataclass(frozen=True, slots=True)
class Request:
    """A closure to solve for one gas: kind, targets (N,), start; as for `Gas.at`."""

    gas: Gas
    targets: tuple[Array, ...]
    start: State | None = None


@singledispatch
def _joined(first: Gas, parts: Sequence[Gas]) -> Gas:
    raise TypeError(f"no way to join gases of type {type(first).__name__}")


@_joined.register
def _(first: ConstantGas, parts: Sequence[ConstantGas]) -> Gas:
    return ConstantGas(np.concatenate([g.cp for g in parts]), np.concatenate([g.gas_constant for g in parts]))


@_joined.register
def _(first: FrozenGas, parts: Sequence[FrozenGas]) -> Gas:
    return FrozenGas(first.table, np.concatenate([g.composition for g in parts], axis=1))


@_joined.register
def _(first: EquilibriumGas, parts: Sequence[EquilibriumGas]) -> Gas:
    return EquilibriumGas(first.table, np.concatenate([g.basis for g in parts], axis=1), np.concatenate([g.inert for g in parts], axis=1))


def _joined_states(parts: Sequence[State | None]) -> State | None:
    states = [s for s in parts if s is not None]
    if len(states) < len(parts):
        return None
    columns = []
    for values in zip(*(s.values() for s in states), strict=True):
        held = [v for v in values if v is not None]
        columns.append(np.concatenate(held, axis=-1) if len(held) == len(values) else None)
    return State(*columns)  # type: ignore[arg-type]


Law = Callable[..., State]
"""A law of one gas: (gas, *targets, start) -> state of its points."""


def apply_together(law: Law, requests: Sequence[Request]) -> list[State]:
    """`law` for all requests, in their order; those of one gas model are solved as one batch.

    All gases of one model must share their species table, as the stations of a walk do.
    """
    found: list[State | None] = [None] * len(requests)
    for model in {type(r.gas): None for r in requests}:
        where = [i for i, r in enumerate(requests) if type(r.gas) is model]
        group = [requests[i] for i in where]
        gas = group[0].gas if len(group) == 1 else _joined(group[0].gas, [r.gas for r in group])
        targets = [np.concatenate(columns) for columns in zip(*(r.targets for r in group), strict=True)]
        state = law(gas, *targets, start=_joined_states([r.start for r in group]))
        low = 0
        for i in where:
            high = low + requests[i].gas.size
            found[i] = state.take(np.arange(low, high))
            low = high
    return [s for s in found if s is not None]


def solve_together(kind: str, requests: Sequence[Request]) -> list[State]:
    """States of all requests by the closure `kind`, in their order, one batch a gas model."""
    return apply_together(lambda gas, *targets, start: gas.at(kind, *targets, start=start), requests)
