"""Published values with their sources, shipped with the package and read by the tests and by self-verification."""

from __future__ import annotations

import tomllib
from collections import Counter
from collections.abc import Mapping
from dataclasses import dataclass
from functools import cache
from importlib.resources import files
from types import MappingProxyType
from typing import Any

CLASSES = ("read", "closed form", "independent calculation", "memory")
"""How well a check is founded, best first. "memory" never counts as published."""


@dataclass(frozen=True)
class Given:
    """An input of a check: value (a number, or text when the unit is "-") and unit as written in the file."""

    value: float | str
    unit: str


@dataclass(frozen=True)
class Expected:
    """A value to be met: value and tolerance in `unit`; polynomial_tolerance, same unit, for NASA polynomials."""

    value: float
    tolerance: float
    unit: str
    polynomial_tolerance: float | None


@dataclass(frozen=True)
class Check:
    """One published value or group of values.

    topic is the letter of the file name; subject says what is checked; founded is one of `CLASSES`.
    """

    id: str
    topic: str
    subject: str
    source: str
    founded: str
    how_verified: tuple[str, ...]
    tolerance_basis: str
    inputs: Mapping[str, Given]
    expected: Mapping[str, Expected]
    relation: str
    note: str


def checks(topic: str | None = None) -> tuple[Check, ...]:
    """All checks, or those of one topic.

    topic: letter of the topic as in the file names ("a", "a2", "b" ...), or None for all. Returns the checks in file
    order. Raises ValueError for an unknown topic.
    """
    by_topic = _all_checks()
    if topic is None:
        return tuple(check for group in by_topic.values() for check in group)
    if topic not in by_topic:
        raise ValueError(f"no evidence on topic {topic!r}; topics: {', '.join(by_topic)}")
    return by_topic[topic]


def counts(topic: str | None = None) -> dict[str, int]:
    """Number of checks by class, every class of `CLASSES` named.

    topic: as in `checks`. Returns {class: number of checks}. Raises ValueError for an unknown topic.
    """
    found = Counter(check.founded for check in checks(topic))
    return {name: found[name] for name in CLASSES}


@cache
def _all_checks() -> Mapping[str, tuple[Check, ...]]:
    sources = sorted(
        (item for item in files(__package__).iterdir() if item.name.endswith(".toml")),
        key=lambda item: item.name,
    )
    return MappingProxyType({topic: _read(topic, item.read_text(encoding="utf-8")) for item in sources for topic in [_topic(item.name)]})


def _topic(file_name: str) -> str:
    return file_name.split("_", 1)[0]


def _read(topic: str, text: str) -> tuple[Check, ...]:
    return tuple(_check(topic, block) for block in tomllib.loads(text)["check"])


def _check(topic: str, block: dict[str, Any]) -> Check:
    if block["class"] not in CLASSES:
        raise ValueError(f"check {block['id']}: unknown class {block['class']!r}")
    return Check(
        id=block["id"],
        topic=topic,
        subject=block["topic"].split(". ", 1)[-1],
        source=block["source"],
        founded=block["class"],
        how_verified=tuple(block["how_verified"]),
        tolerance_basis=block["tolerance_basis"],
        inputs=MappingProxyType({key: Given(v["value"], v["unit"]) for key, v in block["inputs"].items()}),
        expected=MappingProxyType({key: _expected(v) for key, v in block["expected"].items()}),
        relation=block.get("relation", ""),
        note=block.get("note", ""),
    )


def _expected(entry: dict[str, Any]) -> Expected:
    return Expected(entry["value"], entry["tol"], entry["unit"], entry.get("tol_nasa_polynomials"))
