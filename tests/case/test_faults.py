"""Every way a case can be wrong: one clear line each, all at once."""

# ruff: noqa: E501 - texts of files and messages stay whole
from __future__ import annotations

import re

import pytest

from cycle.case import loads, template
from cycle.errors import CaseError


def faults(text: str | bytes) -> list[str]:
    with pytest.raises(CaseError) as caught:
        loads(text, "x.toml")
    lines = str(caught.value).split("\n")
    assert all(line.isprintable() for line in lines)
    assert all(line.startswith(("x.toml: ", "... and ")) for line in lines)
    return lines


def edit(text: str, *pairs: tuple[str, str]) -> str:
    for old, new in pairs:
        assert text.count(old) == 1, old
        text = text.replace(old, new)
    return text


EDITS = {
    "unknown key": (("mach = 8.0", "mach = 8.0\nmatch = 3"), "flight.match: unknown key (did you mean mach?): given 3; allowed mach, speed"),
    "key of another table": (("mach = 8.0", "mach = 8.0\nburnt_fraction = 1.0"), "unknown key (did you mean combustor.burnt_fraction?)"),
    "unknown table": (("[nozzle]", "[nozle]"), "nozle: unknown key (did you mean nozzle?): given a table; allowed title, notes"),
    "missing group": (("mach = 8.0        # as flown", ""), "flight: flight speed is not stated: given none; allowed exactly one of mach, speed"),
    "two members": (
        ("mach = 8.0", "mach = 8.0\naltitude = 3e4"),
        "flight: place of flight is stated more than once: given altitude, dynamic_pressure; "
        "allowed exactly one of altitude, dynamic_pressure, pressure + temperature",
    ),
    "half a member": (('dynamic_pressure = "50 kPa"', "pressure = 1e3"), "flight.temperature: needed with pressure: given none"),
    "wrong type": (('model = "equilibrium"', "model = 3"), "gas.model: unknown choice: given 3; allowed constant-gamma, frozen, equilibrium"),
    "number as flag": (("mach = 8.0", "mach = true"), "flight.mach: not a number: given true; allowed a number"),
    "array as number": (("mach = 8.0", "mach = [8.0]"), "flight.mach: not a number: given an array"),
    "date as number": (("mach = 8.0", "mach = 2020-01-01"), "flight.mach: not a number: given datetime.date(2020, 1, 1)"),
    "text as number": (("mach = 8.0", 'mach = "fast"'), 'flight.mach: not a number with a unit: given "fast"'),
    "table as number": (("mach = 8.0", "mach = { a = 1 }"), "flight.mach: not a number: given a table"),
    "value as table": (("[engine]\ncapture_area = \"0.4 m^2\"", "[[engine]]"), "engine: wrong type: given an array; allowed a table"),
    "unknown unit": (('"50 kPa"', '"50 kpas"'), "flight.dynamic_pressure: unknown unit kpas (did you mean kPa?): given \"50 kpas\"; allowed a number in Pa"),
    "wrong dimension": (('"50 kPa"', '"50 km"'), "flight.dynamic_pressure: km is a unit of length, not of pressure"),
    "out of bounds": (("mach = 8.0", "mach = 31"), "flight.mach: out of bounds: given 31.0; allowed above 0, at most 30"),
    "at an open bound": (("mach = 8.0", "mach = 0"), "flight.mach: out of bounds: given 0.0; allowed above 0, at most 30"),
    "nan": (("mach = 8.0", "mach = nan"), "flight.mach: not a finite number: given nan"),
    "inf": (("mach = 8.0", "mach = -inf"), "flight.mach: not a finite number: given -inf"),
    "huge": (("mach = 8.0", f"mach = 0x{'f' * 900}"), "flight.mach: not a finite number: given an integer beyond the range"),
    "endless digits": (("mach = 8.0", f"mach = {'9' * 5000}"), "x.toml: line 6: a number or name is too long: given more than 1000 characters"),
    "newer format": (("format = 1", "format = 2"), "format: format 2 is newer than this program (1): given 2; allowed format = 1"),
    "no format": (("format = 1", ""), "format: the file does not say which format it is in: given none; allowed format = 1"),
    "old format": (("format = 1", "format = 0"), "format: unknown format: given 0; allowed format = 1"),
    "format as text": (("format = 1", 'format = "1"'), 'format: unknown format: given "1"; allowed format = 1'),
    "format as flag": (("format = 1", "format = true"), "format: unknown format: given true"),
    "long title": (('"Saltmarsh, hydrogen"', f'"{"x" * 201}"'), "title: wrong length: given 201 characters; allowed at most 200 characters"),
    "choice near miss": (('"constant-area"', '"constant-aera"'), "combustor.process: unknown choice (did you mean constant-area?)"),
    "false flag": (("exit_area_over_capture = 1.5", "ideal = false"), "nozzle.ideal: can only be true; leave it out otherwise: given false; allowed true"),
    "not used": (
        ("burnt_fraction = 0.92", "pressure_ratio = 0.9"),
        "combustor.pressure_ratio: not used with combustor.process = constant-area: given a value; "
        "allowed leave it out, or have combustor.process = pressure-loss",
    ),
    "not used after a group": (
        ('dynamic_pressure = "50 kPa"', "pressure = 1e3\ntemperature = 220\ntemperature_offset = 10"),
        "flight.temperature_offset: not used with flight.pressure: given a value; allowed leave it out, or have flight.altitude or",
    ),
    "required of a choice": (('"constant-area"', '"pressure-loss"'), "combustor.pressure_ratio: total-pressure ratio is not stated: given none"),
    "flight and entry": (("[gas]", "[entry]\nmach = 2.0\n[gas]"), "entry: a case starts in flight or at the entry of a rig: given both; allowed [flight]"),
    "unknown species": (("[gas]", "[air]\nmole_fractions = { N2 = 0.8, O2 = 0.1, He = 0.1 }\n[gas]"), "air.mole_fractions.He: unknown species: given \"He\"; allowed N2, O2"),
    "negative fraction": (("[gas]", "[air]\nmole_fractions = { N2 = 1.0, O2 = -0.1 }\n[gas]"), "air.mole_fractions.O2: out of bounds: given -0.1; allowed at least 0, at most 1"),
    "fraction as text": (("[gas]", '[air]\nmole_fractions = { N2 = "x", O2 = 0.2 }\n[gas]'), "air.mole_fractions.N2: wrong type: given \"x\"; allowed a number from 0 to 1"),
    "fractions as number": (("[gas]", "[air]\nmole_fractions = 3\n[gas]"), "air.mole_fractions: wrong type: given 3; allowed a table"),
    "fractions empty": (("[gas]", "[air]\nmole_fractions = {}\n[gas]"), "air.mole_fractions: wrong length: given a table; allowed a table of species"),
    "fraction sum": (("[gas]", "[air]\nmole_fractions = { N2 = 0.8, O2 = 0.1 }\n[gas]"), "air.mole_fractions: mole fractions do not sum to 1: given a sum of 0.9; allowed 1 within 1e-6"),
    "no oxygen": (("[gas]", "[air]\nmole_fractions = { N2 = 1.0 }\n[gas]"), "air.mole_fractions: the stream has no oxygen"),
    "moist and vitiated": (("[gas]", "[air]\nrelative_humidity = 0.5\nmole_fractions = { N2 = 0.8, O2 = 0.2 }\n[gas]"), "air: air is stated more than once: given mole_fractions, relative_humidity; allowed at most one of"),
    "corridor": (("[gas]", "[limits]\ndynamic_pressure_low = 1e5\n[gas]"), "limits.dynamic_pressure_low: the corridor is upside down"),
    "heating value with a real gas": (("name = 'hydrogen'", "heating_value = 120e6"), "fuel.heating_value: a heating value alone does not say what the fuel burns to: given gas.model = equilibrium"),
    "heating value with equivalence ratio": (("name = 'hydrogen'", "heating_value = 120e6"), "combustor.equivalence_ratio: a fuel given by its heating value alone has no stoichiometric ratio"),
    "formula alone": (("name = 'hydrogen'", 'formula = "C2H6"'), "fuel: energy of the fuel is not stated: given none; allowed exactly one of formation_enthalpy, heating_value"),
    "formula without phase": (("name = 'hydrogen'", 'formula = "C2H6"'), "fuel.phase: stored phase is not stated: given none; allowed gas, liquid"),
    "formula without specific heat": (("name = 'hydrogen'", 'formula = "C2H6"'), "fuel.vapour_specific_heat: needed with fuel.formula and gas.model = equilibrium"),
    "liquid without its data": (("name = 'hydrogen'", 'formula = "C10H16"\nphase = "liquid"'), "fuel.liquid_specific_heat: liquid specific heat is not stated"),
    "formula of stone": (("name = 'hydrogen'", 'formula = "SiO2"'), "fuel.formula: fuel formula 'SiO2'"),
    "formula that does not burn": (("name = 'hydrogen'", 'formula = "CO2"'), "needs no oxygen to burn"),
    "formula and name": (("name = 'hydrogen'", "name = 'hydrogen'\nformula = \"C2H6\""), "fuel: fuel is stated more than once: given name, formula"),
    "long formula": (("name = 'hydrogen'", f'formula = "{"C" * 41}"'), "fuel.formula: wrong length: given 41 characters; allowed text, at most 40 characters"),
    "throat": (
        ('process = "constant-area"', 'process = "pressure-loss"\npressure_ratio = 0.9\nexit_area_over_throat = 1.2'),
        "combustor.exit_area_over_throat: there is no throat: given nozzle.throat = none; allowed nozzle.throat = \"sized\"",
    ),
    "study name": (("[study.burner]", '[study."a b"]'), "study.a b: no name for a study: given \"a b\""),
    "study as value": (('[study.burner]\noutputs = ["specific_impulse", "thrust"]   # of interest', "[study]\nmore = 3"), "study.more: wrong type: given 3; allowed a table"),
    "deep arrays": (('outputs = ["specific_impulse", "thrust"]', f"outputs = {'[' * 40}{']' * 40}"), "tables or arrays are nested too deeply"),
    "very deep arrays": (('outputs = ["specific_impulse", "thrust"]', f"outputs = {'[' * 100_000}"), "tables or arrays are nested too deeply"),
    "long chain": (('outputs = ["specific_impulse", "thrust"]', f"{'a.' * 200_000}a = 1"), "names are nested too deeply"),
    "escape codes": (("mach = 8.0", 'mach = "\\u001b[2J8"'), r'flight.mach: not a number with a unit: given "\x1b[2J8"'),
}  # fmt: skip


