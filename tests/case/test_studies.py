"""Named studies: added to a case, refused with words, written to the file and read back."""

from __future__ import annotations

from pathlib import Path
from typing import Any

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from cycle.case import load, loads, save
from cycle.case.document import edited
from cycle.errors import CaseError
from tests.case.conftest import PLAIN

HEAT = {"input": "combustor.equivalence_ratio", "from": 0.4, "to": 0.8, "points": 41}
PRESSURE = {"input": "flight.dynamic_pressure", "from": "40 kPa", "to": "60 kPa", "points": 11}
STUDY: dict[str, Any] = {"outputs": ["thrust", "4.temperature"], "vary": [HEAT, PRESSURE]}


def test_a_study_is_saved_and_taken_out_again_with_the_comments_of_the_file_kept(tmp_path: Path) -> None:
    path = tmp_path / "a.toml"
    path.write_text(PLAIN + "# a last word\n")
    case = load(path)
    made = case.with_study("heat-1", STUDY)
    stamp = save(made, path, case.stamp)
    assert path.read_text().startswith(PLAIN + "# a last word\n") and load(path) == made
    assert load(path).studies["heat-1"]["vary"][1]["from"] == "40 kPa"
    save(case, path, stamp)
    assert load(path) == case and path.read_text().rstrip() == (PLAIN + "# a last word").rstrip()


def test_a_study_of_the_file_that_goes_leaves_its_comments_and_those_behind_it() -> None:
    text = PLAIN.replace("[engine]", "[study.first] # of old\noutputs = []\n# of the engine\n[engine]")
    case = loads(text)
    shorter = loads(PLAIN)
    assert "# of the engine" in edited(text, shorter) and loads(edited(text, shorter)) == shorter != case


def test_studies_in_one_line_take_one_more() -> None:
    text = PLAIN.replace("format = 1\n", "format = 1\nstudy = { }\n").partition("[study.burner]")[0]
    made = loads(text).with_study("b", STUDY)
    assert loads(edited(text, made)) == made


@pytest.mark.parametrize(
    ("name", "change", "words"),
    [
        ("burner", {}, "study.burner: there is a study of this name"),
        ("a b", {}, "no name for a study"),
        ("", {}, "no name for a study"),
        ("n", {"outputs": ["push"]}, "unknown figure: given"),
        ("n", {"outputs": ["x.temperature"]}, "unknown figure: given"),
        ("n", {"vary": [{**HEAT, "input": "gas.model"}]}, "no number input"),
        ("n", {"vary": [{**HEAT, "input": "entry.mach"}]}, "no number input"),
        ("n", {"vary": [{**HEAT, "from": -0.5}]}, "equivalence ratio out of bounds: given -0.5"),
        ("n", {"vary": [{**PRESSURE, "to": "3 kg"}]}, "unknown unit kg"),
        ("n", {"vary": [{**HEAT, "points": 1}]}, "points: out of bounds"),
    ],
)
def test_what_is_no_study_is_refused_with_words(name: str, change: dict[str, Any], words: str) -> None:
    with pytest.raises(CaseError) as caught:
        loads(PLAIN).with_study(name, {**STUDY, **change})
    assert words in str(caught.value)


NAMES = st.text("abcXYZ019-_", min_size=1, max_size=12)


@settings(max_examples=40, deadline=None)
@given(st.dictionaries(NAMES, st.sampled_from([STUDY, {**STUDY, "vary": [HEAT]}, {**STUDY, "outputs": []}]), max_size=3), st.data())
def test_any_studies_come_back_from_the_text_and_any_of_them_can_go(studies: dict[str, Any], data: st.DataObject) -> None:
    case = plain = loads(PLAIN)
    for name, study in studies.items():
        case = case.with_study(name, study) if name not in case.studies else case
    text = edited(PLAIN, case)
    assert loads(text) == case
    fewer = plain
    for name in data.draw(st.lists(st.sampled_from(sorted(studies) or ["-"]), unique=True)):
        fewer = fewer.with_study(name, studies[name]) if name in studies else fewer
    assert loads(edited(text, fewer)) == fewer
