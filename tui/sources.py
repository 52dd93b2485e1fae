"""Walks from elsewhere: other cases, stored walks, moments of the session, kept pins; read and solved in the worker."""

from __future__ import annotations

import json
import math
import os
import time
from collections.abc import Iterable, Mapping
from dataclasses import asdict, dataclass, replace
from pathlib import Path
from typing import TYPE_CHECKING, Any

from cycle.atomic import read_file
from cycle.errors import CaseError, Fault
from cycle.record import FORMAT, KIND, LARGEST_FILE, Json, Stored, case_of, is_figure, is_stored, read_stored
from tui import figures, keeping
from tui.figures import NAN, PERFORMANCE_KEYS, STATION_KEYS, STATIONS, Figures, Passage
from tui.keeping import Kept
from tui.session import Pin, Session

if TYPE_CHECKING:
    from cycle.case import Case
    from cycle.compare import Side

MOST_FILES = 500
"""Files of a folder that are looked at at most."""
AS_LOADED = "as loaded"


@dataclass(frozen=True, slots=True)
class Source:
    """Where a walk comes from. label: words for it; case: the case to solve, None where `path` names a file of a case or of stored
    walks; kind: a word for lists."""

    kind: str
    label: str
    case: Case | None = None
    path: str = ""


@dataclass(frozen=True, slots=True)
class Found:
    """A walk that was fetched: its words, its case, its figures, and what was stored where it was not solved here."""

    label: str
    case: Case
    figures: Figures
    stored: Stored | None = None


def moments(session: Session) -> tuple[Source, ...]:
    """The cases of the undo list: the one as loaded first, then those before the present one, the latest first, then the undone."""
    past, future = session.past, session.future
    if session.case is None:
        return ()
    loaded = Source("session", AS_LOADED, past[0].case if past else session.case)
    states = [(past[i + 1].case, past[i].words) for i in range(len(past) - 1)]
    before = [Source("session", words, case) for case, words in reversed(states)]
    return (loaded, *before, *(Source("undone", moment.words, moment.case) for moment in reversed(future)))


def files(folder: str, besides: str = "") -> tuple[Source, ...]:
    """Cases and stored walks of a folder by name, without the case at `besides`. Errors: OSError."""
    found = []
    for name in names(folder, (".toml", ".json")):
        path = os.path.join(folder, name)
        if os.path.realpath(path) == os.path.realpath(besides):
            continue
        if name.endswith(".toml"):
            found.append(Source("case", name, path=path))
        elif _holds_stored(path):
            found.append(Source("stored", name, path=path))
    return tuple(found)


def names(folder: str, ends: tuple[str, ...]) -> list[str]:
    """Names of a folder with one of the ends, in order, at most `MOST_FILES`; no hidden ones. Errors: OSError."""
    with os.scandir(folder or ".") as entries:
        fitting = (e.name for e in entries if e.name.endswith(ends) and not e.name.startswith(".") and not _is_folder(e))
        return sorted(fitting, key=lambda name: (name.casefold(), name))[:MOST_FILES]


def _is_folder(entry: os.DirEntry[str]) -> bool:
    """Whether an entry is a folder or a link to one; a link that leads nowhere is none."""
    try:
        return entry.is_dir()
    except OSError:
        return False


def _holds_stored(path: str) -> bool:
    try:
        return is_stored(content_of(path, 256, cut=True))
    except CaseError:
        return False


def content_of(path: str, most: int, cut: bool = False) -> bytes:
    """Content of a regular file of at most `most` bytes; its start where `cut`. Errors: CaseError."""
    try:
        content, _ = read_file(path, most)
    except (OSError, ValueError) as error:
        raise CaseError([Fault(path, "", f"cannot be read: {getattr(error, 'strerror', None) or error}")]) from None
    if len(content) > most and not cut:
        raise CaseError([Fault(path, "", "too large", f"more than {most} bytes", f"{most} bytes")])
    return content[:most]


def fetch(source: Source) -> tuple[Found, ...]:
    """The walk of a source, or all those that a file stores. Solves; call it in the worker. Errors: CaseError."""
    from cycle.case import load

    if source.case is not None:
        return (_solved(source.label, source.case),)
    content = content_of(source.path, LARGEST_FILE)
    if is_stored(content):
        return tuple(of_stored(stored) for stored in read_stored(content, source.path))
    return (_solved(Path(source.path).name.removesuffix(".toml"), load(source.path)),)


def _solved(label: str, case: Case) -> Found:
    return Found(label, case, figures.assess(figures.solve(case)))


