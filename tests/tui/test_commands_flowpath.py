"""What the commands say of geometry inlets, ducts and throats: modes, margins, figures, stations 1 and 9, the flow along the duct."""

from __future__ import annotations

import csv
import io
import json
import math
from pathlib import Path

import pytest

import cycle
from cycle.quantities import CAUSES
from tests.tui.command_support import DETACHED, DUCT, DUCT_RIG, INTERNAL, QUICK, THROAT, written
from tui.commands import main
from tui.tables import columns
from tui.text import profile_marks

LONG = DUCT.replace('length = "0.5 m"\nhydraulic', 'length = "2 m"\nhydraulic')  # an isolator that holds every train
TRAIN, CHOKED_DUCT, UNSTARTED = (LONG.replace("equivalence_ratio = 0.4", f"equivalence_ratio = {x}") for x in (1.6, 1.67, 1.9))
SPILLING = THROAT.replace("0.112", "0.104")


@pytest.fixture
def folder(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    monkeypatch.chdir(tmp_path)
    return written(
        tmp_path, duct=DUCT, train=TRAIN, choked=CHOKED_DUCT, unstarted=UNSTARTED, detached=DETACHED, rig=DUCT_RIG, throat=THROAT,
        spilling=SPILLING, internal=INTERNAL, quick=QUICK,
    )  # fmt: skip


def output(capsys: pytest.CaptureFixture[str], *arguments: str, status: int = 0) -> str:
    assert main(arguments) == status
    return capsys.readouterr().out


def words(text: str) -> str:
    """The text in one line: sentences are wrapped."""
    return " ".join(text.split())


@pytest.mark.parametrize("units", ["si", "us"])
@pytest.mark.parametrize(
    ("name", "mode"),
    [
        ("duct", "scramjet"),
        ("train", "scramjet-shock-train"),
        ("choked", "ramjet-thermal-throat"),
        ("rig", "rig"),
        ("throat", "ramjet-supercritical"),
        ("spilling", "ramjet-subcritical"),
    ],
)
def test_every_mode_fits_80_columns(capsys: pytest.CaptureFixture[str], folder: Path, name: str, mode: str, units: str) -> None:
    text = output(capsys, "solve", f"{name}.toml", "--units", units)
    assert f"Solved. Mode {mode}: " in text
    assert "Mode and its margins" in text
    assert max(map(columns, text.splitlines())) <= 80
    assert "nan" not in text.split() and "inf" not in text.split()


def test_the_margins_of_a_duct_stand_in_sentences(capsys: pytest.CaptureFixture[str], folder: Path) -> None:
    text = words(output(capsys, "solve", "train.toml"))
    walk = cycle.solve(cycle.loads(TRAIN))
    isolator = next(p.figures for p in walk.processes if p.name == "isolator")
    assert f"Separation margin {100 * isolator['separation_margin']:+.1f} % (attached peak " in text
    assert f"Isolator margin {100 * isolator['isolator_margin']:+.1f} % (shock train {isolator['train_length']:.4g} m)." in text
    assert "Unstart margin not assessed: no critical section." in text
    borders = [f"{walk.heat_limits[name]:.4g}" for name in ("attached", "train", "unstart")]
    causes = [CAUSES[walk.heat_limit_causes[name]] for name in ("attached", "train", "unstart")]
    ends = [part for pair in zip(borders, causes, strict=True) for part in pair]
    assert (
        "With rising equivalence ratio (here 1.6): attached to {} ({}), shock train to {} ({}), unstart at {} ({}).".format(*ends) in text
    )


def test_a_rig_says_how_its_duct_runs(capsys: pytest.CaptureFixture[str], folder: Path) -> None:
    assert "The duct runs as scramjet: supersonic through the burner" in words(output(capsys, "solve", "rig.toml"))


def test_a_throat_says_where_its_shock_stands(capsys: pytest.CaptureFixture[str], folder: Path) -> None:
    text = words(output(capsys, "solve", "throat.toml"))
    assert "; 0 kg/s of air spilled." in text
    assert "The terminal shock stands at 1.0" in text
    text = words(output(capsys, "solve", "spilling.toml"))
    assert "Throat margin -" in text
    assert "The terminal shock is expelled to station 2; Mach " in text


@pytest.mark.parametrize(("name", "status"), [("unstarted", "unstarted"), ("detached", "detached")])
def test_failures_of_the_flowpath_are_said_and_end_with_3(capsys: pytest.CaptureFixture[str], folder: Path, name: str, status: str) -> None:
    text = output(capsys, "solve", f"{name}.toml", status=3)
    assert f"NO SOLUTION, {status}: " in text
    assert max(map(columns, text.splitlines())) <= 80
    walk = json.loads(output(capsys, "solve", f"{name}.toml", "--format", "json", status=3))
    assert (walk["status"], walk["mode"], walk["profile"]) == (status, "none", {})


def test_what_restores_an_unstarted_inlet_is_said_with_its_heat(capsys: pytest.CaptureFixture[str], folder: Path) -> None:
    text = words(output(capsys, "solve", "unstarted.toml", status=3))
    walk = cycle.solve(cycle.load("unstarted.toml"))
    ends = [f"{walk.heat_limits[name]:.4g} ({CAUSES[walk.heat_limit_causes[name]]})" for name in ("attached", "train", "unstart")]
    assert f"equivalence ratio 1.9, at most {walk.heat_limits['unstart']:.4g} (" in text and "less heat, heat further downstream" in text
    assert "With rising equivalence ratio (here 1.9): attached to {}, shock train to {}, unstart at {}.".format(*ends) in text
    margin = walk.march.figure("isolator", "unstart_margin")[0]
    assert margin < 0.0 and f"Unstart margin {100.0 * margin:+.1f} %." in text


def test_a_heat_that_is_no_fuel_ratio_has_no_borders(capsys: pytest.CaptureFixture[str], folder: Path) -> None:
    setting = ("--set", "combustor.exit_total_temperature=3000")
    assert "limits not known, the heat is no fuel ratio" in words(output(capsys, "solve", "duct.toml", *setting))
    walk = json.loads(output(capsys, "solve", "duct.toml", *setting, "--format", "json"))
    assert walk["heat_limits"]["unstart"] is None
    assert walk["reasons"]["heat_limits.unstart"] == "not known: the heat is no fuel ratio"


def test_figures_of_single_processes_are_listed(capsys: pytest.CaptureFixture[str], folder: Path) -> None:
    rows = [line.split() for line in output(capsys, "solve", "train.toml").splitlines()]
    assert ["external", "compression", "wave", "angle", "1", "10.02", "deg"] in rows
    assert ["captured", "fraction", "1"] in rows
    assert [row for row in rows if row[:2] == ["shock-train", "length"] and row[-1] == "m"]
    assert not [word for row in rows for word in row if "mode_" in word]


def test_rows_are_among_the_inputs(capsys: pytest.CaptureFixture[str], folder: Path) -> None:
    rows = [line.split() for line in output(capsys, "solve", "duct.toml").splitlines()]
    assert ["combustor.area.3.area_ratio", "1.8"] in rows
    assert ["combustor.area.2.x", "0.3", "m"] in rows
    assert ["combustor.injector.1.share", "1", "d"] in rows
    assert ["inlet.ramp.2.angle", "5", "deg"] in rows


def test_stations_1_and_9_have_columns(capsys: pytest.CaptureFixture[str], folder: Path) -> None:
    text = output(capsys, "solve", "internal.toml")
    heads = [name for line in text.splitlines() if line.strip().startswith("station ") for name in line.split()[1:]]
    names = ["0", "1", "2", "3", "4", "9", "10"]
    assert heads[: len(names)] == names
    assert "external compression" in text and "external expansion" in text
    assert max(map(columns, text.splitlines())) <= 80
    assert list(json.loads(output(capsys, "solve", "internal.toml", "--format", "json"))["stations"]) == names


@pytest.mark.parametrize("units", ["si", "us"])
@pytest.mark.parametrize("name", ["duct", "train", "choked"])
def test_the_flow_along_the_duct_is_one_table(capsys: pytest.CaptureFixture[str], folder: Path, name: str, units: str) -> None:
    text = output(capsys, "solve", f"{name}.toml", "--units", units)
    table = text.split("Along the duct, from burner entry\n")[1].split("\n\n")[0].splitlines()
    assert 10 <= len(table) - 1 <= 14
    assert len(table[0].split()) >= 8
    places = [float(line.split()[0]) for line in table[1:]]
    assert places == sorted(places)
    assert places[0] == 0.0
    assert sum("peak" in line for line in table) == 1
    assert sum("throat" in line for line in table) == (name == "choked")
    assert sum("core fills" in line for line in table) == (name != "duct")


def test_the_marked_rows_are_where_things_happen() -> None:
    walk = cycle.solve(cycle.loads(CHOKED_DUCT))
    burner = next(p.figures for p in walk.processes if p.name == "burner")
    marks = profile_marks(walk)
    throat, fills, peak = (next(i for i, mark in marks.items() if what in mark) for what in ("throat", "core fills", "peak"))
    # The throat and the place where the core fills the duct are nodes of the march.
    assert walk.profile["x"][throat] == pytest.approx(burner["throat_x"], abs=1e-9)
    assert walk.profile["x"][fills] == pytest.approx(burner["reattachment_x"], abs=1e-9)
    assert walk.profile["mach"][throat] == pytest.approx(1.0, abs=1e-6)
    assert walk.profile["pressure"][peak] == max(p for p in walk.profile["pressure"] if math.isfinite(p))


def test_json_has_profile_and_borders_of_the_heat(capsys: pytest.CaptureFixture[str], folder: Path) -> None:
    walk = json.loads(output(capsys, "solve", "train.toml", "--format", "json"))
    profile, solved = walk["profile"], cycle.solve(cycle.loads(TRAIN))
    assert len({len(values) for values in profile.values()}) == 1
    assert all(x is not None for x in profile["x"])
    assert profile["pressure"][-1] == pytest.approx(walk["stations"]["4"]["pressure"], rel=1e-9)  # the duct ends at station 4
    assert walk["heat_limits"] == pytest.approx(solved.heat_limits, rel=1e-9)
    isolator = next(p for p in walk["processes"] if p["name"] == "isolator")
    assert isolator["mode"] == "scramjet-shock-train"
    assert not [key for key in isolator["figures"] if key.startswith("mode_")]
    assert isolator["figures"]["unstart_margin"] is None
    assert walk["reasons"]["processes.isolator.unstart_margin"] == "no critical section"
    assert (walk["units"]["profile.pressure"], walk["units"]["combustor.area.x"]) == ("Pa", "m")


def test_other_burners_have_neither_profile_nor_borders(capsys: pytest.CaptureFixture[str], folder: Path) -> None:
    walk = json.loads(output(capsys, "solve", "quick.toml", "--format", "json"))
    assert (walk["profile"], walk["heat_limits"]) == ({}, {})
    assert "Along the duct" not in output(capsys, "solve", "quick.toml")


def test_csv_has_a_row_a_place_along_the_duct(capsys: pytest.CaptureFixture[str], folder: Path) -> None:
    rows = list(csv.DictReader(io.StringIO(output(capsys, "solve", "duct.toml", "quick.toml", "--format", "csv", "--rows", "duct"))))
    profile = json.loads(output(capsys, "solve", "duct.toml", "--format", "json"))["profile"]
    assert {row["case"] for row in rows} == {"duct.toml"}  # the other case has no duct
    assert [float(row["pressure (Pa)"]) for row in rows] == profile["pressure"]
    feet = list(csv.DictReader(io.StringIO(output(capsys, "solve", "duct.toml", "--format", "csv", "--rows", "duct", "--units", "us"))))
    assert float(feet[-1]["x (ft)"]) == pytest.approx(1.2 / 0.3048, rel=1e-12)


def test_rows_of_the_duct_need_csv(capsys: pytest.CaptureFixture[str], folder: Path) -> None:
    assert main(["solve", "duct.toml", "--rows", "duct"]) == 2
    assert capsys.readouterr().err == "--rows duct is for --format csv\n"


def test_markdown_has_the_flow_along_the_duct(capsys: pytest.CaptureFixture[str], folder: Path) -> None:
    text = output(capsys, "solve", "train.toml", "--format", "markdown")
    assert "## Along the duct, from burner entry" in text
    assert "| x, m | p, kPa | T, K | M | A, m^2 | core, m^2 | burnt | pt, kPa |" in text


@pytest.mark.parametrize(
    ("name", "said"),
    [
        ("separation_margin", "separation margin = 1 - "),
        ("limit.duct_separation", "margin = 1 - "),
        ("limit.isolator_length", "isolator length, shock train"),
        ("loss.burner", "heat at speed, mixing, friction, wall heat = "),
        ("potential.isolator", "isolator = -"),
        ("profile.mach", "x 1.2 m: M = "),
        ("heat.unstart", "before unstart = 1.66"),
        ("wave_angle", "external compression 0 to 1, 3: wave angle = "),
        ("combustor.area", "3: x 1.2, area_ratio 1.8"),
        ("combustor.area.area_ratio", "row by row: 1, 1, 1.8."),
        ("combustor.area.2.x", ": 0.3 m."),
        ("scramjet-shock-train", "Isolator margin +"),
        ("throat_margin", "none in this walk"),
        ("exergy.wake", "no value: needs fuel.supply_pressure"),
    ],
)
def test_explain_puts_the_numbers_of_the_flowpath_in(capsys: pytest.CaptureFixture[str], folder: Path, name: str, said: str) -> None:
    text = output(capsys, "explain", name, "train.toml")
    assert said in words(text)
    assert max(map(columns, text.splitlines())) <= 80
    assert main(["explain", name]) == 0


def test_compare_shows_modes_margins_and_cells(capsys: pytest.CaptureFixture[str], folder: Path) -> None:
    written(folder, other=TRAIN.replace("area_ratio = 1.8", "area_ratio = 2.0"))
    text = output(capsys, "compare", "duct.toml", "other.toml")
    rows = [line.split() for line in text.splitlines()]
    assert "A: duct.toml: invented dual-mode engine, ramps and a duct; scramjet\n" in text
    assert "; scramjet-shock-train" in words(text)
    assert ["combustor.area.3.area_ratio", "1.8", "2"] in rows
    assert [row for row in rows if row[:2] == ["separation", "margin"] and len(row) == 4]
    assert [row for row in rows if row[:3] == ["heat,", "before", "unstart"] and len(row) == 5]
    assert max(map(columns, text.splitlines())) <= 80


def test_a_stored_duct_is_compared_as_solved(capsys: pytest.CaptureFixture[str], folder: Path) -> None:
    assert main(["solve", "train.toml", "-o", "kept.json"]) == 0
    kept = json.loads((folder / "kept.json").read_text())["walk"]
    assert kept["profile"]["x"] and kept["heat_limits"]["unstart"]
    capsys.readouterr()
    text = output(capsys, "compare", "kept.json", "train.toml")
    assert "Inputs that differ\n  none\n" in text
