"""The walk: the stream marches through the components, and what each did is kept.

Points that fail drop out where they fail; the rest go on. Nothing here knows a file, a unit or a screen.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass, replace
from functools import partial

import numpy as np

from cycle.arrays import Array, Codes
from cycle.flowpath import assembly, combustor, flight, inlet, isolator, nozzle, viscous
from cycle.flowpath.setting import Setting
from cycle.flowpath.stream import SOLVED, Process, Step, Steps, Stream
from cycle.flowpath.viscous import VISCOUS
from cycle.gas.base import Gas
from cycle.gas.frozen import FrozenGas
from cycle.gas.state import scatter
from cycle.quantities import MODES

RELEASED = "composition released"
"""Process in which a composition that the inlet held goes to equilibrium ahead of the burner."""


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
    process names, the records in order, and ended: name of a process, the points that it ended, and its figures there."""

    setting: Setting
    status: Codes
    failed: Codes
    chain: tuple[str, ...]
    records: tuple[Record, ...]
    ended: tuple[tuple[str, Codes, Mapping[str, Array]], ...] = ()

    def figure(self, process: str, figure: str) -> Array:
        """A figure of a process over all points (N,), also of those that it ended; NaN where it has none."""
        return self._figure(process, figure, self.named(process))

    def figure_of(self, record: Record, figure: str) -> Array:
        """A figure of one record's process, (N,), also of the points that it ended."""
        return self._figure(record.process.name, figure, record)

    def _figure(self, process: str, figure: str, record: Record | None) -> Array:
        found = np.full(self.setting.size, np.nan)
        for name, index, figures in self.ended:
            if name == process and figure in figures:
                found[index] = figures[figure]
        if record is not None and figure in record.process.figures:
            found[record.index] = record.process.figures[figure]
        return found

    @property
    def solved(self) -> Codes:
        """Indices of the points that came through every process."""
        return np.flatnonzero(self.status == SOLVED)

    def reached(self, station: str) -> Record | None:
        """The record that first reached a station; None where no point did."""
        return self.stations().get(station)

    def named(self, name: str) -> Record | None:
        """The record of a process; None where no point came through it."""
        return next((r for r in self.records if r.process.name == name), None)

    def stations(self) -> dict[str, Record]:
        """Station name -> the record that first reached it, behind its friction at the inlet throat, in order along the stream."""
        return _stations(self.records)

    def ambient_pressure(self, points: Codes) -> Array:
        """Ambient pressure of `points`, Pa; NaN for a rig, which has none."""
        record = self.named("flight")
        if record is None:
            return np.full(points.shape, np.nan)
        return record.stream.state.pressure[np.searchsorted(record.index, points)]


def _stations(records: Sequence[Record]) -> dict[str, Record]:
    found: dict[str, Record] = {}
    for record in records:
        if record.process.name == VISCOUS:
            found[record.process.end] = record
        found.setdefault(record.process.end, record)
    return dict(sorted(found.items(), key=lambda item: int(item[0])))


Part = Callable[[Stream, Setting], Step | Steps | None]


def _burn(stream: Stream, setting: Setting) -> Step:
    return combustor.burner(combustor.burner_gas(stream, setting), setting)


def _to_combustion(stream: Stream, setting: Setting) -> Step | None:
    return combustor.gas_change(stream, combustor.combustion_cp(setting), "3") if setting.constant_gamma else None


def _to_expansion(stream: Stream, setting: Setting) -> Step | None:
    if not setting.constant_gamma:
        return None
    return combustor.gas_change(stream, combustor.expansion_cp(setting), "4")


def _release(station: str) -> Part:
    def release(stream: Stream, setting: Setting) -> Step | None:
        if not isinstance(stream.gas, FrozenGas):
            return None
        released = combustor.burner_gas(stream, setting)
        if released is stream:
            return None
        return Step(released, Process(RELEASED, station, station), np.zeros(setting.size, np.int64))

    return release


def _freeze(station: str) -> Part:
    def freeze(stream: Stream, setting: Setting) -> Step | None:
        frozen = nozzle.nozzle_gas(stream, setting, station)
        if frozen is stream:
            return None
        return Step(frozen, Process("frozen chemistry", station, station), np.zeros(setting.size, np.int64))

    return freeze


def _entry(setting: Setting) -> list[tuple[str, Part]]:
    """From station 0 to 2: the inlet, by performance or by geometry."""
    if setting.choices["start"] != "flight":
        return []
    by_geometry = setting.choices["inlet.quality"] == "geometry"
    return [("inlet", assembly.inlet_by_geometry if by_geometry else inlet.inlet)]


def _to_burner_exit(setting: Setting) -> list[tuple[str, Part]]:
    """From station 2 (or a rig's 3) to 4."""
    at_3 = assembly.enters_at_3(setting)
    if setting.choices["combustor.process"] == "duct":
        return [(RELEASED, _release("3" if at_3 else "2")), ("duct", isolator.ahead_of(assembly.duct))]
    diffuser = assembly.diffuser if setting.has("nozzle.throat_area") else isolator.straight
    ahead: list[tuple[str, Part]] = [] if at_3 else [("isolator", diffuser)]
    return [*ahead, ("gas change", _to_combustion), (RELEASED, _release("3")), ("burner", _burn)]


