"""The state of the screen: frozen. An edit makes a new session, undo is the list of cases before it.

Nothing here knows Textual. The functions take a session and return one, or raise `cycle.errors.CaseError` with the
reasons why an edit is no case.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass, field, replace
from typing import TYPE_CHECKING, Any, Literal, TypeGuard

from cycle.quantities import GROUP, HEADLINE
from tui.actions import ACTIONS, Action
from tui.figures import STATIONS, Figures, carried

if TYPE_CHECKING:
    from cycle.case import Case
    from cycle.sensitivity import Sensitivities

Change = dict[str, Any]
"""What a user asked of a case, as plain data: {"set": {key: value}}, {"switch": [group, tag, value]}, {"study": [name, study]},
or, where an undo or redo went back behind a save, {"case": its TOML}."""

VIEWS = ("figures", "change against the pin", "change against the pin, %")
WATCHED_FIRST = ("specific_impulse", "stream_thrust_gain")
"""Figures watched where the user has chosen none: the first that the case has."""
SOLVING = "solving ... figures and limits are of the inputs before"
ASSESSING = "limits are being assessed ... those shown are of the inputs before"


@dataclass(frozen=True, slots=True)
class Pin:
    """A pinned walk: the words that name it, its case and its figures. stored: the stored walk that the figures were read from, None
    where it was solved here (a stored one has no `figures.walk`). chosen: whether the user pinned it, so that it is kept."""

    label: str
    case: Case
    figures: Figures
    stored: Any = None
    chosen: bool = False


@dataclass(frozen=True, slots=True)
class Past:
    """One entry of the undo list: the case as it was and the words for the edit that left it."""

    case: Case
    words: str


@dataclass(frozen=True, slots=True)
class Influence:
    """Sensitivities as they came: generation, that of the case they are of; found, see `cycle.sensitivity.Sensitivities`."""

    generation: int
    found: Sensitivities


@dataclass(frozen=True, slots=True)
class Entry:
    """A field being typed in: the input's key, text, caret position, the unit a bare number is in, whether the next
    character types over all, the group tag that a commit switches to ("" for none), and the words of a fault."""

    key: str
    text: str
    caret: int
    unit: str = ""
    fresh: bool = True
    switch: tuple[str, str] | None = None
    fault: str = ""


@dataclass(frozen=True, slots=True)
class Session:
    """Everything the screen shows. generation: number of the case's latest change; solved: the generation that
    `figures` belong to; good: the last walk with a solution; saved: the case as it stands in the file; borders: the heat input at
    which a duct leaves each regime, None until they are solved for; influence: sensitivities, those of the case before until the new
    ones are there, None before the first; watched: the figure that graphs and sensitivities show, "" for the case's own first choice;
    unkept: why edits are not kept on disk, "" while they are; actions: with the keys that hold."""

    path: str
    case: Case | None = None
    saved: Case | None = None
    stamp: Any = None
    generation: int = 0
    solved: int = -1
    figures: Figures | None = None
    good: Figures | None = None
    pin: Pin | None = None
    past: tuple[Past, ...] = ()
    future: tuple[Past, ...] = ()
    focus: Literal["table", "inputs"] = "table"
    station: str = "0"
    row: int = 0
    inputs: Mapping[str, str] = field(default_factory=dict)
    entry: Entry | None = None
    system: Literal["si", "us"] = "si"
    view: int = 0
    referee: str = ""
    borders: Mapping[str, float] | None = None
    influence: Influence | None = None
    watched: str = ""
    note: str = "reading the case ..."
    faults: tuple[str, ...] = ()
    unkept: str = ""
    actions: tuple[Action, ...] = ACTIONS

    @property
    def failed(self) -> bool:
        """Whether the newest solved case has no solution."""
        return self.figures is not None and not self.figures.solved

    @property
    def settled(self) -> bool:
        """Whether the figures shown are those of the case."""
        return self.figures is not None and self.solved == self.generation

    @property
    def unsaved(self) -> bool:
        """Whether the case differs from the one in the file."""
        return self.case is not None and self.case != self.saved


def _is_set(said: Any) -> bool:
    return isinstance(said, dict) and bool(said)


def _is_switch(said: Any) -> bool:
    known = isinstance(said, list | tuple) and len(said) == 3 and all(isinstance(word, str) for word in said[:2])
    return known and said[0] in GROUP


def _is_study(said: Any) -> bool:
    if not (isinstance(said, list | tuple) and len(said) == 2 and isinstance(said[0], str) and isinstance(said[1], dict)):
        return False
    outputs, varied = said[1].get("outputs"), said[1].get("vary")
    if not (isinstance(outputs, list) and all(isinstance(key, str) for key in outputs) and isinstance(varied, list)):
        return False
    return all(isinstance(one, dict) and all(isinstance(one.get(k), kind) for k, kind in _VARIED.items()) for one in varied)


_VARIED: dict[str, Any] = {"input": str, "from": int | float | str, "to": int | float | str, "points": int}
_KINDS: dict[str, Callable[[Any], bool]] = {
    "set": _is_set,
    "switch": _is_switch,
    "study": _is_study,
    "case": lambda said: isinstance(said, str),
}


def is_change(said: Any) -> TypeGuard[Change]:
    """Whether something read from a journal has the form of a `Change`; what it says is judged by the case."""
    return isinstance(said, dict) and len(said) == 1 and all(k in _KINDS and _KINDS[k](v) for k, v in said.items())


def apply(case: Case, change: Change) -> Case:
    """The case with a change made.

    Parameters: case; change, see `Change`. Errors: CaseError.
    """
    if "study" in change:
        return case.with_study(*change["study"])
    if "case" in change:
        from cycle.case import loads

        return replace(loads(change["case"], case.name), path=case.path, stamp=case.stamp, text=case.text)
    if "switch" in change:
        group, tag, value = change["switch"]
        return case.switch(group, tag, value)
    return case.replace(change["set"])


def came_back(before: Case, after: Case) -> dict[str, Any]:
    """What a choice brought back of the inputs that were set aside: key -> value as written, plain data for the journal."""
    back = {key: value for key, value in after.spelled.items() if key in before.aside and key not in before.spelled}
    if not back:
        return {}
    from cycle.case import thawed

    return {key: thawed(value) for key, value in back.items()}


def loaded(session: Session, case: Case, stamp: Any) -> Session:
    """The session with the case of the file, nothing undone yet."""
    start = columns_of(case)[0]
    return replace(session, case=case, saved=case, stamp=stamp, generation=session.generation + 1, station=start, influence=None, note="")


def afresh(session: Session, path: str) -> Session:
    """The session for another case, not read yet; what the user set for the screen stays.

    Generations go on, so that a result for the case before is known as such.
    """
    kept = {name: getattr(session, name) for name in ("system", "watched", "actions")}
    return Session(path, generation=session.generation + 1, **kept)


def _with_case(session: Session, case: Case, note: str) -> Session:
    columns = columns_of(case)
    # a station that is gone hands on to the next one downstream
    station = next((s for s in columns if int(s) >= int(session.station)), columns[-1])
    return replace(
        session,
        case=case,
        generation=session.generation + 1,
        station=station,
        entry=None,
        referee="",
        borders=None,
        note=note,
        faults=(),
    )


def edited(session: Session, case: Case, words: str) -> Session:
    """The session after an edit that gave `case`; words: what the undo list says of it."""
    if session.case is None or case == session.case:
        return replace(session, entry=None, note="")
    past = (*session.past, Past(session.case, words))
    return replace(_with_case(session, case, ""), past=past, future=())


def undone(session: Session) -> Session:
    """The session before its last edit; the same one with a note where there is none."""
    if not session.past or session.case is None:
        return replace(session, note="nothing to undo")
    last = session.past[-1]
    back = _with_case(session, last.case, f"undone: {last.words}")
    return replace(back, past=session.past[:-1], future=(*session.future, Past(session.case, last.words)))


def redone(session: Session) -> Session:
    """The session with the last undone edit made again; the same one with a note where there is none."""
    if not session.future or session.case is None:
        return replace(session, note="nothing to redo")
    next_ = session.future[-1]
    forward = _with_case(session, next_.case, f"redone: {next_.words}")
    return replace(forward, past=(*session.past, Past(session.case, next_.words)), future=session.future[:-1])


def with_figures(session: Session, generation: int, found: Figures) -> Session:
    """The session with a walk that came back, or with its assessment; a stale one (not of the newest generation)
    changes nothing."""
    if generation != session.generation or session.case is None:
        return session
    now = carried(found, session.figures)
    pin = session.pin
    if now.solved and (pin is None or pin.figures.walk is now.walk):
        first = "first walk" if session.unsaved else "as loaded"
        pin = replace(pin, figures=now) if pin is not None else Pin(first, session.case, now)
    note = session.note
    if note in (SOLVING, ASSESSING):
        note = "" if now.assessed or note == ASSESSING else ASSESSING
    good = now if now.solved else session.good
    return replace(session, figures=now, solved=generation, good=good, pin=pin, note=note)


def pinned(session: Session) -> Session:
    """The session with its present walk pinned."""
    if session.case is None or session.figures is None or not session.settled:
        return replace(session, note="no walk of these inputs to pin yet")
    if not session.figures.solved:
        return replace(session, note="a case without a solution cannot be pinned")
    label = session.past[-1].words if session.past else "as loaded"
    return replace(session, pin=Pin(label, session.case, session.figures, chosen=True), note="pinned: changes are against this walk")


def toggled(session: Session) -> Session:
    """The session in the other unit system."""
    return replace(session, system="us" if session.system == "si" else "si", entry=None, note="")


def influenced(session: Session, influence: Influence) -> Session:
    """The session with sensitivities that came; stale ones change nothing."""
    return replace(session, influence=influence) if influence.generation == session.generation else session


def columns_of(case: Case | None) -> tuple[str, ...]:
    """Stations that a walk of the case has when it is solved; the ones of a flight case where there is none yet."""
    if case is None:
        return ("0", "2", "3", "4", "10")
    entry = case.value("entry.station") if case.choices.get("start") == "entry" else None
    first = "0" if entry is None else str(entry)
    last = "4" if case.choices.get("nozzle.exit") == "absent" else "10"
    there = {
        "1": case.value("inlet.quality") == "geometry",
        "5": case.value("nozzle.throat") == "sized" or case.value("nozzle.throat_area") is not None,
        "9": case.value("nozzle.internal_area_ratio") is not None and case.value("nozzle.freeze") in (None, "freeze_station"),
    }
    return tuple(s for s in STATIONS if int(first) <= int(s) <= int(last) and there.get(s, True))


def watched(session: Session) -> str:
    """Key of the figure that graphs and sensitivities show."""
    keys = performance_keys(session)
    return session.watched if session.watched in keys else next((k for k in WATCHED_FIRST if k in keys), keys[0])


def performance_keys(session: Session) -> tuple[str, ...]:
    """Headline figures of the case: those of a flight, or of a rig."""
    return HEADLINE["flight" if session.case is None else session.case.choices["start"]]
