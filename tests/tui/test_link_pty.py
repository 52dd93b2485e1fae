"""The links, terminals and machines that users have: dropped and stalled links, storms of sizes, tmux, full and read-only disks."""

from __future__ import annotations

import os
import random
import shutil
import subprocess
import sys
import time
from pathlib import Path

import pytest

from tests.tui.pty_support import READY, ROOT, START, Terminal
from tests.tui.test_screen_parts import TEXT
from tests.tui.test_screen_pty import cpu_seconds, ended_without_reading, journals

COMMAND = "import sys; from tui.commands import main; sys.exit(main(sys.argv[1:]))"


def stall(terminal: Terminal) -> None:
    """Nobody reads any more: paint whole screens until the pipe is full."""
    for _ in range(15):
        terminal.press("?", "q")
        time.sleep(0.005)
    time.sleep(0.3)


def test_a_link_that_stalls_and_drops_loses_no_edit(path: Path, env: dict[str, str]) -> None:
    with Terminal([str(path)], env=env, columns=200, rows=60) as terminal:
        terminal.wait(READY)
        terminal.press("tab", "+", "+", "+")
        terminal.wait("M 6.3")
        stall(terminal)
        terminal.process.fileobj.close()
        assert ended_without_reading(terminal, 6.0) == 129
    with Terminal([str(path)], env=env) as again:
        again.wait("left 3 edits of this case")
        again.press("r")
        again.wait("M 6.3")


def test_what_is_typed_into_a_stalled_link_is_there_when_it_runs_again(path: Path, env: dict[str, str]) -> None:
    with Terminal([str(path)], env=env, columns=200, rows=60) as terminal:
        terminal.wait(READY)
        terminal.press("tab")
        stall(terminal)
        terminal.press("+", "+")
        used = cpu_seconds(terminal.process.pid)
        time.sleep(0.5)
        assert cpu_seconds(terminal.process.pid) - used < 0.25
        terminal.wait("M 6.2")


def test_a_storm_of_sizes_ends_in_the_screen_of_the_last_one(terminal: Terminal, path: Path, env: dict[str, str]) -> None:
    before = terminal.text
    draw = random.Random(7)
    terminal.press("tab")
    for at in range(60):
        terminal.resize(draw.randint(2, 200), draw.randint(1, 60))
        if at % 6 == 0:
            terminal.press(draw.choice(("+", "right", "left", "down", "up")))
        terminal.pump(0.02)
    terminal.press(*["u"] * 10, "tab", *["left"] * 6, *["up"] * 9)
    terminal.resize(80, 24)
    terminal.settle(0.6)
    terminal.press("ctrl+l")
    terminal.settle(0.6)
    rows = [row for row in before.splitlines() if row.startswith(("Mach", "p, ", "T, ", "pt, "))]
    assert [row for row in terminal.text.splitlines() if row.startswith(("Mach", "p, ", "T, ", "pt, "))] == rows


def test_a_size_is_taken_where_a_timer_of_the_library_never_comes(path: Path, env: dict[str, str]) -> None:
    """As on a busy machine: its one-shot timers skip a call that comes late."""
    never = "from textual.app import App\nfrom tui.app import DuctwalkApp\nset_timer = App.set_timer\n"
    never += "DuctwalkApp.set_timer = lambda self, delay, *given, **named: set_timer(self, 1e6)\n"
    with Terminal([str(path)], env=env, program=f"{never}{START}") as terminal:
        terminal.wait(READY)
        for columns, rows in ((120, 40), (60, 20), (120, 40)):
            terminal.resize(columns, rows)
            terminal.wait(lambda text, wide=columns: ("limits by margin" in text) == (wide == 120))


def test_a_dumb_terminal_gets_the_walk_as_text(path: Path, env: dict[str, str]) -> None:
    with Terminal([str(path)], env={**env, "TERM": "dumb"}, program=COMMAND) as terminal:
        assert terminal.status(20.0) == 0
        assert b"\x1b" not in terminal.raw
        assert b"to open it run" in terminal.raw
        assert b"specific impulse" in terminal.raw.lower()


