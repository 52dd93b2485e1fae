"""The interactive screen in a real pseudo-terminal: bytes on the link, signals, sizes, colours, journal after a kill."""

from __future__ import annotations

import os
import re
import signal
import subprocess
import sys
import time
from pathlib import Path

import pytest

from tests.tui.pty_support import READY, ROOT, START, Terminal
from tests.tui.test_screen_parts import TEXT

LEFT = b"\x1b[?1049l"


def journals(env: dict[str, str]) -> list[Path]:
    return list((Path(env["XDG_STATE_HOME"]) / "ductwalk").glob("*.journal"))


def edit_mach(terminal: Terminal, value: str) -> None:
    terminal.press("tab", "enter")
    terminal.wait("Enter commits")
    terminal.press(*value, "enter")
    terminal.wait(lambda text: f"M {value}" in text.splitlines()[0])


def ended_without_reading(terminal: Terminal, limit: float) -> int:
    """Exit status of a program whose output nobody reads."""
    end = time.monotonic() + limit
    while terminal.process.isalive():
        assert time.monotonic() < end, "the program did not end"
        time.sleep(0.02)
    return int(terminal.process.exitstatus)


def test_start_edit_and_leave_with_work_kept(terminal: Terminal, env: dict[str, str], path: Path) -> None:
    assert "station" in terminal.text
    edit_mach(terminal, "6.5")
    terminal.press("q")
    assert terminal.status() == 0
    assert LEFT in terminal.raw
    assert b"Work is kept" in terminal.raw
    assert len(journals(env)) == 1
    assert path.read_text() == TEXT


def test_leaving_a_saved_case_leaves_no_journal(terminal: Terminal, env: dict[str, str], path: Path) -> None:
    edit_mach(terminal, "6.5")
    terminal.press("s")
    terminal.wait("saved")
    terminal.press("q")
    assert terminal.status() == 0
    assert journals(env) == []
    assert "mach = 6.5" in path.read_text()


@pytest.mark.parametrize(("number", "status"), [(signal.SIGHUP, 129), (signal.SIGTERM, 143)])
def test_signals_end_it_with_the_terminal_sane_and_the_work_kept(terminal: Terminal, env: dict[str, str], number: int, status: int) -> None:
    edit_mach(terminal, "6.5")
    terminal.process.kill(number)
    assert terminal.status() == status
    assert LEFT in terminal.raw
    assert len(journals(env)) == 1


def test_a_vanished_terminal_ends_it(terminal: Terminal, env: dict[str, str]) -> None:
    edit_mach(terminal, "6.5")
    terminal.process.fileobj.close()
    assert ended_without_reading(terminal, 6.0) == 129
    assert len(journals(env)) == 1


def test_a_stalled_link_does_not_keep_it_from_ending(path: Path, env: dict[str, str]) -> None:
    with Terminal([str(path)], env=env, columns=200, rows=60) as terminal:
        terminal.wait(READY)
        for _ in range(60):
            terminal.press("?", "q")
            time.sleep(0.01)
        used = cpu_seconds(terminal.process.pid)
        time.sleep(0.5)
        # a link that takes nothing must not be spun on: well under half of one core
        assert cpu_seconds(terminal.process.pid) - used < 0.25
        terminal.process.kill(signal.SIGTERM)
        assert ended_without_reading(terminal, 6.0) == 143


def cpu_seconds(pid: int) -> float:
    fields = Path(f"/proc/{pid}/stat").read_text().rsplit(")", 1)[1].split()
    return (int(fields[11]) + int(fields[12])) / os.sysconf("SC_CLK_TCK")


def test_screen_stands_with_standard_error_in_a_file(path: Path, env: dict[str, str], tmp_path: Path) -> None:
    log = tmp_path / "log"
    program = f"import os, sys; os.dup2(os.open({str(log)!r}, os.O_CREAT | os.O_WRONLY), 2); {START}"
    with Terminal([str(path)], env=env, program=program) as terminal:
        terminal.wait(READY)
        terminal.press("q")
        assert ended_without_reading(terminal, 6.0) == 0
    assert log.read_bytes() == b""


def test_suspend_to_the_shell_and_back(path: Path, env: dict[str, str]) -> None:
    program = f"import pty, sys, os; os.execvp('bash', ['bash', '--norc', '--noprofile', '-i'])  # {START}"
    with Terminal([], env={**env, "PS1": "shell$ "}, program=program) as terminal:
        terminal.wait("shell$")
        terminal.process.write(f"{sys.executable} -c '{START}' {path}\n".encode())
        terminal.wait(READY)
        terminal.press("tab", "+")
        terminal.wait("M 6.1")
        terminal.press("ctrl+z")
        terminal.wait("Stopped")
        assert len(journals(env)) == 1
        terminal.screen.reset()
        terminal.process.write(b"fg\n")
        terminal.wait(lambda text: READY in text and "M 6.1" in text)
        terminal.press("+")
        terminal.wait("M 6.2")
        terminal.press("q")
        terminal.wait("Work is kept")
        terminal.process.write(b"exit\n")
        assert terminal.status() == 0


def test_quick_shrink_and_growth_is_painted_whole(terminal: Terminal) -> None:
    before = terminal.text
    terminal.resize(20, 5)
    terminal.resize(80, 24)  # at once: the program finds the size it had before
    terminal.wait(lambda text: text == before)