@pytest.mark.parametrize("what", EDITS)
def test_one_fault_one_line(text: str, what: str) -> None:
    pair, words = EDITS[what]
    lines = faults(edit(text, pair))
    assert any(words in line for line in lines), lines


@pytest.mark.parametrize("what", [w for w in EDITS if w not in (
    "heating value with a real gas", "heating value with equivalence ratio", "formula alone", "formula without phase",
    "formula without specific heat", "formula of stone", "formula that does not burn", "long formula", "liquid without its data",
    "number as flag", "flight and entry", "study as value", "unknown table", "formula and name", "throat",
)])  # fmt: skip
def test_a_single_fault_is_not_repeated_as_others(text: str, what: str) -> None:
    assert len(faults(edit(text, EDITS[what][0]))) == 1


def test_all_faults_at_once(text: str) -> None:
    bad = edit(
        text, ("mach = 8.0", "mach = 80"), ('"50 kPa"', '"50 km"'), ("pressure_ratio = 60.0", "bogus = 1"), ('"constant-area"', '"duct"')
    )
    lines = "\n".join(faults(bad))
    for words in (
        "flight.mach: out of bounds",
        "flight.dynamic_pressure: km is",
        "inlet.bogus: unknown",
        "end of the compression",
        "combustor.area: duct section is not stated",
        "combustor.injector: injector is not stated",
    ):
        assert words in lines
    assert len(lines.split("\n")) == 6


