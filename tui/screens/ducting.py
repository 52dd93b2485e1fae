"""The page of the flow along a duct: how it runs, the heat at which it leaves each regime, and a table by place."""

from __future__ import annotations

from collections.abc import Mapping

from cycle.quantities import INPUT, MODES
from cycle.units import format_number, show
from tui.figures import NAN, Figures
from tui.line import BOLD, DIM, OVER, Line, clean, fit, line, wrap
from tui.session import Session
from tui.views.numbers import quantity

COLUMNS = (
    ("x", "x", "length"),
    ("pressure", "p", "pressure"),
    ("temperature", "T", "temperature"),
    ("mach", "M", "ratio"),
    ("area", "area", "area"),
    ("core_area", "core", "area"),
    ("burnt", "burnt", "ratio"),
    ("total_pressure", "pt", "pressure"),
)
"""Columns of the table: key of the profile, head, dimension."""

BORDERS = {
    "attached": "no attached flow",
    "train": "thermal throat",
    "unstart": "unstart",
}
"""Borders of the regimes of a duct, in words."""

WIDEST, MARK = 12, 8
"""Columns of the screen that a column of the table takes at most, and those kept for the marks."""


def process_figure(found: Figures, process: str, key: str) -> float:
    """A figure of a process of the walk, nan where there is none."""
    figures = next((p.figures for p in found.passages if p.name == process), {})
    return figures.get(key, NAN)


def _running(found: Figures, system: str) -> list[str]:
    """How the duct runs: mode, pressure rise, places."""
    mode = next((p.mode for p in found.passages if p.name == "isolator"), "")
    parts = [f"{mode}: {MODES[mode]}" if mode in MODES else ""]
    parts += [f"{words} {quantity(v, unit, system)}" for words, v, unit in _places(found) if v == v]
    return [p for p in parts if p]


def _places(found: Figures) -> list[tuple[str, float, str]]:
    return [
        ("p3/p2", process_figure(found, "isolator", "pressure_ratio"), "ratio"),
        ("peak p/p2", process_figure(found, "burner", "peak_pressure_ratio"), "ratio"),
        ("train", process_figure(found, "isolator", "train_length"), "length"),
        ("core fills the duct at", process_figure(found, "burner", "reattachment_x"), "length"),
        ("thermal throat at", process_figure(found, "burner", "throat_x"), "length"),
    ]


def _borders(session: Session, wide: int) -> list[Line]:
    """The heat at which the duct leaves each regime, where it is solved for."""
    case = session.case
    key = f"combustor.{case.value('combustor.heat')}" if case is not None else ""
    if case is None or session.borders is None:
        return [line((fit("borders of the regimes: being solved for ...", wide), DIM))]
    spec, now = INPUT[key], case.numbers.get(key, NAN)
    head = f"{spec.label} {quantity(now, spec.unit, session.system, key=key)} now"
    if all(value != value for value in session.borders.values()):
        return [line((fit(f"{head}; borders of the regimes are found for an equivalence or fuel-air ratio", wide), DIM))]
    told = [
        f"{BORDERS.get(name, name)} {_at(value, spec.unit, session.system, key)}"
        for name, value in sorted(session.borders.items(), key=_by_value)
    ]
    return [line(part) for part in wrap([head, *told], wide, " | ")]


def _by_value(border: tuple[str, float]) -> tuple[bool, float]:
    return border[1] != border[1], border[1]


def _at(value: float, unit: str, system: str, key: str) -> str:
    return "not reached" if value == float("inf") else f"from {quantity(value, unit, system, key=key)}" if value == value else "not found"


def duct_head(session: Session, wide: int) -> list[Line]:
    """Mode, places, borders, and the heads of the columns."""
    found = session.figures
    if found is None:
        return []
    running = [line((part, BOLD)) for part in wrap(_running(found, session.system), wide, " | ")]
    if not found.solved:
        running = [line((part, OVER)) for part in wrap(clean(f"NO SOLUTION: {found.reason}").split(), wide)[:3]]
    size = _size(wide)
    heads = [[name for _, name, _ in COLUMNS], [show(1.0, unit, session.system)[1] for _, _, unit in COLUMNS]]
    rows = [line(("".join(fit(h, size - 1).rjust(size) for h in head), BOLD)) for head in heads]
    return [*running, *_borders(session, wide), *rows]


def _size(wide: int) -> int:
    return max(1, min(WIDEST, (wide - MARK) // len(COLUMNS)))


def duct_rows(session: Session, wide: int) -> list[Line]:
    """The flow by place, with marks where fuel enters, where the core fills the duct and where the flow is critical."""
    found = session.figures
    if found is None or not found.profile:
        return [line("no flow along the duct")]
    size, marks = _size(wide), _marks(session, found.profile)
    out: list[Line] = []
    for i in range(len(found.profile["x"])):
        cells = "".join(_cell(found.profile[key][i], unit, session.system, size) for key, _, unit in COLUMNS)
        out.append(line(cells, (f" {marks[i]}" if i in marks else "", BOLD)))
    return out


def _cell(value: float, unit: str, system: str, size: int) -> str:
    digits = 4 if size > 7 else 3
    return fit(format_number(show(value, unit, system)[0], digits) if value == value else "-", size - 1).rjust(size)


def _marks(session: Session, profile: Mapping[str, tuple[float, ...]]) -> dict[int, str]:
    """Row -> what happens there: the first row at or behind each place."""
    found, case = session.figures, session.case
    assert found is not None
    places = [(row["x"], "fuel") for row in (case.rows.get("combustor.injector", ()) if case is not None else ())]
    places += [(process_figure(found, "burner", "reattachment_x"), "filled"), (process_figure(found, "burner", "throat_x"), "throat")]
    out: dict[int, list[str]] = {}
    for x, word in places:
        row = next((i for i, here in enumerate(profile["x"]) if here >= x - 1e-9), None)
        if row is not None and x == x and (x > 0.0 or word == "fuel"):
            out.setdefault(row, []).append(word)
    return {row: "+".join(words) for row, words in out.items()}
