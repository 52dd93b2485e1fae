"""A trajectory is read whole or refused with every fault at once; flown, it is the batch of its rows."""

from __future__ import annotations

import os
from pathlib import Path

import numpy as np
import pytest

import cycle
from cycle.fixing import fixed_case
from cycle.flying import LARGEST, MOST_COLUMNS, MOST_ROWS, Trajectory, fly, parse_trajectory, read_trajectory

CASES = Path(__file__).parents[1] / "cases"


def faults(text: str | bytes) -> list[str]:
    with pytest.raises(cycle.CaseError) as caught:
        parse_trajectory(text, "climb.csv")
    return [str(fault) for fault in caught.value.faults]


def test_units_stand_in_the_header_or_in_the_cells(tmp_path: Path) -> None:
    """Both ways and SI give the same numbers, bit for bit; comments, blank lines, spaces and quotes say nothing."""
    header = "# invented\nflight.mach, flight.altitude [km]\n\n5, 22.5\n6.5, 27\n"
    in_cells = 'flight.mach [-],"flight.altitude"\n 5 ,"22.5 km"\n# halfway\n6.5,27000\n'
    path = tmp_path / "climb.csv"
    path.write_bytes(b"\xef\xbb\xbf" + header.replace("\n", "\r\n").encode())
    read = read_trajectory(path)
    assert read.name == str(path) and read.size == 2 and list(read.values) == ["flight.mach", "flight.altitude"]
    for other in (parse_trajectory(in_cells), parse_trajectory(in_cells.encode())):
        assert all(np.array_equal(read.values[key], other.values[key]) for key in read.values)
    assert read.values["flight.altitude"].tolist() == [22500.0, 27000.0]


@pytest.mark.parametrize(
    ("header", "cell", "text"),
    [
        ("flight.mach", "fast", 'line 2, flight.mach: not a number with a unit: given "fast"; allowed above 0, at most 30'),
        ("flight.mach", "nan", "line 2, flight.mach: not a number with a unit"),
        ("flight.mach", "inf", "line 2, flight.mach: not a number with a unit"),
        ("flight.mach", "1e999", "line 2, flight.mach: not a finite number"),
        ("flight.mach", "9" * 60 + "e300", "line 2, flight.mach: not a finite number"),
        ("flight.mach", "31", 'line 2, flight.mach: out of bounds: given "31"; allowed above 0, at most 30'),
        ("flight.mach", "0", 'line 2, flight.mach: out of bounds: given "0"; allowed above 0, at most 30'),
        ("flight.altitude [km]", "87", 'line 2, flight.altitude: out of bounds: given "87"; allowed at least 0, at most 86000 m'),
        ("combustor.separation_limit", "1", "line 2, combustor.separation_limit: out of bounds"),
        ("combustor.slices", "24.5", 'line 2, combustor.slices: out of bounds: given "24.5"; allowed a whole number, at least 8'),
        ("flight.altitude", "20 kPa", "line 2, flight.altitude: kPa is a unit of pressure, not of length"),
        ("flight.altitude [km]", "20 km", "line 2, flight.altitude: takes no unit: given \"20 km\"; allowed a number alone"),
        ("flight.altitude [km]", "high", "line 2, flight.altitude: not a number with a unit"),
        ("flight.altitude", "２０", "line 2, flight.altitude: not plain ASCII text"),
        ("flight.mach", '""', "line 2, flight.mach: no value: given an empty cell; allowed above 0, at most 30"),
        ("flight.mach", '"5', "line 2 is not CSV"),
        ("flight.mach", "5, 6", "line 2: the row does not fit the header: given 2 cells; allowed 1, as in the header"),
        ("colour", "5", 'header, column 1: unknown key: given "colour"'),
        ("flight.mac", "5", 'header, column 1: unknown key (did you mean flight.mach?): given "flight.mac"'),
        ("altitude [km]", "5", "header, column 1: unknown key (did you mean flight.altitude?)"),
        ("flight mach", "5", "header, column 1: unknown key"),
        ("combustor.area.2.depth", "5", "header, column 1: unknown key"),
        ("gas.model", "frozen", "header, column 1: not an input that takes numbers"),
        ("inlet.ramp", "5", "header, column 1: not an input that takes numbers"),
        ("flight.altitude [kPa]", "5", "header, column 1: kPa is a unit of pressure, not of length"),
        ("flight.altitude [furlong]", "5", "header, column 1: unknown unit furlong"),
        ("flight.altitude [-]", "5", "header, column 1: unknown unit -: "),
    ],
)  # fmt: skip
def test_bad_input_is_named_with_its_place(header: str, cell: str, text: str) -> None:
    (found,) = faults(f"{header}\n{cell}\n")
    assert found.startswith(f"climb.csv: {text}")


def test_every_fault_is_told_at_once() -> None:
    found = faults("flight.mach, flight.altitude [km]\n5, 22\n, 23\n# a comment counts as a line\n40, 24\n6, -1\n7\n8, high\n")
    places = ["line 3, flight.mach", "line 5, flight.mach", "line 6, flight.altitude", "line 7", "line 8, flight.altitude"]
    assert [f.split(": ")[1] for f in found] == places
    found = faults("flight.mach, flight.height, gas.model, flight.altitude [psi]\n5,1,1,1\n")
    assert [f.split(": ")[1] for f in found] == ["header, column 2", "header, column 3", "header, column 4"]


