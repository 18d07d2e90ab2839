"""The files of a book: which tables there are and where, within limits of size."""

import hashlib
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from pathlib import Path

from fieldfit.errors import Fault
from fieldfit.fieldbook.csv_files import read_csv
from fieldfit.fieldbook.faults import fault
from fieldfit.fieldbook.naming import sort_names
from fieldfit.fieldbook.sheet import Sheet
from fieldfit.fieldbook.workbook import read_workbook

__all__ = ["Sheets", "read_sheets"]

LARGEST = 400_000_000  # bytes of one file
MOST_FILES = 1_000


@dataclass(frozen=True, slots=True, kw_only=True)
class Sheets:
    """The tables of a book as text cells, the digest of its files, and what was noted and refused on the way."""

    name: str
    sha256: str
    sheets: Mapping[str, Sheet]
    faults: tuple[Fault, ...]
    notes: tuple[str, ...]


def read_sheets(path: Path) -> Sheets:
    """Every table of a folder of CSV files or of one workbook."""
    if path.is_dir():
        return _folder(path)
    if not path.is_file():
        return _refused(
            path, fault("no such book", "book", "a folder of CSV files or one .xlsx workbook", value=str(path))
        )
    if path.suffix.lower() != ".xlsx":
        hint = "a CSV file belongs in a folder, named for its table" if path.suffix.lower() == ".csv" else None
        expected = "a folder of CSV files or one .xlsx workbook"
        return _refused(path, fault("not a book", "book", expected, value=path.name, hint=hint))
    return _workbook(path)


def _refused(path: Path, *faults: Fault) -> Sheets:
    return Sheets(name=path.name or str(path), sha256="", sheets={}, faults=faults, notes=())


def _digest(files: Sequence[tuple[str, bytes]]) -> str:
    """One SHA-256 of names and contents, by name; lengths keep the two apart."""
    digest = hashlib.sha256()
    for name, content in sorted(files):
        digest.update(f"{len(name.encode())} {len(content)} ".encode() + name.encode())
        digest.update(content)
    return digest.hexdigest()


def _content(path: Path, table: str) -> tuple[bytes, list[Fault]]:
    """The bytes of a file, none if it is too large or cannot be opened."""
    try:
        if path.stat().st_size > LARGEST:
            expected = f"a file of at most {LARGEST // 1_000_000} MB"
            return b"", [fault("file too large", table, expected, value=path.name)]
        return path.read_bytes(), []
    except OSError as error:
        return b"", [fault("cannot be opened", table, "a file that can be read", value=path.name, hint=error.strerror)]


def _workbook(path: Path) -> Sheets:
    content, faults = _content(path, "book")
    if faults:
        return _refused(path, *faults)
    sheets, found, notes = read_workbook(content)
    return Sheets(
        name=path.stem,
        sha256=_digest([(path.name, content)]),
        sheets={sheet.table: sheet for sheet in sheets},
        faults=tuple(found),
        notes=tuple(notes),
    )


def _folder(path: Path) -> Sheets:
    """Every CSV file of a folder that is named for a table."""
    entries = sorted(entry for entry in path.iterdir() if not entry.name.startswith((".", "~$")))
    if len(entries) > MOST_FILES:
        return _refused(path, fault("too many files", "book", f"a folder of at most {MOST_FILES} files"))
    tables, faults, notes = sort_names({entry.name: entry.stem if _is_csv(entry) else None for entry in entries})
    sheets, contents = {}, []
    for name, table in tables.items():
        content, found = _content(path / name, table)
        contents.append((name, content))
        sheet, refused, told = (None, found, []) if found else read_csv(table, content)
        faults.extend(refused)
        notes.extend(told)
        if sheet is not None:
            sheets[table] = sheet
    return Sheets(
        name=path.resolve().name, sha256=_digest(contents), sheets=sheets, faults=tuple(faults), notes=tuple(notes)
    )


def _is_csv(entry: Path) -> bool:
    return entry.suffix.lower() in {".csv", ".tsv"} and entry.is_file()
