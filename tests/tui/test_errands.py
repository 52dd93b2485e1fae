"""Jobs one after the other: none lost, none after the line was cleared, one with the engine at a time."""

from __future__ import annotations

from hypothesis import given
from hypothesis import strategies as st

from tui.engine import Job, Result
from tui.errands import Errands


@given(st.lists(st.sampled_from(("ask", "give", "clear")), max_size=40))
def test_every_job_is_done_in_order_unless_the_line_was_cleared(steps: list[str]) -> None:
    sent: list[tuple[int, Job]] = []
    errands = Errands("any", lambda kind, number, job: sent.append((number, job)))
    wanted: list[int] = []
    got: list[int] = []
    given_back = asked = 0
    for step in steps:
        if step == "ask":
            errands.ask(lambda asked=asked: asked, lambda value, error: got.append(value))
            wanted.append(asked)
            asked += 1
        elif step == "clear":
            errands.clear()
            del wanted[len(got) :]
        elif given_back < len(sent):
            number, job = sent[given_back]
            given_back += 1
            errands.came(Result("any", number, job()))
        assert errands.waiting == len(wanted) - len(got)
    while given_back < len(sent):
        number, job = sent[given_back]
        given_back += 1
        errands.came(Result("any", number, job()))
    assert got == wanted
