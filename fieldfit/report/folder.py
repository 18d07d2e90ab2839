"""The result folder: written whole beside its place, then put there in one step; never over what is not fieldfit's.

On Linux the new folder and the old one change places in one system call, so that whoever looks, whenever a run is
killed, finds one of the two whole. Where the system cannot, the old one is moved aside first; a run killed between the
two steps leaves it beside, and the next run puts it back before it does anything else.
"""

import ctypes
import json
import os
import shutil
import tempfile
from collections.abc import Mapping
from pathlib import Path

from fieldfit.errors import FieldfitError

__all__ = ["OutputError", "replace_folder"]

AT_FDCWD, RENAME_EXCHANGE = -100, 2  # of renameat2(2)


class OutputError(FieldfitError, OSError):
    """The results cannot be written there."""


def replace_folder(out: Path, files: Mapping[str, str | bytes]) -> None:
    """Make ``out`` a folder of these files (relative names to content), or leave it as it was.

    Raises OutputError where ``out`` holds something that fieldfit did not write, or cannot be written.
    """
    try:
        place = out.resolve()
        place.parent.mkdir(parents=True, exist_ok=True)
        _tidy(place)
        _refuse_foreign(out)
        beside = Path(tempfile.mkdtemp(prefix=f"{_mark(place)}{os.getpid()}-", dir=place.parent))
    except OutputError:
        raise
    except OSError as problem:
        raise OutputError(f"{out} cannot be written: {problem.strerror}") from problem
    try:
        _write(beside / "new", files)
        _put(beside, place)
    except OSError as problem:
        raise OutputError(f"{out} cannot be written: {problem.strerror}") from problem
    finally:
        _recover(beside, place)


def _write(folder: Path, files: Mapping[str, str | bytes]) -> None:
    for name, content in files.items():
        target = folder / name
        target.parent.mkdir(parents=True, exist_ok=True)
        target.write_bytes(content.encode() if isinstance(content, str) else content)


def _put(beside: Path, place: Path) -> None:
    """Put ``beside/new`` in its place; what stood there ends up beside."""
    if place.exists():
        if _exchanged(beside / "new", place):
            return
        place.rename(beside / "old")
    (beside / "new").rename(place)


def _exchanged(first: Path, second: Path) -> bool:
    """Let two paths change places in one step; False where the system cannot."""
    renameat2 = getattr(ctypes.CDLL(None, use_errno=True), "renameat2", None) if os.name == "posix" else None
    if renameat2 is None:
        return False
    return bool(renameat2(AT_FDCWD, os.fsencode(first), AT_FDCWD, os.fsencode(second), RENAME_EXCHANGE) == 0)


def _mark(place: Path) -> str:
    """How the names of folders begin that runs make beside the place; the number of the process follows."""
    return f".{place.name}.fieldfit-"


def _tidy(place: Path) -> None:
    """Finish what killed runs left beside the place."""
    for left in place.parent.iterdir():
        if left.name.startswith(_mark(place)) and not _is_running(left.name.removeprefix(_mark(place)).split("-")[0]):
            _recover(left, place)


def _recover(beside: Path, place: Path) -> None:
    """Put an old folder back if its place is empty, and clear away the rest."""
    if (beside / "old").exists() and not place.exists():
        (beside / "old").rename(place)
    shutil.rmtree(beside, ignore_errors=True)


def _is_running(process: str) -> bool:
    try:
        os.kill(int(process), 0)
    except PermissionError:
        return True
    except (ValueError, OSError):
        return False
    return True


def _refuse_foreign(out: Path) -> None:
    if not out.exists():
        return
    if not out.is_dir():
        raise OutputError(f"{out} is a file; results need a folder")
    if any(out.iterdir()) and not _is_ours(out / "results.json"):
        raise OutputError(f"{out} holds files that fieldfit did not write; choose an empty or a new folder")


def _is_ours(record: Path) -> bool:
    try:
        return "fieldfit" in json.loads(record.read_text(encoding="utf-8"))
    except (OSError, ValueError):
        return False
