"""Scenario files: JSON text to a scenario and back, opening and saving.

A file is read as a whole or not at all; whatever is wrong comes as one ScenarioError with the path of the
field. A scenario that was read and is written again has the same values, units, order and explicit parts.
"""

import contextlib
import errno
import json
import os
import secrets
import stat
from collections.abc import Iterator
from pathlib import Path
from typing import Any

from explorer.scenario.embedded import is_page, read_embedded
from explorer.scenario.errors import ScenarioError, cleaned, join
from explorer.scenario.model import Scenario

LARGEST_FILE = 5_000_000
"""Bytes of a scenario file; a large one with twenty options has some 200 000."""

DEEPEST = 40
"""Objects and lists that may stand in each other; four side streams in an option need 17."""

MOST = {"objects": ("{", 50_000), "lists": ("[", 150_000)}
"""By kind of part its sign in the text, and how many a file may have; a large one with twenty options has
some 5 000 objects, fifty full sets of points 100 000 lists. Bounds the time and memory of reading."""

LINE = 100
"""Columns within which a small object is written on one line."""

_LONGEST_WHOLE = 18  # digits; anything longer is out of range for every field and may be a float
_OS_WORDS = {
    errno.ENOENT: "there is no such file or folder",
    errno.EACCES: "it is not permitted",
    errno.EPERM: "it is not permitted",
    errno.EISDIR: "it is a folder",
    errno.ENOTDIR: "a part of the path is not a folder",
    errno.ENOSPC: "the disk is full",
    errno.EFBIG: "it would be too large for the disk",
    errno.EDQUOT: "the disk quota is used up",
    errno.EROFS: "the disk is read-only",
    errno.ENAMETOOLONG: "the name is too long",
}


class _Repeating(dict):
    """A JSON object in which the key ``repeated`` stands twice."""

    repeated = ""


def read_scenario(text: str | bytes) -> Scenario:
    """Scenario from the text of a file, or of a report that carries one.

    Raises ScenarioError; nothing is half-loaded.
    """
    content = _decoded(text)
    raw = _parsed(read_embedded(content) if is_page(content) else content)
    for path, key in _repeated_keys(raw):
        raise ScenarioError(join(path, key), "this key stands twice; allowed once")
    return Scenario.from_dict(raw)


def open_scenario(path: str | os.PathLike[str]) -> Scenario:
    """Scenario from a file. Raises ScenarioError, also for what the system refuses."""
    with _system_errors(path, "opened"):
        if not stat.S_ISREG(os.stat(path).st_mode):
            raise ScenarioError(_named(path), "cannot be opened: it is not a file; allowed a scenario file")
        with open(path, "rb") as file:
            content = file.read(LARGEST_FILE + 1)
    return read_scenario(content)


def save_scenario(scenario: Scenario, path: str | os.PathLike[str]) -> None:
    """Write a scenario to a file, whole or not at all. Raises ScenarioError.

    The text is read back first, so that no file is written that could not be opened.
    """
    text = dumps(scenario)
    read_scenario(text)
    write_text(text, path)


def write_text(text: str, path: str | os.PathLike[str]) -> None:
    """Write a file, whole or not at all: a new one takes the place of the old one in one step, and a failure
    leaves the old one as it was. Raises ScenarioError for what the system refuses."""
    with _system_errors(path, "saved"):
        target = Path(path).resolve()
        mode = _mode_to_keep(target)
        temporary = target.with_name(f".{secrets.token_hex(8)}.tmp")
        try:
            with open(os.open(temporary, os.O_WRONLY | os.O_CREAT | os.O_EXCL, 0o666), "wb") as file:
                file.write(text.encode())
                file.flush()
                os.fsync(file.fileno())
            if mode is not None:
                os.chmod(temporary, mode)
            os.replace(temporary, target)
        except BaseException:
            temporary.unlink(missing_ok=True)
            raise


def dumps(scenario: Scenario) -> str:
    """Text of a scenario file: two spaces a level, small objects on one line, characters as they are."""
    return _laid_out(scenario.to_dict(), 0) + "\n"


