"""Published values with their sources, shipped with the package and read by the tests and by self-verification."""

from __future__ import annotations

import tomllib
from collections import Counter
from collections.abc import Iterator, Mapping
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


@dataclass(frozen=True)
class Figure:
    """A number of an independent solution: value and its numerical uncertainty, in `unit`."""

    value: float
    uncertainty: float
    unit: str


@dataclass(frozen=True)
class Flowpath:
    """An independent solution of a whole flowpath.

    case: the tables of its case file, SI. slices: of each segment in its two grids. mode: in words. expected: figures by
    dotted place, such as "station.2.pressure" or "station.4.mole_fraction.H2O".
    """

    id: str
    title: str
    slices: tuple[int, int]
    case: Mapping[str, Any]
    mode: str
    expected: Mapping[str, Figure]


@cache
def flowpath() -> tuple[Flowpath, ...]:
    """The independent solutions of whole flowpaths, in order; own calculations, not published."""
    sources = sorted((item for item in files(__package__).joinpath("flowpath").iterdir() if item.name.endswith(".toml")), key=str)
    return tuple(_flowpath(tomllib.loads(item.read_text(encoding="utf-8"))) for item in sources)


def _flowpath(content: dict[str, Any]) -> Flowpath:
    expected = {key: value for key, value in content["expected"].items() if key != "mode"}
    low, high = content["slices_per_segment"]
    return Flowpath(
        content["id"], content["title"], (low, high), MappingProxyType(content["case"]), content["expected"]["mode"],
        MappingProxyType(dict(_figures("", expected))),
    )  # fmt: skip


def _figures(place: str, table: Mapping[str, Any]) -> Iterator[tuple[str, Figure]]:
    for key, value in table.items():
        if "uncertainty" in value:
            yield f"{place}{key}", Figure(float(value["value"]), value["uncertainty"], value["unit"])
        else:
            yield from _figures(f"{place}{key}.", value)


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
