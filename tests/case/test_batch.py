"""Arrays of a batch: what a caller may hand over, and one plain line for everything else."""

from __future__ import annotations

import datetime
import re
from decimal import Decimal
from typing import Any

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from hypothesis.extra import numpy as arrays_of

import cycle
from cycle.case import Case, check_batch
from cycle.errors import CaseError
from tests.case_files import case_file

A = np.array
PYTHON = re.compile(r"array\(|dtype|numpy|np\.|object|<|float64|ndarray|masked_array|\bNone\b|datetime|Traceback")
"""Words of the language a message is not written in."""


class WithUnit(np.ndarray):
    """Values that carry a unit, as packages for units make them."""

    unit = "km"


class Elsewhere:
    """Values of another package that carry units and turn into an array."""

    units = "km"

    def __array__(self, dtype: object = None, copy: object = None) -> np.ndarray:
        return A([7.0, 8.0])


def nested(depth: int) -> list[Any]:
    found: list[Any] = [7.0]
    for _ in range(depth):
        found = [found]
    return found


ITSELF: list[Any] = []
ITSELF.append(ITSELF)
MASK, UNITS, FLAGS, OTHER = (f"not numbers: given {words}" for words in (
    "values with a mask", "values with units of their own", "true and false", "values that are no numbers",
))  # fmt: skip
REFUSED = {
    "masked": (np.ma.array([7.0, 8.0], mask=[0, 1]), MASK),
    "masked nowhere": (np.ma.array([7.0, 8.0]), MASK),
    "masked constant": (np.ma.masked, MASK),
    "masked inside a list": ([7.0, np.ma.masked], MASK),
    "rows with a mask": ([np.ma.array([7.0, 8.0], mask=[0, 1])] * 2, MASK),
    "units": (A([7.0]).view(WithUnit), UNITS),
    "units elsewhere": (Elsewhere(), UNITS),
    "complex": (A([7.0 + 0j]), "not numbers: given an array of complex numbers"),
    "complex in a list": ([7.0, 1j], "not numbers: given an array of complex numbers"),
    "text": (A(["7 km"]), "not numbers: given an array of text"),
    "bytes": (A([b"7"]), "not numbers: given an array of text"),
    "dates": (A(["2020-01-01"], dtype="M8[D]"), "not numbers: given an array of dates"),
    "durations": (A([7], dtype="m8[s]"), "not numbers: given an array of durations"),
    "records": (np.zeros(2, dtype=[("a", "f8")]), "not numbers: given an array of records"),
    "a date": (datetime.date(2020, 1, 1), OTHER),
    "objects": (A([7.0, None], dtype=object), "not numbers: given an array of values that are no numbers"),
    "nothing in a list": ([None, 7.0], "not numbers: given an array of values that are no numbers"),
    "nothing": (None, OTHER),
    "a set": ({7.0}, OTHER),
    "a table": ({"a": 7.0}, OTHER),
    "a generator": ((x for x in [7.0]), OTHER),
    "a decimal": (Decimal("7"), OTHER),
    "true": (True, FLAGS),
    "true among numbers": ([7.0, True], FLAGS),
    "an array of flags among numbers": ([A([True]), [7.0]], FLAGS),
    "flags": (A([True]), "not numbers: given an array of true and false"),
    "empty": (A([]), "no values: given an empty array"),
    "empty rows": (np.zeros((3, 0)), "no values: given an empty array"),
    "ragged": ([[7.0], [7.0, 8.0]], "not an array of numbers: given rows of unequal length"),
    "itself": (ITSELF, "not numbers: given rows nested too deeply"),
    "deep": (nested(40), "not numbers: given rows nested too deeply"),
    "nan": (A([[7.0, 8.0], [np.nan, 7.0]]), "not a finite number at index (1, 0): given nan"),
    "inf": (A([7.0, -np.inf]), "not a finite number at index 1: given -inf"),
    "longer than a number": (A([np.longdouble("1e4000")]), "not a finite number at index 0: given inf"),
    "a large integer": ([7, 10**30], "out of bounds at index 1: given 1e30"),
    "an endless integer": ([10**400], "not a finite number: given an integer beyond the range of numbers"),
}  # fmt: skip


@pytest.mark.parametrize("name", REFUSED)
def test_what_is_no_array_of_numbers_is_refused_in_one_plain_line(case: Case, name: str) -> None:
    values, words = REFUSED[name]
    for call in (check_batch, cycle.solve):
        with pytest.raises(CaseError) as caught:
            call(case, {"flight.mach": values})
        line = str(caught.value)
        assert line == f"saltmarsh: flight.mach: {words}; allowed above 0, at most 30"
        assert not PYTHON.search(line)


TAKEN: dict[str, tuple[Any, list[float]]] = {
    "no dimension": (A(7.0), [7.0]),
    "float32": (np.float32(7.0), [7.0]),
    "integers": (A([7, 8]), [7.0, 8.0]),
    "small integers": (A([7, 8], dtype="u1"), [7.0, 8.0]),
    "half precision": (A([7.0], dtype="f2"), [7.0]),
    "other byte order": (A([7.0, 8.0], dtype=">f8"), [7.0, 8.0]),
    "every second, backwards": (np.arange(20.0)[9:5:-2], [9.0, 7.0]),
    "by columns": (np.asfortranarray([[7.0, 8.0], [9.0, 6.0]]), [7.0, 8.0, 9.0, 6.0]),
    "broadcast": (np.broadcast_to(7.0, (2,)), [7.0, 7.0]),
    "objects that are numbers": (A([7.0, 8], dtype=object), [7.0, 8.0]),
    "a range": (range(7, 9), [7.0, 8.0]),
    "a tuple of rows": (((7.0,), [8.0]), [7.0, 8.0]),
    "text": ("7", [7.0]),
}


