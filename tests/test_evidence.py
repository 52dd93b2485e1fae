from __future__ import annotations

import pytest

from cycle import evidence
from tests.evidence_support import assert_met


def test_every_check_has_a_class_a_source_and_something_to_meet() -> None:
    everything = evidence.checks()
    assert len({check.id for check in everything}) == len(everything)
    for check in everything:
        assert check.founded in evidence.CLASSES
        assert check.source
        assert check.expected
        assert all(expected.tolerance > 0.0 for expected in check.expected.values())


def test_counts_add_up_by_topic_and_class() -> None:
    topics = {check.topic for check in evidence.checks()}
    assert topics == {"a", "a2", "b", "c", "d", "e", "f", "g", "h", "i"}
    for name, count in evidence.counts().items():
        assert count == sum(evidence.counts(topic)[name] for topic in topics)
    assert sum(evidence.counts().values()) == len(evidence.checks())


def test_nothing_that_only_memory_holds_is_classed_higher() -> None:
    for check in evidence.checks():
        if any("memory only" in word for word in check.how_verified):
            assert check.founded == "memory", check.id
        if check.founded == "read":
            assert "read in a copy of the source" in check.how_verified, check.id


def test_an_unknown_topic_is_named_in_the_error() -> None:
    with pytest.raises(ValueError, match=r"no evidence on topic 'z'; topics: a2?, "):
        evidence.checks("z")


def test_a_value_off_by_more_than_its_tolerance_fails() -> None:
    check = evidence.checks("c")[0]
    computed = {key: expected.value for key, expected in check.expected.items()}
    assert_met(check, computed)
    with pytest.raises(AssertionError, match="NOAA-S/T 76-1562"):
        assert_met(check, computed | {"T": computed["T"] + 2.0 * check.expected["T"].tolerance})
    with pytest.raises(AssertionError, match="nothing computed"):
        assert_met(check, {"T": computed["T"]})