def test_small_and_back(terminal: Terminal) -> None:
    before = terminal.text
    terminal.resize(20, 5)
    terminal.settle()
    terminal.press("right", "down", "tab", "+")
    terminal.settle()
    terminal.press("u", "tab", "up", "left")
    terminal.settle()
    terminal.resize(80, 24)
    terminal.wait(lambda text: READY in text and "potential" in text)
    terminal.press("t", "t")
    terminal.settle()
    same = [row for row in before.splitlines() if row.startswith(("Mach", "p, ", "T, ", "pt, "))]
    assert [row for row in terminal.text.splitlines() if row.startswith(("Mach", "p, ", "T, ", "pt, "))] == same


SGR = re.compile(rb"\x1b\[([0-9;]*)m")


def colours(raw: bytes) -> set[int]:
    """Numbers of all SGR sequences sent."""
    return {int(n) for match in SGR.finditer(raw) for n in match.group(1).split(b";") if n}


def test_no_colour_where_none_is_wanted(path: Path, env: dict[str, str]) -> None:
    with Terminal([str(path)], env={**env, "NO_COLOR": "1"}) as terminal:
        terminal.wait(READY)
        terminal.press("tab", "+", "w")
        terminal.settle()
        assert colours(bytes(terminal.raw)).isdisjoint({*range(30, 39), *range(40, 49), *range(90, 108)})
        assert 7 in colours(bytes(terminal.raw))  # the cursor is reverse video


def test_sixteen_colours_are_enough(path: Path, env: dict[str, str]) -> None:
    with Terminal([str(path)], env={**env, "TERM": "xterm"}) as terminal:
        terminal.wait(READY)
        terminal.press("w")
        terminal.settle()
        assert colours(bytes(terminal.raw)).isdisjoint({38, 48})


def test_work_is_offered_after_a_kill(path: Path, env: dict[str, str]) -> None:
    with Terminal([str(path)], env=env) as terminal:
        terminal.wait(READY)
        edit_mach(terminal, "6.5")
        terminal.process.kill(signal.SIGKILL)
        terminal.status()
    with Terminal([str(path)], env=env) as terminal:
        terminal.wait("Unsaved work found")
        terminal.press("r")
        terminal.wait("restored 1 edit;")
        terminal.wait("M 6.5")
        terminal.press("q")
        assert terminal.status() == 0
    assert len(journals(env)) == 1


def test_bytes_on_the_link(terminal: Terminal) -> None:
    # bars of the design at 80x24: 0 B/s idle, 1 kB a cursor move, 6 kB an edit
    assert terminal.pump(1.5) == 0
    moves = []
    for key in ("right", "right", "right", "right", "down", "down", "left"):
        terminal.press(key)
        moves.append(terminal.settle())
    assert max(moves) <= 1000, moves
    terminal.press("tab")
    terminal.settle()
    terminal.press("enter")
    opened = terminal.settle()
    terminal.press("\x15", *"0.006", "\r")
    assert opened + terminal.settle(0.5) <= 6000
    terminal.press("+")
    assert terminal.settle(0.5) <= 6000


def test_first_paint_comes_before_the_model(path: Path, env: dict[str, str], tmp_path: Path) -> None:
    told = tmp_path / "modules"
    program = (
        "import sys\nfrom tui.screens.main import MainScreen\n"
        f"MainScreen._start = lambda self: (open({str(told)!r}, 'w').write(chr(10).join(sys.modules)), self.app.exit())\n"
        "import tui.app\ntui.app.run(sys.argv[1])\n"
    )
    with Terminal([str(path)], env=env, program=program) as terminal:
        terminal.settle(0.5)
        terminal.status()
        assert b"station" in terminal.raw
    loaded = set(told.read_text().split())
    assert "tui.screens.main" in loaded
    assert loaded.isdisjoint({"numpy", "scipy", "cantera", "pydantic", "tomlkit", "cycle.result", "cycle.case"})


def test_the_model_does_not_know_the_terminal() -> None:
    code = "import sys, cycle; cycle.solve; print([m for m in sys.modules if m.split('.')[0] in ('tui', 'textual', 'rich')])"
    done = subprocess.run([sys.executable, "-c", code], cwd=ROOT, capture_output=True, text=True, check=True)
    assert done.stdout.strip() == "[]"


def test_another_case_is_opened_and_work_is_offered_on_return(terminal: Terminal, env: dict[str, str], path: Path) -> None:
    (path.parent / "other.toml").write_text(TEXT.replace("mach = 6.0", "mach = 7.0"))
    edit_mach(terminal, "6.5")
    terminal.press("b")
    terminal.wait(lambda text: "other.toml" in text and "case.toml" in text)
    terminal.press("down", "enter")
    terminal.wait(lambda text: "M 7" in text.splitlines()[0])
    assert len(journals(env)) == 1
    terminal.press("b")
    terminal.wait(lambda text: "> other.toml" in text and " *case.toml" in text)
    terminal.press("up", "enter")
    terminal.wait("Unsaved work found")
    terminal.press("r")
    terminal.wait(lambda text: "M 6.5" in text.splitlines()[0])
    terminal.press("q")
    assert terminal.status() == 0
    assert len(journals(env)) == 1
