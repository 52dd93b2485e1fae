"""A walk as plain data and its stored form."""

from __future__ import annotations

import copy
import json
import os
from pathlib import Path
from typing import Any

import numpy as np
import pytest
import tomlkit

import cycle
from cycle.errors import CaseError
from cycle.gas.species import data_hash
from cycle.record import LARGEST_FILE, case_record, dumps, flown, is_stored, read_stored, record, stored, write
from tests.tui.command_support import CHOKED, DETACHED, DUCT, DUCT_RIG, HOT, QUICK, RAMJET, RIG, THROAT


@pytest.fixture(scope="module")
def kept() -> dict[str, Any]:
    return stored(cycle.solve(cycle.loads(HOT, "hot")), "1.2.3")


@pytest.mark.parametrize("text", [QUICK, HOT, CHOKED, RAMJET, RIG, DUCT, DUCT_RIG, DETACHED, THROAT])
def test_the_case_of_a_record_is_the_case_solved(text: str) -> None:
    case = cycle.loads(text)
    again = cycle.loads(tomlkit.dumps(case_record(case)))
    assert again.numbers == case.numbers
    assert again.choices == case.choices
    assert again.texts == case.texts
    assert again.fractions == pytest.approx(case.fractions, rel=1e-15)  # normalising once more may round


def test_figures_are_those_of_the_walk() -> None:
    walk = cycle.solve(cycle.loads(HOT))
    found = record(walk)
    assert found["performance"]["thrust"] == walk.performance.thrust
    assert found["stations"]["4"]["temperature"] == walk.station["4"].temperature
    assert found["stations"]["4"]["mole_fractions"]["H2O"] == walk.station["4"].mole_fractions["H2O"]
    assert found["referee"] == {"asked": False, "words": "not asked"}
    assert found["audit"]["ok"] is True
    assert sum(row["value"] for row in found["potentials"][:-1]) == pytest.approx(walk.performance.thrust, rel=1e-9)


def test_the_referee_is_heard_where_asked() -> None:
    found = record(cycle.solve(cycle.loads(HOT)), referee=True)["referee"]
    assert (found["asked"], found["agrees"]) == (True, True)
    assert [row["where"] for row in found["rows"]] == [f"station {name}" for name in ("0", "2", "3", "4", "10")]
    # The referee's own bar on temperatures: the two solvers differ by their tolerances only.
    assert all(row["temperature"] < 1e-4 for row in found["rows"])
    closed = record(cycle.solve(cycle.loads(QUICK)), referee=True)["referee"]
    assert (closed["compared"], closed["rows"]) == (0, [])


def test_defaults_are_listed() -> None:
    defaults = record(cycle.solve(cycle.loads(QUICK)))["defaults"]
    assert "fuel.temperature" in defaults
    assert "flight.mach" not in defaults


def test_every_null_has_its_reason() -> None:
    found = record(cycle.solve(cycle.loads(CHOKED)))
    nulls = [key for key, value in found["performance"].items() if value is None]
    assert "thrust" in nulls
    assert all(found["reasons"][f"performance.{key}"] for key in nulls)
    assert found["reasons"]["losses"] == found["reasons"]["exergy"] == "no solution"


def test_a_stored_walk_comes_back_as_it_was(kept: dict[str, Any]) -> None:
    (back,) = read_stored(dumps(kept).encode(), "kept.json")
    assert back.walk == kept["walk"]
    assert (back.file, back.name, back.version) == ("kept.json", "hot", "1.2.3")
    assert back.species_data == data_hash()
    assert back.case_text == HOT
    assert len(read_stored(dumps([kept, kept]).encode(), "two.json")) == 2


def changed(kept: dict[str, Any], path: str, value: Any) -> bytes:
    """The stored walk with one entry changed, None takes it away."""
    data = copy.deepcopy(kept)
    *way, last = path.split("/")
    table = data
    for step in way:
        table = table[step]
    if value is None:
        del table[last]
    else:
        table[last] = value
    return json.dumps(data).encode()


