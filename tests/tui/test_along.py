"""Fixing a flowpath and flying it along a trajectory, from the command line."""

from __future__ import annotations

import csv
import io
import json
from pathlib import Path

import pytest

import cycle
from tests.tui.command_support import DETACHED, DUCT, DUCT_RIG, HOT, QUICK, written
from tui.along import _spans
from tui.commands import main
from tui.tables import columns

CLIMB = """\
# invented climb
flight.mach, flight.dynamic_pressure, combustor.equivalence_ratio
5, 50 kPa, 0.4
6, 50 kPa, 0.6
8, 50 kPa, 0.4
2, 50 kPa, 0.4
"""
QUICK_CLIMB = "flight.mach, flight.altitude [km]\n7.5, 27\n8, 30\n"


@pytest.fixture
def folder(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    monkeypatch.chdir(tmp_path)
    (tmp_path / "climb.csv").write_text(CLIMB, encoding="utf-8")
    (tmp_path / "short.csv").write_text(QUICK_CLIMB, encoding="utf-8")
    return written(tmp_path, duct=DUCT, quick=QUICK, rig=DUCT_RIG, hot=HOT)


def output(capsys: pytest.CaptureFixture[str], *arguments: str, status: int = 0) -> str:
    assert main(arguments) == status
    return capsys.readouterr().out


@pytest.mark.parametrize("units", ["si", "us"])
def test_a_flight_is_a_table_with_a_row_a_point(capsys: pytest.CaptureFixture[str], folder: Path, units: str) -> None:
    text = output(capsys, "solve", "duct.toml", "--along", "climb.csv", "--units", units, status=3)
    table = text.split("Points\n")[1].split("\n\n")[0].splitlines()
    assert [line.split()[:2] for line in table[1:]] == [
        ["1", "scramjet-shock-train"], ["2", "scramjet-shock-train"], ["3", "scramjet"], ["4", "no:"],
    ]  # fmt: skip
    assert "Point 4: internal compression: " in " ".join(text.split())
    assert "scramjet-shock-train: an oblique shock train" in text
    assert max(map(columns, text.splitlines())) <= 80


def test_a_point_of_a_flight_is_that_point_alone(capsys: pytest.CaptureFixture[str], folder: Path) -> None:
    points = json.loads(output(capsys, "solve", "duct.toml", "--along", "climb.csv", "--format", "json", status=3))["points"]
    alone = json.loads(output(capsys, "solve", "duct.toml", "--format", "json"))
    assert points[2]["inputs"] == {"flight.mach": 8.0, "flight.dynamic_pressure": 50e3, "combustor.equivalence_ratio": 0.4}
    # One point equals its twin inside a batch to 1e-10, as the model promises.
    for key, value in alone["performance"].items():
        assert points[2]["performance"][key] == (None if value is None else pytest.approx(value, rel=1e-10))
    assert (points[3]["status"], points[3]["performance"]["thrust"]) == ("detached", None)
    assert points[3]["reason"]


def test_csv_of_a_flight_has_inputs_and_performance(capsys: pytest.CaptureFixture[str], folder: Path) -> None:
    rows = list(csv.DictReader(io.StringIO(output(capsys, "solve", "duct.toml", "--along", "climb.csv", "--format", "csv", status=3))))
    points = json.loads(output(capsys, "solve", "duct.toml", "--along", "climb.csv", "--format", "json", status=3))["points"]
    assert [row["mode"] for row in rows] == [point["mode"] for point in points]
    assert [float(row["flight.mach"]) for row in rows] == [5.0, 6.0, 8.0, 2.0]
    assert float(rows[0]["thrust (N)"]) == points[0]["performance"]["thrust"]
    assert rows[3]["thrust (N)"] == ""
    feet = list(
        csv.DictReader(io.StringIO(output(capsys, "solve", "quick.toml", "--along", "short.csv", "--format", "csv", "--units", "us")))
    )
    assert float(feet[0]["flight.altitude (kft)"]) == pytest.approx(27.0 / 0.3048, rel=1e-12)


def test_markdown_of_a_flight_has_the_same_table(capsys: pytest.CaptureFixture[str], folder: Path) -> None:
    text = output(capsys, "solve", "quick.toml", "--along", "short.csv", "--format", "markdown")
    assert "| point | mode | M | q, kPa |" in text
    assert "| 2 | scramjet | 8 |" in text


def test_a_rig_shows_how_its_duct_runs(capsys: pytest.CaptureFixture[str], folder: Path) -> None:
    (folder / "warm.csv").write_text("entry.temperature [K]\n900\n1000\n")
    text = output(capsys, "solve", "rig.toml", "--along", "warm.csv")
    assert "1      rig, scramjet" in text
    assert "dF, kN" in text


def test_several_cases_and_bad_ones_end_with_the_highest(capsys: pytest.CaptureFixture[str], folder: Path) -> None:
    arguments = ("solve", "quick.toml", "missing.toml", "hot.toml", "--along", "short.csv", "--format")
    found = json.loads(output(capsys, *arguments, "json", status=2))
    assert [one["status"] for one in found] == ["solved", "bad-input", "solved"]
    rows = list(csv.DictReader(io.StringIO(output(capsys, *arguments, "csv", status=2))))
    assert [(row["case"], row["point"], row["status"]) for row in rows] == [
        ("quick.toml", "1", "solved"), ("quick.toml", "2", "solved"), ("missing.toml", "", "bad-input"), ("hot.toml", "1", "solved"),
        ("hot.toml", "2", "solved"),
    ]  # fmt: skip


def test_settings_hold_along_the_flight(capsys: pytest.CaptureFixture[str], folder: Path) -> None:
    plain, less = (
        json.loads(output(capsys, "solve", "quick.toml", *setting, "--along", "short.csv", "--format", "json"))["points"]
        for setting in ((), ("--set", "combustor.fuel_air_ratio=0.005"))
    )
    assert less[0]["performance"]["fuel_air_ratio"] == pytest.approx(0.5 * plain[0]["performance"]["fuel_air_ratio"], rel=1e-12)


@pytest.mark.parametrize(
    ("content", "said"),
    [
        ("flight.mahc\n5\n", "flight.mahc"),
        ("flight.mach\nfast\n", "flight.mach"),
        ("flight.mach\n-3\n", "flight.mach"),
        ("", "bad.csv"),
    ],
)
def test_a_bad_trajectory_is_2_and_says_where(capsys: pytest.CaptureFixture[str], folder: Path, content: str, said: str) -> None:
    (folder / "bad.csv").write_text(content)
    assert main(["solve", "quick.toml", "--along", "bad.csv"]) == 2
    found = capsys.readouterr()
    assert found.out == ""
    assert "bad.csv" in found.err and said in found.err


@pytest.mark.parametrize("option", [("-o", "kept.json"), ("--referee",), ("--rows", "duct")])
def test_what_is_for_single_points_is_refused_along(capsys: pytest.CaptureFixture[str], folder: Path, option: tuple[str, ...]) -> None:
    assert main(["solve", "quick.toml", "--along", "short.csv", *option]) == 2
    assert "those are for single points" in capsys.readouterr().err
    assert not (folder / "kept.json").exists()


def test_points_are_told_in_spans() -> None:
    assert _spans([1, 2, 3, 7, 9, 10]) == "1 to 3, 7, 9 to 10"


def test_a_fixed_flowpath_solves_to_the_sized_thrust(capsys: pytest.CaptureFixture[str], folder: Path) -> None:
    assert main(["fix-geometry", "duct.toml", "-o", "fixed.toml"]) == 0
    assert capsys.readouterr().err == "written: fixed.toml\n"
    fixed, sized = (cycle.solve(cycle.load(folder / name)).performance.thrust for name in ("fixed.toml", "duct.toml"))
    # The fixed case is solved by another way through the same model: equal to rounding of areas.
    assert fixed == pytest.approx(sized, rel=1e-8)
    text = output(capsys, "fix-geometry", "duct.toml")
    assert text == (folder / "fixed.toml").read_text()
    assert main(["fix-geometry", "duct.toml", "-o", "fixed.toml"]) == 2
    assert "file exists" in capsys.readouterr().err


def test_a_fixed_flowpath_has_nothing_left_to_fix(capsys: pytest.CaptureFixture[str], folder: Path) -> None:
    assert main(["fix-geometry", "duct.toml", "-o", "fixed.toml"]) == 0
    capsys.readouterr()
    assert main(["fix-geometry", "fixed.toml"]) == 0
    found = capsys.readouterr()
    assert "nothing to fix" in found.err
    assert found.out == (folder / "fixed.toml").read_text()


def test_what_cannot_be_fixed_is_refused(capsys: pytest.CaptureFixture[str], folder: Path) -> None:
    assert main(["fix-geometry", "hot.toml"]) == 2
    assert "constant-pressure" in capsys.readouterr().err
    written(folder, slow=DETACHED)
    assert main(["fix-geometry", "slow.toml"]) == 3
    found = capsys.readouterr()
    assert (found.out, "NO SOLUTION, detached" in found.err) == ("", True)
