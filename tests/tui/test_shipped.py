"""Shipped cases are copied, never changed: the command, the screen in a real terminal, and the guard below both."""

from __future__ import annotations

import shutil
import stat
from collections.abc import Callable, Iterator
from pathlib import Path

import pytest

import cycle
from cycle import atomic
from tests.tui.command_support import ROOT, run
from tests.tui.pty_support import READY, Terminal
from tui import shipped, trash

CASES = ROOT / "cases"
NAMES = sorted(file.stem for file in CASES.glob("*.toml"))
PROGRAM = "import sys; from tui.commands import main; sys.exit(main(sys.argv[1:]))"


def test_the_shipped_cases_are_listed_with_title_and_what_they_show(tmp_path: Path) -> None:
    done = run(tmp_path, "cases")
    assert (done.returncode, done.stderr) == (0, "")
    rows = [line for line in done.stdout.splitlines()[2:] if line and not line.startswith(" ")]
    assert [row.split()[0] for row in rows] == NAMES
    flat = " ".join(done.stdout.split())
    for name in NAMES:
        case = cycle.load(CASES / f"{name}.toml")
        assert case.title in flat
        assert " ".join(case.notes.split()).split(". ")[0] in flat
    assert max(map(len, done.stdout.splitlines())) <= 80


@pytest.mark.parametrize("more", [[], ["-o", "mine.toml"]])
def test_a_shipped_case_is_copied_out_and_nothing_is_overwritten(tmp_path: Path, more: list[str]) -> None:
    target = tmp_path / (more[-1] if more else "narrows.toml")
    done = run(tmp_path, "cases", "narrows", *more)
    assert done.returncode == 0
    assert target.read_bytes() == (CASES / "narrows.toml").read_bytes()
    target.write_text("mine")
    again = run(tmp_path, "cases", "narrows", *more)
    assert again.returncode == 2
    assert "file exists" in again.stderr
    assert target.read_text() == "mine"


def test_a_shipped_case_goes_to_standard_output(tmp_path: Path) -> None:
    done = run(tmp_path, "cases", "heron.toml", "-o", "-")
    assert done.stdout == (CASES / "heron.toml").read_text()
    assert sorted(p.name for p in tmp_path.iterdir()) == []


@pytest.mark.parametrize(
    ("arguments", "words"),
    [
        (["cases", "saltmarch"], "did you mean saltmarsh?"),
        (["cases", "-o", "x.toml"], "-o needs the NAME"),
        (["saltmarsh"], "ductwalk cases saltmarsh copies it"),
    ],
)
def test_what_is_wrong_with_the_name_is_said(tmp_path: Path, arguments: list[str], words: str) -> None:
    done = run(tmp_path, *arguments)
    assert done.returncode == 2
    assert words in done.stderr
    assert done.stderr.count("\n") == 1


def test_first_sentence_of_notes() -> None:
    assert shipped.first_sentence("One\nthing. Another.") == "One thing."
    assert shipped.first_sentence("One thing.") == "One thing."
    assert shipped.first_sentence("") == ""


def test_the_guard_covers_every_package() -> None:
    for package in ("cycle", "tui", "cases"):
        assert atomic.is_own(ROOT / package / "new.toml")
        assert atomic.is_own(ROOT / "tests" / ".." / package / "new.toml")
    assert not atomic.is_own(ROOT / "tests" / "new.toml")
    assert not atomic.is_own(ROOT / "cases-of-mine" / "new.toml")


