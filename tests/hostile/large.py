"""Case files near the largest size that is read, each of one kind of thing that costs a reader much."""

from __future__ import annotations

from collections.abc import Callable, Iterator

from cycle import toml
from tests.tui.command_support import QUICK

SIZE = toml.LARGEST - 2048
"""Characters of a large file."""


def repeated(part: Callable[[int], str], size: int = SIZE) -> str:
    """part(0), part(1), ... up to a size."""

    def parts() -> Iterator[str]:
        length, i = 0, 0
        while length + len(piece := part(i)) <= size:
            yield piece
            length, i = length + len(piece), i + 1

    return "".join(parts())


def alone(part: str | Callable[[int], str], size: int = SIZE) -> Callable[[], bytes]:
    """A file of one thing alone, over and over."""
    each = part if callable(part) else lambda i: part
    return lambda: repeated(each, size).encode()


def inside(before: str, part: str | Callable[[int], str], after: str, size: int = SIZE) -> Callable[[], bytes]:
    """A sound case, and behind it one thing over and over between two words."""
    each = part if callable(part) else lambda i: part
    return lambda: f"{QUICK}{before}{repeated(each, size)}{after}\n".encode()


def many(part: str, count: int, before: str = "", after: str = "") -> Callable[[], bytes]:
    """A sound case with a number of parts behind it, within or just above what is read."""
    return lambda: f"{QUICK}{before}{part * count}{after}\n".encode()


