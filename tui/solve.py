"""The command `solve`: one walk a case, in the form asked for."""

from __future__ import annotations

import argparse
import os
import stat
from collections.abc import Callable, Iterable, Sequence
from dataclasses import dataclass, field
from typing import TYPE_CHECKING

import cycle
from cycle.atomic import place_of, trouble
from cycle.case import read_setting
from cycle.errors import CaseError, DuctwalkError, Fault
from cycle.record import Json, dumps, is_stored, record, refused, stored, write
from cycle.sensitivity import plain
from tui import sheets
from tui.influence import sensitivity_blocks
from tui.output import emit, load_case, tell
from tui.tables import as_markdown, as_text
from tui.text import audit_words, headline_words, walk_blocks

if TYPE_CHECKING:
    from cycle.result import Walk
    from cycle.sensitivity import Sensitivities

STANDARD_OUTPUT = "-"
SOLVED, BAD_INPUT, NO_SOLUTION, AUDIT_FAILED = 0, 2, 3, 4


@dataclass(frozen=True, slots=True)
class Outcome:
    """What became of one case: its walk, or the faults of an input that is none."""

    name: str
    walk: Walk | None
    faults: tuple[Fault, ...] = field(default=())


def run(options: argparse.Namespace) -> int:
    """Solve the cases of the command line and write them; returns the exit status, the highest of all cases."""
    if options.rows != "stations" and options.format != "csv":
        raise DuctwalkError(f"--rows {options.rows} is for --format csv")
    if options.sensitivities and options.format == "csv":
        raise DuctwalkError("--sensitivities is for text, json and markdown; for csv use --rows sensitivities")
    if options.output is not None:
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
    if options.output is not None:
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
    """Refuse to put stored walks where none can be, or in the place of anything else."""
    if path == STANDARD_OUTPUT:
        raise DuctwalkError("-o takes the name of a file: standard output has the results; for JSON there use --format json")
    target, status = place_of(path)
    if status is None or not stat.S_ISREG(status.st_mode):
        return
    if any(os.path.exists(name) and os.path.samefile(name, target) for name in cases):
        raise CaseError((Fault(path, "", "is a case being solved; give -o another name"),))
    try:
        with open(target, "rb") as file:
            start = file.read(256)
    except OSError as error:
        raise trouble(path, "read", error) from error
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
            more = sensitivity_blocks(_sensitivities(found.walk), options.units) if options.sensitivities else ()
            if not emit(gap + render(walk_blocks(found.walk, options.units, options.referee, more))):
                return
            gap = "\n\n"

    return write_form


def _json_form(outcomes: Iterable[Outcome], count: int, options: argparse.Namespace) -> None:
    found = [_json(o, options.referee, options.sensitivities) for o in outcomes]
    emit(dumps(found if count > 1 else found[0]))


def _sensitivities(walk: Walk) -> Sensitivities:
    return cycle.sensitivities(walk.case, walk, apart=True)


def _json(found: Outcome, referee: bool, sensitive: bool) -> Json:
    if found.walk is None:
        return refused(found.name, found.faults)
    walked = record(found.walk, referee)
    if sensitive:
        told = _sensitivities(found.walk)
        walked["sensitivities"] = plain(told)
        walked["reasons"] |= {"sensitivities": told.why_not} if told.why_not else {}
    return walked


def _csv_form(outcomes: Iterable[Outcome], count: int, options: argparse.Namespace) -> None:
    records = [(o.name, _json(o, False, options.rows == "sensitivities")) for o in outcomes]
    emit(sheets.SHEETS[options.rows](records, options.units))


FORMS: dict[str, Callable[[Iterable[Outcome], int, argparse.Namespace], None]] = {
    "text": _plain_form(as_text),
    "json": _json_form,
    "csv": _csv_form,
    "markdown": _plain_form(as_markdown),
}
"""Form of the output -> what writes it."""
