"""Case files: bounded reading, saving that keeps the user's comments, order and spelling."""

from __future__ import annotations

import hashlib
import os
import re
import stat
from pathlib import Path
from typing import Any

from cycle import toml
from cycle.atomic import Irregular, read_file, replace_file
from cycle.case.case import Case, Stamp, build
from cycle.errors import CaseError, Fault, FileChanged, shown

_DEVICE = ("not a case file", "a device or pipe", "a file, or - for standard input")
_SETTING = re.compile(r"\s*([A-Za-z0-9_.-]{1,80})\s*=\s*(.*?)\s*", re.DOTALL)


def load(path: str | os.PathLike[str]) -> Case:
    """Read and validate a case file.

    Parameters: path, of a regular file of at most 1 MiB. Returns: the Case, with its path, text and stamp.
    Errors: CaseError with every fault, also where the file cannot be read.
    """
    name = os.fspath(path)
    data, mtime = _read(name)
    text = _decode(data, name)
    stamp = Stamp(hashlib.sha256(data).hexdigest(), mtime)
    return build(parse(text, name), Path(name).stem, name, stamp, text)


def loads(text: str | bytes, name: str = "-") -> Case:
    """Validate the text of a case.

    Parameters: text, TOML of at most 1 MiB, bytes as UTF-8; name, for messages. Returns: the Case, without a path.
    Errors: CaseError with every fault.
    """
    data = text.encode("utf-8", "surrogatepass") if isinstance(text, str) else text
    if len(data) > toml.LARGEST:
        raise _one(name, "too large", f"more than {toml.LARGEST} bytes", f"at most {toml.LARGEST} bytes")
    decoded = _decode(data, name)
    return build(parse(decoded, name), name, None, None, decoded)


def read_setting(text: str) -> tuple[str, object]:
    """Key and value of a setting such as "flight.altitude=27 km".

    Parameters: text, KEY=VALUE; VALUE is read as a TOML value, and as bare text where it is none.
    Returns: key and value for `Case.replace`. Errors: CaseError where there is no key or no value.
    """
    match = _SETTING.fullmatch(text) if len(text) <= 1000 else None
    if match is None or not match.group(2):
        raise _one("setting", "not a setting", shown(text), "section.key=VALUE, such as flight.mach=7.5 or flight.altitude=27 km")
    key, value = match.groups()
    try:
        found = toml.tables(f"value = {value}", "setting")
    except CaseError:
        found = {}
    # more lines than one would bring keys of their own
    return key, found["value"] if len(found) == 1 else value


def parse(text: str, file: str) -> dict[str, Any]:
    """Tables of a case file.

    Parameters: text; file, the name that messages use. Returns: nested plain data. Errors: CaseError with line and column.
    """
    if not text.strip():
        raise _one(file, "the file is empty", "nothing", "a case; ductwalk new writes one")
    return toml.tables(text, file)


def _one(file: str, text: str, given: str = "", allowed: str = "") -> CaseError:
    return CaseError([Fault(file, "", text, given, allowed)])


def _trouble(file: str, doing: str, error: OSError) -> CaseError:
    return _one(file, f"cannot be {doing}: {(error.strerror or str(error)).lower()}")


def _read(name: str) -> tuple[bytes, float]:
    """Bytes and modification time of a regular file."""
    try:
        data, status = read_file(name, toml.LARGEST)
    except Irregular:
        raise _one(name, *_DEVICE) from None
    except IsADirectoryError:
        raise _one(name, "not a case file", "a directory", _DEVICE[-1]) from None
    except OSError as error:
        raise _trouble(name, "read", error) from None
    except ValueError:
        raise _one(name, "no name of a file", shown(name), "a path") from None
    if len(data) > toml.LARGEST:
        raise _one(name, "too large", f"{max(status.st_size, len(data))} bytes", f"at most {toml.LARGEST} bytes")
    return data, status.st_mtime


def _decode(data: bytes, file: str) -> str:
    try:
        return data.decode("utf-8-sig")
    except UnicodeDecodeError as error:
        line = data.count(b"\n", 0, error.start) + 1
        column = error.start - data.rfind(b"\n", 0, error.start)
        raise CaseError([Fault(file, "", "not UTF-8 text", f"byte 0x{data[error.start]:02x}", "UTF-8", line, column)]) from None


def _stamp(path: str) -> Stamp | None:
    """Stamp of a file as it is now, None where there is none."""
    try:
        # a pipe would be waited for, and a device has no end
        if not stat.S_ISREG((status := os.stat(path)).st_mode) and not stat.S_ISDIR(status.st_mode):
            raise _one(path, *_DEVICE)
        with open(path, "rb") as stream:
            return Stamp(hashlib.file_digest(stream, "sha256").hexdigest(), os.fstat(stream.fileno()).st_mtime)
    except FileNotFoundError:
        return None
    except OSError as error:
        raise _trouble(path, "read", error) from None


def _is_foreign(there: Stamp | None, expect: Stamp | None) -> bool:
    """Whether a file is not the one expected; no file is nobody's."""
    return there is not None and (expect is None or there.digest != expect.digest)


def save(case: Case, path: str | os.PathLike[str], expect: Stamp | None = None) -> Stamp:
    """Write a case to a file, keeping comments, order and spelling of all that did not change.

    Parameters: case; path, a link is followed to its target; expect, the stamp of the file when it was last read or written,
    None for a new file. A file that has vanished is written anew from the text the case came from.
    Returns: the new stamp. Errors: FileChanged (nothing written) where the file on disk is not the one expected; CaseError
    where it cannot be written, with the old file untouched.
    """
    from cycle.case.document import edited

    name = os.fspath(path)
    target = os.path.realpath(name)
    there = _stamp(target)
    if _is_foreign(there, expect):
        raise FileChanged(name, edited(case.text, case), _read(target)[0].decode("utf-8", "replace"))
    base = case.text if there is None else _decode(_read(target)[0], name)
    text = edited(base, case)
    again = build(parse(text, name), case.name, name)
    if again != case:
        raise _one(name, "not saved: the text would not read back as the same case; save under another name")
    data = text.encode("utf-8")
    if len(data) > toml.LARGEST:
        raise _one(name, "not saved: too large", f"{len(data)} bytes", f"at most {toml.LARGEST} bytes")
    try:
        return _write(target, data, name, expect)
    except OSError as error:
        raise _trouble(name, "written", error) from None


def _write(target: str, data: bytes, name: str, expect: Stamp | None) -> Stamp:
    def refuse_a_foreign_change() -> None:
        if _is_foreign(_stamp(target), expect):
            raise FileChanged(name, data.decode("utf-8"), _read(target)[0].decode("utf-8", "replace"))

    return Stamp(hashlib.sha256(data).hexdigest(), replace_file(target, data, refuse_a_foreign_change))
