"""Files read within bounds, new ones that take nobody's place, and long names."""

from __future__ import annotations

import os
from pathlib import Path

import pytest

from cycle.atomic import Irregular, new_file, read_file, replace_file
from cycle.case import load, save
from cycle.errors import CaseError

CASES = Path(__file__).parents[1] / "cases"


def test_what_is_no_regular_file_is_not_read_and_one_byte_more_tells_too_much(tmp_path: Path) -> None:
    pipe = tmp_path / "pipe"
    os.mkfifo(pipe)
    with pytest.raises(Irregular):
        read_file(pipe, 10)
    (tmp_path / "long").write_bytes(b"x" * 100)
    assert len(read_file(tmp_path / "long", 10)[0]) == 11


def test_a_new_file_takes_no_other_ones_place_and_a_broken_one_is_gone(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    target = tmp_path / "there"
    target.write_text("theirs")
    with pytest.raises(FileExistsError):
        new_file(target, b"ours")
    assert target.read_text() == "theirs"

    def refuse(descriptor: int) -> None:
        raise OSError(28, "no space left on device")

    monkeypatch.setattr(os, "fsync", refuse)
    with pytest.raises(OSError, match="no space"):
        new_file(tmp_path / "broken", b"ours")
    assert not (tmp_path / "broken").exists()


def test_a_name_of_many_bytes_is_replaced_too(tmp_path: Path) -> None:
    """200 characters of three bytes are more than a file system takes; the name of the file beside it is cut by bytes."""
    target = tmp_path / ("\u65e5" * 80)
    replace_file(str(target), b"one")
    replace_file(str(target), b"two")
    assert target.read_bytes() == b"two" and len(list(tmp_path.iterdir())) == 1


@pytest.mark.parametrize("name", ["/dev/zero", "pipe"])
def test_a_case_is_not_saved_over_a_device_or_a_pipe(tmp_path: Path, name: str) -> None:
    os.mkfifo(tmp_path / "pipe")
    with pytest.raises(CaseError, match="a device or pipe"):
        save(load(CASES / "saltmarsh.toml"), tmp_path / name)