@pytest.fixture
def guarded(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    """A case in a folder that stands for one of the installed program."""
    folder = tmp_path / "site"
    folder.mkdir()
    monkeypatch.setattr(atomic, "OWN", (str(folder.resolve()),))
    return Path(shutil.copy(CASES / "saltmarsh.toml", folder / "saltmarsh.toml"))


def _saved(file: Path, mine: Path) -> None:
    case = cycle.load(file)
    cycle.case.save(case.replace({"flight.mach": 7.0}), file, case.stamp)


CHANGES: dict[str, Callable[[Path, Path], object]] = {
    "save": _saved,
    "new": lambda file, mine: atomic.new_file(file.parent / "new.toml", b"x"),
    "replace": lambda file, mine: atomic.replace_file(str(file), b"x"),
    "rename": lambda file, mine: trash.move_new(str(file), str(mine)),
    "move in": lambda file, mine: trash.move_new(str(shutil.copy(file, mine)), str(file.parent / "mine.toml")),
    "delete": lambda file, mine: trash.throw_away(str(file)),
}


@pytest.mark.parametrize("linked", [False, True])
@pytest.mark.parametrize("what", CHANGES)
def test_nothing_in_the_program_is_written_renamed_or_deleted(guarded: Path, tmp_path: Path, what: str, linked: bool) -> None:
    place = guarded.parent
    if linked:
        place = tmp_path / "link"
        place.symlink_to(guarded.parent, target_is_directory=True)
    before = snapshot(guarded.parent)
    with pytest.raises((atomic.ReadOnly, cycle.CaseError)) as caught:
        CHANGES[what](place / guarded.name, tmp_path / "mine.toml")
    assert "part of the installed program" in str(caught.value)
    assert snapshot(guarded.parent) == before


def test_a_link_of_the_user_to_a_shipped_case_may_be_deleted_but_not_written_through(guarded: Path, tmp_path: Path) -> None:
    link = tmp_path / "link.toml"
    link.symlink_to(guarded)
    assert shipped.is_shipped(str(link))
    with pytest.raises(cycle.CaseError, match="part of the installed program"):
        _saved(link, link)
    trash.throw_away(str(link))
    assert guarded.exists() and not link.is_symlink()


def snapshot(folder: Path) -> dict[str, tuple[int, bytes]]:
    """Every file of a folder: when it was changed, and what is in it."""
    files = [f for f in folder.rglob("*") if f.is_file() and "__pycache__" not in f.parts]
    return {str(f.relative_to(folder)): (f.stat().st_mtime_ns, f.read_bytes()) for f in files}


@pytest.fixture(params=["writable", "read-only"])
def site(request: pytest.FixtureRequest, tmp_path: Path) -> Iterator[Path]:
    """The program as installed in a folder that the user may write, or may not."""
    folder = tmp_path / "site"
    for package in ("cycle", "tui", "cases"):
        shutil.copytree(ROOT / package, folder / package, ignore=shutil.ignore_patterns("__pycache__"))
    places = [folder, *folder.rglob("*")]
    if request.param == "read-only":
        for place in places:
            place.chmod(stat.S_IMODE(place.stat().st_mode) & ~0o222)
    yield folder
    for place in places:
        place.chmod(stat.S_IMODE(place.stat().st_mode) | 0o200)


def opened(site: Path, tmp_path: Path, *arguments: str) -> Terminal:
    """The installed program in a terminal, in a working folder of its own."""
    work = tmp_path / "work"
    work.mkdir(exist_ok=True)
    env = {"PYTHONPATH": str(site), "PYTHONDONTWRITEBYTECODE": "1", "XDG_STATE_HOME": str(tmp_path / "state")}
    return Terminal(arguments, env=env, program=PROGRAM, cwd=work)


def test_without_a_name_a_copy_opens_and_saving_asks_for_a_name(site: Path, tmp_path: Path) -> None:
    before = snapshot(site)
    with opened(site, tmp_path) as terminal:
        terminal.wait("shipped case saltmarsh, read-only: s saves a copy")
        terminal.wait(READY)
        terminal.press("tab", "+")
        terminal.wait(lambda screen: "Saltmarsh" in screen and " *" in screen.splitlines()[0])
        terminal.press("s")
        terminal.wait("Save a copy of the shipped case")
        assert "saltmarsh.toml" in terminal.text
        terminal.press("enter")
        terminal.wait("saved saltmarsh.toml")
        terminal.press("+")
        terminal.wait(lambda screen: " *" in screen.splitlines()[0])
        terminal.press("s")
        terminal.wait(lambda screen: " *" not in screen.splitlines()[0])
        terminal.press("q")
        assert terminal.status() == 0
    assert snapshot(site) == before
    copy, first = cycle.load(tmp_path / "work" / "saltmarsh.toml"), cycle.load(CASES / "saltmarsh.toml")
    assert copy.value("flight.mach") == pytest.approx(first.value("flight.mach") + 0.2)
    assert copy.notes == first.notes


def test_a_shipped_case_named_by_its_path_and_its_neighbours_are_read_only(site: Path, tmp_path: Path) -> None:
    before = snapshot(site)
    with opened(site, tmp_path, str(site / "cases" / "heron.toml")) as terminal:
        terminal.wait("shipped case heron, read-only: s saves a copy")
        terminal.wait(READY)
        terminal.press("tab", "+", "s")
        terminal.wait("Save a copy of the shipped case")
        terminal.press("\x15", str(site / "cases" / "mine.toml"), "enter")
        terminal.wait("part of the installed program")
        terminal.press("s", "\x15", str(site / "cases" / "heron.toml"), "enter")
        terminal.wait("part of the installed program")
        terminal.press("b")
        terminal.wait("Shipped cases, read-only (3 of")
        terminal.press("down")
        for key in "rdn":
            terminal.press("down" if key != "d" else "up")
            terminal.settle()
            terminal.press(key)
            terminal.wait("shipped cases are read-only; c copies one")
        terminal.press("c")
        terminal.wait("name of a new file")
        terminal.press("\x15", "own", "enter")
        terminal.wait("copied to")
        terminal.press("S")
        terminal.wait(lambda screen: "own.toml" in screen and "Shipped cases" not in screen)
        terminal.press("escape")
        terminal.settle()
        terminal.press("q")
        assert terminal.status() == 0
        assert "unsaved edits of the shipped case heron are" in terminal.raw.decode(errors="replace")
    assert snapshot(site) == before
    assert [f.name for f in (tmp_path / "work").iterdir()] == ["own.toml"]
    assert (tmp_path / "work" / "own.toml").read_bytes() in [f.read_bytes() for f in CASES.glob("*.toml")]
