"""Axes as numbers: round ticks that contain the data, decades, and where a value lies between both ends.

A tick is a whole multiple of 1, 2 or 5 times a power of ten, kept as integers until it is written, so no label carries
digits that the tick does not have.
"""

from __future__ import annotations

import math
from collections.abc import Iterable, Iterator
from dataclasses import dataclass
from decimal import Decimal

from tui.plots.chart import Axis

LARGEST, LEAST = 1e300, 1e-290
"""Magnitudes beyond which a value is drawn as a gap, and below which as zero."""

_SAME = 1e-9
"""Relative spread below which values count as one."""

_SLACK = 1e-9
"""Share of a step by which data may lie outside a tick through rounding."""

_FULL = 0.8
"""Share of an axis that the data should fill before finer ticks are taken."""

_NARROW = 4.0
"""Ratio of the ends below which a log axis is labelled in even steps."""

_DECADE_STEPS = (1, 2, 3, 5, 10, 20, 50, 100, 200)
_MANTISSAS = (1, 2, 5)
_MINOR = ((2, 3, 4, 5, 6, 7, 8, 9), (2, 5), ())


@dataclass(frozen=True, slots=True)
class Tick:
    """A labelled place of an axis: its value and its text (in units of the axis' power of ten)."""

    value: float
    text: str


@dataclass(frozen=True, slots=True)
class Scale:
    """An axis with its ends, labelled ticks, candidates for minor ticks (fullest first) and common power of ten."""

    low: float
    high: float
    log: bool
    ticks: tuple[Tick, ...]
    minor: tuple[tuple[float, ...], ...] = ()
    power: int = 0

    def share(self, value: float) -> float:
        """Where a value lies: 0 at the low end, 1 at the high end, values outside at the nearer end."""
        if self.log:
            if value <= 0.0:
                return 0.0
            low = math.log10(self.low)
            part = (math.log10(value) - low) / (math.log10(self.high) - low)
        else:
            part = (value - self.low) / (self.high - self.low)
        return min(1.0, max(0.0, part))

    def place(self, value: float, cells: int) -> int:
        """Index of the cell of `cells` in which a value lies, the ends in the first and the last."""
        return round(self.share(value) * (cells - 1))

    def fewer(self, places: int) -> tuple[float, ...]:
        """The fullest minor ticks that `places` places keep apart, () where none do."""
        return next((m for m in self.minor if len(m) <= places), ())


def drawable(value: float) -> float:
    """A value as it can be drawn: nan where it is not finite or beyond 1e300, 0 below 1e-290."""
    size = abs(value)
    if not size <= LARGEST:
        return math.nan
    return 0.0 if size < LEAST else float(value)


def heading(axis: Axis, power: int = 0) -> str:
    """Label and unit of an axis, with the power of ten that its ticks are in units of."""
    unit = " ".join(part for part in (f"in 10^{power}" if power else "", axis.unit) if part)
    return f"{axis.label}, {unit}" if unit else axis.label


def scale_of(axis: Axis, values: Iterable[float], most: int, tight: bool = False) -> Scale:
    """The scale of an axis that contains all values.

    Parameters: axis; values, at least one that can be drawn, above zero for a log axis; most, ticks that have room (3 are always
    allowed where 2 do not do); tight, whether the axis ends at the data (a map) and not at round numbers.
    Returns: a `Scale` of at least two ticks, all of them between its ends; one at every name where the axis has names.
    """
    if axis.names:
        return Scale(0.0, max(1.0, len(axis.names) - 1.0), False, tuple(Tick(float(n), name) for n, name in enumerate(axis.names)))
    known = [v for v in map(drawable, values) if v == v]
    known += [v for v in map(drawable, axis.include) if v > 0.0 or (v == v and not axis.log)]
    low, high = min(known), max(known)
    return (_log if axis.log else _linear)(low, high, max(2, most), tight)


def power_of(largest: float) -> int:
    """The power of ten, a multiple of 3, in whose units numbers up to `largest` read best; 0 from 0.001 to 99,999."""
    if largest == 0.0 or 1e-3 <= largest < 1e5:
        return 0
    return 3 * math.floor(math.log10(largest) / 3.0)


def decimal_text(whole: int, exponent: int) -> str:
    """The number whole x 10^exponent in plain digits, with exactly the decimals its exponent gives."""
    return str(whole * 10**exponent) if exponent >= 0 else f"{Decimal(whole).scaleb(exponent):.{-exponent}f}"


def steps(span: float) -> Iterator[tuple[int, int]]:
    """Round steps (mantissa, exponent) from a hundredth of `span` to ten times it, smallest first."""
    top = math.floor(math.log10(span))
    return ((m, e) for e in range(top - 2, top + 2) for m in _MANTISSAS)


