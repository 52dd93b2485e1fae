"""The command `solve`: one walk a case, in the form asked for."""

from __future__ import annotations

import argparse
import csv
import io
from collections.abc import Callable, Iterable, Sequence
from dataclasses import dataclass, field
from pathlib import Path
from typing import TYPE_CHECKING

import cycle
from cycle.case import read_setting
from cycle.errors import CaseError, Fault
from cycle.quantities import OUTPUTS
from cycle.record import Json, dumps, is_stored, record, refused, stored, write
from cycle.units import display_unit, si_unit
from tui.output import emit, load_case, tell
from tui.tables import as_markdown, as_text
from tui.text import audit_words, headline_words, walk_blocks

if TYPE_CHECKING:
    from cycle.result import Walk

SOLVED, BAD_INPUT, NO_SOLUTION, AUDIT_FAILED = 0, 2, 3, 4


@dataclass(frozen=True, slots=True)
class Outcome:
    """What became of one case: its walk, or the faults of an input that is none."""

    name: str
    walk: Walk | None
    faults: tuple[Fault, ...] = field(default=())


def run(options: argparse.Namespace) -> int:
    """Solve the cases of the command line and write them; returns the exit status, the highest of all cases."""
    if options.output:
        _check_output(options.output, options.cases)
    changes = settings(options.set)
    write_all = FORMS[options.format]
    if options.format == "json" and options.units != "si":
        tell("JSON is always in SI; --units has no effect on it")
    outcomes: list[Outcome] = []

    def solved() -> Iterable[Outcome]:
        for name in options.cases:
            outcomes.append(outcome(name, changes))
            yield outcomes[-1]

    write_all(solved(), len(options.cases), options)
    if options.output:
        _store(options.output, outcomes, options.referee)
    return max((exit_status(o) for o in outcomes), default=SOLVED)


def settings(texts: Sequence[str]) -> dict[str, object]:
    """Changes asked for by `--set section.key=VALUE`, the last one of a key counts. Raises CaseError."""
    return dict(read_setting(text) for text in texts)


def outcome(name: str, changes: dict[str, object]) -> Outcome:
    """Load, change and solve one case, and tell on standard error what keeps it from being solved."""
    try:
        case = load_case(name)
        walk = cycle.solve(case.replace(changes) if changes else case)
    except CaseError as error:
        tell(str(error))
        return Outcome(name, None, error.faults)
    if walk.status != "solved":
        tell(f"{name}: {headline_words(walk)}")
    if not walk.audit.ok:
        tell(f"{name}: {audit_words(walk)}")
    return Outcome(name, walk)


def exit_status(found: Outcome) -> int:
    """0 solved, 2 bad input, 3 no solution, 4 audit failed."""
    if found.walk is None:
        return BAD_INPUT
    if not found.walk.audit.ok:
        return AUDIT_FAILED
    return SOLVED if found.walk.status == "solved" else NO_SOLUTION


def _check_output(path: str, cases: Iterable[str]) -> None:
    """Refuse to put stored walks in the place of anything else."""
    target = Path(path)
    if target.is_file() and any(Path(c).exists() and target.samefile(c) for c in cases):
        raise CaseError((Fault(path, "", "is a case being solved; give -o another name"),))
    if not target.is_file():
        return
    try:
        with target.open("rb") as file:
            start = file.read(256)
    except OSError as error:
        raise CaseError((Fault(path, "", f"cannot be read: {error.strerror}"),)) from error
    if start.strip() and not is_stored(start):
        raise CaseError((Fault(path, "", "exists and holds no stored walk; give -o another name"),))


def _store(path: str, outcomes: Iterable[Outcome], referee: bool) -> None:
    kept = [stored(o.walk, cycle.__version__, referee) for o in outcomes if o.walk is not None]
    if not kept:
        tell(f"{path}: not written, there is no walk to store")
        return
    write(path, dumps(kept[0] if len(kept) == 1 else kept))
    tell(f"stored in {path}")


def _plain_form(render: Callable[..., str]) -> Callable[[Iterable[Outcome], int, argparse.Namespace], None]:
    def write_form(outcomes: Iterable[Outcome], count: int, options: argparse.Namespace) -> None:
        gap = ""
        for found in outcomes:
            if found.walk is None:
                continue
            if not emit(gap + render(walk_blocks(found.walk, options.units, options.referee))):
                return
            gap = "\n\n"

    return write_form


def _json_form(outcomes: Iterable[Outcome], count: int, options: argparse.Namespace) -> None:
    found = [_json(o, options.referee) for o in outcomes]
    emit(dumps(found if count > 1 else found[0]))


def _json(found: Outcome, referee: bool) -> Json:
    return refused(found.name, found.faults) if found.walk is None else record(found.walk, referee)


def _csv_form(outcomes: Iterable[Outcome], count: int, options: argparse.Namespace) -> None:
    records = [(o.name, _json(o, False)) for o in outcomes]
    species = sorted({x for _, r in records for s in r.get("stations", {}).values() for x in s["mole_fractions"]})
    text = io.StringIO()
    writer = csv.writer(text, lineterminator="\n")
    outputs = [o for o in OUTPUTS if o.where == "station"]
    units = [_csv_unit(o.unit, options.units, o.key) for o in outputs]
    heads = [f"{o.key} ({label})" if label else o.key for o, (label, _, _) in zip(outputs, units, strict=True)]
    writer.writerow(["case", "status", "mode", "station", *heads, *(f"mole_fraction {x}" for x in species)])
    for name, walk in records:
        for station, values in (walk.get("stations") or {"": {}}).items():
            cells = [_cell(values.get(o.key), unit) for o, unit in zip(outputs, units, strict=True)]
            shares = [values.get("mole_fractions", {}).get(x) for x in species]
            writer.writerow([name, walk["status"], walk.get("mode", ""), station, *cells, *shares])
    emit(text.getvalue())


def _csv_unit(dimension: str, system: str, key: str) -> tuple[str, float, float]:
    """Label, factor and offset: plain SI, or the customary units of a table."""
    if system == "si":
        return si_unit(dimension), 1.0, 0.0
    unit = display_unit(dimension, system, key)
    return unit.label, unit.factor, unit.offset


def _cell(value: float | None, unit: tuple[str, float, float]) -> float | None:
    return None if value is None else (value - unit[2]) / unit[1]


FORMS: dict[str, Callable[[Iterable[Outcome], int, argparse.Namespace], None]] = {
    "text": _plain_form(as_text),
    "json": _json_form,
    "csv": _csv_form,
    "markdown": _plain_form(as_markdown),
}
"""Form of the output -> what writes it."""
