"""Arrays for the number inputs of one case."""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import replace
from typing import TYPE_CHECKING

from cycle.case.case import Case
from cycle.case.joint import PAIRS, has_lip_circle, lip_circle, pairs
from cycle.case.rows import ROW_RULES, view
from cycle.case.rules import bounds
from cycle.errors import CaseError, Fault, UnitError, shown
from cycle.quantities import INPUTS, Input, input_of, split_cell
from cycle.units import format_number, read

if TYPE_CHECKING:
    from cycle.arrays import Array, ArrayLike, Flags


def check_batch(case: Case, values: Mapping[str, ArrayLike | str]) -> tuple[Case, dict[str, Array]]:
    """A case and arrays for some of its number inputs, validated.

    Parameters: case; values, key of a number input or of a cell -> array of any shape, number (SI) or text with a unit. A member of a group
    replaces the group, as in `Case.replace`.
    Returns: the case with the first element of each array as its own value, so that its choices hold for the batch; and
    key -> float64 array (SI, own shape, not broadcast) for these keys and for those that follow them.
    Errors: CaseError with every fault: not a number input, not numeric, empty, NaN, infinite, out of bounds, rows that do
    not fit each other, or a cone's lip that does not fit the capture area.
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
    """Hold every element of the constant-gamma pairs to what a gas has; arrays that do not fit each other are not compared."""
    constant = arrays.get("gas.gas_constant", case.numbers.get("gas.gas_constant"))
    if constant is None:
        return
    for key in PAIRS:
        if key not in case.numbers or not {key, "gas.gas_constant"}.intersection(arrays):
            continue
        try:
            faults = [replace(fault, file=file) for fault in pairs({key: arrays.get(key, case.numbers[key])}, constant)]
        except ValueError:
            continue
        if faults:
            raise CaseError(faults)


def _check_lip(file: str, case: Case, arrays: Mapping[str, Array]) -> None:
    """Hold every element of a cone's lip and capture area to each other; arrays that do not fit each other are not compared."""
    pair = [arrays.get(key, case.numbers.get(key)) for key in ("inlet.lip_y", "engine.capture_area")]
    if pair[0] is None or pair[1] is None:
        return
    try:
        faults = [replace(fault, file=file) for fault in lip_circle(case.choices, *pair)]
    except ValueError:
        return
    if faults:
        raise CaseError(faults)


def _check_rows(file: str, case: Case, arrays: Mapping[str, Array]) -> None:
    """Hold every element of the cells that vary to the rules of rows; arrays that do not fit each other are not compared."""
    import numpy as np

    varying = {key: array for key, array in arrays.items() if split_cell(key)}
    if not varying:
        return
    try:
        np.broadcast_shapes(*(array.shape for array in varying.values()))
    except ValueError:
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
        return None, Fault(file, key, text, shown(given), "the key of a number input")
    try:
        array = np.array(read(given, entry.unit) if isinstance(given, str) else given)
        if array.dtype.kind not in "iuf":
            return None, Fault(file, key, "not numbers", shown(given), bounds(entry))
    except (UnitError, ValueError) as error:
        text = error.text if isinstance(error, UnitError) else "not an array of numbers"
        return None, Fault(file, key, text, shown(given), bounds(entry))
    numbers = array.astype(np.float64)
    return numbers, _array_fault(file, entry, numbers)


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
    place = f" at index {first}" if array.ndim else ""
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
