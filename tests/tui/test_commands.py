"""The batch command as a real process: exit statuses, streams, start-up."""

from __future__ import annotations

import json
import os
import pty
import signal
import subprocess
import sys
from pathlib import Path

import pytest

from tests.tui.command_support import CHOKED, COMMAND, QUICK, ROOT, environment, run, written

HEAVY = ("numpy", "scipy", "cantera", "pydantic", "tomlkit", "textual", "rich")


@pytest.mark.parametrize("argument", ["--help", "--version"])
def test_help_and_version_import_nothing_heavy(tmp_path: Path, argument: str) -> None:
    code = (
        "import sys\nfrom tui.commands import main\n"
        f"try:\n    main([{argument!r}])\nexcept SystemExit:\n    pass\n"
        f"print([m for m in {HEAVY!r} if m in sys.modules], file=sys.stderr)"
    )
    done = subprocess.run(
        [sys.executable, "-c", code], capture_output=True, text=True, env=environment(tmp_path), cwd=tmp_path, check=True, timeout=60
    )
    assert done.stderr.strip() == "[]"
    assert "ductwalk" in done.stdout


def test_a_solved_case_ends_with_0_and_is_plain_ascii_within_80_columns(tmp_path: Path) -> None:
    done = run(written(tmp_path, quick=QUICK), "solve", "quick.toml")
    assert (done.returncode, done.stderr) == (0, "")
    assert done.stdout.isascii()
    assert "\x1b" not in done.stdout
    assert max(map(len, done.stdout.splitlines())) <= 80


def test_bad_input_ends_with_2_and_says_file_and_key(tmp_path: Path) -> None:
    done = run(written(tmp_path, bad=QUICK.replace("mach = 8.0", "mach = -8.0")), "solve", "bad.toml")
    assert done.returncode == 2
    assert done.stdout == ""
    assert done.stderr.startswith("bad.toml: flight.mach: ")
    assert "Traceback" not in done.stderr


def test_no_solution_ends_with_3_and_says_why_and_what_restores_it(tmp_path: Path) -> None:
    done = run(written(tmp_path, choked=CHOKED), "solve", "choked.toml")
    assert done.returncode == 3
    assert "NO SOLUTION, choked: burner: " in done.stdout
    assert "largest" in done.stderr
    assert done.stderr.count("\n") == 1


def test_several_cases_end_with_the_highest_status_and_all_are_done(tmp_path: Path) -> None:
    done = run(written(tmp_path, a=QUICK, b=CHOKED), "solve", "a.toml", "missing.toml", "b.toml", "--format", "json")
    assert done.returncode == 3
    found = json.loads(done.stdout)
    assert [one["status"] for one in found] == ["solved", "bad-input", "choked"]
    assert "missing.toml" in found[1]["faults"][0]
    assert "missing.toml" in done.stderr


def test_a_dash_reads_standard_input(tmp_path: Path) -> None:
    done = run(tmp_path, "solve", "-", "--format", "json", text=QUICK)
    assert done.returncode == 0
    assert json.loads(done.stdout)["status"] == "solved"
    assert run(tmp_path, "check", "-", text="").returncode == 2


def test_a_setting_changes_the_case_and_replaces_its_group(tmp_path: Path) -> None:
    settings = ("--set", "flight.altitude=85 kft", "--set", "flight.mach=7")
    done = run(written(tmp_path, quick=QUICK), "solve", "quick.toml", *settings, "--format", "json")
    flight = json.loads(done.stdout)["case"]["flight"]
    assert flight["altitude"] == pytest.approx(85e3 * 0.3048, rel=1e-12)
    assert flight["mach"] == 7.0
    assert "dynamic_pressure" not in flight


def test_no_terminal_prints_the_walk_and_says_how_to_open_the_screen(tmp_path: Path) -> None:
    done = run(written(tmp_path, quick=QUICK), "quick.toml")
    assert done.returncode == 0
    assert "invented constant-gamma scramjet" in done.stdout
    assert done.stderr == "no screen here; to open it run 'ductwalk quick.toml' in a terminal (TERM other than dumb)\n"


def in_terminal(folder: Path, command: list[str], term: str) -> tuple[int, str]:
    """Exit status and output of a process whose three streams are a terminal."""
    main, other = pty.openpty()
    child = subprocess.Popen(command, stdin=other, stdout=other, stderr=other, cwd=folder, env=environment(folder, TERM=term))
    os.close(other)
    said = b""
    while True:
        try:
            piece = os.read(main, 4096)
        except OSError:  # the other end is closed
            break
        if not piece:
            break
        said += piece
    os.close(main)
    return child.wait(60), said.decode()


def test_a_dumb_terminal_gets_the_walk_as_text(tmp_path: Path) -> None:
    status, said = in_terminal(written(tmp_path, quick=QUICK), [*COMMAND, "quick.toml"], "dumb")
    assert status == 0
    assert "no screen here" in said
    assert "Stations" in said
    assert "\x1b" not in said


