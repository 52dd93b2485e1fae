"""What the tests of the screen stand on: a state directory of their own; a case in a file, and the program on it in a terminal."""

from __future__ import annotations

from collections.abc import Iterator
from pathlib import Path

import pytest

from tests.tui.pty_support import READY, Terminal
from tests.tui.test_screen_parts import TEXT
from tui import crash


@pytest.fixture(autouse=True)
def state(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Iterator[Path]:
    """Where the program keeps its journals in this test. A defect that the screen told, and that the test did not make, fails it."""
    monkeypatch.setenv("XDG_STATE_HOME", str(tmp_path / "state"))
    monkeypatch.setattr(crash, "_written", {})
    folder = tmp_path / "state" / "ductwalk"
    yield folder
    assert [file.read_text() for file in folder.glob("crash-*.txt")] == []


@pytest.fixture
def path(tmp_path: Path) -> Path:
    """A case in a file."""
    file = tmp_path / "case.toml"
    file.write_text(TEXT)
    return file


@pytest.fixture
def env(tmp_path: Path) -> dict[str, str]:
    """Environment of a program in a terminal."""
    return {"XDG_STATE_HOME": str(tmp_path / "state")}


@pytest.fixture
def terminal(path: Path, env: dict[str, str]) -> Iterator[Terminal]:
    """The program on the case in a terminal, its first walk there."""
    with Terminal([str(path)], env=env) as opened:
        opened.wait(READY)
        opened.settle()
        yield opened
