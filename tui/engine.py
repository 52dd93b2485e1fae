"""The threads that compute: one for what an edit asks for, one for the second pass, which must not hold an edit up.

The first lane takes the newest solve, drops older ones, and does the other jobs in order. The second takes what costs more
than a walk (limits, the borders of a duct's regimes), and begins only while the first has nothing to do. The model (`cycle`
and numpy) is imported in the first lane, after the first paint. No thread touches a widget: they hand frozen results to
`post`, which must be safe to call from a thread.
"""

from __future__ import annotations

import threading
from collections import deque
from collections.abc import Callable
from dataclasses import dataclass
from typing import Any

Job = Callable[[], Any]

QUICK = ("solve",)
SECOND = ("influence", "assess", "explain", "peek", "borders", "shares", "limit", "beside", "folder")
"""Kinds of which only the newest job counts, in the order they are taken up: those of the first and of the second lane. Sensitivities go
ahead of limits: in a duct they cost several times as much, and both are to be there within half a second."""


@dataclass(frozen=True, slots=True)
class Result:
    """What a job gave. kind: the name it was asked under; generation: that of the request; value: the job's return
    value, or None where `error` says why there is none."""

    kind: str
    generation: int
    value: Any = None
    error: BaseException | None = None


class Engine:
    """Two worker threads with one place for the newest job of each kind that may be dropped, and a queue for the others.

    Parameters: post, called in a worker with each `Result`.
    """

    def __init__(self, post: Callable[[Result], object]) -> None:
        self._post = post
        self._change = threading.Condition()
        self._newest: dict[str, tuple[int, Job] | None] = dict.fromkeys((*QUICK, *SECOND))
        self._queue: deque[tuple[str, int, Job]] = deque()
        self._busy = False
        takers = {"engine": self._next_quick, "second pass": self._next_second}
        self._threads = [threading.Thread(target=self._run, args=(take,), name=name, daemon=True) for name, take in takers.items()]

    def start(self) -> None:
        """Start the threads; call it after the first paint."""
        for thread in self._threads:
            thread.start()

    def newest(self, kind: str, generation: int, job: Job) -> None:
        """Ask for a job of a kind in `QUICK` or `SECOND`; one of that kind that waits and has not begun is replaced."""
        with self._change:
            self._newest[kind] = (generation, job)
            self._change.notify_all()

    def do(self, kind: str, generation: int, job: Job) -> None:
        """Ask for a job that is never dropped; jobs run in the order asked, before those that may be dropped."""
        with self._change:
            self._queue.append((kind, generation, job))
            self._change.notify_all()

    def _waiting(self, kinds: tuple[str, ...]) -> str | None:
        return next((kind for kind in kinds if self._newest[kind] is not None), None)

    def _taken(self, kinds: tuple[str, ...]) -> tuple[str, int, Job]:
        kind = self._waiting(kinds)
        assert kind is not None
        job = self._newest[kind]
        assert job is not None
        self._newest[kind] = None
        return kind, *job

    def _next_quick(self) -> tuple[str, int, Job]:
        with self._change:
            self._busy = False
            self._change.notify_all()
            self._change.wait_for(lambda: self._queue or self._waiting(QUICK))
            self._busy = True
            return self._queue.popleft() if self._queue else self._taken(QUICK)

    def _next_second(self) -> tuple[str, int, Job]:
        with self._change:
            self._change.wait_for(lambda: not (self._busy or self._queue or self._waiting(QUICK)) and self._waiting(SECOND))
            return self._taken(SECOND)

    def _run(self, take: Callable[[], tuple[str, int, Job]]) -> None:
        while True:
            kind, generation, job = take()
            self._post(self._outcome(kind, generation, job))

    @staticmethod
    def _outcome(kind: str, generation: int, job: Job) -> Result:
        # Whatever a job raises is carried to the thread that owns the screen, which knows the expected errors and
        # raises the others there; a dead worker would look like a screen that never answers.
        try:
            return Result(kind, generation, job())
        except BaseException as error:
            return Result(kind, generation, error=error)