@pytest.mark.parametrize("name", TAKEN)
def test_every_array_of_numbers_is_taken(case: Case, name: str) -> None:
    values, numbers = TAKEN[name]
    _, arrays = check_batch(case, {"flight.mach": values})
    found = arrays["flight.mach"]
    assert found.dtype == np.float64 and found.dtype.isnative and found.ravel().tolist() == numbers
    walk = cycle.solve(case, {"flight.mach": values})
    assert walk.shape == found.shape and np.ravel(walk.station["0"].mach) == pytest.approx(numbers, rel=1e-12)


def test_shapes_that_do_not_fit_are_named_with_their_keys(case: Case) -> None:
    values = {
        "flight.mach": np.full((2, 1), 7.0),
        "combustor.burnt_fraction": np.full(3, 0.9),
        "fuel.temperature": np.full(4, 300.0),
        "engine.capture_area": np.full((2, 3), 0.4),
        "combustor.wall_heat": np.full((5, 1, 2), 0.0),
    }
    with pytest.raises(CaseError) as caught:
        cycle.solve(case, values)
    end = "; allowed sizes that are equal or 1, from the last on"
    assert str(caught.value).split("\n") == [
        f"saltmarsh: fuel.temperature: the shape does not fit that of combustor.burnt_fraction: given (4,) with (3,){end}",
        f"saltmarsh: combustor.wall_heat: the shape does not fit that of combustor.burnt_fraction: given (5, 1, 2) with (3,){end}",
    ]


SHAPES = st.lists(st.lists(st.integers(1, 3), max_size=3).map(tuple), min_size=2, max_size=4)
KEYS = ("flight.mach", "combustor.burnt_fraction", "fuel.temperature", "engine.capture_area")


@settings(max_examples=200)
@given(SHAPES)
def test_shapes_fit_where_numpy_says_so(shapes: list[tuple[int, ...]]) -> None:
    case = cycle.load(case_file("plain"))
    values = {key: np.full(shape, case.numbers[key]) for key, shape in zip(KEYS, shapes, strict=False)}
    try:
        np.broadcast_shapes(*shapes)
    except ValueError:
        with pytest.raises(CaseError, match="the shape does not fit that of"):
            check_batch(case, values)
    else:
        check_batch(case, values)


SCALARS = (
    st.none(),
    st.booleans(),
    st.integers(),
    st.floats(),
    st.complex_numbers(),
    st.text(max_size=4),
    st.binary(max_size=4),
    st.dates(),
)
ANYTHING = st.recursive(st.one_of(*SCALARS), lambda inner: st.lists(inner, max_size=3) | st.dictionaries(st.text(), inner, max_size=2))
ARRAYS = arrays_of.arrays(arrays_of.scalar_dtypes(), arrays_of.array_shapes(min_dims=0, max_side=3, min_side=0))


@pytest.mark.filterwarnings("ignore::RuntimeWarning")
@settings(max_examples=400)
@given(st.one_of(ANYTHING, ARRAYS, st.sets(st.integers())))
def test_anything_is_taken_as_finite_numbers_or_refused_in_one_plain_line(values: Any) -> None:
    case = cycle.load(case_file("plain"))
    try:
        _, arrays = check_batch(case, {"combustor.wall_heat": values})
    except CaseError as error:
        line = str(error)
        assert line.startswith(f"{case.path}: combustor.wall_heat: ") and line.isprintable()
        given = line if isinstance(values, str) else line.replace(repr(values), "")
        assert not PYTHON.search(given), line
    else:
        assert np.isfinite(arrays["combustor.wall_heat"]).all()


def test_equal_cases_have_equal_hashes(case: Case) -> None:
    """Equality looks at the content, whatever file, spelling or order it came from; any other content is another key."""
    again = case.replace({"flight.mach": "7.5"}).replace({"flight.mach": case.numbers["flight.mach"]})
    assert again == case and hash(again) == hash(case) and {case: "here"}[again] == "here"
    others = [case.replace({"flight.mach": 7.5}), case.replace({"title": "x"}), case.replace({"gas.model": "frozen"})]
    study = {"outputs": ["thrust"], "vary": [{"input": "flight.mach", "from": 7.0, "to": 8.0, "points": 3}]}
    others.append(case.with_study("another", study))
    assert len({case, again, *others}) == 1 + len(others)


def test_an_edit_takes_no_arrays(case: Case) -> None:
    for values, given_words in ((A([7.0, 8.0]), "an array"), (A(["a"]), "an array"), (np.ma.masked, "masked")):
        with pytest.raises(CaseError) as caught:
            case.replace({"flight.mach": values})
        assert str(caught.value).startswith(f"saltmarsh: flight.mach: not a number: given {given_words}; allowed a number")
    with pytest.raises(CaseError, match=r"flight\.match: unknown key: given an array; allowed"):
        check_batch(case, {"flight.match": A([7.0])})
    assert case.replace({"flight.mach": A(7.0)}).numbers["flight.mach"] == 7.0
