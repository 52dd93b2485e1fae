"""Pictures of a walk and its losses as data, and the files they are written to."""

from __future__ import annotations

import csv
import io
import math
from dataclasses import replace
from pathlib import Path

import pytest

from cycle.case import load
from cycle.errors import CaseError
from tests.case_files import case_file
from tui import figures, session, writing
from tui.session import Session, loaded, with_figures
from tui.views import pictures, went
from tui.views.went import ACCOUNTS


def walked(name: str, **changes: object) -> Session:
    """A session with the assessed walk of a shipped case, pinned; then, where changes are given, with that of the changed case."""
    now = loaded(Session(name), load(case_file(name)), None)
    assert now.case is not None
    now = with_figures(now, now.generation, figures.assess(figures.solve(now.case)))
    if changes:
        case = now.case.replace({key.replace("__", "."): value for key, value in changes.items()})
        now = session.edited(now, case, "changed")
        now = with_figures(now, now.generation, figures.assess(figures.solve(case)))
    return now


@pytest.fixture(scope="module")
def changed() -> Session:
    return walked("plain", combustor__equivalence_ratio=0.7)


@pytest.mark.parametrize("account", ACCOUNTS, ids=lambda a: a.key)
def test_the_bars_of_an_account_follow_each_other_and_end_at_its_last_sum(changed: Session, account: went.Account) -> None:
    rows = went.bars(changed, account)
    level = 0.0
    for bar in rows:
        assert bar.start == pytest.approx(0.0 if bar.whole else level, abs=1e-6 * abs(rows[0].value))
        level = bar.end
    assert changed.figures is not None
    thrust = changed.figures.performance["thrust"] / 1e3
    before_last = rows[-2].end
    if account.key == "exergy":
        assert level == pytest.approx(0.0, abs=1e-6 * rows[0].value)
    else:
        assert rows[-1].value == pytest.approx(thrust, rel=1e-9) and before_last == pytest.approx(thrust, rel=1e-9)


def test_losses_stand_beside_those_of_the_pinned_walk(changed: Session) -> None:
    told = went.lines(changed, ACCOUNTS[0], 80, "ascii")
    text = ["".join(piece for piece, _ in row) for row in told]
    assert text[0].split() == ["kN", "%", "pin", "change"]
    assert changed.figures is not None and changed.pin is not None
    now, pin = (f.performance["thrust"] / 1e3 for f in (changed.figures, changed.pin.figures))
    last = next(row for row in text if row.startswith("uninstalled thrust"))
    assert float(last.split()[2]) == pytest.approx(now, rel=1e-3) and float(last.split()[4]) == pytest.approx(pin, rel=1e-3)
    assert float(last.split()[5]) == pytest.approx(now - pin, rel=1e-2) and "=" in last
    assert all(len(row) <= 80 for row in text)


def test_the_file_of_the_losses_holds_what_the_screen_shows(changed: Session) -> None:
    rows = list(csv.DictReader(io.StringIO(went.table_csv(changed, ACCOUNTS[0]))))
    values = {row["row"]: float(row["value, kN"]) for row in rows}
    assert sum(v for k, v in values.items() if k != "uninstalled thrust") == pytest.approx(values["uninstalled thrust"], rel=1e-9)
    assert all(float(r["change, kN"]) == float(r["value, kN"]) - float(r["pinned, kN"]) for r in rows)


@pytest.mark.parametrize(("name", "words"), [("bench-three", "a rig has no flight thrust"), ("narrows", "no solution")])
def test_an_account_that_is_not_assessed_says_why(name: str, words: str) -> None:
    now = walked(name)
    assert went.bars(now, ACCOUNTS[0]) == [] and words in went.why_not(now, ACCOUNTS[0])


def test_the_walk_and_the_pinned_one_go_through_their_stations(changed: Session) -> None:
    assert changed.figures is not None and changed.pin is not None
    chart = pictures.temperature_entropy(changed, "", False)
    assert [s.role for s in chart.series] == ["now", "pin"]
    assert chart.series[0].y == tuple(changed.figures.at(s, "temperature") for s in ("0", "2", "3", "4", "10"))
    assert chart.series[1].x == tuple(changed.pin.figures.at(s, "entropy") for s in ("0", "2", "3", "4", "10"))
    assert [s.label for s in chart.spots] == ["0", "2", "3", "4", "10"]


def test_total_enthalpy_is_a_line_through_its_station(changed: Session) -> None:
    chart = pictures.enthalpy_velocity(changed, "", False)
    first = next(s for s in chart.series if s.label == "total enthalpy of 0")
    spot = next(s for s in chart.spots if s.label == "0")
    assert changed.figures is not None
    assert first.y[0] == pytest.approx(spot.x + spot.y) == pytest.approx(changed.figures.at("0", "total_enthalpy") / 1e6)
    assert first.y[0] - first.y[1] == pytest.approx(first.x[1])


def test_along_the_duct_marks_where_something_happens() -> None:
    now = walked("tidegate")
    chart = pictures.along_duct(now, "area", False)
    assert [s.label for s in chart.series] == ["this walk", "core, this walk"]
    assert all(core <= area * (1 + 1e-12) for area, core in zip(chart.series[0].y, chart.series[1].y, strict=True))
    words = " ".join(r.words for r in chart.rules)
    assert all(part in words for part in ("fuel, 0.05 m", "shock train begins, -0.45", "core fills the duct", "thermal throat"))
    pressure = pictures.along_duct(now, "pressure", True)
    assert pressure.y_axis.log and pressure.spots[0].x == -1.0
    assert len(pictures.views(now)) == 4 and len(pictures.views(walked("narrows"))) == 3


def test_the_other_unit_system_moves_the_numbers_and_not_the_picture(changed: Session) -> None:
    si, us = (pictures.by_station(replace(changed, system=s), "temperature", False) for s in ("si", "us"))
    assert us.y_axis.unit == "degR" or us.y_axis.unit != si.y_axis.unit
    assert [v / w for v, w in zip(us.series[0].y, si.series[0].y, strict=True)] == pytest.approx([1.8] * 5)


def test_a_picture_and_its_data_are_written_or_neither_is(tmp_path: Path) -> None:
    stem = str(tmp_path / "a")
    got = writing.write(f"{stem}.svg", "<svg/>", "x\r\n")
    assert (Path(got.drawing).read_bytes(), Path(got.data).read_bytes()) == (b"<svg/>", b"x\r\n")
    with pytest.raises(CaseError, match="exists already and is not overwritten"):
        writing.write(stem, "new", "new")
    Path(got.drawing).unlink()
    with pytest.raises(CaseError, match=r"a\.csv: exists already"):
        writing.write(stem, "new", "new")
    assert [p.name for p in tmp_path.iterdir()] == ["a.csv"] and Path(got.data).read_bytes() == b"x\r\n"
    with pytest.raises(CaseError, match="cannot be written: no such file or directory"):
        writing.write(str(tmp_path / "none" / "a"), "new", "new")


@pytest.mark.parametrize("name", ["", " ", "..", "a/", "a\x1b[2J", "b" * 300, ".svg"])
def test_what_is_no_name_is_refused(name: str) -> None:
    with pytest.raises(CaseError, match="no name of a file"):
        writing.stem_of(name)


def test_names_are_made_of_words() -> None:
    assert writing.plain_name("Salt marsh", "T at 4, K") == "salt-marsh-t-at-4-k" and writing.plain_name("///") == "picture"
    assert math.isnan(figures.NAN)
