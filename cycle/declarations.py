"""What a declaration of an input, a group of inputs or an output says."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Literal

Kind = Literal["number", "choice", "text", "flag", "fractions", "rows"]
NEGLIGIBLE = 1e-12
"""Share of the upper bound of an input that counts as 0 where 0 is no value: figures so far apart lose each other to rounding."""

When = tuple[tuple[str, tuple[str, ...]], ...]


@dataclass(frozen=True, slots=True)
class Input:
    """One key of a case file.

    unit: a dimension name of `cycle.units` (SI inside); lower and upper are inclusive bounds in SI, above and below
    exclusive ones; flight_upper: the upper bound, where it is lower, of a case in flight. default None: the key is optional, or
    required where `required`. step: the natural step of an edit. whole: whole numbers only. follows: the key whose value holds when
    this one is absent. by_fuel: the default for each built-in fuel; the one named "" is that of every other fuel.
    when: (choice, allowed values) pairs that must hold for the key to mean anything; the value "" holds where that choice
    does not apply itself.
    Kind "rows", an array of tables: columns, whose keys are plain names; fewest and most rows; one_of, columns of which each
    row has exactly one.
    """

    key: str
    symbol: str
    label: str
    meaning: str
    unit: str = "ratio"
    kind: Kind = "number"
    lower: float | None = None
    upper: float | None = None
    flight_upper: float | None = None
    above: float | None = None
    below: float | None = None
    default: float | str | bool | None = None
    required: bool = False
    whole: bool = False
    follows: str = ""
    by_fuel: tuple[tuple[str, float], ...] = ()
    step: float = 0.01
    choices: tuple[str, ...] = ()
    when: When = ()
    source: str = "common practice"
    columns: tuple[Input, ...] = ()
    fewest: int = 1
    most: int = 64
    one_of: tuple[str, ...] = ()

    def default_in(self, choices: Mapping[str, str | None]) -> float | str | bool | None:
        """The default beside these choices of a case."""
        fuels = dict(self.by_fuel)
        return fuels.get(choices.get("fuel.name") or "", fuels[""]) if fuels else self.default

    @property
    def over(self) -> float | None:
        """What a value must exceed: `above`, of which 0 means more than a negligible part of the upper bound."""
        return NEGLIGIBLE * self.upper if self.above == 0.0 and self.upper is not None else self.above

    @property
    def section(self) -> str:
        """Table of the case file that holds the key; "table.sub-table" for a sub-table."""
        return self.key.rpartition(".")[0]

    @property
    def name(self) -> str:
        """The key inside its table."""
        return self.key.rpartition(".")[2]


@dataclass(frozen=True, slots=True)
class Member:
    """One way of saying what a group says: `keys` must all be given, `also` may be. Several may share a tag."""

    tag: str
    keys: tuple[str, ...]
    also: tuple[str, ...] = ()


@dataclass(frozen=True, slots=True)
class Group:
    """Several ways to say one thing; at most one is given. default: the tag that holds when none is."""

    name: str
    meaning: str
    members: tuple[Member, ...]
    required: bool = True
    default: str | None = None
    when: When = ()


@dataclass(frozen=True, slots=True)
class Output:
    """One emitted figure. unit: a dimension name of `cycle.units`; where: the table it stands in."""

    key: str
    symbol: str
    label: str
    meaning: str
    unit: str = "ratio"
    where: str = "station"
    equation: str = ""
    source: str = "definition"


@dataclass(frozen=True, slots=True)
class Optimistic:
    """A default that flatters. key: of the input; default: what holds where nothing is given; usual: what an engine is more likely to
    have, common practice; change: of specific impulse from default to usual, s, this input alone, on the case `inputs.FLATTERED`."""

    key: str
    default: float | str
    usual: float | str
    change: int