def _parts(setting: Setting) -> list[tuple[str, Part]]:
    """The processes that this case's stream goes through behind the inlet, in order."""
    parts = _to_burner_exit(setting)
    if setting.choices["nozzle.exit"] == "absent":
        return parts
    parts += [("gas change", _to_expansion), ("frozen chemistry", _freeze("4"))]
    if nozzle.has_throat(setting):
        parts += [("throat", nozzle.throat), ("frozen chemistry", _freeze("5"))]
    return parts


def march(setting: Setting) -> March:
    """Walk every point of `setting` as far as it goes."""
    entering = {"flight": flight.flight, "entry": flight.entry}[setting.choices["start"]]
    walked = _Walked(setting)
    walked.take(setting.choices["start"], entering)
    for name, part in _entry(setting):
        walked.take(name, partial(_continue, walked, part))
    if setting.choices.get("inlet.viscous", "none") != "none":
        walked.take(VISCOUS, lambda s: viscous.loss(walked.stream, s, walked.ambient()))
    for name, part in _parts(setting):
        walked.take(name, partial(_continue, walked, part))
    if setting.choices["nozzle.exit"] != "absent":
        walked.take("nozzle", lambda s: assembly.expansion(walked.stream, s, walked.ambient()))
    return walked.march()


def _continue(walked: _Walked, part: Part, setting: Setting) -> Step | Steps | None:
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
        self.ended: list[tuple[str, Codes, Mapping[str, Array]]] = []

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

    def take(self, name: str, part: Callable[[Setting], Step | Steps | None]) -> None:
        """Let the walking points go through one part; those that fail stop there."""
        if not self.alive.size:
            self.chain.append(name)
            return
        whole = self.alive.size == self.setting.size
        given = part(self.setting if whole else self.setting.take(self.alive))
        if given is None:
            return
        found = given if isinstance(given, Steps) else Steps((given,))
        self._change_ahead(found)
        keep = np.arange(self.alive.size)
        for step in found.steps:
            keep = self._record(step, keep)

    def _record(self, step: Step, keep: Codes) -> Codes:
        """Record one step of the points `keep` of those that entered the part; which of them come through."""
        self.chain.append(step.process.name)
        status = step.status[keep]
        through = status == SOLVED
        self.status[self.alive] = status
        self.failed[self.alive[~through]] = len(self.chain) - 1
        if step.process.figures and not through.all():
            figures = {name: values[keep[~through]] for name, values in step.process.figures.items()}
            self.ended.append((step.process.name, self.alive[~through], figures))
        self.alive, keep = self.alive[through], keep[through]
        if keep.size:
            everyone = keep.size == step.status.size
            part = step if everyone else Step(step.stream.take(keep), step.process.take(keep), step.status[keep])
            self.records.append(Record(part.process, self.alive, part.stream))
        return keep

    def _change_ahead(self, found: Steps) -> None:
        """Give the stations ahead the mass flow that is captured, and the streams that the solution has changed."""
        if found.captured is None and not found.replaced:
            return
        entered = np.flatnonzero(found.steps[0].status == SOLVED)
        solved = np.flatnonzero(np.all([s.status == SOLVED for s in found.steps], axis=0))
        own = _stations(self.records)
        for i, record in enumerate(self.records):
            stream = record.stream
            if found.captured is not None:
                flow = stream.mass_flow.copy()
                flow[np.searchsorted(record.index, self.alive[entered])] *= found.captured[entered]
                stream = replace(stream, mass_flow=flow)
            if record.process.end in found.replaced and own[record.process.end] is record:
                at = np.searchsorted(record.index, self.alive[solved])
                new = found.replaced[record.process.end].take(solved)
                stream = _with_points(stream, at, new)
            self.records[i] = Record(record.process, record.index, stream)

    def march(self) -> March:
        """What was walked."""
        return March(self.setting, self.status, self.failed, tuple(self.chain), tuple(self.records), tuple(self.ended))


def _with_points(stream: Stream, at: Codes, new: Stream) -> Stream:
    """The stream with the points `at` in their new state; the gas of a point does not change."""
    columns = {name: getattr(stream, name).copy() for name in ("velocity", "mass_flow", "axial_factor")}
    for name, column in columns.items():
        column[at] = getattr(new, name)
    return Stream(stream.gas, scatter(stream.state, at, new.state), **columns)


def modes(march: March, of_rigs: bool = False) -> list[str]:
    """The engine mode found at each point, a key of `quantities.MODES`. of_rigs: that of a rig's own duct instead of "rig"."""
    found = ["none"] * march.setting.size
    record = march.named("isolator")
    names = [] if record is None else [k.removeprefix("mode_") for k in record.process.figures if k.startswith("mode_")]
    for point in march.solved:
        if march.chain[0] == "entry" and not (of_rigs and names):
            found[point] = "rig"
        elif record is not None and names:
            at = int(np.searchsorted(record.index, point))
            own = next(n for n in names if record.process.figures[f"mode_{n}"][at] == 1.0)
            found[point] = own if own in MODES else f"ramjet-{own}"
        else:
            found[point] = "ramjet-critical" if nozzle.has_throat(march.setting) else "scramjet"
    return found


def case_gas(gas: Gas, setting: Setting) -> Gas:
    """The gas in which a station's potential expands: the case's own, so shifting where the case is equilibrium and its
    composition was only held by the inlet's choice."""
    if setting.choices["gas.model"] == "equilibrium" and isinstance(gas, FrozenGas):
        return gas.reacting()
    return gas
