"""Keys of one's own: what a file of keys may say, what holds where it is wrong, and that printed keys follow."""

from __future__ import annotations

import os
from pathlib import Path

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from tests.tui.screen_support import CASES, opened
from tui import keymap
from tui.actions import ACTIONS, NO_KEY
from tui.commands import main
from tui.keymap import parse

NAMES = [a.name for a in ACTIONS]


def keys_of(text: str) -> dict[str, tuple[str, ...]]:
    return {a.name: a.keys for a in parse(text, "keys.toml").actions}


@pytest.fixture
def file(tmp_path: Path, state: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    monkeypatch.setenv("XDG_CONFIG_HOME", str(tmp_path / "config"))
    folder = tmp_path / "config" / "ductwalk"
    folder.mkdir(parents=True)
    return folder / "keys.toml"


def test_printed_keys_are_a_file_that_changes_nothing(capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["keys"]) == 0
    printed = capsys.readouterr().out
    found = parse(printed, "keys.toml")
    assert found.faults == ()
    assert [a.name for a in found.actions if f"\n{a.name} = " not in printed] == []
    same = {keymap.SIGNS.get(k, k) for a in ACTIONS for k in a.keys}
    assert {keymap.SIGNS.get(k, k) for a in found.actions for k in a.keys} == same


def test_keys_by_character_by_name_several_and_none() -> None:
    found = keys_of('[keys]\nundo = "z"\npeek = ["g", "F5", "ctrl+g"]\nsuspend = []\nredo = "Z"\npin = ","')
    assert found["undo"] == ("z",)
    assert found["peek"] == ("g", "f5", "ctrl+g")
    assert found["suspend"] == (NO_KEY,)
    assert found["redo"] == ("Z", "shift+z")
    assert found["pin"] == (",",)


def test_two_actions_change_their_keys_with_each_other() -> None:
    found = parse('[keys]\nundo = "U"\nredo = "u"', "keys.toml")
    assert found.faults == ()
    assert {a.name: a.shown for a in found.actions if a.name in ("undo", "redo")} == {"undo": "U", "redo": "u"}


@pytest.mark.parametrize(
    ("text", "action", "words"),
    [
        ("leave = []", "leave", "leave: must keep a key: given []"),
        ('redo = "hyper+z"', "redo", 'redo: no such key: given "hyper+z"; allowed x, f5'),
        ('redo = "5"', "redo", 'no such key: given "5"'),
        ("redo = 5", "redo", "no such key: given 5"),
        ('peek = "u"', "peek", 'peek: undo has this key: given "u"'),
        ('undo = "z"\nredo = "z"', "redo", 'redo: undo has this key: given "z"'),
        ('rendo = "z"', "undo", "rendo: no such action: allowed redo or undo"),
    ],
)
def test_what_is_wrong_is_told_and_the_declared_keys_hold_for_it(text: str, action: str, words: str) -> None:
    found = parse(f"[keys]\n{text}", "/home/a/keys.toml")
    (fault,) = found.faults
    assert fault.startswith("keys.toml: ")
    assert words in fault
    declared = next(a for a in ACTIONS if a.name == action)
    assert next(a for a in found.actions if a.name == action) == declared


_KEY = st.one_of(st.sampled_from([*keymap.NAMED, *"abcdefgzUPS?/:;,.", "f5", "ctrl+x", "ctrl+i", "5", ""]), st.text(max_size=3))


@settings(deadline=None, max_examples=150)
@given(st.dictionaries(st.sampled_from([*NAMES, "no_such"]), st.one_of(_KEY, st.lists(_KEY, max_size=3), st.integers()), max_size=6))
def test_whatever_is_asked_no_key_has_two_actions_and_one_can_always_leave(asked: dict[str, object]) -> None:
    import tomlkit

    found = parse(tomlkit.dumps({"keys": asked}), "keys.toml")
    keys = [keymap.SIGNS.get(k, k) for a in found.actions for k in a.keys if k != NO_KEY]
    assert len(keys) == len(set(keys))
    assert all(NO_KEY not in a.keys for a in found.actions if a.name in keymap.KEPT)
    assert [a.name for a in found.actions] == NAMES


async def test_remapped_keys_work_and_are_printed(file: Path) -> None:
    file.write_text('[keys]\nunits = ["z", "f6"]\nundo = "t"\nredo = ","\nhelp = "k"\n')
    async with opened(CASES / "saltmarsh.toml", size=(160, 24)) as driver:
        await driver.settled()
        await driver.press("tab")
        assert "t undo" in driver.screen().splitlines()[-1]
        await driver.press("tab")
        await driver.press("z")
        assert driver.session.system == "us"
        await driver.press("f6")
        assert driver.session.system == "si"
        await driver.press("tab", "plus", "u")
        assert len(driver.session.past) == 1
        await driver.press("t")
        assert driver.session.past == ()
        await driver.press("comma")
        assert len(driver.session.past) == 1
        await driver.press("k", "pagedown", "pagedown")
        assert "z F6 " in driver.screen()


async def test_faults_stand_on_one_line_and_all_of_them_with_the_keys(file: Path) -> None:
    file.write_text('[keys]\nunits = "hyper+x"\nleave = []\n')
    async with opened(CASES / "saltmarsh.toml") as driver:
        await driver.until(lambda: "keys.toml: units: no such key" in driver.screen())
        await driver.settled()
        assert 'keys.toml: units: no such key: given "hyper+x"; allowed x, f5, ctrl+x (+1: ?)' in driver.screen()
        await driver.press("question_mark")
        assert "keys.toml: leave: must keep a key" in driver.screen()
        await driver.press("escape", "t")
        assert driver.session.system == "us"


@pytest.mark.parametrize("bad", ["[keys", "\xff", "folder", "pipe", "large"])
async def test_a_file_that_cannot_be_read_is_told_and_the_declared_keys_hold(file: Path, bad: str) -> None:
    makes = {"folder": file.mkdir, "pipe": lambda: os.mkfifo(file), "large": lambda: file.write_text("#" * (keymap.LARGEST + 1))}
    makes.get(bad, lambda: file.write_bytes(bad.encode("latin-1")))()
    found = keymap.read()
    assert found.actions == ACTIONS
    assert len(found.faults) == 1
    async with opened(CASES / "saltmarsh.toml") as driver:
        await driver.settled()
        assert found.faults[0][:60] in driver.screen()


def test_without_a_home_the_declared_keys_hold(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.delenv("XDG_CONFIG_HOME", raising=False)
    monkeypatch.setattr(os.path, "expanduser", lambda name: name)
    assert keymap.path() == ""
    assert keymap.read() == keymap.Keymap()
