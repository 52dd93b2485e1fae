"""What the command says of influence: `solve --sensitivities`, and where the difference of `compare` comes from."""

from __future__ import annotations

import csv
import io
import json
import math
from pathlib import Path

import pytest

import cycle
from cycle.sensitivity import sensitivities
from cycle.shares import shares
from tests.tui.command_support import CHOKED, DUCT, HOT, QUICK, RIG, written
from tui.commands import main
from tui.tables import columns

RICHER = HOT.replace("equivalence_ratio = 0.6", "equivalence_ratio = 0.7").replace("mach = 8.0", "mach = 8.5")


@pytest.fixture
def folder(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    monkeypatch.chdir(tmp_path)
    return written(tmp_path, quick=QUICK, hot=HOT, richer=RICHER, choked=CHOKED, rig=RIG, duct=DUCT)


def output(capsys: pytest.CaptureFixture[str], *arguments: str, status: int = 0) -> str:
    assert main(arguments) == status
    return capsys.readouterr().out


def part(text: str, start: str) -> list[str]:
    """Lines of the section whose heading starts so."""
    lines = text.splitlines()
    first = next(i for i, line in enumerate(lines) if line.startswith(start))
    end = next(i for i, line in enumerate(lines) if i > first and line and not line.startswith(" "))
    return [line for line in lines[first + 1 : end] if line]


def test_the_text_ranks_inputs_by_what_a_step_gives(capsys: pytest.CaptureFixture[str], folder: Path) -> None:
    text = output(capsys, "solve", "hot.toml", "--sensitivities")
    assert max(map(columns, text.splitlines())) <= 80
    lines = part(text, "Sensitivities")
    assert lines[0].split() == ["input", "step", "F,", "kN", "Isp,", "s", "F/m0,", "N", "s/kg"]
    found = sensitivities(cycle.loads(HOT))
    ranked = [row.input.key for row in found.ranked()]
    assert [line.split()[0] for line in lines[1 : len(ranked) + 1]] == ranked
    (mach,) = [line.split() for line in lines if line.split()[0] == "flight.mach"]
    row = found.row("flight.mach")
    assert row is not None
    assert float(mach[1]) == row.step
    assert float(mach[2]) == pytest.approx(row.changes["thrust"] / 1e3, rel=5e-3)  # three digits are shown
    assert "above: out of bounds: nozzle.divergence_factor" in " ".join(" ".join(lines).split())


@pytest.mark.parametrize("name", ["rig", "duct"])
@pytest.mark.parametrize("units", ["si", "us"])
def test_sensitivities_of_rows_and_of_a_rig_fit_80_columns(capsys: pytest.CaptureFixture[str], folder: Path, name: str, units: str) -> None:
    text = output(capsys, "solve", f"{name}.toml", "--sensitivities", "--units", units)
    assert max(map(columns, text.splitlines())) <= 80
    keys = [line.split()[0] for line in part(text, "Sensitivities")]
    assert ("combustor.area.3.area_ratio" if name == "duct" else "fuel.formation_enthalpy") in keys
    assert "cannot vary within a batch" not in text  # the command solves those apart


def test_json_has_one_object_an_input_with_null_for_no_value(capsys: pytest.CaptureFixture[str], folder: Path) -> None:
    (walk,) = json.loads("[" + output(capsys, "solve", "duct.toml", "--sensitivities", "--format", "json") + "]")
    rows = {row["input"]: row for row in walk["sensitivities"]}
    found = sensitivities(cycle.loads(DUCT))
    assert set(rows) == {row.input.key for row in found.rows}
    for row in found.rows:
        assert rows[row.input.key]["step"] == row.step
        for key, change in rows[row.input.key]["changes"].items():
            expected = row.changes.get(key, math.nan)
            assert change is None if math.isnan(expected) else change == pytest.approx(expected, rel=1e-9, abs=1e-9 * found.base[key])
    held = rows["combustor.area.1.area_ratio"]
    assert (held["side"], held["changes"]["thrust"], held["reason"]) == ("none", None, "burner entry has another area")
    assert "sensitivities" not in json.loads(output(capsys, "solve", "hot.toml", "--format", "json"))


@pytest.mark.parametrize("form", ["text", "json", "markdown"])
def test_a_walk_without_a_solution_has_no_sensitivities_and_says_why(capsys: pytest.CaptureFixture[str], folder: Path, form: str) -> None:
    text = output(capsys, "solve", "choked.toml", "--sensitivities", "--format", form, status=3)
    assert "no solution: choked" in text
    if form == "json":
        walk = json.loads(text)
        assert walk["sensitivities"] is None and walk["reasons"]["sensitivities"] == "no solution: choked"


def test_csv_has_a_row_an_input_where_its_rows_are_sensitivities(capsys: pytest.CaptureFixture[str], folder: Path) -> None:
    plain, feet = (
        list(csv.DictReader(io.StringIO(output(capsys, "solve", "hot.toml", "--format", "csv", "--rows", "sensitivities", *units))))
        for units in ((), ("--units", "us"))
    )
    found = sensitivities(cycle.loads(HOT))
    assert [row["input"] for row in plain] == [row.input.key for row in found.ranked()]
    for si, us in zip(plain, feet, strict=True):
        assert float(si["thrust (N)"]) == pytest.approx(float(us["thrust (lbf)"]) * 4.4482216152605, rel=1e-9, abs=1e-9)
        assert si["side"] in ("central", "above", "below")


@pytest.mark.parametrize(
    ("arguments", "words"),
    [
        (("--sensitivities", "--format", "csv"), "for csv use --rows sensitivities"),
        (("--rows", "sensitivities"), "--rows sensitivities is for --format csv"),
        (("--sensitivities", "--along", "climb.csv"), "--along takes none of -o, --referee, --sensitivities and --rows"),
    ],
)
def test_what_does_not_go_together_is_one_line_and_2(
    capsys: pytest.CaptureFixture[str], folder: Path, arguments: tuple[str, ...], words: str
) -> None:
    assert main(["solve", "hot.toml", *arguments]) == 2
    error = capsys.readouterr().err
    assert words in error and error.count("\n") == 1


def test_compare_says_where_the_difference_comes_from(capsys: pytest.CaptureFixture[str], folder: Path) -> None:
    text = output(capsys, "compare", "hot.toml", "richer.toml")
    assert max(map(columns, text.splitlines())) <= 80
    lines = {line.split()[0]: line.split() for line in part(text, "Where the difference comes from, B - A")}
    found = shares(cycle.loads(HOT), cycle.loads(RICHER))
    assert set(lines) == {"F,", "flight", "combustor", "in"}
    for expected in found.parts:
        assert float(lines[expected.groups[0]][1]) == pytest.approx(expected.shares["thrust"] / 1e3, rel=5e-3)  # three digits are shown
    assert float(lines["in"][2]) == pytest.approx((found.second["thrust"] - found.first["thrust"]) / 1e3, rel=5e-3)


def test_each_further_side_is_held_against_the_first(capsys: pytest.CaptureFixture[str], folder: Path) -> None:
    assert main(["compare", "hot.toml", "richer.toml", "rig.toml", "hot.toml", "choked.toml"]) == 3
    text = capsys.readouterr().out
    assert part(text, "Where the difference comes from, C - A") == ["  Not assessed: a flight and a rig have no headline figure in common"]
    assert part(text, "Where the difference comes from, D - A") == ["  Not assessed: the inputs do not differ"]
    assert part(text, "Where the difference comes from, E - A") == ["  Not assessed: E: no solution, choked (burner)"]


def test_stored_walks_are_shared_out_as_cases_and_a_stale_one_is_said(capsys: pytest.CaptureFixture[str], folder: Path) -> None:
    for name in ("hot", "richer"):
        assert main(["solve", f"{name}.toml", "-o", f"{name}.json"]) == 0
    capsys.readouterr()
    start = "Where the difference comes from"
    cases = part(output(capsys, "compare", "hot.toml", "richer.toml"), start)
    assert part(output(capsys, "compare", "hot.json", "richer.json"), start) == cases
    kept = json.loads((folder / "richer.json").read_text())
    kept["walk"]["performance"]["thrust"] *= 1.001
    (folder / "richer.json").write_text(json.dumps(kept))
    stale = part(output(capsys, "compare", "hot.json", "richer.json"), start)
    assert stale[: len(cases)] == cases
    assert " ".join(" ".join(stale[len(cases) :]).split()).startswith("B computed by this version is not the stored walk")


def test_a_stored_case_of_another_version_is_not_assessed(capsys: pytest.CaptureFixture[str], folder: Path) -> None:
    assert main(["solve", "hot.toml", "-o", "hot.json"]) == 0
    kept = json.loads((folder / "hot.json").read_text())
    kept["walk"]["case"]["nozzle"]["swirl"] = 1.0
    (folder / "hot.json").write_text(json.dumps(kept))
    (line, *_) = part(output(capsys, "compare", "hot.json", "richer.toml"), "Where the difference comes from")
    assert line.startswith("  Not assessed: a stored case is none of this version: ")