@pytest.mark.skipif(shutil.which("tmux") is None, reason="tmux is not installed here")
def test_inside_tmux_detached_and_attached_again(path: Path, tmp_path: Path, env: dict[str, str]) -> None:
    socket = tmp_path / "tmux"
    own = {**os.environ, **env, "PYTHONPATH": str(ROOT), "TERM": "xterm-256color"}

    def tmux(*arguments: str) -> str:
        return subprocess.run(["tmux", "-S", str(socket), *arguments], env=own, capture_output=True, text=True, check=True).stdout

    def shows(text: str) -> None:
        end = time.monotonic() + 20.0
        while text not in (seen := tmux("capture-pane", "-p", "-t", "duct")):
            assert time.monotonic() < end, seen
            time.sleep(0.1)

    program = tmp_path / "start.py"
    program.write_text(START)
    tmux("-f", "/dev/null", "new-session", "-d", "-s", "duct", "-x", "80", "-y", "24", f"{sys.executable} {program} {path}; sleep 9")
    try:
        shows(READY)
        tmux("send-keys", "-t", "duct", "Tab", "+")
        shows("M 6.1")
        tmux("resize-window", "-t", "duct", "-x", "120", "-y", "40")
        shows("limits by margin")
        tmux("send-keys", "-t", "duct", "q")
        shows("Work is kept")
    finally:
        tmux("kill-server")
    assert len(journals(env)) == 1


def test_without_a_home_folder_edits_live_in_the_session_and_it_says_so(path: Path) -> None:
    program = f"import os\nos.environ.pop('XDG_STATE_HOME', None)\n{START}"
    with Terminal([str(path)], env={"HOME": "/dev/null/nowhere"}, program=program) as terminal:
        terminal.wait(READY)
        terminal.press("tab", "+")
        terminal.wait("edits are not kept on disk")
        terminal.wait("M 6.1")
        terminal.press("q")
        terminal.wait("leave and lose them")
        terminal.press("s")
        terminal.wait("thrust")
        terminal.press("s")
        terminal.wait("saved")
        terminal.press("q")
        assert terminal.status() == 0
    assert "mach = 6.1" in path.read_text()


def mounted(command: str, folder: Path) -> str:
    """A program that runs the screen in a mount namespace of its own, after a mount command in `folder`."""
    shell = f"{command} && cd {ROOT} && exec {sys.executable} -c '{START}' \"$0\""
    return f"import os, sys; os.chdir({str(folder)!r}); os.execvp('unshare', ['unshare', '-rm', 'sh', '-c', {shell!r}, sys.argv[1]])"


def can_mount() -> bool:
    """Whether this machine lets a program mount in a namespace of its own."""
    tool = shutil.which("unshare")
    return tool is not None and subprocess.run([tool, "-rm", "mount", "-t", "tmpfs", "none", "/mnt"], capture_output=True).returncode == 0


needs_mounts = pytest.mark.skipif(not can_mount(), reason="no mount namespaces here")


@needs_mounts
def test_a_full_disk_is_told_and_the_file_stays_whole(tmp_path: Path, env: dict[str, str]) -> None:
    folder = tmp_path / "full"
    folder.mkdir()
    fill = (
        f"mount -t tmpfs -o size=16k none {folder} && cp case.toml {folder} && mkdir {folder}/state"
        f" && (head -c 65536 /dev/zero > {folder}/filler; true)"
    )
    (tmp_path / "case.toml").write_text(TEXT)
    with Terminal([str(folder / "case.toml")], env={"XDG_STATE_HOME": str(folder / "state")}, program=mounted(fill, tmp_path)) as terminal:
        terminal.wait(READY)
        terminal.press("tab", "+")
        terminal.wait("M 6.1")
        terminal.wait(lambda text: "edits are not kept on disk: No space left" in text)
        terminal.press("s")
        terminal.wait(lambda text: "cannot be written: no space left" in text)
        terminal.press("q")
        terminal.wait("leave and lose them")
        terminal.press("l")
        assert terminal.status() == 0


@needs_mounts
def test_a_read_only_folder_is_told_and_another_name_saves_the_work(tmp_path: Path, path: Path, env: dict[str, str]) -> None:
    folder = tmp_path / "kept"
    folder.mkdir()
    (folder / "case.toml").write_text(TEXT)
    mount = f"mount --bind {folder} {folder} && mount -o remount,ro,bind {folder}"
    with Terminal([str(folder / "case.toml")], env=env, program=mounted(mount, tmp_path)) as terminal:
        terminal.wait(READY)
        terminal.press("tab", "+")
        terminal.wait("M 6.1")
        terminal.press("s")
        terminal.wait("cannot be written: read-only file system")
        assert len(journals(env)) == 1
        terminal.press("S")
        terminal.wait("name of a new file")
        terminal.press("\x15", str(tmp_path / "other.toml"), "enter")
        terminal.wait("saved")
        terminal.press("q")
        assert terminal.status() == 0
    assert "mach = 6.1" in (tmp_path / "other.toml").read_text()
    assert (folder / "case.toml").read_text() == TEXT
