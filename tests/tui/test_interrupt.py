"""An interrupt sent to a real process at moments of its imports, its solving and its writing."""

from __future__ import annotations

import random
import signal
import subprocess
import sys
import time
from pathlib import Path

from tests.tui.command_support import HOT, environment, run, written

# the mark says that the program has hold of the process; how long an interpreter takes to get there is not its doing
CODE = "from tui import interrupt\ninterrupt.take()\nprint(flush=True)\nimport sys\nfrom tui.__main__ import main\nsys.exit(main())"


def interrupted(folder: Path, delay: float, *arguments: str) -> tuple[int, str]:
    """Exit status and standard error of the command, interrupted `delay` seconds after it has begun."""
    child = subprocess.Popen(
        [sys.executable, "-W", "error", "-c", CODE, *arguments],
        stdin=subprocess.DEVNULL,
        stdout=subprocess.PIPE,
        stderr=subprocess.PIPE,
        text=True,
        cwd=folder,
        env=environment(folder),
        preexec_fn=lambda: signal.signal(signal.SIGINT, signal.default_int_handler),  # a background job of a shell ignores it
    )
    assert child.stdout is not None
    child.stdout.readline()
    time.sleep(delay)
    child.send_signal(signal.SIGINT)
    _, said = child.communicate(timeout=60)
    return child.returncode, said


def delay(rng: random.Random) -> float:
    """Seconds: half of them below 0.1, while the program's own parts are imported."""
    return 0.8 * rng.random() ** 3


def trial(folder: Path, after: float) -> bool:
    """Whether the command was interrupted, with one line and nothing left behind; the only other end is that of its work."""
    kept = folder / "hot.json"
    status, said = interrupted(folder, after, "solve", "hot.toml", "--referee", "--sensitivities", "-o", kept.name)
    assert (status, said) in ((130, "interrupted\n"), (0, "stored in hot.json\n")), (after, status, said)
    assert {p.name for p in folder.iterdir()} <= {"hot.toml", "hot.json", "state"}
    return status == 130


def test_an_interrupt_at_any_moment_is_one_line_and_130(tmp_path: Path) -> None:
    written(tmp_path, hot=HOT)
    rng = random.Random(9)
    assert sum(trial(tmp_path, delay(rng)) for _ in range(8)) >= 4


def test_a_job_in_the_background_is_not_interrupted(tmp_path: Path) -> None:
    written(tmp_path, hot=HOT)
    code = f"import signal\nsignal.signal(signal.SIGINT, signal.SIG_IGN)\n{CODE}"
    child = subprocess.Popen(
        [sys.executable, "-c", code, "check", "hot.toml"], stdout=subprocess.PIPE, text=True, cwd=tmp_path, env=environment(tmp_path)
    )
    assert child.stdout is not None
    child.stdout.readline()
    child.send_signal(signal.SIGINT)
    assert (child.communicate(timeout=60)[0], child.returncode) == ("hot.toml: ok\n", 0)


def test_an_interrupt_while_a_file_is_written_leaves_nothing_of_it(tmp_path: Path) -> None:
    """The write raises as the handler does there: what was begun is taken away and the old file stands."""
    written(tmp_path, hot=HOT)
    code = (
        "import os, signal, sys\nsignal.signal(signal.SIGINT, signal.default_int_handler)  # a background job of a shell ignores it\n"
        "from tui import interrupt\ninterrupt.take()\n"
        "os.fsync = lambda handle: signal.raise_signal(signal.SIGINT)\n"
        "from tui.__main__ import main\nsys.exit(main())"
    )
    (tmp_path / "hot.json").write_text("{}")
    done = subprocess.run(
        [sys.executable, "-c", code, "solve", "hot.toml", "-o", "hot.json"], capture_output=True, text=True, cwd=tmp_path,
        env=environment(tmp_path), check=False, timeout=60,
    )  # fmt: skip
    assert (done.returncode, done.stderr) == (130, "interrupted\n")
    assert (tmp_path / "hot.json").read_text() == "{}" and {p.name for p in tmp_path.iterdir()} == {"hot.toml", "hot.json"}


def test_the_program_runs_as_a_module(tmp_path: Path) -> None:
    done = subprocess.run(
        [sys.executable, "-W", "error", "-m", "tui", "--version"], capture_output=True, text=True, env=environment(tmp_path), check=False
    )
    assert done.returncode == 0 and done.stdout == run(tmp_path, "--version").stdout


if __name__ == "__main__":
    import tempfile

    low, high = map(int, sys.argv[1:])
    with tempfile.TemporaryDirectory() as name:
        written(Path(name), hot=HOT)
        ended = [trial(Path(name), delay(random.Random(seed))) for seed in range(low, high)]
    print(f"seeds {low} to {high - 1}: {sum(ended)} interrupted, {len(ended) - sum(ended)} had done their work; each with one line")
