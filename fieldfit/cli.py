"""The command line: a skin over the library. Heavy imports wait until a command needs them."""

from contextlib import contextmanager
from pathlib import Path
from typing import TYPE_CHECKING, Annotated

import typer

if TYPE_CHECKING:
    from collections.abc import Iterator, Sequence

    from fieldfit.errors import FieldBookError
    from fieldfit.judge import Verdict

__all__ = ["app", "main"]

UNUSABLE = 2

app = typer.Typer(
    help="Reconcile readings taken on existing beams with beam theory.",
    no_args_is_help=True,
    add_completion=False,
    pretty_exceptions_enable=False,
)


@app.callback()
def fieldfit() -> None:
    """Reconcile readings taken on existing beams with beam theory."""


@app.command()
def reconcile(
    book: Annotated[Path, typer.Argument(help="Field book: a folder of CSV files.")],
    out: Annotated[Path | None, typer.Option(help="Folder for the results; reports/<book name> if left out.")] = None,
) -> None:
    """Read a field book, fit its members, judge them and write the report."""
    from rich.console import Console  # noqa: PLC0415
    from rich.progress import track  # noqa: PLC0415

    from fieldfit.fieldbook import read_book  # noqa: PLC0415
    from fieldfit.observe import observe  # noqa: PLC0415
    from fieldfit.report import write_report  # noqa: PLC0415
    from fieldfit.work import judged  # noqa: PLC0415

    console = Console(stderr=True)
    with _refusals():
        read = read_book(book)
        subjects = observe(read)
        steps = track(
            judged(subjects), "Fitting", total=len(subjects), console=console, disable=not console.is_terminal
        )
        verdicts = tuple(steps)
        report = write_report(read, verdicts, out or Path("reports") / read.name)
    _say_verdicts(verdicts)
    typer.echo(f"Report: {report}")


@app.command()
def check(book: Annotated[Path, typer.Argument(help="Field book: a folder of CSV files, or one .xlsx.")]) -> None:
    """Read a field book and say what would be used, set aside and assumed; nothing is fitted or written."""
    from fieldfit.fieldbook import read_book  # noqa: PLC0415
    from fieldfit.observe import observe  # noqa: PLC0415
    from fieldfit.report import overview  # noqa: PLC0415

    with _refusals():
        read = read_book(book)
        lines = overview(read, observe(read))
    typer.echo("\n".join(lines))


@app.command()
def blank(path: Annotated[Path, typer.Argument(help="A new folder, or a new file that ends in .xlsx.")]) -> None:
    """Write an empty field book with its instructions and an example row in every table."""
    from fieldfit.fieldbook import write_blank  # noqa: PLC0415

    with _refusals():
        write_blank(path)
    typer.echo(f"Blank field book: {path}")


@contextmanager
def _refusals() -> "Iterator[None]":
    """Say in words what fieldfit refuses, and end with status 2; a user never sees a traceback."""
    from fieldfit.errors import FieldBookError, FieldfitError  # noqa: PLC0415

    try:
        yield
    except FieldBookError as refused:
        _say_faults(refused)
        raise typer.Exit(UNUSABLE) from None
    except FieldfitError as refused:
        typer.echo(str(refused), err=True)
        raise typer.Exit(UNUSABLE) from None


def _say_faults(refused: "FieldBookError") -> None:
    count = len(refused.faults)
    typer.echo(
        f"{refused.book} cannot be used: {count} {'fault' if count == 1 else 'faults'}. Nothing was written.", err=True
    )
    for fault in refused.faults:
        typer.echo(f"  {fault}", err=True)


def _say_verdicts(verdicts: "Sequence[Verdict]") -> None:
    """One line a member, then the warnings and the first caution."""
    from fieldfit.report import answer, headline  # noqa: PLC0415

    typer.echo(headline(verdicts))
    for verdict in verdicts:
        typer.echo(f"  {verdict.reconciliation.subject.name}: {verdict.verdict}. {answer(verdict)}")
    for warning in dict.fromkeys(warning for verdict in verdicts for warning in verdict.warnings):
        typer.echo(f"Note: {warning}")
    typer.echo(verdicts[0].cautions[0])


def main() -> None:
    """Entry point of the ``fieldfit`` command."""
    app()
