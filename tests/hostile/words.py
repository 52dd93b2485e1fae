"""Trajectories, stored walks, settings and names of files. The quick case lies beside them as quick.toml, its stored walk as quick.json."""

from __future__ import annotations

import json
from collections.abc import Callable
from typing import Any

from tests.hostile.cases import DIGITS, Content


def csv(text: str) -> bytes:
    return text.encode("utf-8", "surrogatepass")


TRAJECTORIES: dict[str, Content] = {
    "nothing": b"",
    "a header alone": b"flight.mach\n",
    "comments alone": b"# flight.mach\n# 5\n",
    "every point fails at flight": b"flight.mach\n0.01\n0.02\n",
    "400 digits": csv(f"flight.mach\n{DIGITS}\n"),
    "400 digits and a unit": csv(f"flight.altitude [km]\n{DIGITS}\n"),
    "400 digits of a row": csv(f"combustor.area.{DIGITS[:60]}.x\n5\n"),
    "a long cell": csv(f"flight.mach\n{'5' * 200_000}\n"),
    "a long header": csv(f"{'flight.mach' * 20_000}\n5\n"),
    "an evil cell": csv("flight.mach\n\x1b[2J\u202e\x9b\n"),
    "a zero-width cell": csv("flight.mach\n5\u200b\n"),
    "an evil header": csv("flight.mach\x1b[2J\n5\n"),
    "an evil unit": csv("flight.altitude [\x1b[2J]\n5\n"),
    "a bidi unit": csv("flight.altitude [\u202emk]\n5\n"),
    "a NUL": csv("flight.mach\n5\x00\n"),
    "a line separator": csv("flight.mach\n5\u20286\n"),
    "a form feed": csv("flight.mach\n5\x0c6\n"),
    "a file separator": csv("flight.mach\n5\x1c6\n"),
    "UTF-16": "flight.mach\n5\n".encode("utf-16"),
    "Latin-1": b"flight.mach\n\xe9\n",
    "an encoded surrogate": b"flight.mach\n\xed\xa0\x80\n",
    "a quote open": b'flight.mach\n"5\n',
    "a quote too many": b'flight.mach\n"5"x\n',
    "a quoted line end": b'flight.mach\n"5\n6"\n',
    "not a number": b"flight.mach\nnan\n",
    "infinity": b"flight.mach\ninf\n",
    "an exponent": b"flight.mach\n1e999\n",
    "an empty cell": b"flight.mach,flight.altitude\n5,\n",
    "a cell too many": b"flight.mach\n5,6\n",
    "a cell too few": b"flight.mach,flight.altitude\n5\n",
    "a formula of a spreadsheet": b"flight.mach\n=1+1\n",
    "semicolons": b"flight.mach;flight.altitude\n5;22\n",
    "a decimal comma": b'flight.mach\n"5,5"\n',
    "digits of another script": csv("flight.mach\n\u0665\n"),
    "a key twice": b"flight.mach,flight.mach\n5,5\n",
    "a group twice": b"flight.altitude,flight.dynamic_pressure\n5,5\n",
    "a choice": b"gas.model\nfrozen\n",
    "an unknown key": b"flight.match\n5\n",
    "an empty key": b",flight.mach\n5,5\n",
    "a row below zero": b"combustor.area.-1.x\n5\n",
    "a unit of another kind": b"flight.altitude [kg]\n5\n",
    "two units": b"flight.altitude [km]\n5 km\n",
    "too many columns": csv(",".join(["flight.mach"] * 33) + "\n"),
    "too many rows": csv("flight.mach\n" + "5\n" * 20_001),
    "many bad rows": csv("flight.mach\n" + "\x1b,\n" * 19_000),
    "more than is read": csv("flight.mach\n" + "5" * (1 << 20)),
    "a case": b"format = 1\n[flight]\n",
}


def walk(change: Callable[[Any], object]) -> Callable[[bytes], bytes]:
    """The stored walk with something changed in it."""

    def make(stored: bytes) -> bytes:
        data = json.loads(stored)
        change(data)
        return json.dumps(data).encode()

    return make


def put(place: str, value: object) -> Callable[[bytes], bytes]:
    """The stored walk with another value in a place; the parts of the place stand between strokes."""

    def change(data: Any) -> None:
        *way, name = place.split("/")
        for part in way:
            data = data[int(part) if isinstance(data, list) else part]
        data[int(name) if isinstance(data, list) else name] = value

    return walk(change)


