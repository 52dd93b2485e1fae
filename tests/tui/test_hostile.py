"""Hostile files and words: each with its lines, none with a raised exception, and the dearest within their bounds as processes."""

from __future__ import annotations

from pathlib import Path

import pytest

from tests import hostile_files
from tests.hostile import large
from tests.hostile.running import TYPES, Trial, expected, furnish, run, shortened, trials
from tests.tui.command_support import QUICK

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
