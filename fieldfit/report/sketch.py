"""Sketch: the members of a book to scale with their gauges, before anything is fitted."""

from collections.abc import Sequence
from pathlib import Path

from fieldfit.fieldbook import Book
from fieldfit.observe import Subject
from fieldfit.report.canvas import Drawing, Shape, Text, moved, shortened
from fieldfit.report.figures import beam
from fieldfit.report.folder import OutputError, replace_folder
from fieldfit.report.svg import svg

__all__ = ["write_sketch"]

HEADING = 26.0  # px above each member for its name
FILES = (".svg", ".png")


def write_sketch(book: Book, subjects: Sequence[Subject], out: Path) -> Path:
    """Draw every member to scale: all in one file where ``out`` ends in .svg or .png, else one SVG each in a folder.

    Raises OutputError where something is there already, or nothing can be written.
    """
    if out.exists() and not (out.is_dir() and not any(out.iterdir())):
        raise OutputError(f"{out} is there already; name a new file, or a new or empty folder")
    drawings = [beam(book, subject).drawing for subject in subjects]
    if out.suffix.lower() not in FILES:
        replace_folder(out, {f"member-{number:03d}.svg": svg(one) for number, one in enumerate(drawings, start=1)})
        return out
    names = [subject.name for subject in subjects]
    _write_file(out, _rendered(_below_each_other(book, names, drawings), out.suffix.lower()))
    return out


def _below_each_other(book: Book, names: Sequence[str], drawings: Sequence[Drawing]) -> Drawing:
    """All drawings in one, each under the name of its member."""
    shapes: list[Shape] = []
    top = 0.0
    for name, drawing in zip(names, drawings, strict=True):
        shapes.append(Text(8, top + 16, shortened(name, drawing.width - 100, 14), size=14, bold=True))
        shapes += [moved(shape, top + HEADING) for shape in drawing.shapes]
        top += HEADING + drawing.height
    return Drawing(
        width=drawings[0].width,
        height=top,
        title=f"Members of {book.name} to scale",
        description=" ".join(f"{name}: {drawing.description}" for name, drawing in zip(names, drawings, strict=True)),
        shapes=tuple(shapes),
    )


def _rendered(drawing: Drawing, suffix: str) -> bytes:
    if suffix == ".svg":
        return svg(drawing).encode()
    from fieldfit.report.raster import png  # noqa: PLC0415  # matplotlib takes long to import

    return png(drawing)


def _write_file(out: Path, content: bytes) -> None:
    """Write a file beside its place, then put it there, so that it is whole or not there."""
    beside = out.with_name(f".{out.name}.fieldfit")
    try:
        out.parent.mkdir(parents=True, exist_ok=True)
        beside.write_bytes(content)
        beside.replace(out)
    except OSError as problem:
        raise OutputError(f"{out} cannot be written: {problem.strerror}") from problem
