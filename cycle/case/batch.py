"""Arrays for the number inputs of one case."""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import replace
from typing import TYPE_CHECKING, Any

from cycle.case.case import Case
from cycle.case.edits import plain
from cycle.case.joint import PAIRS, has_lip_circle, lip_circle, pairs
from cycle.case.rows import ROW_RULES, view
from cycle.case.rules import bounds
from cycle.errors import CaseError, Fault, UnitError, shown
from cycle.quantities import INPUTS, Input, input_of, split_cell
from cycle.units import format_number, read

if TYPE_CHECKING:
    from cycle.arrays import Array, ArrayLike, Flags

_DEEPEST = 32
"""Rows in rows that are looked into: as many as an array may have."""


def check_batch(case: Case, values: Mapping[str, ArrayLike | str]) -> tuple[Case, dict[str, Array]]:
    """A case and arrays for some of its number inputs, validated.

    Parameters: case; values, key of a number input or of a cell -> array of any shape, number (SI) or text with a unit. A member of a group
    replaces the group, as in `Case.replace`.
    Returns: the case with the first element of each array as its own value, so that its choices hold for the batch; and
    key -> float64 array (SI, own shape, not broadcast) for these keys and for those that follow them.
    Errors: CaseError with every fault: not a number input, not numbers, masked, with units of their own, empty, NaN, infinite, out of
    bounds, shapes that do not broadcast, rows that do not fit each other, or a cone's lip that does not fit the capture area.
    """
    file = case.path or case.name
    arrays: dict[str, Array] = {}
    faults: list[Fault] = []
    for key, given in values.items():
        array, fault = _array(file, key, given)
        if fault is not None:
            faults.append(fault)
        elif array is not None:
            arrays[key] = array
    faults += _shape_faults(file, arrays)
    if faults:
        raise CaseError(faults)
    chosen = case.replace({key: float(array.flat[0]) for key, array in arrays.items()})
    bounded = (_array_fault(file, entry, array) for key, array in arrays.items() if (entry := chosen.declared(key)))
    faults = [fault for fault in bounded if fault]
    if faults:
        raise CaseError(faults)
    for entry in INPUTS:
        if entry.follows in arrays and entry.key in chosen.numbers and entry.key not in chosen.given:
            arrays[entry.key] = arrays[entry.follows]
    if has_lip_circle(chosen.choices) and "inlet.lip_y" in arrays and "engine.capture_area" not in {*chosen.given, *arrays}:
        arrays["engine.capture_area"] = math.pi * arrays["inlet.lip_y"] ** 2
    _check_rows(file, chosen, arrays)
    _check_lip(file, chosen, arrays)
    _check_pairs(file, chosen, arrays)
    return chosen, arrays


def _check_pairs(file: str, case: Case, arrays: Mapping[str, Array]) -> None:
    """Hold every element of the constant-gamma pairs to what a gas has."""
    constant = arrays.get("gas.gas_constant", case.numbers.get("gas.gas_constant"))
    if constant is None:
        return
    for key in PAIRS:
        if key not in case.numbers or not {key, "gas.gas_constant"}.intersection(arrays):
            continue
        faults = [replace(fault, file=file) for fault in pairs({key: arrays.get(key, case.numbers[key])}, constant)]
        if faults:
            raise CaseError(faults)


def _shape_faults(file: str, arrays: Mapping[str, Array]) -> list[Fault]:
    """Arrays whose shapes do not broadcast, each with the first one ahead of it that it does not fit."""
    faults: list[Fault] = []
    fitting: dict[str, tuple[int, ...]] = {}
    for key, array in arrays.items():
        other = next((name for name, shape in fitting.items() if not _fit(shape, array.shape)), None)
        if other is None:
            fitting[key] = array.shape
        else:
            given = f"{array.shape} with {fitting[other]}"
            faults.append(Fault(file, key, f"the shape does not fit that of {other}", given, "sizes that are equal or 1, from the last on"))
    return faults


def _fit(first: tuple[int, ...], second: tuple[int, ...]) -> bool:
    return all(a == b or 1 in (a, b) for a, b in zip(first[::-1], second[::-1], strict=False))


def _check_lip(file: str, case: Case, arrays: Mapping[str, Array]) -> None:
    """Hold every element of a cone's lip and capture area to each other."""
    pair = [arrays.get(key, case.numbers.get(key)) for key in ("inlet.lip_y", "engine.capture_area")]
    if pair[0] is None or pair[1] is None:
        return
    faults = [replace(fault, file=file) for fault in lip_circle(case.choices, *pair)]
    if faults:
        raise CaseError(faults)