def test_many_faults_are_counted() -> None:
    lines = faults("format = 1\n" + "\n".join(f"k{i} = 1" for i in range(3000)))
    assert len(lines) == 51
    assert re.fullmatch(r"\.\.\. and at least 1\d\d more", lines[-1])


@pytest.mark.parametrize(
    ("text", "words"),
    [
        ("", "x.toml: the file is empty"),
        (" \n\t\n", "x.toml: the file is empty"),
        ("format = 1\n[flight\nmach = 8\n", "x.toml: line 2, column 8: not TOML: expected ']' at the end of a table declaration: given \"[flight\""),
        ("format = 1\nmach", "x.toml: line 2, column 5: not TOML: "),
        ("format = 1\nformat = 1\n", "line 2, column 11: not TOML: cannot overwrite a value"),
        (b"format = 1\ntitle = \"a\xff\"\n", "x.toml: line 2, column 11: not UTF-8 text: given byte 0xff; allowed UTF-8"),
        ("format = 1\ntitle = \"a\x1b[2Jb\"\n", "line 2"),
        (b"\x00\x01\x02", "not TOML"),
        ("format = 1\n" + "#" * (1 << 20), "x.toml: too large: given more than 1048576 bytes; allowed at most 1048576 bytes"),
    ],
)  # fmt: skip
def test_text_that_is_no_case(text: str | bytes, words: str) -> None:
    lines = faults(text)
    assert len(lines) == 1
    assert words in lines[0]


def test_a_byte_order_mark_and_windows_line_ends_are_read(text: str) -> None:
    assert loads(b"\xef\xbb\xbf" + text.replace("\n", "\r\n").encode()) == loads(text)


def test_a_case_in_the_template_format_is_sound() -> None:
    assert loads(template()).title.startswith("New case")