def of_stored(stored: Stored) -> Found:
    """A stored walk with the figures that it was stored with. Errors: CaseError where its inputs are no case of this version."""
    case = replace(case_of(stored.walk["case"], stored.name), text=stored.case_text)
    return Found(f"{stored.name}, stored {stored.date[:10]}{_apart(stored)}", case, recorded(stored.walk), stored)


def _apart(stored: Stored) -> str:
    """What computed a stored walk, where it is not this program with this data."""
    import cycle
    from cycle.gas.species import data_hash

    version = f", version {stored.version}" if stored.version != cycle.__version__ else ""
    return version + (", other species data" if stored.species_data != data_hash() else "")


def _number(value: Any) -> float:
    return float(value) if value is not None and is_figure(value) else NAN


def _numbers(table: Mapping[str, Any], keys: Iterable[str]) -> dict[str, float]:
    return {key: _number(table.get(key)) for key in keys}


def recorded(walk: Json) -> Figures:
    """Figures of a stored record: what it has, nan elsewhere; `walk` is None, for there is none to ask later.

    walk: checked by `cycle.record.read_stored`. Limits and accounts are left out: they belong to the version that stored them.
    """
    reasons: dict[str, Any] = walk["reasons"]
    performance = _numbers(walk["performance"], PERFORMANCE_KEYS)
    tables = {s: walk["stations"][s] for s in STATIONS if s in walk["stations"]}
    shares = {s: table.get("mole_fractions") for s, table in tables.items()}
    return Figures(
        status=walk["status"],
        mode=walk["mode"],
        reason=str(walk.get("reason", "")),
        failed=str(walk.get("failed_process", "")),
        stations={s: _numbers(table, STATION_KEYS) for s, table in tables.items()},
        fractions={s: _numbers(of, of) if isinstance(of, dict) else {} for s, of in shares.items()},
        performance=performance,
        why_not={k: str(reasons.get(f"performance.{k}", "not stored")) for k, v in performance.items() if math.isnan(v)},
        passages=tuple(_passage(p) for p in walk["processes"]),
        potentials=(),
        altitude=performance["altitude"],
        walk=None,
        assessed=True,
        profile=_profile(walk.get("profile")),
    )


def _passage(process: Json) -> Passage:
    name, label, start, end = (str(process.get(key, "")) for key in ("name", "label", "start", "end"))
    return Passage(name, label, start, end, _numbers(process["figures"], process["figures"]))


def _profile(columns: Any) -> dict[str, tuple[float, ...]]:
    """The flow along a duct, {} where the record has none or its columns are not of one length."""
    if not isinstance(columns, dict) or not all(isinstance(column, list) for column in columns.values()):
        return {}
    found = {name: tuple(_number(v) for v in column) for name, column in columns.items()}
    return found if len({len(column) for column in found.values()}) == 1 else {}


def keep(path: str, pin: Pin) -> None:
    """Keep a pin for the case at `path`. Call it in the worker. Errors: OSError."""
    from cycle.case.document import edited

    stored = ""
    if pin.stored is not None:
        item = {k: v for k, v in asdict(pin.stored).items() if k != "file"}
        stored = json.dumps({"format": FORMAT, "kind": KIND, **item})
    text = "" if stored else edited(pin.case.text, pin.case)
    keeping.keep_pin(path, Kept(pin.label, time.strftime("%Y-%m-%d"), pin.case.name, text, stored))


def kept(pin: Kept) -> Found:
    """The walk of a pin kept before, its day in the label. Solves; call it in the worker. Errors: CaseError."""
    from cycle.case import loads

    words = f"{pin.label}, of {pin.date}"
    if not pin.stored:
        return _solved(words, loads(pin.text, pin.name))
    stored = read_stored(pin.stored.encode(), "the pin")[0]
    apart = _apart(stored)
    return replace(of_stored(stored), label=words if apart in words else words + apart)


def side(label: str, case: Case, found: Figures, stored: Stored | None = None) -> Side:
    """A walk as `cycle.compare` takes it: what was stored, or the figures at hand as a record."""
    import cycle
    from cycle.compare import Side
    from cycle.gas.species import data_hash
    from cycle.record import case_record

    if stored is not None:
        return Side(label, stored.walk, stored.version, stored.species_data)
    record: Json = {
        "case": case_record(case),
        "status": found.status,
        "mode": found.mode,
        "reason": found.reason,
        "stations": {s: {k: v for k, v in of.items() if found.assessed or k not in figures.DEAR} for s, of in found.stations.items()},
        "processes": [{"name": p.name, "figures": p.figures} for p in found.passages],
        "performance": found.performance,
    }
    return Side(label, record, cycle.__version__, data_hash())
