"""Hostile files and words: each with its lines, none with a raised exception, and the dearest within their bounds as processes."""

from __future__ import annotations

import subprocess
import sys
from pathlib import Path

import pytest

from tests import hostile_files
from tests.hostile import large
from tests.hostile.running import TYPES, Trial, expected, furnish, run, shortened, trials
from tests.tui.command_support import QUICK, environment
from tui import line, output

KINDS = ("case", "trajectory", "walk", "setting", "place")


def test_there_are_enough_of_them_and_each_has_its_lines() -> None:
    names = [trial.name for trial in trials()]
    assert len(names) == len(set(names)) >= 300
    assert set(names) == set(expected())
    assert {name.partition(",")[0] for name in names} == set(KINDS)


@pytest.mark.parametrize("kind", KINDS)
def test_every_one_is_told_in_its_lines(tmp_path: Path, monkeypatch: pytest.MonkeyPatch, kind: str) -> None:
    monkeypatch.setenv("XDG_STATE_HOME", str(tmp_path / "state"))
    furnish(tmp_path)
    monkeypatch.chdir(tmp_path)
    lines = expected()
    for trial in (t for t in trials() if t.name.startswith(f"{kind},")):
        trial.prepare(tmp_path)
        status, out, told = run(*trial.arguments)
        assert (status, shortened(told)) == lines[trial.name], trial.name
        assert all(line.isprintable() for line in (out + told).split("\n")), trial.name
        assert status == 0 or not TYPES.search(told), trial.name


DEAR = ("a long text of escapes", "many dotted keys", "many keys", "many rows in one line", "names of 7 parts")


@pytest.mark.parametrize("name", DEAR)
def test_the_dearest_sound_files_are_saved_within_the_bounds(tmp_path: Path, name: str) -> None:
    """In a process of its own; all of them, in every command: `python -m tests.hostile_files`."""
    found = hostile_files.cost(Trial(name, ("save",), "x.toml", large.SOUND[name]), tmp_path)
    assert found.status == 0
    assert found.megabytes <= hostile_files.MOST_MEGABYTES
    assert "mach = 7.0" in (tmp_path / "x.toml").read_text()


@pytest.mark.parametrize("name", ["many objects", "many keys", "long text of many widths"])
def test_a_stored_walk_of_many_values_takes_no_memory(tmp_path: Path, name: str) -> None:
    trial = next(t for t in trials() if t.name == f"walk, {name}")
    (tmp_path / "quick.toml").write_text(QUICK)
    found = hostile_files.cost(Trial(name, ("compare", "quick.toml", "x.json"), "x.json", trial.content), tmp_path)
    assert found.status == 2
    assert found.megabytes <= hostile_files.MOST_MEGABYTES


EVIL = "\x1b[2J\x9b\u202e\u2066\u200e\u061c\u200b\u034f\ufeff"
ESCAPED = r"\x1b[2J\x9b\u202e\u2066\u200e\u061c\u200b\u034f\ufeff"


@pytest.mark.parametrize("form", ["text", "markdown", "csv", "json"])
def test_titles_notes_and_names_of_files_reach_no_output_raw(tmp_path: Path, monkeypatch: pytest.MonkeyPatch, form: str) -> None:
    monkeypatch.chdir(tmp_path)
    text = 'notes = "{evil}"\n' + QUICK.replace("invented", "{evil}")
    (tmp_path / f"{EVIL}.toml").write_text(text.replace("{evil}", "".join(f"\\u{ord(c):04x}" for c in EVIL)), encoding="utf-8")
    for more in ((), ("--along", "t.csv")):
        (tmp_path / "t.csv").write_text("flight.mach\n7\n0.01\n")
        status, out, told = run("solve", f"{EVIL}.toml", "--format", form, *more)
        assert status == (3 if more else 0)
        assert all(line.isprintable() for line in (out + told).split("\n"))
        assert "\\u202e" in out or "\\\\u202e" in out
    for command in (("compare", f"{EVIL}.toml", f"{EVIL}.toml"), ("explain", "thrust", f"{EVIL}.toml"), ("check", f"{EVIL}.toml")):
        status, out, told = run(*command)
        assert status == 0
        assert all(line.isprintable() for line in (out + told).split("\n"))


def test_a_terminal_gets_nothing_raw_and_a_file_all(capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch) -> None:
    output.emit(f"a\t{EVIL}\n")
    assert capsys.readouterr().out == f"a\t{EVIL}\n"
    monkeypatch.setattr(sys.stdout, "isatty", lambda: True)
    output.emit(f"a\t{EVIL}\n")
    assert capsys.readouterr().out == f"a\t{ESCAPED}\n"
    output.tell(f"written: {EVIL}")
    assert capsys.readouterr().err == f"written: {ESCAPED}\n"


def test_the_screen_paints_no_control_character_whatever_it_is_given() -> None:
    assert all(character.isprintable() for character, _ in line.cells(line.line(EVIL + "x\n\t\x00"), 30))


def test_standard_output_is_no_name_of_a_stored_walk_and_an_empty_name_is_none(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.chdir(tmp_path)
    (tmp_path / "q.toml").write_text(QUICK)
    assert run("solve", "q.toml", "-o", "-")[::2] == (
        2, "-o takes the name of a file: standard output has the results; for JSON there use --format json\n",
    )  # fmt: skip
    status, out, told = run("fix-geometry", "q.toml", "-o", "-")
    assert (status, told) == (0, "") and "(fixed)" in out
    for command in (("solve", "q.toml", "--along", ""), ("explain", "thrust", ""), ("cases", "narrows", "-o", "")):
        assert run(*command)[0] == 2
    assert [path.name for path in tmp_path.iterdir()] == ["q.toml"]


def test_a_device_is_written_and_a_full_one_is_said(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.chdir(tmp_path)
    (tmp_path / "q.toml").write_text(QUICK)
    assert run("solve", "q.toml", "-o", "/dev/null")[::2] == (0, "stored in /dev/null\n")
    assert run("solve", "q.toml", "-o", "/dev/full")[::2] == (2, "/dev/full: cannot be written: no space left on device\n")


@pytest.mark.parametrize("command", [("solve", "{}", "-o", "w.json"), ("new", "-o", "n.toml"), ("cases", "narrows"), ("check", "q.toml")])
def test_a_deleted_working_folder_is_one_line(tmp_path: Path, command: tuple[str, ...]) -> None:
    (tmp_path / "q.toml").write_text(QUICK)
    gone = tmp_path / "gone"
    gone.mkdir()
    code = f"import os, sys\nos.rmdir({str(gone)!r})\nfrom tui.__main__ import main\nsys.exit(main())"
    arguments = [part.format(tmp_path / "q.toml") for part in command]
    done = subprocess.run(
        [sys.executable, "-c", code, *arguments], capture_output=True, text=True, cwd=gone, env=environment(tmp_path), check=False
    )
    assert done.returncode == 2
    assert done.stderr.endswith("no such file or directory\n") and done.stderr.count("\n") == 1
