"""Case files: reading, saving, and everything a disk can do in between."""

# ruff: noqa: E501 - texts of files and messages stay whole
from __future__ import annotations

import os
import resource
import stat
import subprocess
import sys
import tempfile
import time
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path

import pytest

from cycle.case import Case, load, loads, save, template
from cycle.errors import CaseError, FileChanged


@pytest.fixture
def path(tmp_path: Path, text: str) -> Path:
    file = tmp_path / "saltmarsh.toml"
    file.write_text(text)
    return file


def fault(call: object, *args: object) -> str:
    with pytest.raises(CaseError) as caught:
        call(*args)  # type: ignore[operator]
    return str(caught.value)


def changed_lines(old: str, new: str) -> list[tuple[str, str]]:
    a, b = old.split("\n"), new.split("\n")
    assert len(a) == len(b)
    return [(x, y) for x, y in zip(a, b, strict=True) if x != y]


def test_load_keeps_name_path_text_and_stamp(path: Path, text: str) -> None:
    case = load(path)
    assert (case.name, case.path, case.text) == ("saltmarsh", str(path), text)
    assert case.stamp is not None
    assert case == loads(text)


def test_saving_an_unchanged_case_keeps_every_byte(path: Path) -> None:
    case = load(path)
    before = path.read_bytes()
    assert save(case, path, case.stamp).digest == case.stamp.digest  # type: ignore[union-attr]
    assert path.read_bytes() == before


def test_only_changed_values_change(path: Path, text: str) -> None:
    case = load(path)
    new = case.replace({"flight.mach": 7.25, "flight.dynamic_pressure": 61e3, "fuel.name": "methane"})
    save(new, path, case.stamp)
    assert changed_lines(text, path.read_text()) == [
        ("mach = 8.0        # as flown", "mach = 7.25        # as flown"),
        ('dynamic_pressure = "50 kPa"', 'dynamic_pressure = "61 kPa"'),
        ("name = 'hydrogen'", 'name = "methane"'),
    ]
    assert load(path) == new


def test_a_group_switch_takes_the_place_of_the_old_member(path: Path, text: str) -> None:
    case = load(path)
    new = case.replace({"flight.altitude": "27 km", "inlet.adiabatic_efficiency": 0.9, "inlet.exit_mach": 3.0, "nozzle.ideal": True})
    save(new, path, case.stamp)
    assert changed_lines(text, path.read_text()) == [
        ('dynamic_pressure = "50 kPa"', 'altitude = "27 km"'),
        ("kinetic_energy_efficiency = 0.975   # guess", "adiabatic_efficiency = 0.9   # guess"),
        ("pressure_ratio = 60.0", "exit_mach = 3.0"),
        ("exit_area_over_capture = 1.5", "ideal = true"),
    ]
    assert load(path) == new


def test_added_and_removed_keys(path: Path, text: str) -> None:
    case = load(path)
    edits = {"combustor.wall_heat": "2 MW", "limits.gas_temperature": 2800.0, "combustor.burnt_fraction": None, "notes": "one\ntwo"}
    save(case.replace(edits), path, case.stamp)
    expected = text.replace('title  = "Saltmarsh, hydrogen"\n', 'title  = "Saltmarsh, hydrogen"\nnotes = """one\ntwo"""\n')
    expected = expected.replace("burnt_fraction = 0.92\n", 'wall_heat = "2 MW"\n') + "\n[limits]\ngas_temperature = 2800.0\n"
    assert path.read_text() == expected
    assert load(path) == case.replace(edits)


def test_a_rig_made_of_an_engine(path: Path) -> None:
    case = load(path)
    entry = {"entry.mach": 2.5, "entry.pressure": 1e5, "entry.temperature": 1000.0, "entry.area": "60 cm^2", "nozzle.exit_area_ratio": 2.0}
    rig = case.replace(entry)
    save(rig, path, case.stamp)
    written = path.read_text()
    assert "[flight]" not in written
    assert "# a comment between keys" in written
    assert load(path) == rig
    assert load(path).studies == case.studies


