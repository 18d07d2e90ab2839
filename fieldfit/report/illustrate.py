"""Illustrate: the figures of a member as SVG text, and as PNG where asked for."""

from dataclasses import dataclass

from fieldfit.fieldbook import Book
from fieldfit.fit import Reconciliation
from fieldfit.report.canvas import Drawing
from fieldfit.report.figures import Picture, figures_of
from fieldfit.report.svg import inline_svg, svg_file

__all__ = ["Illustration", "illustrations"]


@dataclass(frozen=True, slots=True, kw_only=True)
class Illustration:
    """One figure of the report, for the page (``inline``) and for files; ``key`` names it in file names."""

    key: str
    heading: str
    caption: str
    inline: str
    svg: str
    png: bytes | None


def illustrations(book: Book, found: Reconciliation, *, png: bool = False) -> tuple[Illustration, ...]:
    """Every figure of a member, drawn."""
    return tuple(_illustrated(picture, png=png) for picture in figures_of(book, found))


def _illustrated(picture: Picture, *, png: bool) -> Illustration:
    inline = inline_svg(picture.drawing)
    return Illustration(
        key=picture.key,
        heading=picture.heading,
        caption=picture.caption,
        inline=inline,
        svg=svg_file(picture.drawing, inline),
        png=_raster(picture.drawing) if png else None,
    )


def _raster(drawing: Drawing) -> bytes:
    """A PNG; matplotlib is only imported when one is asked for."""
    from fieldfit.report.raster import png  # noqa: PLC0415

    return png(drawing)
