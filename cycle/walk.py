"""The walk: the stream marches through the components, and what each did is kept.

Points that fail drop out where they fail; the rest go on. Nothing here knows a file, a unit or a screen.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from functools import partial

import numpy as np

from cycle.arrays import Array, Codes
from cycle.flowpath import combustor, flight, inlet, nozzle
from cycle.flowpath.setting import Setting
from cycle.flowpath.stream import SOLVED, Process, Step, Stream
from cycle.gas.base import Gas
from cycle.gas.frozen import FrozenGas


@dataclass(frozen=True, slots=True)
class Record:
    """One process and the stream behind it, of the points `index` that came through."""

    process: Process
    index: Codes
    stream: Stream

    def taken(self, points: Codes) -> Record:
        """The record of `points`, a sorted subset of `index`."""
        if points.size == self.index.size:
            return self
        at = np.searchsorted(self.index, points)
        return Record(self.process.take(at), points, self.stream.take(at))


@dataclass(frozen=True, slots=True)
class March:
    """A walked batch: the setting, status codes (N,), the position of the failed process (N,) or -1, the chain of
    process names, and the records in order."""

    setting: Setting
    status: Codes
    failed: Codes
    chain: tuple[str, ...]
    records: tuple[Record, ...]

    @property
    def solved(self) -> Codes:
        """Indices of the points that came through every process."""
        return np.flatnonzero(self.status == SOLVED)

    def named(self, name: str) -> Record | None:
        """The record of a process; None where no point came through it."""
        return next((r for r in self.records if r.process.name == name), None)

    def stations(self) -> dict[str, Record]:
        """Station name -> the record that first reached it, in order along the stream."""
        found: dict[str, Record] = {}
        for record in self.records:
            found.setdefault(record.process.end, record)
        return dict(sorted(found.items(), key=lambda item: int(item[0])))

    def ambient_pressure(self, points: Codes) -> Array:
        """Ambient pressure of `points`, Pa; NaN for a rig, which has none."""
        record = self.named("flight")
        if record is None:
            return np.full(points.shape, np.nan)
        return record.stream.state.pressure[np.searchsorted(record.index, points)]


Part = Callable[[Stream, Setting], Step | None]


def _as_station_3(stream: Stream, setting: Setting) -> Step:
    """Without an isolator the burner entry is the inlet throat."""
    return Step(stream, Process("isolator", "2", "3"), np.zeros(setting.size, np.int64))


def _burn(stream: Stream, setting: Setting) -> Step:
    return combustor.burner(combustor.burner_gas(stream, setting), setting)


def _to_combustion(stream: Stream, setting: Setting) -> Step | None:
    if not setting.constant_gamma:
        return None
    return combustor.gas_change(stream, combustor.combustion_cp(setting), "3")


def _to_expansion(stream: Stream, setting: Setting) -> Step | None:
    if not setting.constant_gamma:
        return None
    return combustor.gas_change(stream, combustor.expansion_cp(setting), "4")


def _freeze(stream: Stream, setting: Setting) -> Step | None:
    frozen = nozzle.nozzle_gas(stream, setting)
    if frozen is stream:
        return None
    return Step(frozen, Process("frozen chemistry", "4", "4"), np.zeros(setting.size, np.int64))


def _parts(setting: Setting) -> list[tuple[str, Part]]:
    """The processes that this case's stream goes through, in order, after it has entered."""
    parts: list[tuple[str, Part]] = []
    if setting.choices["start"] == "flight":
        parts += [("inlet", inlet.inlet), ("isolator", _as_station_3)]
    elif setting.choices["entry.station"] == "2":
        parts += [("isolator", _as_station_3)]
    parts += [("gas change", _to_combustion), ("burner", _burn)]
    if setting.choices["nozzle.exit"] == "absent":
        return parts
    parts += [("gas change", _to_expansion), ("frozen chemistry", _freeze)]
    if setting.choices["nozzle.throat"] == "sized":
        parts.append(("throat", nozzle.throat))
    return parts


def march(setting: Setting) -> March:
    """Walk every point of `setting` as far as it goes."""
    entering = {"flight": flight.flight, "entry": flight.entry}[setting.choices["start"]]
    walked = _Walked(setting)
    walked.take(setting.choices["start"], entering)
    for name, part in _parts(setting):
        walked.take(name, partial(_continue, walked, part))
    if setting.choices["nozzle.exit"] != "absent":
        walked.take("nozzle", lambda s: nozzle.nozzle(walked.stream, s, walked.ambient()))
    return walked.march()


def _continue(walked: _Walked, part: Part, setting: Setting) -> Step | None:
    return part(walked.stream, setting)


class _Walked:
    """The march under way: which points are still walking, and what has been recorded."""

    def __init__(self, setting: Setting) -> None:
        self.setting = setting
        self.alive: Codes = np.arange(setting.size)
        self.status: Codes = np.zeros(setting.size, np.int64)
        self.failed: Codes = np.full(setting.size, -1)
        self.chain: list[str] = []
        self.records: list[Record] = []

    @property
    def stream(self) -> Stream:
        """The stream of the points still walking."""
        return self.records[-1].stream

    def ambient(self) -> Array:
        """Ambient pressure of the points still walking; NaN for a rig."""
        first = self.records[0]
        if first.process.name != "flight":
            return np.full(self.alive.shape, np.nan)
        return first.stream.state.pressure[np.searchsorted(first.index, self.alive)]

    def take(self, name: str, part: Callable[[Setting], Step | None]) -> None:
        """Let the walking points go through one process; those that fail stop here."""
        if not self.alive.size:
            self.chain.append(name)
            return
        whole = self.alive.size == self.setting.size
        step = part(self.setting if whole else self.setting.take(self.alive))
        if step is None:
            return
        self.chain.append(name)
        through = step.status == SOLVED
        self.status[self.alive] = step.status
        self.failed[self.alive[~through]] = len(self.chain) - 1
        if not through.all():
            keep = np.flatnonzero(through)
            step = Step(step.stream.take(keep), step.process.take(keep), step.status[keep])
            self.alive = self.alive[keep]
        if self.alive.size:
            self.records.append(Record(step.process, self.alive, step.stream))

    def march(self) -> March:
        """What was walked."""
        return March(self.setting, self.status, self.failed, tuple(self.chain), tuple(self.records))


def case_gas(gas: Gas, setting: Setting) -> Gas:
    """The gas in which a station's potential expands: the case's own, so shifting where the case is equilibrium and its
    composition was only held by the inlet's choice."""
    if setting.choices["gas.model"] == "equilibrium" and isinstance(gas, FrozenGas):
        return gas.reacting()
    return gas