def _decoded(text: str | bytes) -> str:
    if len(text) > LARGEST_FILE:
        raise ScenarioError("", f"the file is too large; allowed {LARGEST_FILE // 1_000_000} MB")
    if isinstance(text, str):
        return text.removeprefix("\ufeff")
    try:
        return text.decode("utf-8-sig")
    except UnicodeDecodeError as error:
        message = f"the file is not UTF-8 text (byte {error.start + 1}); allowed JSON saved as UTF-8"
        raise ScenarioError("", message) from None


def _parsed(text: str) -> Any:
    for kind, (sign, most) in MOST.items():
        if (count := text.count(sign)) > most:
            raise ScenarioError("", f"the file has {count} {kind}; allowed {most}")
    try:
        return json.loads(text, object_pairs_hook=_object, parse_int=_whole)
    except json.JSONDecodeError as error:
        where = f"line {error.lineno}, column {error.colno}"
        raise ScenarioError("", f"the file is not JSON at {where}: {error.msg.lower()}") from None
    except RecursionError:
        raise ScenarioError("", _TOO_DEEP) from None


_TOO_DEEP = f"the file has too many objects in each other; allowed {DEEPEST} levels"


def _object(pairs: list[tuple[str, Any]]) -> dict[str, Any]:
    parts = dict(pairs)
    if len(parts) == len(pairs):
        return parts
    repeating, seen = _Repeating(parts), set()
    for key, _ in pairs:
        if key in seen:
            repeating.repeated = key
            break
        seen.add(key)
    return repeating


def _whole(digits: str) -> int | float:
    return int(digits) if len(digits) <= _LONGEST_WHOLE else float(digits)


def _repeated_keys(raw: Any) -> Iterator[tuple[str, str]]:
    """Objects with a repeated key, by path and key. Raises ScenarioError when the text is too deep."""
    waiting = [("", raw, 1)] if isinstance(raw, dict | list) else []
    while waiting:
        path, value, depth = waiting.pop()
        if depth > DEEPEST:
            raise ScenarioError("", _TOO_DEEP)
        if isinstance(value, _Repeating):
            yield path, value.repeated
        parts = value.items() if isinstance(value, dict) else enumerate(value)
        waiting += [
            (join(path, key), part, depth + 1) for key, part in parts if isinstance(part, dict | list)
        ]


def _laid_out(value: Any, indent: int) -> str:
    line = json.dumps(value, ensure_ascii=False, allow_nan=False)
    if not isinstance(value, dict | list) or (_levels(value) <= 2 and len(line) + indent <= LINE):
        return line
    inner, outer = " " * (indent + 2), " " * indent
    if isinstance(value, list):
        parts = [_laid_out(part, indent + 2) for part in value]
        return f"[\n{inner}" + f",\n{inner}".join(parts) + f"\n{outer}]"
    parts = [
        f"{json.dumps(key, ensure_ascii=False)}: {_laid_out(part, indent + 2)}" for key, part in value.items()
    ]
    return f"{{\n{inner}" + f",\n{inner}".join(parts) + f"\n{outer}}}"


def _levels(value: Any) -> int:
    """How many objects and lists stand in each other."""
    if not isinstance(value, dict | list):
        return 0
    parts = value.values() if isinstance(value, dict) else value
    return 1 + max(map(_levels, parts), default=0)


@contextlib.contextmanager
def _system_errors(path: str | os.PathLike[str], done: str) -> Iterator[None]:
    """Turn what the system refuses into one sentence."""
    try:
        yield
    except OSError as error:
        words = _OS_WORDS.get(error.errno) or (error.strerror or "the system refuses").lower()
        raise ScenarioError(_named(path), f"cannot be {done}: {words}") from None
    except ValueError as error:
        if isinstance(error, ScenarioError):
            raise
        raise ScenarioError(_named(path), f"cannot be {done}: this is not a path") from None


def _named(path: str | os.PathLike[str]) -> str:
    return cleaned(os.fspath(path)) or "the file"


def _mode_to_keep(target: Path) -> int | None:
    """Permissions of the file that is there; None for a new one. Raises OSError where it must not change."""
    if not target.exists():
        return None
    if target.is_dir():
        raise IsADirectoryError(errno.EISDIR, "")
    if not target.is_file() or not os.access(target, os.W_OK):
        # Replacing would get round a write protection, or put a file in the place of a device.
        raise PermissionError(errno.EACCES, "")
    return stat.S_IMODE(target.stat().st_mode)