def test_columns_that_say_the_same_thing_are_refused() -> None:
    assert faults("flight.mach, flight.mach\n5, 6\n") == [
        "climb.csv: header, flight.mach: stated more than once: given 2 columns; allowed one"
    ]
    (found,) = faults("flight.mach, flight.speed, flight.altitude\n5, 1500, 20000\n")
    assert "flight speed is stated more than once: given flight.mach, flight.speed" in found
    (found,) = faults("flight.altitude, flight.pressure, flight.temperature\n5, 1500, 200\n")
    assert "place of flight is stated more than once" in found


def test_size_is_bounded() -> None:
    assert "too large" in faults("flight.mach\n" + "5\n" * LARGEST)[0]
    assert "too many rows" in faults("flight.mach\n" + "5\n" * (MOST_ROWS + 1))[0]
    assert parse_trajectory("flight.mach\n" + "5\n" * MOST_ROWS).size == MOST_ROWS
    assert "too many columns" in faults(", ".join(["flight.mach"] * (MOST_COLUMNS + 1)))[0]


@pytest.mark.parametrize("text", ["", "\n\n# nothing\n"])
def test_an_empty_file_is_refused(text: str) -> None:
    assert "the file is empty" in faults(text)[0]


def test_a_header_alone_is_refused() -> None:
    assert "no rows" in faults("flight.mach\n")[0]


def test_what_is_no_text_file_is_refused(tmp_path: Path) -> None:
    assert faults(b"flight.mach\n5\n\xff\n") == ["climb.csv: line 3 is not UTF-8 text: given byte 0xff; allowed UTF-8"]
    pipe = tmp_path / "pipe"
    os.mkfifo(pipe)
    for path, words in ((tmp_path / "none.csv", "no such file"), (tmp_path, "directory"), (pipe, "a device or pipe"), ("a\0b", "no name")):
        with pytest.raises(cycle.CaseError, match=words):
            read_trajectory(path)


CLIMB = """# a climb at constant dynamic pressure, invented
flight.mach, flight.dynamic_pressure [kPa], combustor.equivalence_ratio
4.0, 50, 0.8
4.2, 50, 0.8
4.6, 50, 0.8
4.8, 50, 0.8
5.5, 50, 0.6
"""


def test_fixed_flowpath_climbs_through_its_modes() -> None:
    """From unstart over the thermal throat and the shock train to the scramjet, as the shipped case's notes say; the batch is its rows."""
    fixed = fixed_case(cycle.solve(cycle.load(CASES / "tidegate.toml")))
    climb = parse_trajectory(CLIMB)
    walk = fly(fixed, climb)
    assert walk.shape == (5,) and walk.audit.ok
    assert walk.status.tolist() == ["unstarted", *["solved"] * 4]
    assert walk.mode.tolist() == ["none", "ramjet-thermal-throat", "scramjet-shock-train", "scramjet", "scramjet"]
    assert walk.reason[0].startswith("isolator: ") and np.isnan(walk.performance.thrust[0])
    for row in range(climb.size):
        one = cycle.solve(fixed.replace({key: values[row] for key, values in climb.values.items()}))
        assert one.status == walk.status[row] and one.mode == walk.mode[row]
        # the contract: one point equals its twin in a batch to 1e-10 of the stream thrust, of which thrust is a difference
        scale = 1e-10 * one.station["0"].stream_thrust
        assert walk.performance.thrust[row] == pytest.approx(one.performance.thrust, rel=0.0, abs=scale, nan_ok=True)


def test_altitude_takes_the_place_of_the_dynamic_pressure() -> None:
    case = cycle.load(CASES / "saltmarsh.toml")
    assert case.choices["flight.place"] == "dynamic_pressure"
    walk = fly(case, parse_trajectory("flight.altitude [kft]\n80\n90\n"))
    assert walk.case.choices["flight.place"] == "altitude"
    assert walk.performance.altitude == pytest.approx([24384.0, 27432.0], rel=1e-9)
    assert (np.diff(walk.station["0"].dynamic_pressure) < 0.0).all()


def test_a_cell_of_a_table_may_vary() -> None:
    case = cycle.load(CASES / "tidegate.toml")
    walk = fly(case, parse_trajectory("combustor.area.3.area_ratio\n2.2\n2.6\n"))
    ratio = walk.station["4"].area / walk.station["2"].area
    assert ratio == pytest.approx([2.2, 2.6], rel=1e-9)


@pytest.mark.parametrize(
    ("text", "words"),
    [
        ("flight.pressure\n1200\n", "flight.temperature: needed with pressure"),
        ("inlet.exit_mach\n2.5\n", "inlet.exit_mach: not used"),
        ("combustor.area.9.area_ratio\n2.5\n", "there is no such row"),
        ("combustor.area.3.area_ratio, combustor.area.3.x [m]\n2, 1.1\n2, 0.1\n", "the places do not rise: given 0.1 at index 1 m"),
        ("entry.mach\n2.5\n", "entry.pressure: entry pressure is not stated"),
    ],
)
def test_columns_that_do_not_fit_the_case_are_named_with_the_trajectory(text: str, words: str) -> None:
    case = cycle.load(CASES / "tidegate.toml")
    with pytest.raises(cycle.CaseError) as caught:
        fly(case, parse_trajectory(text, "climb.csv"))
    assert all(str(fault).startswith("climb.csv: ") for fault in caught.value.faults)
    assert words in str(caught.value)


def test_trajectory_can_be_made_of_arrays() -> None:
    made = Trajectory("made", {"flight.mach": np.array([7.0, 8.0])})
    walk = fly(cycle.load(CASES / "saltmarsh.toml"), made)
    assert made.size == 2 and walk.station["0"].mach == pytest.approx([7.0, 8.0], rel=1e-14)
