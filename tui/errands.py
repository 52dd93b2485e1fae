"""Jobs of one kind, done one after the other, none of them dropped."""

from __future__ import annotations

from collections import deque
from collections.abc import Callable
from typing import Any

from tui.engine import Job, Result

Then = Callable[[Any, BaseException | None], None]
"""Takes what a job gave, or the error that kept it from giving anything."""


class Errands:
    """A line of jobs; only the first one is with the engine, so that an edit's solve always goes between two of them.

    Parameters: kind, a kind used by nobody else; send, `Engine.newest` with one of `engine.SECOND` for jobs that may wait, `Engine.do`
    for those that change something.
    """

    def __init__(self, kind: str, send: Callable[[str, int, Job], None]) -> None:
        self._send_job, self._kind, self._number = send, kind, 0
        self._waiting: deque[tuple[Job, Then]] = deque()

    @property
    def waiting(self) -> int:
        """How many are not done yet."""
        return len(self._waiting)

    def ask(self, job: Job, then: Then) -> None:
        """Put a job at the end of the line; `then` is called in the thread that gives results to `came`."""
        self._waiting.append((job, then))
        if len(self._waiting) == 1:
            self._send()

    def _send(self) -> None:
        self._number += 1
        self._send_job(self._kind, self._number, self._waiting[0][0])

    def came(self, result: Result) -> None:
        """Take a result; one that was asked for before the line was cleared is dropped."""
        if result.generation != self._number or not self._waiting:
            return
        _, then = self._waiting.popleft()
        if self._waiting:
            self._send()
        then(result.value, result.error)

    def clear(self) -> None:
        """Forget all that is asked for."""
        self._waiting.clear()
        self._number += 1
