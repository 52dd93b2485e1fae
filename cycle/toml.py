"""TOML text to plain data, with the work bounded before the reader starts.

The readers of TOML are quadratic or worse in the length of a joined name, in the number of tables and in the lines between them.
"""

from __future__ import annotations

import re
import tomllib
from typing import Any

from cycle.errors import CaseError, Fault, shown

LARGEST = 1 << 20
"""Bytes of a TOML file that are read."""
MOST_PARTS = 20_000
"""Keys, tables, values of arrays and lines, outside of strings, that are read together."""
DEEPEST = 32
"""Names joined by points, and brackets inside each other."""
LONGEST_WORD = 1000
"""Characters of a number or of a bare name."""

_POSITION = re.compile(r" \(at (?:line (\d+), column (\d+)|end of document)\)$")
# what the reader takes as one thing: strings and comments hide all signs in them
_PART = re.compile(
    r'(?P<string>"""(?:[^"\\]|\\.|"{1,2}(?!"))*+"{3,5}|\'\'\'(?:[^\']|\'{1,2}(?!\'))*+\'{3,5}|"(?:[^"\\\n]|\\.)*+"|\'[^\'\n]*+\')'
    r"|(?P<comment>#[^\n]*+)|(?P<word>[^\s\"'#=.,\[\]{}]++)|(?P<sign>[=.,\[\]{}\n])|(?P<open>[\"'])",
    re.DOTALL,
)
_TABLE_TWICE = re.compile(r"(cannot declare|cannot mutate immutable namespace) \(.*", re.DOTALL)
_KEY_TWICE = re.compile(r"duplicate inline table key .*", re.DOTALL)


def tables(text: str, file: str) -> dict[str, Any]:
    """Tables of TOML text.

    Parameters: text; file, the name that messages use. Returns: nested plain data. Errors: CaseError, with line and column, where it
    is no TOML or asks for more work than any case needs.
    """
    bounded(text, file)
    try:
        return tomllib.loads(text)
    except ValueError as error:
        raise CaseError([_syntax(str(error), text, file)]) from None


def bounded(text: str, file: str) -> None:
    """Refuse text that would cost a reader of TOML much more than its length.

    Parameters: text, TOML or meant to be; file, the name that messages use. Errors: CaseError with the line.
    """
    parts = joined = depth = 0
    for match in _PART.finditer(text):
        kind, sign, at = match.lastgroup, match.group(), match.start()
        if kind == "open":
            return  # a string without an end: the reader comes no further
        if kind == "word" and len(sign) > LONGEST_WORD:
            raise _much(text, at, file, "a number or name is too long", f"{LONGEST_WORD} characters")
        if kind != "sign":
            continue
        parts += sign not in "]}"
        joined = joined + 1 if sign == "." else 0 if sign in "=,[\n" else joined
        depth += (sign in "[{") - (sign in "]}")
        if joined >= DEEPEST:
            raise _much(text, at, file, "names are nested too deeply", f"{DEEPEST} names joined by points")
        if depth > DEEPEST:
            raise _much(text, at, file, "tables or arrays are nested too deeply", f"{DEEPEST} levels")
        if parts > MOST_PARTS:
            raise _much(text, at, file, "too many keys, values and lines", f"{MOST_PARTS}")


def _much(text: str, at: int, file: str, what: str, most: str) -> CaseError:
    return CaseError([Fault(file, "", what, f"more than {most}", f"at most {most}", text.count("\n", 0, at) + 1)])


def _syntax(message: str, text: str, file: str) -> Fault:
    found = _POSITION.search(message)
    lines = text.split("\n")
    what = message[: found.start()] if found else message
    what = _KEY_TWICE.sub("a key is stated twice", what[:1].lower() + what[1:])
    what = _TABLE_TWICE.sub("a table is stated twice, or added to where it stands in one line", what)
    if found is None:
        return Fault(file, "", f"not TOML: {what}")
    line = int(found[1]) if found[1] else len(lines)
    column = int(found[2]) if found[2] else len(lines[-1]) + 1
    quoted = lines[line - 1] if line <= len(lines) else ""
    return Fault(file, "", f"not TOML: {what}", shown(quoted), "", line, column)
