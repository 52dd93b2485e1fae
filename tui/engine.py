"""The one thread that computes. It takes the newest solve, drops older ones, and does the other jobs in order.

The model (`cycle` and numpy) is imported in this thread, after the first paint. The thread never touches a widget: it
hands frozen results to `post`, which must be safe to call from a thread.
"""

from __future__ import annotations

import threading
from collections import deque
from collections.abc import Callable
from dataclasses import dataclass
from typing import Any

Job = Callable[[], Any]

DROPPED = ("solve", "assess")
"""Kinds of which only the newest job counts, in the order they are taken up."""


@dataclass(frozen=True, slots=True)
class Result:
    """What a job gave. kind: the name it was asked under; generation: that of the request; value: the job's return
    value, or None where `error` says why there is none."""

    kind: str
    generation: int
    value: Any = None
    error: BaseException | None = None


class Engine:
    """A worker thread with one place for the newest job of each kind that may be dropped, and a queue for the others.

    Parameters: post, called in the worker with each `Result`.
    """

    def __init__(self, post: Callable[[Result], object]) -> None:
        self._post = post
        self._change = threading.Condition()
        self._newest: dict[str, tuple[int, Job] | None] = dict.fromkeys(DROPPED)
        self._queue: deque[tuple[str, int, Job]] = deque()
        self._thread = threading.Thread(target=self._run, name="engine", daemon=True)

    def start(self) -> None:
        """Start the thread; call it after the first paint."""
        self._thread.start()

    def newest(self, kind: str, generation: int, job: Job) -> None:
        """Ask for a job of a kind in `DROPPED`; one of that kind that waits and has not begun is replaced."""
        with self._change:
            self._newest[kind] = (generation, job)
            self._change.notify()

    def do(self, kind: str, generation: int, job: Job) -> None:
        """Ask for a job that is never dropped; jobs run in the order asked, before those that may be dropped."""
        with self._change:
            self._queue.append((kind, generation, job))
            self._change.notify()

    def _waiting(self) -> str | None:
        return next((kind for kind in DROPPED if self._newest[kind] is not None), None)

    def _next(self) -> tuple[str, int, Job]:
        with self._change:
            self._change.wait_for(lambda: self._queue or self._waiting())
            if self._queue:
                return self._queue.popleft()
            kind = self._waiting()
            assert kind is not None
            job = self._newest[kind]
            assert job is not None
            self._newest[kind] = None
            return kind, *job

    def _run(self) -> None:
        while True:
            kind, generation, job = self._next()
            self._post(self._outcome(kind, generation, job))

    @staticmethod
    def _outcome(kind: str, generation: int, job: Job) -> Result:
        # Whatever a job raises is carried to the thread that owns the screen, which knows the expected errors and
        # raises the others there; a dead worker would look like a screen that never answers.
        try:
            return Result(kind, generation, job())
        except BaseException as error:
            return Result(kind, generation, error=error)