LAYOUTS = {
    "inline": 'format = 1\nflight = { mach = 8.0, dynamic_pressure = "50 kPa" }\ninlet = {kinetic_energy_efficiency=0.97, pressure_ratio=60.0}\n'
    'fuel = { name = "hydrogen" }\ncombustor = { equivalence_ratio = 0.6 }\nnozzle = { ideal = true }\n',
    "dotted": 'format = 1\nflight.mach = 8.0\nflight.dynamic_pressure = "50 kPa" # q\ninlet.kinetic_energy_efficiency = 0.97\n'
    'inlet.pressure_ratio = 60.0\nfuel.name = "hydrogen"\ncombustor.equivalence_ratio = 0.6\nnozzle.ideal = true\n',
    "indented": 'format = 1\n[flight]\n  mach = 8.0\n  dynamic_pressure = "50 kPa"\n[inlet]\n\tkinetic_energy_efficiency = 0.97\n'
    '\tpressure_ratio = 60.0\n[fuel]\nname = "hydrogen"\n[combustor]\nequivalence_ratio = 0.6\n[nozzle]\nideal = true',
    "quoted": 'format = 1\n["flight"]\n"mach" = 8.0\n\'dynamic_pressure\' = """50 kPa"""\n[inlet]\nkinetic_energy_efficiency = 97e-2\n'
    'pressure_ratio = 6_0.0\n[fuel]\nname = "hydrogen"\n[combustor]\nequivalence_ratio = 0.6\n[nozzle]\nideal = true\n',
    "sub-table": "format = 1\n[flight]\nmach = 8\ndynamic_pressure = 50e3\n[air.mole_fractions]\nN2 = 0.78 # air\nO2 = 0.22\n[inlet]\n"
    'kinetic_energy_efficiency = 0.97\npressure_ratio = 60.0\n[fuel]\nname = "hydrogen"\n[combustor]\nequivalence_ratio = 0.6\n[nozzle]\nideal = true\n',
    "bare headers": "format = 1\n[flight]\nmach = 8\ndynamic_pressure = 50e3\n[inlet]\nkinetic_energy_efficiency = 0.97\npressure_ratio = 60.0\n"
    '[fuel]\nname = "hydrogen"\n[combustor]\nequivalence_ratio = 0.6\n[nozzle]\nideal = true\n[limits]\n[air]\n# nothing yet\n[engine]',
}
CHANGES: list[dict[str, object]] = [
    {"flight.mach": 7.0},
    {"flight.altitude": "27 km"},
    {"flight.pressure": 1e3, "flight.temperature": 220.0},
    {"flight.temperature_offset": 10.0, "combustor.wall_heat": 1e5},
    {"nozzle.exit_pressure": "2 kPa", "engine.capture_area": 2.0, "limits.gas_temperature": 3000.0},
    {"air.relative_humidity": 0.5},
    {"air.mole_fractions": {"N2": 0.6, "O2": 0.2, "H2O": 0.2}},
    {"air.mole_fractions": None, "air.relative_humidity": None},
    {"combustor.process": "pressure-loss", "combustor.pressure_ratio": 0.9},
    {"gas.model": "constant-gamma", "fuel.heating_value": "120 MJ/kg", "combustor.fuel_air_ratio": 0.02},
    {"fuel.formula": "CH4", "fuel.phase": "gas", "fuel.formation_enthalpy": "-75 kJ/mol", "fuel.vapour_specific_heat": 2200.0},
    {"title": "other", "notes": 'a "quoted"\n\\ note """ with all\ttricks'},
    {"entry.mach": 2.5, "entry.pressure": 1e5, "entry.temperature": 1e3, "entry.area": 0.01, "nozzle.exit_area_ratio": 2.0},
]  # fmt: skip


