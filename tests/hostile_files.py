"""What hostile files cost: every one of them in a process of its own, which may take 2 s of processor time and 300 MB.

By hand: `python -m tests.hostile_files [WORD]` runs all trials whose name has the word, prints the dearest and those beyond the bounds.
"""

from __future__ import annotations

import subprocess
import sys
import tempfile
from collections.abc import Iterator
from dataclasses import dataclass, replace
from pathlib import Path

from tests.hostile import large
from tests.hostile.running import Trial, furnish, trials
from tests.tui.command_support import environment

MOST_SECONDS, MOST_MEGABYTES = 2.0, 300.0
OPEN = "import sys\nfrom tui.app import DuctwalkApp\n"
EVERY = (
    ("solve", "x.toml"), ("solve", "x.toml", "--set", "flight.mach=7"), ("solve", "x.toml", "--format", "json", "-o", "kept.json"),
    ("compare", "quick.toml", "x.toml"), ("explain", "thrust", "x.toml"), ("fix-geometry", "x.toml"),
)  # fmt: skip
"""Commands that a sound case is given to."""


@dataclass(frozen=True, slots=True)
class Cost:
    """What a process took: exit status, s of processor time, MB at most."""

    name: str
    status: int
    seconds: float
    megabytes: float

    @property
    def fits(self) -> bool:
        return self.seconds <= MOST_SECONDS and self.megabytes <= MOST_MEGABYTES and self.status in (0, 2, 3)


def dear() -> Iterator[Trial]:
    """The trials, and every command on each sound case and on some that are wrong."""
    yield from trials()
    for name, content in {**large.SOUND, **large.WRONG}.items():
        for arguments in EVERY:
            yield Trial(f"{' '.join(arguments)}, {name}", arguments, "x.toml", content)
        yield Trial(f"save, {name}", ("save",), "x.toml", content)


SAVE = "import sys\nfrom cycle.case import load, save\nfrom cycle.errors import CaseError\n" + (
    "try:\n    case = load('x.toml')\nexcept CaseError as error:\n    sys.exit(2)\n"
    "save(case.replace({'flight.mach': 7.0}), 'x.toml', case.stamp)\n"
)
"""What the screen does when a case is saved."""


METER = """
import os, subprocess, sys
child = subprocess.Popen(sys.argv[1:], stdout=subprocess.DEVNULL, stderr=subprocess.DEVNULL)
_, status, used = os.wait4(child.pid, 0)
print(os.waitstatus_to_exitcode(status), used.ru_utime + used.ru_stime, used.ru_maxrss / 1024)
os._exit(0)
"""
"""A small process between: the memory of a process that starts another counts as that of the other."""


def cost(trial: Trial, folder: Path) -> Cost:
    """Run a trial as a process."""
    trial.prepare(folder)
    code = ["-c", SAVE] if trial.arguments == ("save",) else ["-m", "tui", *trial.arguments]
    done = subprocess.run(
        [sys.executable, "-c", METER, sys.executable, "-W", "error", *code],
        stdin=subprocess.DEVNULL, stdout=subprocess.PIPE, text=True, cwd=folder, env=environment(folder), check=True,
    )  # fmt: skip
    status, seconds, megabytes = done.stdout.split()
    return Cost(trial.name, int(status), float(seconds), float(megabytes))


def main(word: str) -> int:
    with tempfile.TemporaryDirectory() as name:
        folder = Path(name)
        furnish(folder)
        # an argument with a NUL reaches no process
        chosen = [t for t in dear() if word in t.name and not any("\0" in part for part in t.arguments)]
        found = [cost(replace(trial), folder) for trial in chosen]
    for key in ("seconds", "megabytes"):
        for one in sorted(found, key=lambda c: -getattr(c, key))[:8]:
            print(f"{one.seconds:6.2f} s {one.megabytes:6.0f} MB  status {one.status}  {one.name}")
        print()
    beyond = [one for one in found if not one.fits]
    print(f"{len(found)} processes; beyond {MOST_SECONDS:g} s or {MOST_MEGABYTES:g} MB, or with another status: {beyond or 'none'}")
    return int(bool(beyond))


if __name__ == "__main__":
    sys.exit(main(sys.argv[1] if len(sys.argv) > 1 else ""))
