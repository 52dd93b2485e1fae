"""Root and maximum of many scalar functions at once: one function a point, no loop over points."""

from __future__ import annotations

from collections.abc import Callable

import numpy as np

from cycle.arrays import Array, ArrayLike, Codes, Flags

Valued = Callable[[Array], Array]
ValuedWithSlope = Callable[[Array], tuple[Array, Array]]

_NEWTON_LIMIT = 100
_BRACKET_LIMIT = 100
_GOLDEN = (np.sqrt(5.0) - 1.0) / 2.0
_ROUNDING = 4.0 * np.finfo(np.float64).eps


def _settled(step: Array, x: Array) -> Flags:
    return ~(np.abs(step) > _ROUNDING * (np.abs(x) + _ROUNDING))


def _common(*arrays: ArrayLike) -> list[Array]:
    floats = [np.asarray(a, dtype=np.float64) for a in arrays]
    return [np.array(a) for a in np.broadcast_arrays(*floats)]


@np.errstate(invalid="ignore", divide="ignore", over="ignore")
def newton(function: ValuedWithSlope, lower: ArrayLike, upper: ArrayLike, start: ArrayLike) -> Array:
    """Root of a function that rises from `lower` to `upper`, by Newton steps held inside a bracket.

    function: x (N,) -> value (N,), slope (N,). lower, upper: bracket, (N,), unit of x. start: first guess, (N,).
    A step that leaves the bracket, or that does not halve the last one, is replaced by a bisection.
    Returns (N,), the root; NaN where an input is NaN or the steps have not settled.
    Source: W. H. Press et al., Numerical Recipes, section 9.4 (the safeguard, from memory).
    """
    low, high, x = _common(lower, upper, start)
    x = np.clip(x, low, high)
    last = high - low
    done = np.zeros(x.shape, dtype=np.bool_)
    for _ in range(_NEWTON_LIMIT):
        value, slope = function(x)
        low, high = np.where(value < 0.0, x, low), np.where(value > 0.0, x, high)
        step = -value / slope
        aimed = x + step
        good = (aimed >= low) & (aimed <= high) & (np.abs(step) <= 0.5 * np.abs(last))
        moved = np.where(value == 0.0, x, np.where(good, aimed, low + 0.5 * (high - low)))
        moved = np.where(np.isnan(value), np.nan, moved)
        last = np.where(done, 0.0, moved - x)
        x = np.where(done, x, moved)
        done = done | _settled(last, x)
        if done.all():
            break
    return np.where(done, x, np.nan)


@np.errstate(invalid="ignore", divide="ignore", over="ignore")
def bracketed(
    function: Valued, lower: ArrayLike, upper: ArrayLike, tolerance: float, *, enough: float = 0.0, first: Array | None = None,
    ends: tuple[Array, Array] | None = None,
) -> Array:  # fmt: skip
    """Root inside a bracket when the slope is not known: inverse quadratic steps, bisection where they fail.

    function: x (N,) -> value (N,), of opposite sign (or zero) at `lower` and `upper`. lower, upper: (N,).
    tolerance: half-width of the final bracket relative to the root, 1 (a root at zero: relative to `tolerance`
    times the first bracket). enough: size of the value at which x is a root whatever the bracket: the noise of the function.
    first: where to look first, (N,), where it lies inside; else the middle. ends: the function's values at `lower` and
    `upper`, (N,), where they are known.
    Returns (N,), the root; NaN without a change of sign or where an input is NaN.
    Source: T. R. Chandrupatla, Advances in Engineering Software 28 (1997) 145 (from memory).
    """
    a, b = _common(upper, lower)
    fb, fa = (function(b), function(a)) if ends is None else _common(*ends)
    c, fc = a, fa
    smallest = tolerance * np.abs(a - b)
    fraction = np.full(a.shape, 0.5)
    if first is not None:
        part = (first - a) / (b - a)
        fraction = np.where((part > 0.0) & (part < 1.0), part, fraction)
    signed = np.sign(fa) * np.sign(fb) <= 0.0
    done = ~signed
    root = np.where(np.abs(fb) < np.abs(fa), b, a)
    for _ in range(_BRACKET_LIMIT):
        x = a + fraction * (b - a)
        fx = function(x)
        same = np.sign(fx) == np.sign(fa)
        c, fc = np.where(same, a, b), np.where(same, fa, fb)
        b, fb = np.where(same, b, a), np.where(same, fb, fa)
        a, fa = x, fx
        nearer = np.abs(fa) < np.abs(fb)
        best, least = np.where(nearer, a, b), np.where(nearer, fa, fb)
        root = np.where(done, root, best)
        allowed = tolerance * np.maximum(np.abs(best), smallest) / np.abs(b - c)
        done = done | (allowed > 0.5) | (np.abs(least) <= enough) | (a == b)
        if done.all():
            break
        fraction = np.clip(_quadratic_fraction(a, b, c, fa, fb, fc), allowed, 1.0 - allowed)
        fraction = np.where(np.isfinite(fraction), fraction, 0.5)
    return np.where(signed & done, root, np.nan)