@pytest.mark.parametrize("layout", LAYOUTS)
@pytest.mark.parametrize("change", CHANGES, ids=lambda c: "+".join(c))
@pytest.mark.parametrize("ends", ["\n", "\r\n"], ids=["unix", "windows"])
def test_every_layout_takes_every_change_and_back(tmp_path: Path, layout: str, change: dict[str, object], ends: str) -> None:
    path = tmp_path / "case.toml"
    path.write_bytes(LAYOUTS[layout].replace("\n", ends).encode())
    case = load(path)
    new = case.replace(change)
    stamp = save(new, path, case.stamp)
    assert load(path) == new
    comments = [line for line in LAYOUTS[layout].split("\n") if line.startswith("#")]
    assert all(comment in path.read_text() for comment in comments)
    if ends == "\r\n" and "notes" not in change:
        data = path.read_bytes()
        assert data.count(b"\n") == data.count(b"\r\n")
    save(case, path, stamp)
    assert load(path) == case


def test_a_new_file_keeps_the_comments_of_the_text_it_came_from(tmp_path: Path) -> None:
    case = loads(template())
    path = tmp_path / "new.toml"
    stamp = save(case.replace({"flight.mach": 7.0}), path)
    assert path.read_text() == template().replace("\nmach = 9.5\n", "\nmach = 7.0\n")
    again = load(path)
    assert again.stamp is not None
    assert again.stamp.digest == stamp.digest


def test_a_file_changed_by_another_session_is_not_overwritten(path: Path, text: str) -> None:
    case = load(path)
    theirs = text.replace("mach = 8.0", "mach = 9.0")
    path.write_text(theirs)
    with pytest.raises(FileChanged) as caught:
        save(case.replace({"flight.mach": 7.0}), path, case.stamp)
    assert path.read_text() == theirs
    assert caught.value.theirs == theirs
    assert caught.value.ours == text.replace("mach = 8.0", "mach = 7.0")
    assert "not overwritten" in str(caught.value)


def test_a_touched_file_with_the_same_content_is_not_changed(path: Path) -> None:
    case = load(path)
    os.utime(path, (1.0, 1.0))
    save(case.replace({"flight.mach": 7.0}), path, case.stamp)
    assert load(path).numbers["flight.mach"] == 7.0


def test_an_existing_file_is_not_overwritten_unasked(path: Path, tmp_path: Path) -> None:
    other = tmp_path / "other.toml"
    other.write_text("not ours")
    with pytest.raises(FileChanged):
        save(load(path), other)
    assert other.read_text() == "not ours"


def test_a_vanished_file_is_written_anew(path: Path, text: str) -> None:
    case = load(path)
    path.unlink()
    save(case, path, case.stamp)
    assert path.read_text() == text


def test_mode_bits_and_links_survive(path: Path, tmp_path: Path) -> None:
    path.chmod(0o640)
    link = tmp_path / "link.toml"
    link.symlink_to(path.name)
    case = load(link)
    save(case.replace({"flight.mach": 7.0}), link, case.stamp)
    assert link.is_symlink()
    assert load(path).numbers["flight.mach"] == 7.0
    assert stat.S_IMODE(path.stat().st_mode) == 0o640
    assert sorted(p.name for p in tmp_path.iterdir()) == ["link.toml", "saltmarsh.toml"]


def test_a_new_file_follows_the_umask(tmp_path: Path, case: Case) -> None:
    old = os.umask(0o027)
    try:
        save(case, tmp_path / "new.toml")
    finally:
        os.umask(old)
    assert stat.S_IMODE((tmp_path / "new.toml").stat().st_mode) == 0o640


FULL_DISK = """
import resource, signal, sys
from cycle.case import load, save
from cycle.errors import CaseError
case = load(sys.argv[1])
signal.signal(signal.SIGXFSZ, signal.SIG_IGN)
resource.setrlimit(resource.RLIMIT_FSIZE, (100, 100))
try:
    save(case.replace({"flight.mach": 7.0}), sys.argv[1], case.stamp)
except CaseError as error:
    print(error)
"""