def multiples(value: float, mantissa: int, exponent: int) -> float:
    """How many steps of mantissa x 10^exponent make `value`."""
    return value / mantissa / 10.0**exponent if exponent >= 0 else value / mantissa * 10.0**-exponent


def _spread(low: float, high: float) -> tuple[float, float]:
    """Both ends, moved apart where they are one value to rounding."""
    size = max(abs(low), abs(high))
    if high - low > _SAME * size:
        return low, high
    return (low - 0.1 * size, high + 0.1 * size) if size else (-1.0, 1.0)


def _runs(low: float, high: float, tight: bool) -> Iterator[tuple[range, int, int]]:
    """Ticks at every round step: their whole multiples, mantissa and exponent, finest first."""
    for mantissa, exponent in steps(high - low):
        first, last = multiples(low, mantissa, exponent), multiples(high, mantissa, exponent)
        if tight:
            run = range(math.ceil(first - _SLACK), math.floor(last + _SLACK) + 1)
        else:
            run = range(math.floor(first + _SLACK), math.ceil(last - _SLACK) + 1)
        if len(run) >= 2:
            yield run, mantissa, exponent


def _linear(low: float, high: float, most: int, tight: bool) -> Scale:
    low, high = _spread(low, high)
    runs = list(_runs(low, high, tight))
    fitting = [r for r in runs if len(r[0]) <= most] or [min(runs, key=lambda r: len(r[0]))]
    if tight:
        run, mantissa, exponent = fitting[0]
    else:
        span = high - low
        full = [r for r in fitting if len(r[0]) >= 3 and span >= _FULL * (len(r[0]) - 1) * float(f"{r[1]}e{r[2]}")]
        run, mantissa, exponent = full[0] if full else fitting[0]
    wholes = [n * mantissa for n in run]
    values = [float(f"{n}e{exponent}") for n in wholes]
    power = power_of(max(abs(v) for v in values))
    ticks = tuple(Tick(v, decimal_text(n, exponent - power)) for v, n in zip(values, wholes, strict=True))
    return Scale(*((low, high) if tight else (values[0], values[-1])), False, ticks, (), power)


def _rung(number: int) -> tuple[int, int]:
    """The number-th member of ..., 1, 2, 5, 10, 20, ... as mantissa and exponent."""
    return _MANTISSAS[number % 3], number // 3


def _rungs(low: float, high: float) -> range:
    """Members of the 1-2-5 ladder from the last at or below `low` to the first at or above `high`."""
    first = 3 * math.floor(math.log10(low)) - 1
    while _value(*_rung(first + 1)) <= low * (1.0 + _SLACK):
        first += 1
    last = first
    while _value(*_rung(last)) < high * (1.0 - _SLACK):
        last += 1
    return range(first, max(last, first + 1) + 1)


def _value(mantissa: int, exponent: int) -> float:
    return float(f"{mantissa}e{exponent}")


def _log(low: float, high: float, most: int, tight: bool) -> Scale:
    if high / low <= 1.0 + _SAME:
        low, high = 0.8 * low, 1.25 * high
    even = _even(low, high, most, tight) if high / low < _NARROW else None
    if even:
        return even
    ladder = [_rung(n) for n in _rungs(low, high)]
    ends = (low, high) if tight else (_value(*ladder[0]), _value(*ladder[-1]))
    inside = [r for r in ladder if ends[0] * (1.0 - _SLACK) <= _value(*r) <= ends[1] * (1.0 + _SLACK)]
    choices = [inside, *([r for r in inside if r[0] == 1 and r[1] % n == 0] for n in _DECADE_STEPS)]
    usable = [c for c in choices if len(c) >= 2]
    if not usable:
        return _even(low, high, most, tight) or _log(low, high, most, False)
    chosen = next((c for c in usable if len(c) <= most), usable[-1])
    ticks = tuple(Tick(_value(*r), _log_text(*r)) for r in chosen)
    return Scale(*ends, True, ticks, _log_minor(*ends))


def _even(low: float, high: float, most: int, tight: bool) -> Scale | None:
    """A log scale labelled in even steps, None where these would reach zero or need a power of ten."""
    even = _linear(low, high, most, tight)
    return Scale(even.low, even.high, True, even.ticks, (), even.power) if even.low > 0.0 else None


def _log_text(mantissa: int, exponent: int) -> str:
    return decimal_text(mantissa, exponent) if -3 <= exponent <= 3 else f"{mantissa}e{exponent}"


def _log_minor(low: float, high: float) -> tuple[tuple[float, ...], ...]:
    """Minor ticks at every number of a decade, at 2 and 5, or at the decades alone."""
    decades = range(math.floor(math.log10(low)), math.ceil(math.log10(high)) + 1)
    return tuple(tuple(v for e in decades for m in (1, *ms) if low <= (v := _value(m, e)) <= high) for ms in _MINOR)
