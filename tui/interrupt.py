"""What an interrupt (Ctrl-C) does to the batch command: one line and exit status 130, at any moment."""

from __future__ import annotations

import os
import signal
import sys
from types import FrameType

STATUS = 130


def take() -> None:
    """From now on an interrupt ends the process; nothing happens where the shell has it ignored, as for a job in the background."""
    if signal.getsignal(signal.SIGINT) is signal.default_int_handler:
        signal.signal(signal.SIGINT, _end)


def release() -> None:
    """From now on an interrupt is an exception again, as the screen needs it to set the terminal back."""
    if signal.getsignal(signal.SIGINT) is _end:
        signal.signal(signal.SIGINT, signal.default_int_handler)


def _end(number: int, frame: FrameType | None) -> None:
    # an exception would be lost, or told in many lines, where it meets the import of a library; only what writes a file must clear up
    writers = sys.modules.get("cycle.atomic")
    while frame is not None and writers is not None:
        if frame.f_code.co_filename == writers.__file__ and frame.f_code.co_name != "<module>":
            raise KeyboardInterrupt
        frame = frame.f_back
    if sys.stderr is not None:
        os.write(2, b"interrupted\n")
    os._exit(STATUS)