def test_a_write_that_breaks_off_leaves_the_file_untouched(path: Path, tmp_path: Path) -> None:
    before = path.read_bytes()
    done = subprocess.run([sys.executable, "-c", FULL_DISK, str(path)], capture_output=True, text=True, check=True)
    assert done.stdout == f"{path}: cannot be written: file too large\n"
    assert path.read_bytes() == before
    assert [p.name for p in tmp_path.iterdir()] == ["saltmarsh.toml"]


@contextmanager
def as_nobody(folder: Path, mode: int) -> Iterator[None]:
    """Folder with that mode, seen by a user without rights to it."""
    user = os.geteuid()
    folder.chmod(mode)
    try:
        if user == 0:
            os.seteuid(65534)
        yield
    finally:
        if user == 0:
            os.seteuid(0)
        folder.chmod(0o755)


@pytest.fixture
def open_folder() -> Iterator[Path]:
    """A folder that another user can reach, unlike pytest's own."""
    with tempfile.TemporaryDirectory(dir="/tmp") as name:
        Path(name).chmod(0o755)
        yield Path(name)


def test_a_read_only_folder_is_one_clear_line(open_folder: Path, text: str) -> None:
    file = open_folder / "case.toml"
    save(loads(text), file)
    case = load(file)
    with as_nobody(open_folder, 0o555):
        assert fault(save, case.replace({"flight.mach": 7.0}), file, case.stamp) == f"{file}: cannot be written: permission denied"
    assert file.read_text() == text
    assert [p.name for p in open_folder.iterdir()] == ["case.toml"]


def test_a_missing_folder_is_one_clear_line(case: Case, tmp_path: Path) -> None:
    path = tmp_path / "none" / "case.toml"
    assert fault(save, case, path) == f"{path}: cannot be written: no such file or directory"


def test_what_cannot_be_read_is_one_clear_line(tmp_path: Path) -> None:
    assert fault(load, tmp_path) == f"{tmp_path}: not a case file: given a directory; allowed a file, or - for standard input"
    missing = tmp_path / "missing.toml"
    assert fault(load, missing) == f"{missing}: cannot be read: no such file or directory"
    pipe = tmp_path / "pipe.toml"
    os.mkfifo(pipe)
    assert "not a case file: given a device or pipe" in fault(load, pipe)
    assert "not a case file: given a device or pipe" in fault(load, "/dev/zero")
    loop = tmp_path / "loop.toml"
    loop.symlink_to(loop)
    assert "cannot be read: too many levels of symbolic links" in fault(load, loop)
    assert "no name of a file" in fault(load, "a\x00b")
    assert "cannot be read: file name too long" in fault(load, "x" * 5000)


def test_an_unreadable_file_is_one_clear_line(open_folder: Path, text: str) -> None:
    file = open_folder / "case.toml"
    file.write_text(text)
    file.chmod(0o000)
    with as_nobody(open_folder, 0o755):
        assert fault(load, file) == f"{file}: cannot be read: permission denied"


def test_a_huge_file_costs_neither_memory_nor_time(tmp_path: Path) -> None:
    file = tmp_path / "huge.toml"
    with file.open("wb") as stream:
        stream.truncate(100 * 1024 * 1024)
    peak = resource.getrusage(resource.RUSAGE_SELF).ru_maxrss
    start = time.perf_counter()
    assert fault(load, file) == f"{file}: too large: given 104857600 bytes; allowed at most 1048576 bytes"
    assert time.perf_counter() - start < 1.0
    # KiB; a bounded read holds a little over 1 MiB
    assert resource.getrusage(resource.RUSAGE_SELF).ru_maxrss - peak < 20 * 1024


def test_two_writers_do_not_mix(path: Path) -> None:
    one, two = load(path), load(path)
    stamp = save(one.replace({"flight.mach": 7.0}), path, one.stamp)
    with pytest.raises(FileChanged):
        save(two.replace({"flight.mach": 6.0}), path, two.stamp)
    save(two.replace({"flight.mach": 6.0}), path, stamp)
    assert load(path).numbers["flight.mach"] == 6.0
