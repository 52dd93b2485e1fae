"""Commands that explain, compare, check and make; and what is said to a mistyped line."""

from __future__ import annotations

import json
import re
from pathlib import Path

import pytest

from cycle.quantities import INPUTS
from tests.tui.command_support import CHOKED, HOT, QUICK, written
from tui.commands import LATER, main
from tui.tables import columns


@pytest.fixture
def folder(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    monkeypatch.chdir(tmp_path)
    return written(tmp_path, quick=QUICK, hot=HOT, choked=CHOKED)


def said(capsys: pytest.CaptureFixture[str], *arguments: str, status: int = 0) -> str:
    assert main(arguments) == status
    found = capsys.readouterr()
    return found.out if status == 0 else found.err


@pytest.mark.parametrize(
    ("line", "words"),
    [
        ("slove quick.toml", "did you mean solve?"),
        ("solve --unit us quick.toml", "did you mean --units?"),
        ("solve --format jsn quick.toml", "did you mean json?"),
        ("solve", "CASE"),
        ("compare quick.toml --untis us", "did you mean --units?"),
        ("quick.toml --units us", "ductwalk solve quick.toml"),
        ("--verison", "did you mean --version?"),
        ("solve quick.toml --set flight.mahc=7", "did you mean mach?"),
        ("solve quick.toml --set flight.mach", "flight.mach"),
        ("solve quick.toml --set flight.altitude=27kmh", "km"),
    ],
)
def test_a_mistyped_line_gets_one_line_of_help_and_2(capsys: pytest.CaptureFixture[str], folder: Path, line: str, words: str) -> None:
    error = said(capsys, *line.split(), status=2)
    assert words in error
    assert error.count("\n") == 1


@pytest.mark.parametrize("name", LATER)
def test_later_commands_are_refused_and_not_offered(capsys: pytest.CaptureFixture[str], name: str) -> None:
    assert said(capsys, name, "x.toml", status=2) == f"ductwalk: {name} is not in this version\n"
    with pytest.raises(SystemExit):
        main(["--help"])
    assert name not in capsys.readouterr().out.split()


@pytest.mark.parametrize("arguments", [(), ("solve",), ("compare",), ("explain",), ("check",), ("new",), ("schema",), ("fix-geometry",)])
def test_help_fits_80_columns(capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch, arguments: tuple[str, ...]) -> None:
    monkeypatch.setenv("COLUMNS", "80")
    with pytest.raises(SystemExit):
        main([*arguments, "--help"])
    lines = capsys.readouterr().out.splitlines()
    assert len(lines) > 3
    assert max(map(len, lines)) <= 80


def test_check_says_ok_or_every_fault(capsys: pytest.CaptureFixture[str], folder: Path) -> None:
    written(folder, bad=QUICK.replace("mach = 8.0", 'mach = "fast"').replace("ideal = true", "idael = true"))
    assert main(["check", "quick.toml", "bad.toml"]) == 2
    found = capsys.readouterr()
    assert found.out == "quick.toml: ok\n"
    assert "bad.toml: flight.mach: " in found.err
    assert "bad.toml: nozzle.idael: " in found.err


@pytest.mark.parametrize("rig", [[], ["--rig"]])
def test_new_writes_a_case_that_solves_and_never_overwrites(capsys: pytest.CaptureFixture[str], folder: Path, rig: list[str]) -> None:
    text = said(capsys, "new", *rig)
    assert main(["new", *rig, "-o", "mine.toml"]) == 0
    assert (folder / "mine.toml").read_text() == text
    assert main(["solve", "mine.toml"]) == 0
    capsys.readouterr()
    assert "file exists" in said(capsys, "new", "-o", "mine.toml", status=2)
    assert (folder / "mine.toml").read_text() == text


def test_schema_is_json_and_knows_every_input(capsys: pytest.CaptureFixture[str]) -> None:
    text = said(capsys, "schema")
    assert json.loads(text)["type"] == "object"
    for entry in INPUTS:
        assert f'"{entry.name}"' in text


@pytest.mark.parametrize("name", ["specific_impulse", "Isp", "isp", "specific impulse", "Specific Impulse"])
def test_explain_takes_name_symbol_and_label(capsys: pytest.CaptureFixture[str], name: str) -> None:
    text = said(capsys, "explain", name)
    assert text.startswith("specific impulse (Isp)\n")
    assert "Isp = F / (g0 mf)" in text


def test_explain_puts_the_numbers_of_the_case_in(capsys: pytest.CaptureFixture[str], folder: Path) -> None:
    text = said(capsys, "explain", "Isp", "quick.toml")
    found = re.search(r"Isp = (.*) = ([\d.]+) s", text)
    assert found is not None
    # Both sides are shown to six digits.
    assert eval(found[1]) == pytest.approx(float(found[2]), rel=1e-5)


def test_explain_gives_a_station_figure_at_each_station(capsys: pytest.CaptureFixture[str], folder: Path) -> None:
    text = said(capsys, "explain", "dynamic_pressure", "quick.toml")
    shown = re.findall(r"station (\d+): q = ([\d.]+) \* ([\d.]+)\^2 / 2 = ([\d.]+) Pa", text)
    assert [s[0] for s in shown] == ["0", "2", "3", "4", "10"]
    for _, density, speed, q in shown:
        # Six digits each, the speed squared.
        assert float(density) * float(speed) ** 2 / 2 == pytest.approx(float(q), rel=3e-5)


@pytest.mark.parametrize(
    ("name", "words"),
    [
        ("flight.mach", "flight Mach number"),
        ("inlet.quality", "inlet.kinetic_energy_efficiency"),
        ("choked", "status of a walk"),
        ("scramjet", "mode of the engine"),
        ("combustor.burnt_fraction", "eta_b"),
    ],
)
def test_explain_knows_inputs_groups_and_words(capsys: pytest.CaptureFixture[str], folder: Path, name: str, words: str) -> None:
    assert words.lower() in said(capsys, "explain", name).lower()
    assert main(["explain", name, "quick.toml"]) == 0


def test_explain_suggests_near_names(capsys: pytest.CaptureFixture[str]) -> None:
    error = said(capsys, "explain", "specific_impuls", status=2)
    assert error.startswith("no quantity is called 'specific_impuls'; did you mean specific_impulse")
    assert "flight.mach" in said(capsys, "explain", "flight.mahc", status=2)
    assert "overall_efficiency" in said(capsys, "explain", "overall", status=2)
    assert said(capsys, "explain", "zzzzzz", status=2) == "no quantity is called 'zzzzzz'\n"


def test_explain_of_a_failed_walk_says_why_there_is_no_value(capsys: pytest.CaptureFixture[str], folder: Path) -> None:
    assert main(["explain", "thrust", "choked.toml"]) == 3
    assert "no value: " in capsys.readouterr().out


@pytest.mark.parametrize("name", [e.key for e in INPUTS[::7]] + ["thrust", "F", "pressure", "thermal_efficiency", "entropy"])
def test_explain_fits_80_columns(capsys: pytest.CaptureFixture[str], folder: Path, name: str) -> None:
    assert max(map(columns, said(capsys, "explain", name, "hot.toml").splitlines())) <= 80


def test_compare_shows_inputs_headline_and_stations(capsys: pytest.CaptureFixture[str], folder: Path) -> None:
    written(folder, other=HOT.replace("equivalence_ratio = 0.6", "equivalence_ratio = 0.5"))
    text = said(capsys, "compare", "hot.toml", "other.toml")
    lines = [line.split() for line in text.splitlines()]
    assert ["combustor.equivalence_ratio", "0.6", "0.5"] in lines
    (ratio,) = [line for line in lines if line[:2] == ["equivalence", "ratio"]]
    assert ratio[2:4] == ["0.6", "0.5"]
    assert float(ratio[4]) == pytest.approx(-100.0 / 6.0, abs=0.05)  # three digits are shown
    (temperature,) = [line for line in lines if line[:1] == ["temperature"]]
    assert temperature[1:4] == ["0", "0", "0"]  # nothing changed before the burner
    assert float(temperature[4]) < 0.0
    assert max(map(columns, text.splitlines())) <= 80


def test_compare_takes_stored_walks_and_says_when_versions_differ(capsys: pytest.CaptureFixture[str], folder: Path) -> None:
    assert main(["solve", "hot.toml", "-o", "kept.json"]) == 0
    assert "different versions" not in said(capsys, "compare", "kept.json", "hot.toml")
    kept = json.loads((folder / "kept.json").read_text())
    kept["version"], kept["species_data"] = "0.0.1", "0" * 64
    (folder / "kept.json").write_text(json.dumps(kept))
    text = " ".join(said(capsys, "compare", "kept.json", "hot.toml").split())
    assert "different versions" in text
    assert "0.0.1" in text
    assert "different species data" in text


def test_compare_of_a_walk_with_itself_changes_nothing(capsys: pytest.CaptureFixture[str], folder: Path) -> None:
    text = said(capsys, "compare", "hot.toml", "hot.toml")
    assert "Inputs that differ\n  none\n" in text
    assert not re.search(r"[+-]\d", text.split("Stations", 1)[1])


def test_compare_with_a_walk_that_failed(capsys: pytest.CaptureFixture[str], folder: Path) -> None:
    assert main(["compare", "quick.toml", "choked.toml"]) == 3
    text = capsys.readouterr().out
    assert "choked.toml has no solution" in text
    assert max(map(columns, text.splitlines())) <= 80


@pytest.mark.parametrize("content", ["{}", "[]", "{" * 100_000, '{"kind": "stored walk", "format": 2}', '{"a": NaN}', "[{}]"])
def test_what_is_no_stored_walk_is_refused(capsys: pytest.CaptureFixture[str], folder: Path, content: str) -> None:
    (folder / "odd.json").write_text(content)
    error = said(capsys, "compare", "odd.json", "quick.toml", status=2)
    assert error.startswith("odd.json: ")
    assert error.count("\n") == 1


def test_compare_needs_two(capsys: pytest.CaptureFixture[str], folder: Path) -> None:
    assert said(capsys, "compare", "quick.toml", status=2) == "compare takes 2 to 26 walks: 1 given\n"
