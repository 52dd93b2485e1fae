"""Ends that nobody asked for: a hang-up, a termination signal, a link that is gone or stalled.

The journal is on disk at every moment, so nothing is left to save; what matters is to end, soon, with the terminal
sane where it still exists.
"""

from __future__ import annotations

import asyncio
import os
import select
import signal
import sys
import termios
import threading
from collections.abc import Callable
from types import FrameType
from typing import Any

PATIENCE = 3.0
"""Seconds that an orderly end may take before the process is ended without it."""

CODES = {signal.SIGHUP: 129, signal.SIGINT: 130, signal.SIGTERM: 143}
RESET = b"\x1b[?1000l\x1b[?1003l\x1b[?1004l\x1b[?2004l\x1b[<u\x1b[?7h\x1b[?1049l\x1b[?25h"
"""Mouse, focus reports, bracketed paste and key protocol off, line wrap on, main screen, cursor shown."""


def guard(leave: Callable[[int], object], attributes: list[Any] | None) -> None:
    """Install the handlers. Call it in the main thread with the event loop running.

    Parameters: leave, ends the program in order with an exit status; attributes, the terminal's settings from before
    (`termios.tcgetattr`), None where there is no terminal.
    """
    loop = asyncio.get_running_loop()

    def handler(number: int, _frame: FrameType | None) -> None:
        code = CODES[signal.Signals(number)]
        watchdog = threading.Timer(PATIENCE, _end, [code, attributes])
        watchdog.daemon = True
        watchdog.start()
        loop.call_soon_threadsafe(leave, code)

    for number in CODES:
        signal.signal(number, handler)
    stdin = sys.__stdin__
    if stdin is not None and stdin.isatty():
        watcher = threading.Thread(target=_watch, args=(stdin.fileno(),), name="hang-up", daemon=True)
        watcher.start()


def _watch(terminal: int) -> None:
    """End the process when the terminal is gone: reading it would return at once, for ever."""
    poll = select.poll()
    poll.register(terminal, 0)  # hang-up and error are always reported; input is not asked for
    poll.poll()
    os._exit(CODES[signal.SIGHUP])


def _end(code: int, attributes: list[Any] | None) -> None:
    """End the process at once, the terminal set back as far as it takes it without waiting."""
    try:
        terminal = os.open("/dev/tty", os.O_WRONLY | os.O_NONBLOCK | os.O_NOCTTY)
        os.write(terminal, RESET)
        if attributes is not None:
            termios.tcsetattr(terminal, termios.TCSANOW, attributes)
    except (OSError, termios.error):
        pass  # no terminal is left to set back
    os._exit(code)