def _quadratic_fraction(a: Array, b: Array, c: Array, fa: Array, fb: Array, fc: Array) -> Array:
    """Where to go between a and b: inverse quadratic interpolation where it is safe, the chord where c is infinite, else one half."""
    xi, phi = (a - b) / (c - b), (fa - fb) / (fc - fb)
    safe = (phi**2 < xi) & ((1.0 - phi) ** 2 < 1.0 - xi)
    step = fa / (fb - fa) * fc / (fb - fc) + (c - a) / (b - a) * fa / (fc - fa) * fb / (fc - fb)
    return np.where(safe, step, np.where(np.isinf(fc) & np.isfinite(fa), fa / (fa - fb), 0.5))


_SCAN = 9
_ZOOMS = 3


@np.errstate(invalid="ignore", divide="ignore", over="ignore")
def scanned_peak(function: Callable[[Array, Codes], Array], lower: Array, upper: Array) -> Array:
    """Place of the largest value of a smooth function with one peak, many places to a call: where a call costs more than its points.

    function: x (9 N,) and the index of each point (9 N,) -> value (9 N,); NaN counts as no peak. lower, upper: (N,), one peak between.
    Nine places, then nine between the neighbours of the best, twice; at last the vertex of the parabola through three, some 1e-5 of
    the first interval from the peak. Returns (N,), the place. Source: elementary.
    """
    points = np.tile(np.arange(lower.size), _SCAN)
    every = np.arange(lower.size)
    low, high = lower, upper
    for _ in range(_ZOOMS):
        x = low + (high - low) * np.linspace(0.0, 1.0, _SCAN)[:, None]
        values = function(x.ravel(), points).reshape(x.shape)
        middle = np.clip(np.argmax(np.where(np.isnan(values), -np.inf, values), axis=0), 1, _SCAN - 2)
        low, high = x[middle - 1, every], x[middle + 1, every]
    below, top, above = (values[middle + i, every] for i in (-1, 0, 1))
    shift = 0.25 * (high - low) * (below - above) / (below - 2.0 * top + above)
    best = np.argmax(np.where(np.isnan(values), -np.inf, values), axis=0)
    inside = np.abs(shift) < 0.5 * (high - low)
    place: Array = np.where(inside & (best == middle), x[middle, every] + shift, x[best, every])
    return place


@np.errstate(invalid="ignore", divide="ignore", over="ignore")
def peak(function: Valued, lower: ArrayLike, upper: ArrayLike, width: float) -> Array:
    """Place of the largest value of a function with one peak, by golden section.

    function: x (N,) -> value (N,), one peak between `lower` and `upper`, (N,). width: final interval as a
    fraction of the first, 1; the place of a smooth peak is not known better than about 1e-8 of its scale.
    Returns (N,), the place; NaN where an input is NaN.
    Source: J. Kiefer, Proceedings of the American Mathematical Society 4 (1953) 502 (from memory).
    """
    low, high = _common(lower, upper)
    left, right = high - _GOLDEN * (high - low), low + _GOLDEN * (high - low)
    f_left, f_right = function(left), function(right)
    for _ in range(int(np.ceil(np.log(width) / np.log(_GOLDEN)))):
        keep_right = f_right > f_left
        low, high = np.where(keep_right, left, low), np.where(keep_right, high, right)
        probe = np.where(keep_right, low + _GOLDEN * (high - low), high - _GOLDEN * (high - low))
        f_probe = function(probe)
        left, right = np.where(keep_right, right, probe), np.where(keep_right, probe, left)
        f_left, f_right = np.where(keep_right, f_right, f_probe), np.where(keep_right, f_probe, f_left)
    return 0.5 * (low + high)