def _check_rows(file: str, case: Case, arrays: Mapping[str, Array]) -> None:
    """Hold every element of the cells that vary to the rules of rows."""
    varying = {key: array for key, array in arrays.items() if split_cell(key)}
    if not varying:
        return
    tables = view({**case.numbers, **varying})
    faults = [replace(fault, file=file) for rule in ROW_RULES for fault in rule(tables)]
    if faults:
        raise CaseError(faults)


def _array(file: str, key: str, given: ArrayLike | str) -> tuple[Array | None, Fault | None]:
    import numpy as np

    entry = input_of(key)
    if entry is None or entry.kind != "number":
        text = "not an input that takes numbers" if entry else "unknown key"
        return None, Fault(file, key, text, shown(plain(given)), "the key of a number input")
    if odd := _odd(given):
        return None, Fault(file, key, "not numbers", odd, bounds(entry))
    try:
        array = np.array(read(given, entry.unit) if isinstance(given, str) else given)
        if array.dtype.kind == "O" and all(isinstance(x, (int, float)) and not isinstance(x, bool) for x in array.flat):
            array = array.astype(np.float64)
    except UnitError as error:
        return None, Fault(file, key, error.text, shown(given), bounds(entry))
    except OverflowError:
        return None, Fault(file, key, "not a finite number", "an integer beyond the range of numbers", bounds(entry))
    except ValueError:
        return None, Fault(file, key, "not an array of numbers", "rows of unequal length", bounds(entry))
    if array.dtype.kind not in "iuf":
        return None, Fault(file, key, "not numbers", _said(array), bounds(entry))
    with np.errstate(over="ignore"):
        numbers = array.astype(np.float64, copy=False)
    return numbers, _array_fault(file, entry, numbers)


_KINDS = {
    "b": "true and false", "c": "complex numbers", "U": "text", "S": "text", "T": "text", "M": "dates", "m": "durations",
    "V": "records",
}  # fmt: skip
"""What numpy's kinds of values are called."""


def _said(array: Any) -> str:
    """What an array that holds no numbers holds."""
    return f"{'an array of ' if array.ndim else ''}{_KINDS.get(array.dtype.kind, 'values that are no numbers')}"


def _odd(given: object, depth: int = 0) -> str:
    """What of the values would be lost if they were read as plain numbers, "" where nothing would: a mask, a unit, true and false."""
    import numpy as np

    if isinstance(given, (list, tuple)):
        inner = (_odd(part, depth + 1) for part in given if type(part) is not float)
        return next((odd for odd in inner if odd), "") if depth < _DEEPEST else "rows nested too deeply"
    if isinstance(given, (bool, np.bool_)) or (depth and isinstance(given, np.ndarray) and given.dtype.kind == "b"):
        return _KINDS["b"]
    if isinstance(given, np.ndarray) and hasattr(given, "mask"):
        return "values with a mask"
    return "values with units of their own" if hasattr(given, "units") or hasattr(given, "unit") else ""


def _array_fault(file: str, entry: Input, array: Array) -> Fault | None:
    import numpy as np

    if array.size == 0:
        return Fault(file, entry.key, "no values", "an empty array", bounds(entry))
    broken = np.rint(array) != array if entry.whole else np.zeros(array.shape, np.bool_)
    faulty = {"not a finite number": ~np.isfinite(array), "out of bounds": _outside(entry, array), "not a whole number": broken}
    wrong = np.logical_or.reduce(list(faulty.values()))
    if not wrong.any():
        return None
    first = int(np.flatnonzero(wrong)[0])
    value = float(array.flat[first])
    what = next(text for text, flags in faulty.items() if flags.flat[first])
    index = tuple(int(i) for i in np.unravel_index(first, array.shape))
    place = f" at index {index if array.ndim > 1 else first}" if array.ndim else ""
    number = format_number(value, 8) if np.isfinite(value) else str(value)
    return Fault(file, entry.key, f"{what}{place}", number, bounds(entry))


def _outside(entry: Input, array: Array) -> Flags:
    import numpy as np

    outside = np.zeros(array.shape, dtype=np.bool_)
    for limit, beyond in (
        (entry.lower, np.less),
        (entry.over, np.less_equal),
        (entry.upper, np.greater),
        (entry.below, np.greater_equal),
    ):
        if limit is not None:
            outside |= beyond(array, limit)
    return outside