@pytest.mark.parametrize(("arguments", "path"), [(["quick.toml"], "quick.toml"), ([], str(ROOT / "cases" / "saltmarsh.toml"))])
def test_a_terminal_opens_the_screen_before_anything_heavy(tmp_path: Path, arguments: list[str], path: str) -> None:
    code = (
        "import sys, types\nscreen = types.ModuleType('tui.app')\n"
        f"screen.run = lambda path: print(path, [m for m in {HEAVY!r} if m in sys.modules]) or 0\n"
        f"sys.modules['tui.app'] = screen\nsys.argv = ['ductwalk', *{arguments!r}]\n"
        "from tui.commands import main\nsys.exit(main())"
    )
    status, said = in_terminal(written(tmp_path, quick=QUICK), [sys.executable, "-c", code], "xterm")
    assert (status, said.strip()) == (0, f"{path} []")


def test_no_color_changes_nothing_because_there_is_no_colour(tmp_path: Path) -> None:
    written(tmp_path, quick=QUICK)
    plain, bare = run(tmp_path, "solve", "quick.toml", NO_COLOR="1"), run(tmp_path, "solve", "quick.toml")
    assert plain.stdout == bare.stdout != ""


@pytest.mark.parametrize("closed", ["|false", ">&-"])
def test_nobody_reading_the_results_is_quiet(tmp_path: Path, closed: str) -> None:
    written(tmp_path, quick=QUICK)
    line = f"set -o pipefail; {' '.join(COMMAND)} solve quick.toml quick.toml {closed.replace('|', '| ')}"
    done = subprocess.run(
        ["bash", "-c", line], capture_output=True, text=True, cwd=tmp_path, env=environment(tmp_path), timeout=60, check=False
    )
    assert done.stderr == ""
    assert done.returncode == (1 if closed == "|false" else 0)  # 1 is the status of `false` itself


def test_a_full_disk_on_standard_output_is_one_line_and_2(tmp_path: Path) -> None:
    written(tmp_path, quick=QUICK)
    with open("/dev/full", "w") as full:
        done = subprocess.run(
            [*COMMAND, "solve", "quick.toml"],
            stdout=full,
            stderr=subprocess.PIPE,
            text=True,
            cwd=tmp_path,
            env=environment(tmp_path),
            timeout=60,
            check=False,
        )
    assert done.returncode == 2
    assert done.stderr == "standard output: cannot be written: no space left on device\n"


def test_an_interrupt_ends_with_130(tmp_path: Path) -> None:
    written(tmp_path, quick=QUICK)
    child = subprocess.Popen(
        [*COMMAND, "check", "quick.toml", "-"],
        stdin=subprocess.PIPE,
        stdout=subprocess.PIPE,
        stderr=subprocess.PIPE,
        text=True,
        cwd=tmp_path,
        env=environment(tmp_path),
        preexec_fn=lambda: signal.signal(signal.SIGINT, signal.SIG_DFL),  # a background job of a shell ignores it
    )
    assert child.stdout is not None
    assert child.stdout.readline() == "quick.toml: ok\n"  # from here on it waits for standard input
    child.send_signal(signal.SIGINT)
    _, said = child.communicate(timeout=60)
    assert (child.returncode, said) == (130, "interrupted\n")


def test_a_defect_leaves_a_crash_file_one_line_and_1(tmp_path: Path) -> None:
    code = (
        "import sys\nfrom tui import commands\n"
        "line, options, _ = commands.COMMANDS['check']\n"
        "commands.COMMANDS['check'] = (line, options, lambda given: 1 // 0)\n"
        "sys.argv = ['ductwalk', 'check', 'x.toml']\nsys.exit(commands.main())"
    )
    done = subprocess.run(
        [sys.executable, "-c", code], capture_output=True, text=True, env=environment(tmp_path), cwd=tmp_path, check=False, timeout=60
    )
    assert (done.returncode, done.stdout) == (1, "")
    assert done.stderr.startswith("ductwalk: internal error, a defect of the program (ZeroDivisionError); details are in ")
    assert done.stderr.count("\n") == 1
    (kept,) = (tmp_path / "state" / "ductwalk").glob("crash-*.txt")
    assert "Traceback" in kept.read_text() and "x.toml" in kept.read_text()
    kept.unlink()


def test_a_latin_locale_does_not_stop_a_title(tmp_path: Path) -> None:
    written(tmp_path, quick=QUICK.replace("invented", "r\u00e9acteur"))
    done = run(tmp_path, "solve", "quick.toml", PYTHONIOENCODING="ascii", LC_ALL="C")
    assert done.returncode == 0
    assert "acteur constant-gamma scramjet" in done.stdout


def test_a_batch_of_stored_walks_is_written_whole(tmp_path: Path) -> None:
    written(tmp_path, quick=QUICK)
    done = run(tmp_path, "solve", "quick.toml", "-o", "kept.json")
    assert done.returncode == 0
    assert done.stderr == "stored in kept.json\n"
    kept = json.loads((tmp_path / "kept.json").read_text())
    assert kept["case_text"] == QUICK
    assert kept["walk"]["status"] == "solved"
    assert sorted(p.name for p in tmp_path.iterdir()) == ["kept.json", "quick.toml"]