CHAIN = "abcdefghijklmnopqrstuvwxyzabcde"
SYNTAX: dict[str, Callable[[], bytes]] = {
    "keys": alone(lambda i: f"k{i} = 1\n"),
    "short keys without blanks": alone(lambda i: f"{i}=1\n"),
    "tables": alone(lambda i: f"[t{i}]\n"),
    "rows": alone("[[a]]\n"),
    "rows of rows": alone("[[a]]\n[[a.b]]\n"),
    "ramps": inside("", "[[inlet.ramp]]\nangle = 1\n", ""),
    "dotted keys": alone(lambda i: f"a.b{i} = 1\n"),
    "dotted headers": alone(lambda i: f"[a.b.c.d{i}]\n"),
    "names of 32 parts": alone(lambda i: f"{'.'.join(CHAIN)}.{i} = 1\n"),
    "headers of 32 parts": alone(lambda i: f"[{'.'.join(CHAIN)}.{i}]\n"),
    "a joined name": alone("a."),
    "a joined name of 80 kB": alone("a.", 80_000),
    "a joined name with blanks": alone("a . "),
    "a joined name of quotes": alone('"".'),
    "a joined name of literal quotes": alone("''."),
    "a header joined": lambda: ("[" + "a." * (SIZE // 2) + "a]\n").encode(),
    "a header of rows joined": lambda: ("[[" + "a." * (SIZE // 2) + "a]]\n").encode(),
    "a joined name inside": inside("x = { ", "a.", "a = 1 }"),
    "numbers in an array": inside("x = [", "1,", "]"),
    "numbers on lines": inside("x = [", "1,\n", "]"),
    "decimals in an array": inside("x = [", "1.5,", "]"),
    "texts in an array": inside("x = [", '"",', "]"),
    "dates in an array": inside("x = [", "1979-05-27,", "]"),
    "arrays in an array": inside("x = [", "[],", "]"),
    "tables in an array": inside("x = [", "{},", "]"),
    "rows in one line": inside("x = [", "{a=1},", "]"),
    "keys in one line": inside("x = {", lambda i: f"k{i}=1,", "z=1}"),
    "open arrays": inside("x = ", "[", ""),
    "open tables": inside("x = ", "{a=", ""),
    "open arrays on lines": inside("x = ", "[\n", ""),
    "arrays of arrays": lambda: f"{QUICK}x = {'[' * 400}{']' * 400}\n".encode(),
    "blank lines": alone("\n"),
    "blank lines of Windows": alone("\r\n"),
    "returns": alone("\r"),
    "blanks": alone(" "),
    "tabs": alone("\t"),
    "comment lines": alone("#\n"),
    "comment lines in an array": inside("x = [\n", "#\n", "]"),
    "a long name": inside("", "k", " = 1"),
    "a long number": inside("x = ", "1", ""),
    "a long decimal": inside("x = ", "1", ".5"),
    "a long hexadecimal": inside("x = 0x", "f", ""),
    "a long date": inside("x = 1979-05-27T00:00:00.", "0", ""),
    "long text without end": inside('x = """', "a", ""),
    "lines of long text without end": alone('\\"""\n'),
    "quotes": alone('"'),
    "apostrophes": alone("'"),
    "backslashes": alone("\\"),
    "equals signs": alone("="),
    "escapes": inside('[study.a]\nx = "', "\\n", '"'),
    "keys of 8 names": alone(lambda i: f"a.b.c.d.e.f.g.k{i} = 1\n"),
    "headers out of order": alone(lambda i: f"[a.b.c.d.e.f.g.k{i}]\n[z.k{i}]\n"),
    "points": alone("."),
    "commas": alone(","),
    "closing brackets": alone("]"),
    "NULs": alone("\x00"),
    "nothing but one letter": alone("a"),
    "more than is read": alone("#" * 1000 + "\n", toml.LARGEST + 5000),
}
"""None of these is a case: they are refused before they cost much."""
SOUND: dict[str, Callable[[], bytes]] = {
    "a long comment": inside("# ", "x", ""),
    "many comment lines": many("# a line of words\n", toml.MOST_PARTS - 100),
    "brackets in comments": many("# [[[[[[ a.b.c.d.e.f.g\n", toml.MOST_PARTS - 100),
    "many blank lines": many("\n", toml.MOST_PARTS - 100),
    "many lines of Windows": lambda: (QUICK + "\n" * (toml.MOST_PARTS - 100)).replace("\n", "\r\n").encode(),
    "a long text": inside('[study.a]\nx = "', "x", '"'),
    "a long text of escapes": many("\\u001b", toml.MOST_ESCAPES - 10, '[study.a]\nx = "', '"'),
    "a long text over lines": inside('[study.a]\nx = """\n', "x\n", '"""'),
    "a long literal text": inside("[study.a]\nx = '''\n", "x\n", "'''"),
    "brackets and points in text": inside('[study.a]\nx = """\n', "[[[[{a.b.c.d.e.f,,,,\n", '"""'),
    "a long quoted name": inside('[study.a]\n"', "k", '" = 1'),
    "many keys": lambda: (QUICK + "[study.a]\n" + "".join(f"k{i} = 1\n" for i in range(4_900))).encode(),
    "many dotted keys": lambda: (QUICK + "[study.a]\n" + "".join(f"a.k{i} = 1\n" for i in range(240))).encode(),
    "many dotted tables": lambda: (QUICK + "".join(f"[study.a.k{i}]\n" for i in range(490))).encode(),
    "many studies": lambda: (QUICK + "".join(f"[study.k{i}]\n" for i in range(990))).encode(),
    "many rows": many("[[study.a.b]]\n", 490),
    "many rows with keys": many("[[study.a.b]]\nx = 1\n", 490),
    "many numbers": many("1,", 9_800, "[study.a]\nx = [", "]"),
    "many numbers on lines": many("1,\n", 4_900, "[study.a]\nx = [", "]"),
    "many rows in one line": many("{a=1},", 3_200, "[study.a]\nx = [", "]"),
    "many empty tables": many("{},", 4_900, "[study.a]\nx = [", "]"),
    "many texts": many('"\\u001b",', 9_800, "[study.a]\nx = [", "]"),
    "many comments in an array": many("#\n", 9_800, "[study.a]\nx = [\n", "]"),
    "one table of many keys": lambda: (QUICK + "[study.a]\nx = {" + ",".join(f"k{i}=1" for i in range(4_800)) + "}\n").encode(),
    "names of 7 parts": lambda: (QUICK + "[study.a]\n" + "".join(f"{'.'.join(CHAIN[:6])}.{i} = 1\n" for i in range(40))).encode(),
}
"""Sound cases with much behind them that no rule forbids: every command takes them, and none takes long."""
WRONG: dict[str, Callable[[], bytes]] = {
    "unknown keys": lambda: (QUICK + "".join(f"machs{i} = 1\n" for i in range(4_900))).encode(),
    "unknown tables": lambda: (QUICK + "".join(f"[flights{i}]\n" for i in range(3_200))).encode(),
    "unknown keys of 100 letters": lambda: (QUICK + "".join(f"{'mach' * 25}{i} = 1\n" for i in range(4_900))).encode(),
    "one unknown key of many letters": lambda: f'{QUICK}"{"mach" * 200_000}" = 1\n'.encode(),
    "one value of many letters": lambda: QUICK.replace('"constant-gamma"', f'"{"constant-gamma" * 60_000}"').encode(),
    "a long unit": lambda: QUICK.replace('"50 kPa"', f'"50 {"k" * 900_000}"').encode(),
    "a long title": lambda: QUICK.replace("invented", "\\u001b" * 150_000).encode(),
    "long notes": lambda: f'notes = "{"[." * 400_000}"\n{QUICK}'.encode(),
    "too many ramps": many("[[inlet.ramp]]\nangle = 0.01\n", 950),
    "evil ramps": many('[[inlet.ramp]]\n"\\u001b" = 1\n', 950),
    "many species": lambda: (QUICK + "[air.mole_fractions]\n" + "".join(f"N{i} = 1\n" for i in range(4_900))).encode(),
    "ramps of tables": many("{angle={}},", 2_400, "[inlet]\nramp = [", "]")  ,
    "keys twice": lambda: (QUICK + "x = 1\n" * 4_000).encode(),
    "a depth of 300": lambda: f"{QUICK}[study.a]\nx = {('{' + '.'.join('a' * 8) + '=') * 9}1{'}' * 9}\n".encode(),
    "33 levels": many("[", 33, "[study.a]\nx = ", "]" * 33),
}  # fmt: skip
"""Within the bounds of what is read, and wrong as a case."""
ALL = SYNTAX | WRONG
