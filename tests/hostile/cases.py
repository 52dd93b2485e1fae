"""Case files that are none, or hold what no case holds. Each is checked with `ductwalk check x.toml`."""

from __future__ import annotations

from collections.abc import Callable

from tests.tui.command_support import DUCT, HOT, QUICK

Content = bytes | Callable[[], bytes]
DIGITS = "9" * 400


def edited(text: str, old: str, new: str) -> bytes:
    assert text.count(old) == 1, old
    return text.replace(old, new).encode("utf-8", "surrogatepass")


def quick(old: str, new: str) -> bytes:
    return edited(QUICK, old, new)


def mach(value: str) -> bytes:
    return quick("mach = 8.0", f"mach = {value}")


def title(value: str) -> bytes:
    return quick('title = "invented constant-gamma scramjet"', f"title = {value}")


def added(more: str) -> bytes:
    return (QUICK + more).encode("utf-8", "surrogatepass")


def injectors(value: str) -> bytes:
    """A duct with something else in the place of its injectors."""
    ahead, behind = DUCT.split('[[combustor.injector]]\nx = "5 cm"\n')
    return (ahead.replace('process = "duct"', f'process = "duct"\ninjector = {value}') + behind).encode()


ENCODINGS: dict[str, Content] = {
    "nothing": b"",
    "blanks alone": b" \t\n\r\n",
    "byte order mark alone": b"\xef\xbb\xbf",
    "byte order mark": b"\xef\xbb\xbf" + QUICK.encode(),
    "two byte order marks": b"\xef\xbb\xbf\xef\xbb\xbf" + QUICK.encode(),
    "byte order mark inside": added("\ufeff"),
    "UTF-16 with mark": QUICK.encode("utf-16"),
    "UTF-16 without mark": QUICK.encode("utf-16-le"),
    "UTF-32": QUICK.encode("utf-32"),
    "Latin-1": title('"r\u00e9acteur"').decode().encode("latin-1"),
    "overlong NUL": QUICK.encode() + b"# \xc0\x80\n",
    "character cut off": QUICK.encode() + b"# \xe2\x82",
    "encoded surrogate": QUICK.encode() + b"# \xed\xa0\x80\n",
    "beyond Unicode": QUICK.encode() + b"# \xf4\x90\x80\x80\n",
    "NUL behind": added("\x00"),
    "NUL in text": title('"a\x00b"'),
    "NULs alone": b"\x00" * 64,
    "Windows line ends": QUICK.replace("\n", "\r\n").encode(),
    "old Macintosh line ends": QUICK.replace("\n", "\r").encode(),
    "mixed line ends": QUICK.replace("\n", "\r\n", 3).encode(),
    "return inside a line": mach("8\r.0"),
    "form feed": added("\f\n"),
    "vertical tab": added("\v = 1\n"),
    "line separator": added("\u2028x = 1\n"),
    "next line, C1": added("\x85x = 1\n"),
    "escape raw in a comment": added("# \x1b[2J\n"),
    "escape raw in text": title('"\x1b[2J"'),
    "delete raw in text": title('"\x7f"'),
    "C1 raw in text": title('"\x9b2J"'),
    "C1 raw as a name": added("\x9b = 1\n"),
    "ELF": b"\x7fELF\x02\x01\x01" + b"\x00" * 9,
    "gzip": b"\x1f\x8b\x08\x00\x00\x00\x00\x00\x00\x03",
    "PNG": b"\x89PNG\r\n\x1a\n",
    "PDF": b"%PDF-1.7\n%\xe2\xe3\xcf\xd3\n",
    "zip": b"PK\x03\x04\x14\x00",
    "HTML": b"<!doctype html>\n<title>x</title>\n",
    "JSON": b'{"format": 1}\n',
    "YAML": b"format: 1\nflight:\n  mach: 8\n",
    "INI": b"; a comment\n[flight]\nmach=8\n",
    "CSV": b"flight.mach,flight.altitude\n5,22000\n",
    "shell": b"#!/bin/sh\necho hello\n",
}
SYNTAX: dict[str, Content] = {
    "a name alone": b"mach",
    "no name": b"= 1",
    "no value": b"format =",
    "no line end between": b"format = 1 title = 'x'",
    "a bracket alone": b"[",
    "an empty header": b"[]",
    "a header cut off": b"format = 1\n[flight",
    "two headers in a line": b"[a] [b]\n",
    "a header twice": b"format = 1\n[flight]\n[flight]\n",
    "a header in a value": b"a = 1\n[a.b]\n",
    "a header in an inline table": b"a = {}\n[a.b]\n",
    "rows in an array": b"a = []\n[[a]]\n",
    "a table over rows": b"[[a]]\n[a]\n",
    "rows over a table": b"[a]\n[[a]]\n",
    "a name twice": b"format = 1\nformat = 1\n",
    "a name twice inline": b"a = { b = 1, b = 2 }\n",
    "an evil name twice inline": b'a = { "\\u001b[2J" = 1, "\\u001b[2J" = 2 }\n',
    "an evil header twice": b'["\\u001b[2J"]\n["\\u001b[2J"]\n',
    "a name through a value": b"a = 1\na.b = 2\n",
    "a comma behind": b"a = { b = 1, }\n",
    "an inline table over lines": b"a = { b = 1\n}\n",
    "an array cut off": b"a = [1, 2",
    "arrays of commas": b"a = [,,]",
    "text cut off": b'a = "x',
    "literal text cut off": b"a = 'x",
    "long text cut off": b'a = """x\n',
    "long literal text cut off": b"a = '''x\n",
    "an unknown escape": b'a = "\\q"',
    "an escape cut off": b'a = "\\u12"',
    "an escaped surrogate": b'a = "\\ud800"',
    "an escape beyond Unicode": b'a = "\\UFFFFFFFF"',
    "a quote too many": b'a = "x""\n',
    "six quotes": b'a = """""""\n',
    "a zero ahead": b"a = 01",
    "two signs": b"a = +-1",
    "underscores": b"a = 1__0",
    "a point behind": b"a = 1.",
    "an exponent without digits": b"a = 1e",
    "a wrong hexadecimal": b"a = 0xg",
    "no such day": b"a = 1979-02-30",
    "no such month": b"a = 1979-13-01",
    "no such hour": b"a = 25:00:00",
    "no such offset": b"a = 1979-05-27T00:00:00+99:99",
    "True": b"a = True",
    "null": b"a = null",
    "digits of another script": "a = \u0661".encode(),
    "fullwidth equals": "a \uff1d 1".encode(),
    "typographic quotes": "a = \u201cx\u201d".encode(),
    "a name of another script": "\u00e9t\u00e9 = 1".encode(),
    "a bidi mark as a name": "\u202e = 1".encode(),
    "a long line": b"a = " + b"x" * 900,
}
VALUES: dict[str, Content] = {
    "400 digits": mach(DIGITS),
    "400 digits below zero": mach(f"-{DIGITS}"),
    "400 digits and a point": mach(f"{DIGITS}.0"),
    "400 digits as text": mach(f'"{DIGITS}"'),
    "400 digits of a format": quick("format = 1", f"format = {DIGITS}"),
    "400 digits below zero of a format": quick("format = 1", f"format = -{DIGITS}"),
    "400 digits of a title": title(DIGITS),
    "400 digits of a flag": quick("ideal = true", f"ideal = {DIGITS}"),
    "400 digits of a choice": quick('"constant-gamma"', DIGITS),
    "400 digits of a share": edited(HOT, "[fuel]", f"[air]\nmole_fractions = {{ N2 = {DIGITS} }}\n[fuel]"),
    "400 digits of a row": edited(DUCT, 'angle = "4 deg"', f"angle = {DIGITS}"),
    "400 digits of a number of slices": edited(DUCT, 'process = "duct"', f'process = "duct"\nslices = {DIGITS}'),
    "400 digits as a table": quick("[gas]", f"gas = {DIGITS}\n[gas2]"),
    "400 hexadecimal digits": mach("0x" + "f" * 400),
    "an exponent of 400": mach("1e400"),
    "an exponent of 4 digits as text": mach('"1e9999"'),
    "65 digits as text": mach(f'"{"1" * 65}"'),
    "infinity": mach("inf"),
    "no number": mach("nan"),
    "minus infinity": mach("-inf"),
    "minus zero": mach("-0.0"),
    "a date": mach("1979-05-27"),
    "a time": mach("07:32:00"),
    "a moment": mach("1979-05-27T07:32:00Z"),
    "a moment as a title": title("1979-05-27T07:32:00.999999-07:00"),
    "a moment as a format": quick("format = 1", "format = 1979-05-27"),
    "true": mach("true"),
    "an array": mach("[1, 2]"),
    "a table in one line": mach("{ a = 1 }"),
    "empty text": mach('""'),
    "blanks as text": mach('" "'),
    "a number over lines": mach('"""\n8\n"""'),
    "a unit of another kind": quick('"50 kPa"', '"50 km"'),
    "an unknown unit": quick('"50 kPa"', '"50 kpa"'),
    "an evil unit": quick('"50 kPa"', '"50 \\u001b[2J"'),
    "a C1 unit": quick('"50 kPa"', '"50 \\u009bk"'),
    "digits of another script as text": mach('"\u0668"'),
    "a NUL escaped": mach('"8\\u0000"'),
    "an expression": mach('"__import__(1)"'),
    "a template": mach('"{0.__class__}"'),
    "a per cent template": mach('"%s%n"'),
    "a title too long": title('"' + "t" * 201 + '"'),
    "a title of a number": title("5"),
    "an evil choice": quick('"constant-gamma"', '"\\u202eammag-tnatsnoc"'),
    "a zero-width choice": quick('"constant-gamma"', '"constant-\\u200bgamma"'),
    "an evil formula": edited(HOT, 'name = "hydrogen"', 'formula = "\\u001bC"'),
    "a formula of zeros": edited(HOT, 'name = "hydrogen"', 'formula = "C0H0"'),
    "a formula of digits": edited(HOT, 'name = "hydrogen"', 'formula = "C' + "9" * 39 + '"'),
    "false as a flag": quick("ideal = true", "ideal = false"),
    "a format of text": quick("format = 1", 'format = "1"'),
    "a format of true": quick("format = 1", "format = true"),
    "a format of 1.0": quick("format = 1", "format = 1.0"),
    "format 0": quick("format = 1", "format = 0"),
    "format 2": quick("format = 1", "format = 2"),
    "no format": quick("format = 1\n", ""),
}
KEYS: dict[str, Content] = {
    "an evil key": added('"\\u001b[2J" = 1\n'),
    "a bidi key": added('"\\u202eneve" = 1\n'),
    "an isolate key": added('"a\\u2066b\\u2069" = 1\n'),
    "a zero-width key": added('"idea\\u200bl2" = 1\n'),
    "a filler as a key": added('"\\u3164" = 1\n'),
    "a joiner as a key": added('"a\\u034fb" = 1\n'),
    "a tag as a key": added('"a\\U000e0041" = 1\n'),
    "a C1 key": added('"\\u009b2J" = 1\n'),
    "a key of a line end": added('"a\\nb" = 1\n'),
    "an empty key": added('"" = 1\n'),
    "an evil table": added('["\\u001b]0;x\\u0007"]\na = 1\n'),
    "an empty table": added('[""]\n'),
    "a table of points": added('["flight.mach"]\na = 1\n'),
    "an evil species": edited(HOT, "[fuel]", '[air]\nmole_fractions = { "\\u001b[2J" = 1.0 }\n[fuel]'),
    "an evil study": added('[study."\\u001b[2J"]\n'),
    "an empty study": added('[study.""]\n'),
    "a study of a number": added("[study]\nx = 1\n"),
    "an evil column": edited(DUCT, 'angle = "4 deg"', '"\\u202e" = 1\nangle = "4 deg"'),
    "a class": added("__class__ = 1\n"),
    "a private name": added("model_config = 1\n"),
    "a copy of the model": added("copy = 1\njson = 2\n"),
    "a table as rows": quick("[gas]", "[[gas]]"),
    "rows as a table": added("[inlet.ramp]\nangle = 1\n"),
    "rows of numbers": injectors("[1, 2]"),
    "rows of nothing": injectors("[]"),
    "rows of text": injectors('["\\u001b"]'),
    "a key of a key": quick("mach = 8.0", "mach.x = 8.0"),
    "a key of 1000 letters": added("k" * 1000 + " = 1\n"),
    "a quoted key of 5000 letters": added('"' + "k" * 5000 + '" = 1\n'),
    "a name of 8 parts": added(".".join("a" * 8) + " = 1\n"),
    "a name of 9 parts": added(".".join("a" * 9) + " = 1\n"),
}  # fmt: skip
ALL = {**ENCODINGS, **SYNTAX, **VALUES, **KEYS}
