"""Equations of `quantities` as arithmetic: the numbers put in, and what they come to."""

from __future__ import annotations

import math
import re
from collections.abc import Callable
from dataclasses import dataclass

Lookup = Callable[[str], float | None]

_TOKEN = re.compile(r"\s*([A-Za-z_][A-Za-z_0-9]*(?:,[A-Za-z]+)?\*?|\d+(?:\.\d+)?|[-+/^()])")
_SUFFIXED = re.compile(r"\(([^()]*)\)(\d+)")
_SYMBOL = re.compile(r"[A-Za-z_][A-Za-z_0-9]*(?:,[A-Za-z]+)?\*?")
_FUNCTIONS: dict[str, Callable[[float], float]] = {"sqrt": math.sqrt}


class NoNumbersError(ValueError):
    """The equation is in words, or holds a symbol that has no value; `symbol` says which."""

    def __init__(self, symbol: str) -> None:
        super().__init__(f"no number for {symbol!r}")
        self.symbol = symbol


@dataclass(frozen=True, slots=True)
class Worked:
    """An equation with numbers in it. text: plain arithmetic ("*", "/", "^"), value: what it comes to, SI."""

    text: str
    value: float


def spread(equation: str) -> str:
    """The equation with a station behind a bracket written behind each symbol: "(m u)10" becomes "(m10 u10)"."""
    return _SUFFIXED.sub(lambda found: "(" + _SYMBOL.sub(lambda s: s.group() + found[2], found[1]) + ")", equation)


def symbols(equation: str) -> tuple[str, ...]:
    """Symbols of an equation in order of appearance, functions left out."""
    names = (m.group() for m in _SYMBOL.finditer(spread(equation)))
    return tuple(dict.fromkeys(n for n in names if n not in _FUNCTIONS))


def work(equation: str, lookup: Lookup) -> Worked:
    """Put numbers into an equation in which neighbours multiply.

    equation: text such as "F / (g0 mf)"; lookup: symbol -> value in SI, None where it has none.
    Returns the arithmetic with numbers to six digits and its value from the unrounded ones.
    Raises NoNumbersError where the equation is not arithmetic, lacks a number or cannot be evaluated.
    """
    reader = _Reader(_tokens(spread(equation)), lookup)
    text, value = reader.sum()
    if reader.next:
        raise NoNumbersError(reader.next)
    return Worked(text, value)


def _tokens(equation: str) -> list[str]:
    tokens: list[str] = []
    at = 0
    while at < len(equation.rstrip()):
        found = _TOKEN.match(equation, at)
        if found is None:
            raise NoNumbersError(equation[at:])
        tokens.append(found[1])
        at = found.end()
    return tokens


class _Reader:
    """Recursive descent over the tokens; each step returns the text with numbers and the value."""

    def __init__(self, tokens: list[str], lookup: Lookup) -> None:
        self.tokens = tokens
        self.lookup = lookup

    @property
    def next(self) -> str:
        return self.tokens[0] if self.tokens else ""

    def sum(self) -> tuple[str, float]:
        text, value = self.product()
        while self.next in ("+", "-"):
            sign = self.tokens.pop(0)
            more, term = self.product()
            text, value = f"{text} {sign} {more}", value + (term if sign == "+" else -term)
        return text, value

    def product(self) -> tuple[str, float]:
        text, value = self.power()
        while self.next and self.next not in ("+", "-", ")"):
            over = self.next == "/"
            if over:
                self.tokens.pop(0)
            more, factor = self.power()
            if over and factor == 0.0:
                raise NoNumbersError("a division by zero")
            text, value = f"{text} {'/' if over else '*'} {more}", value / factor if over else value * factor
        return text, value

    def power(self) -> tuple[str, float]:
        text, value = self.factor()
        if self.next == "^":
            self.tokens.pop(0)
            more, exponent = self.factor()
            return f"{text}^{more}", value**exponent
        return text, value

    def factor(self) -> tuple[str, float]:
        if not self.tokens:
            raise NoNumbersError("the end of the equation")
        token = self.tokens.pop(0)
        if token in _FUNCTIONS:
            text, value = self.factor()
            if value < 0.0:
                raise NoNumbersError(token)
            return token + text, _FUNCTIONS[token](value)
        if token == "(":
            text, value = self.sum()
            if self.next != ")":
                raise NoNumbersError("an open bracket")
            self.tokens.pop(0)
            return f"({text})", value
        return self.number(token)

    def number(self, token: str) -> tuple[str, float]:
        if token[0].isdigit():
            return token, float(token)
        value = self.lookup(token)
        if value is None or not math.isfinite(value):
            raise NoNumbersError(token)
        return (f"{value:.6g}" if value >= 0.0 else f"({value:.6g})"), value