@pytest.mark.parametrize(
    ("path", "value", "said"),
    [
        ("kind", "notes", "kind: not a stored walk"),
        ("format", 2, "format: not a format of stored walks"),
        ("format", "1", "format: not a format of stored walks"),
        ("version", None, "version: not a stored walk"),
        ("walk", None, "walk: not a stored walk"),
        ("walk/stations", [], "walk.stations: not a stored walk"),
        ("walk/stations/4", "hot", "walk.stations.4: not a stored walk"),
        ("walk/stations/4/pressure", "high", 'walk.stations.4.pressure: neither a number nor null: given "high"'),
        ("walk/performance/thrust", True, "walk.performance.thrust: neither a number nor null"),
        ("walk/performance/thrust", 10**400, "walk.performance.thrust: neither a number nor null"),
        ("walk/processes", {}, "walk.processes: not a stored walk"),
        ("walk/processes", [7], "walk.processes.0: not a stored walk"),
        ("walk/processes", [{"figures": {"friction": "some"}}], "walk.processes.0.figures.friction: neither a number nor null"),
        ("walk/heat_limits", [], "walk.heat_limits: not a stored walk"),
        ("walk/heat_limits", {"unstart": "never"}, "walk.heat_limits.unstart: neither a number nor null"),
        ("walk/case/inlet", {"cone": 7}, "walk.case.inlet.cone: not a table of a case"),
        ("walk/case/inlet", {"ramp": 7}, "walk.case.inlet.ramp: no rows: given 7"),
        ("walk/case/combustor", {"area": [{"x": "far"}]}, "walk.case.combustor.area: no rows"),
        ("walk/case/combustor", {"area": [{}] * 65}, "walk.case.combustor.area: no rows"),
        ("walk/case/flight", 8.0, "walk.case.flight: not a table of a case"),
        ("walk/case/flight/mach", "fast", 'walk.case.flight.mach: no number: given "fast"'),
        ("walk/case/flight/mach", 10**400, "walk.case.flight.mach: no number"),
        ("walk/case/fuel/name", 7, "walk.case.fuel.name: no choice: given 7"),
    ],
    ids=lambda value: str(value)[:30],
)
def test_what_is_no_stored_walk_is_refused_with_the_place(kept: dict[str, Any], path: str, value: Any, said: str) -> None:
    with pytest.raises(CaseError) as caught:
        read_stored(changed(kept, path, value), "odd.json")
    assert str(caught.value).startswith(f"odd.json: {said}")


def test_a_stored_walk_without_borders_of_the_heat_is_read(kept: dict[str, Any]) -> None:
    (back,) = read_stored(changed(kept, "walk/heat_limits", None), "older.json")
    assert "heat_limits" not in back.walk


def test_a_duct_is_recorded_with_profile_and_rows() -> None:
    walk = cycle.solve(cycle.loads(DUCT))
    found = record(walk)
    placed = np.isfinite(walk.profile["x"])
    assert found["profile"]["mach"] == list(walk.profile["mach"][placed])
    assert found["case"]["combustor"]["area"][2] == {"x": 1.2, "area_ratio": 1.8}
    assert found["heat_limits"] == walk.heat_limits
    assert "combustor.injector.1.share" in found["defaults"]
    failed = record(cycle.solve(cycle.loads(DETACHED)))
    assert (failed["profile"], failed["heat_limits"]) == ({}, {})


def test_points_of_a_flight_are_those_of_the_batch() -> None:
    mach = np.array([2.0, 8.0])
    walk = cycle.solve(cycle.loads(DETACHED), {"flight.mach": mach})
    found = flown(walk, "two", {"flight.mach": mach})
    assert [p["status"] for p in found["points"]] == ["detached", "solved"]
    assert found["status"] == "detached"
    assert found["points"][0]["performance"]["thrust"] is None
    assert found["points"][1]["performance"]["thrust"] == walk.performance.thrust[1]
    assert [p["entering"]["mach"] for p in found["points"]] == list(walk.station["0"].mach)
    assert json.loads(dumps(found)) == found


@pytest.mark.parametrize("content", [b"", b"\xff\xfe", b"[]", b'{"a": NaN}', b"[" * 200_000, b" " * (LARGEST_FILE + 1), b'{"a"'])
def test_what_is_no_json_is_refused(content: bytes) -> None:
    with pytest.raises(CaseError, match=r"^odd\.json: "):
        read_stored(content, "odd.json")


def test_json_and_toml_are_told_apart() -> None:
    assert is_stored(b' \n{"format": 1}')
    assert is_stored(b'[\n {"format": 1}]')
    assert not is_stored(HOT.encode())
    assert not is_stored(b"[flight]\nmach = 8")
    assert not is_stored(b"")


def test_writing_keeps_mode_and_link_and_leaves_nothing_behind(tmp_path: Path) -> None:
    target, link = tmp_path / "walk.json", tmp_path / "link.json"
    target.write_text("{}")
    target.chmod(0o640)
    link.symlink_to(target)
    write(link, "new")
    assert link.is_symlink()
    assert target.read_text() == "new"
    assert target.stat().st_mode & 0o777 == 0o640
    assert sorted(p.name for p in tmp_path.iterdir()) == ["link.json", "walk.json"]


def test_a_failed_write_leaves_the_old_file(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    target = tmp_path / "walk.json"
    target.write_text("old")

    def full(handle: int) -> None:
        raise OSError(28, os.strerror(28))

    monkeypatch.setattr(os, "fsync", full)
    with pytest.raises(CaseError, match="cannot be written: no space left on device"):
        write(target, "new")
    assert target.read_text() == "old"
    assert [p.name for p in tmp_path.iterdir()] == ["walk.json"]


def test_a_device_is_written_and_not_replaced() -> None:
    write("/dev/null", "gone")
    assert not Path("/dev/null").is_file()
