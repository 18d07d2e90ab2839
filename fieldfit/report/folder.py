"""The result folder: written whole beside its place, then moved into it; never over what is not fieldfit's."""

import json
import shutil
import tempfile
from collections.abc import Mapping
from pathlib import Path

from fieldfit.errors import FieldfitError

__all__ = ["OutputError", "replace_folder"]


class OutputError(FieldfitError, OSError):
    """The results cannot be written there."""


def replace_folder(out: Path, files: Mapping[str, str]) -> None:
    """Make ``out`` a folder of these files (relative names to text), or leave it as it was.

    Raises OutputError where ``out`` holds something that fieldfit did not write, or cannot be written.
    """
    _refuse_foreign(out)
    try:
        out.parent.mkdir(parents=True, exist_ok=True)
        beside = Path(tempfile.mkdtemp(prefix=f".{out.name}.", dir=out.parent))
    except OSError as problem:
        raise OutputError(f"{out} cannot be written: {problem.strerror}") from problem
    try:
        fresh = beside / "new"
        for name, text in files.items():
            target = fresh / name
            target.parent.mkdir(parents=True, exist_ok=True)
            target.write_text(text, encoding="utf-8", newline="")
        if out.exists():
            out.rename(beside / "old")
        fresh.rename(out)
    except OSError as problem:
        if (beside / "old").exists() and not out.exists():
            (beside / "old").rename(out)
        raise OutputError(f"{out} cannot be written: {problem.strerror}") from problem
    finally:
        shutil.rmtree(beside, ignore_errors=True)


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
