"""What the terminal sends, judged before the library reads it: bytes that are no text and sequences that are no key are dropped.

The library's reader takes numbers of any size in a report, types what it does not know as keys, and never leaves a paste that
has no end; one byte that is no text ends it.
"""

from __future__ import annotations

import os
import re
import select
from codecs import getincrementaldecoder
from collections.abc import Iterable, Iterator
from itertools import chain

from textual import events
from textual._xterm_parser import XTermParser
from textual.drivers.linux_driver import LinuxDriver
from textual.message import Message
from textual.messages import InBandWindowResize

LONGEST = 32
"""Characters of a sequence that the library's reader takes."""

MOST_PASTED = 1 << 16
"""Characters of one paste that are taken."""

PATIENCE = 3.0
"""Seconds of silence after which a paste without an end is over."""

TICK = 0.1
"""Seconds between two looks at what waits."""

_PASTE, _PASTED = "\x1b[200~", "\x1b[201~"
_STRING = r"\x1b[]P^_X][^\x1b\x07]*"
_WHOLE = re.compile(rf"\x1b\[[0-?]*[ -/]*[@-~]|{_STRING}(?:\x07|\x1b\\)")
_BEGUN = re.compile(rf"\x1b\[[0-?]*[ -/]*\Z|{_STRING}\x1b?\Z")
_CUT = re.compile(rf"\x1b\[[0-?]*[ -/]*|{_STRING}")
_SIZES = (events.Resize, InBandWindowResize)
"""Reports of a size, and of whether there will be some. The kernel tells the size; a terminal could tell any."""


class Sieve:
    """Takes text as it comes from the terminal and gives the pieces that the library's reader can take, in order."""

    def __init__(self) -> None:
        self._held = ""
        self._pasted = -1
        self._silence = 0.0

    def take(self, text: str) -> Iterator[str]:
        """Pieces of a text, none of them empty; a sequence that is not whole yet is held back."""
        self._silence = 0.0
        text, at = self._held + text, 0
        self._held = ""
        while (start := text.find("\x1b", at)) >= 0:
            yield from self._plain(text[at:start])
            if (whole := _WHOLE.match(text, start)) is not None:
                yield from self._sequence(whole)
                at = whole.end()
            elif _BEGUN.match(text, start):
                self._hold(text[start:])
                return
            else:
                cut = _CUT.match(text, start)
                at = cut.end() if cut is not None else start + 1
                if cut is None and self._pasted < 0:
                    yield "\x1b"
        yield from self._plain(text[at:])

    def waited(self, seconds: float) -> Iterator[str]:
        """Pieces that are due when nothing has come for some seconds more: a key with alt, the end of a paste that has none."""
        self._silence += seconds
        if len(self._held) == len("\x1b[") and self._pasted < 0:
            yield self._held
            self._held = ""
        elif self._held[1:2] != "[":
            self._held = ""
        if self._pasted >= 0 and self._silence >= PATIENCE:
            self._pasted = -1
            yield _PASTED

    def _hold(self, text: str) -> None:
        """Keep the beginning of a sequence; of one that is too long, that it is."""
        end = "\x1b" if text.endswith("\x1b") else ""
        self._held = text if len(text) <= LONGEST else text[:2] + "0" * LONGEST + end

    def _plain(self, text: str) -> Iterator[str]:
        if self._pasted >= 0:
            text = text[: MOST_PASTED - self._pasted]
            self._pasted += len(text)
        if text:
            yield text

    def _sequence(self, found: re.Match[str]) -> Iterator[str]:
        if found[0] == _PASTE and self._pasted < 0:
            self._pasted = 0
            yield _PASTE
        elif found[0] == _PASTED and self._pasted >= 0:
            self._pasted = -1
            yield _PASTED
        elif self._pasted < 0 and found[0][1] == "[" and len(found[0]) <= LONGEST:
            yield found[0]


class TerminalDriver(LinuxDriver):
    """The library's driver with its input judged first."""

    def _run_input_thread(self) -> None:
        try:
            self.run_input_thread()
        except BaseException as error:
            # the thread that reads cannot end the program itself
            self._app.call_later(self._app._handle_exception, error)

    def run_input_thread(self) -> None:
        """Read until the driver is told to stop."""
        sieve, decode = Sieve(), getincrementaldecoder("utf-8")("ignore").decode
        self._reader = XTermParser()
        while not self.exit_event.is_set():
            there = select.select([self.fileno], [], [], TICK)[0]
            pieces = sieve.take(decode(os.read(self.fileno, 4096))) if there else sieve.waited(TICK)
            for character in chain.from_iterable(pieces):
                self._hand_on(self._reader.feed(character))
            self._hand_on(self._reader.tick())

    def _hand_on(self, found: Iterable[Message]) -> None:
        """Hand on what the library's reader makes of a character; what it stumbles on is dropped, and a new reader goes on."""
        try:
            messages = list(found)
        except Exception:
            messages, self._reader = [], XTermParser()
        for message in messages:
            if isinstance(message, _SIZES):
                self._reader = XTermParser()  # from here on this one would scale the places of the mouse
            else:
                self.process_message(message)