BIG = 10**400
EVIL = "\x1b[2J\u202e\x9b\u200b"
WALKS: dict[str, bytes | Callable[[], bytes] | Callable[[bytes], bytes]] = {
    "an object": b"{}",
    "an object cut off": b'{"kind": "stored walk"',
    "an array of an object": b"[{}]",
    "not a number": b'{"kind": NaN}',
    "infinity": b'{"kind": -Infinity}',
    "400 digits": b'{"kind": ' + DIGITS.encode() + b"}",
    "5000 digits": b'{"kind": ' + b"9" * 5000 + b"}",
    "a control character": b'{"ki\x1bnd": 1}',
    "not UTF-8": b'{"kind": "\xff"}',
    "a lone surrogate": b'{"kind": "\\ud800"}',
    "deep": lambda: b'{"a":' + b"[" * 200_000,
    "deep objects": lambda: b'{"a":' * 200_000,
    "many arrays": lambda: b'{"a": [' + b"[]," * 5_000_000 + b"[]]}",
    "many objects": lambda: b'{"a": [' + b"{}," * 5_000_000 + b"{}]}",
    "many texts": lambda: b'{"a": [' + b'"",' * 5_000_000 + b'""]}',
    "many keys": lambda: b"{" + b",".join(b'"%d":1' % i for i in range(1_200_000)) + b"}",
    "long text": lambda: b'{"kind": "' + b"," * 16_000_000 + b'"}',
    "long text of many widths": lambda: b'{"kind": "' + "\U0001f680".encode() + b"x" * 16_000_000 + b'"}',
    "long text without end": lambda: b'{"kind": "' + b'\\"' * 8_000_000,
    "more than is read": lambda: b"{" + b" " * (16 << 20) + b"}",
    "another kind": put("kind", "picture"),
    "an evil kind": put("kind", EVIL),
    "a newer format": put("format", 2),
    "400 digits of a format": put("format", BIG),
    "a format of a table": put("format", {"a": EVIL}),
    "no name": put("name", None),
    "no walk": put("walk", None),
    "a walk of text": put("walk", EVIL),
    "stations of text": put("walk/stations", EVIL),
    "a station of text": put("walk/stations/0", EVIL),
    "an evil station": put("walk/stations/\x1b[2J", "x"),
    "400 digits of a figure": put("walk/stations/0/pressure", BIG),
    "a figure of text": put("walk/stations/0/pressure", EVIL),
    "a figure of an array": put("walk/stations/0/pressure", [EVIL]),
    "a figure of true": put("walk/performance/thrust", True),
    "a process of nothing": put("walk/processes/0", None),
    "a process without figures": put("walk/processes/0/figures", [1]),
    "an evil figure of a process": put("walk/processes/0/figures/\x1b[2J", "x"),
    "heat limits of text": put("walk/heat_limits", "x"),
    "a table of text": put("walk/case/flight", "x"),
    "an input of text": put("walk/case/flight/mach", EVIL),
    "400 digits of an input": put("walk/case/flight/mach", BIG),
    "a choice of a number": put("walk/case/gas/model", BIG),
    "a flag of text": put("walk/case/nozzle/ideal", "x"),
    "a mode of a number": put("walk/mode", 3),
    "reasons of a list": put("walk/reasons", []),
}
SETTINGS: dict[str, str] = {
    "nothing": "",
    "no value": "flight.mach=",
    "no key": "=3",
    "no sign": "flight.mach",
    "an evil key": "\x1b[2J=3",
    "an evil value": "flight.mach=\x1b[2J\u202e",
    "a C1 value": "flight.mach=\x9b2J",
    "a zero-width value": "flight.mach=8\u200b",
    "a NUL": "flight.mach=\x00",
    "a lone surrogate": "flight.mach=\udc80",
    "400 digits": f"flight.mach={DIGITS}",
    "400 digits below zero": f"flight.mach=-{DIGITS}",
    "990 digits": f"flight.mach={'9' * 986}",
    "too long": f"flight.mach={'9' * 1000}",
    "a key of 81 letters": "k" * 81 + "=1",
    "another key on a second line": "flight.mach=8\nx=1",
    "a table on a second line": "flight.mach=8\n[x]",
    "brackets": "flight.mach=" + "[" * 500,
    "a joined name": "flight.mach={" + "a." * 400 + "a=1}",
    "a date": "flight.mach=1979-05-27",
    "not a number": "flight.mach=nan",
    "true": "flight.mach=true",
    "a table": "flight.mach={a=1}",
    "an unknown key": "flight.match=3",
    "an unknown table": "flights.mach=3",
    "parts": "a.b.c.d.e=1",
    "points": "...=1",
    "a format": "format=2",
    "a title of a number": "title=5",
    "a study": "study.a.b=3",
    "a row that is not there": "inlet.ramp.1.angle=3",
    "a row of many digits": f"inlet.ramp.{'9' * 60}.angle=3",
    "row 0": "combustor.area.0.x=3",
    "400 digits of a row": f"inlet.ramp=[{{angle={DIGITS}}}]",
    "400 digits of a share": f"air.mole_fractions={{N2={DIGITS}}}",
    "400 digits of a flag": f"nozzle.ideal={DIGITS}",
    "400 digits of a choice": f"gas.model={DIGITS}",
    "400 digits of a formula": f"fuel.formula='C{DIGITS}'",
    "an evil formula": "fuel.formula=C\x1b",
    "a deep formula": "fuel.formula=" + "(" * 39,
}
PLACES: dict[str, str] = {
    "no name": "",
    "a link loop": "loop",
    "a link to nowhere": "nowhere",
    "a pipe": "pipe",
    "a socket": "socket",
    "a folder": "folder",
    "this folder": ".",
    "a missing folder": "missing/x",
    "through a file": "quick.toml/x",
    "a NUL": "a\x00b",
    "a long name": "x" * 300,
    "a long path": "x/" * 3000,
    "an evil missing name": "missing/\x1b[2J\u202e\x9b\u200b",
    "a lone surrogate": "missing/\udc80",
}
"""Names of files that can be neither read nor written."""
