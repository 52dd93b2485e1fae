"""What `solve` writes: text, JSON, CSV, Markdown, stored walks."""

from __future__ import annotations

import csv
import io
import json
import math
from pathlib import Path

import pytest

from cycle.quantities import OUTPUTS
from tests.tui.command_support import CHOKED, HOT, QUICK, RAMJET, RIG, ROOT, written
from tui.commands import main
from tui.tables import columns

SHIPPED = sorted((ROOT / "cases").glob("*.toml"))
STATION_KEYS = [o.key for o in OUTPUTS if o.where == "station"]
PERFORMANCE_KEYS = [o.key for o in OUTPUTS if o.where == "performance"]
PARTS = ["format", "case", "status", "mode", "stations", "performance", "losses", "limits", "audit", "referee", "units", "reasons"]


@pytest.fixture
def folder(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    monkeypatch.chdir(tmp_path)
    return written(tmp_path, quick=QUICK, hot=HOT, choked=CHOKED, ramjet=RAMJET, rig=RIG)


def output(capsys: pytest.CaptureFixture[str], *arguments: str, status: int = 0) -> str:
    assert main(arguments) == status
    return capsys.readouterr().out


@pytest.mark.parametrize("path", SHIPPED, ids=lambda p: p.stem)
@pytest.mark.parametrize("units", ["si", "us"])
def test_every_shipped_case_fits_80_columns(capsys: pytest.CaptureFixture[str], path: Path, units: str) -> None:
    main(["solve", str(path), "--units", units])
    text = capsys.readouterr().out
    assert text.isascii()
    assert max(map(columns, text.splitlines())) <= 80


def test_text_shows_every_part_of_the_walk(capsys: pytest.CaptureFixture[str], folder: Path) -> None:
    text = output(capsys, "solve", "hot.toml", "--referee")
    for words in (
        "uninstalled thrust", "specific impulse", "specific thrust", "overall efficiency", "Stations", "component",
        "Where the thrust comes from and goes", "Losses against the ideal engine", "Exergy", "Limits, least margin first", "not assessed:",
        "Audit ok", "Cantera check agrees: ", "Preliminary-design estimate; not for",
    ):  # fmt: skip
        assert words in text
    assert max(map(columns, text.splitlines())) <= 80
    (temperature,) = [line for line in text.splitlines() if line.strip().startswith("fuel.temperature ")]
    assert temperature.split() == ["fuel.temperature", "300", "K", "d"]
    (burnt,) = [line for line in text.splitlines() if line.strip().startswith("combustor.burnt_fraction ")]
    assert burnt.split() == ["combustor.burnt_fraction", "0.92"]


@pytest.mark.parametrize("units", ["si", "us"])
@pytest.mark.parametrize(("name", "mode"), [("ramjet", "ramjet-critical"), ("rig", "rig"), ("hot", "scramjet")])
def test_every_kind_of_engine_fits_80_columns(capsys: pytest.CaptureFixture[str], folder: Path, name: str, mode: str, units: str) -> None:
    text = output(capsys, "solve", f"{name}.toml", "--units", units)
    assert f"Mode {mode}" in text
    assert max(map(columns, text.splitlines())) <= 80
    assert "nan" not in text.split()


def test_figures_of_the_text_are_those_of_the_json(capsys: pytest.CaptureFixture[str], folder: Path) -> None:
    text = output(capsys, "solve", "quick.toml")
    walk = json.loads(output(capsys, "solve", "quick.toml", "--format", "json"))
    (line,) = [line.split() for line in text.splitlines() if line.strip().startswith("specific impulse")]
    # Four digits are shown: half a unit in the fourth is 5e-4 at most.
    assert float(line[3]) == pytest.approx(walk["performance"]["specific_impulse"], rel=5e-4)
    (row,) = [line.split() for line in text.splitlines() if line.strip().startswith("temperature, K")]
    assert [float(x) for x in row[2:]] == pytest.approx([s["temperature"] for s in walk["stations"].values()], rel=5e-4)


def test_us_units_convert_and_label(capsys: pytest.CaptureFixture[str], folder: Path) -> None:
    walk = json.loads(output(capsys, "solve", "quick.toml", "--format", "json"))
    text = output(capsys, "solve", "quick.toml", "--units", "us")
    (row,) = [line.split() for line in text.splitlines() if line.strip().startswith("temperature, degR")]
    kelvin = [s["temperature"] for s in walk["stations"].values()]
    assert [float(x) for x in row[2:]] == pytest.approx([1.8 * T for T in kelvin], rel=5e-4)


@pytest.mark.parametrize(("name", "status"), [("hot", 0), ("quick", 0), ("choked", 3), ("ramjet", 0), ("rig", 0)])
def test_json_has_the_keys_of_the_contract_and_no_nan(capsys: pytest.CaptureFixture[str], folder: Path, name: str, status: int) -> None:
    text = output(capsys, "solve", f"{name}.toml", "--format", "json", status=status)
    walk = json.loads(text, parse_constant=lambda constant: pytest.fail(f"{constant} in the JSON"))
    assert set(PARTS) <= set(walk)
    assert list(walk["performance"]) == PERFORMANCE_KEYS
    for station in walk["stations"].values():
        assert list(station) == [*STATION_KEYS, "mole_fractions"]
    for key, value in walk["performance"].items():
        assert value is not None or walk["reasons"][f"performance.{key}"]
    for name_of, station in walk["stations"].items():
        assert station["pressure"] is not None or walk["reasons"][f"stations.{name_of}"]
    assert set(walk["units"]) >= {*STATION_KEYS, *PERFORMANCE_KEYS}


@pytest.mark.parametrize(
    ("status", "changes"),
    [
        ("no-altitude", ["flight.dynamic_pressure=0.001"]),
        ("over-compressed", ["inlet.pressure_ratio=90000"]),
        ("choked", ["combustor.process=constant-area", "flight.mach=4"]),
        ("no-fuel", ["combustor.exit_total_temperature=5900"]),
        ("mode-refused", ["engine.mode=supersonic", "inlet.exit_mach=0.5"]),
        ("throat-mismatch", ["nozzle.throat=sized"]),
        ("stalled", ["combustor.process=constant-pressure", "combustor.friction_area_ratio=5"]),
    ],
    ids=lambda value: value if isinstance(value, str) else "",
)
def test_every_way_to_fail_is_said_in_every_form(capsys: pytest.CaptureFixture[str], folder: Path, status: str, changes: list[str]) -> None:
    settings = [word for change in changes for word in ("--set", change)]
    text = output(capsys, "solve", "hot.toml", *settings, status=3)
    assert f"NO SOLUTION, {status}: " in text
    assert max(map(columns, text.splitlines())) <= 80
    walk = json.loads(output(capsys, "solve", "hot.toml", *settings, "--format", "json", status=3))
    assert walk["status"] == status
    assert walk["reason"]
    rows = output(capsys, "solve", "hot.toml", *settings, "--format", "csv", status=3).splitlines()
    assert len(rows) == 1 + max(len(walk["stations"]), 1)


def test_a_walk_that_fails_keeps_the_stations_before(capsys: pytest.CaptureFixture[str], folder: Path) -> None:
    walk = json.loads(output(capsys, "solve", "choked.toml", "--format", "json", status=3))
    assert walk["status"] == "choked"
    assert walk["failed_process"] == "burner"
    assert walk["stations"]["3"]["temperature"] > walk["stations"]["0"]["temperature"]
    assert walk["performance"]["thrust"] is None
    assert all(walk["stations"].get(name, {"pressure": None})["pressure"] is None for name in ("4", "10"))


def test_csv_has_a_row_a_station_and_a_header_with_units(capsys: pytest.CaptureFixture[str], folder: Path) -> None:
    rows = list(csv.DictReader(io.StringIO(output(capsys, "solve", "hot.toml", "quick.toml", "--format", "csv"))))
    walks = json.loads(output(capsys, "solve", "hot.toml", "quick.toml", "--format", "json"))
    assert [(r["case"], r["station"]) for r in rows] == [
        (name, s) for name, walk in zip(("hot.toml", "quick.toml"), walks, strict=True) for s in walk["stations"]
    ]
    assert float(rows[0]["pressure (Pa)"]) == walks[0]["stations"]["0"]["pressure"]
    assert float(rows[0]["mole_fraction N2"]) == walks[0]["stations"]["0"]["mole_fractions"]["N2"]
    assert rows[-1]["mole_fraction N2"] == ""  # constant gamma has no composition


def test_csv_in_us_units_says_so(capsys: pytest.CaptureFixture[str], folder: Path) -> None:
    rows = list(csv.DictReader(io.StringIO(output(capsys, "solve", "quick.toml", "--format", "csv", "--units", "us"))))
    walk = json.loads(output(capsys, "solve", "quick.toml", "--format", "json"))
    expected = [1.8 * s["temperature"] for s in walk["stations"].values()]
    assert [float(r["temperature (degR)"]) for r in rows] == pytest.approx(expected, rel=1e-12)


def test_markdown_has_the_same_tables(capsys: pytest.CaptureFixture[str], folder: Path) -> None:
    text = output(capsys, "solve", "hot.toml", "--format", "markdown")
    assert text.startswith("# invented hydrogen scramjet\n")
    rows = [line for line in text.splitlines() if line.startswith("|")]
    assert any(line.startswith("| temperature, K |") for line in rows)
    assert all(line.count(" | ") == rows[i - 1].count(" | ") for i, line in enumerate(rows) if line.startswith("| :--"))


def test_a_stored_walk_is_not_put_in_the_place_of_anything_else(capsys: pytest.CaptureFixture[str], folder: Path) -> None:
    before = (folder / "quick.toml").read_bytes()
    (folder / "notes.txt").write_text("mine")
    for name, words in (("quick.toml", "is a case being solved"), ("notes.txt", "holds no stored walk")):
        assert main(["solve", "quick.toml", "-o", name]) == 2
        assert words in capsys.readouterr().err
    assert (folder / "quick.toml").read_bytes() == before
    assert (folder / "notes.txt").read_text() == "mine"
    assert main(["solve", "quick.toml", "-o", "walk.json"]) == 0
    assert main(["solve", "hot.toml", "quick.toml", "-o", "walk.json"]) == 0
    assert len(json.loads((folder / "walk.json").read_text())) == 2


def test_an_output_that_cannot_be_written_is_said_and_2(capsys: pytest.CaptureFixture[str], folder: Path) -> None:
    assert main(["solve", "quick.toml", "-o", "missing/walk.json"]) == 2
    assert capsys.readouterr().err == "missing/walk.json: cannot be written: no such file or directory\n"


def test_an_audit_that_fails_ends_with_4(capsys: pytest.CaptureFixture[str], folder: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    import cycle.audit

    # No residual is below this limit, so the real audit of a real walk must fail.
    monkeypatch.setattr(cycle.audit, "LIMIT", -math.inf)
    assert main(["solve", "quick.toml"]) == 4
    found = capsys.readouterr()
    assert "Audit FAILED" in found.out
    assert "quick.toml: Audit FAILED" in found.err
