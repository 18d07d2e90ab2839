"""The command line: a skin over the library. Heavy imports wait until a command needs them."""

from contextlib import contextmanager
from enum import StrEnum
from pathlib import Path
from typing import TYPE_CHECKING, Annotated

import typer

if TYPE_CHECKING:
    from collections.abc import Iterator

    from fieldfit.errors import FieldBookError
    from fieldfit.work import Findings

__all__ = ["app", "main"]

UNUSABLE, FAILED = 2, 3

BookPath = Annotated[Path, typer.Argument(metavar="BOOK", help="Field book: a folder of CSV files, or one .xlsx.")]
MemberNames = Annotated[
    list[str] | None, typer.Option("--member", metavar="NAME", help="Only this member; may be given several times.")
]


class FailOn(StrEnum):
    """Verdicts that may end a run with a status of their own."""

    BEYOND = "beyond"


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
    book: BookPath,
    out: Annotated[
        Path | None, typer.Option(metavar="FOLDER", help="Folder for the results; reports/<book name> if left out.")
    ] = None,
    member: MemberNames = None,
    png: Annotated[bool, typer.Option("--png", help="Write the figures as PNG too.")] = False,
    json: Annotated[bool, typer.Option("--json", help="Print the results as JSON instead of the table.")] = False,
    quiet: Annotated[bool, typer.Option("--quiet", help="Print nothing but the path of the report.")] = False,
    fail_on: Annotated[FailOn | None, typer.Option(help="End with status 3 if a member has this verdict.")] = None,
) -> None:
    """Read a field book, fit its members, judge them and write the report."""
    from rich.console import Console  # noqa: PLC0415
    from rich.progress import track  # noqa: PLC0415

    from fieldfit.fieldbook import read_book  # noqa: PLC0415
    from fieldfit.observe import observe  # noqa: PLC0415
    from fieldfit.work import Findings, among, judged  # noqa: PLC0415

    console = Console(stderr=True)
    with _refusals():
        read = read_book(book)
        subjects = among(observe(read), member or ())
        silent = quiet or not console.is_terminal
        steps = track(judged(subjects), "Fitting", total=len(subjects), console=console, disable=silent)
        findings = Findings(book=read, verdicts=tuple(steps))
        report = findings.write(out, png=png)
    if json:
        _say_record(findings)
    elif not quiet:
        _say_findings(findings)
    typer.echo(f"Report: {report}", err=json)
    if fail_on and any(verdict.verdict == fail_on for verdict in findings):
        raise typer.Exit(FAILED)


@app.command()
def check(
    book: BookPath,
    out: Annotated[
        Path | None,
        typer.Option(
            metavar="PATH",
            help="Draw the members to scale too: a new .svg or .png for all, or a new folder, a file each.",
        ),
    ] = None,
) -> None:
    """Read a field book and say what would be used, set aside and assumed; nothing is fitted."""
    from fieldfit.fieldbook import read_book  # noqa: PLC0415
    from fieldfit.observe import observe  # noqa: PLC0415
    from fieldfit.report import overview, write_sketch  # noqa: PLC0415

    with _refusals():
        read = read_book(book)
        subjects = observe(read)
        lines = overview(read, subjects)
        if out is not None:
            lines += ["", f"Drawn: {write_sketch(read, subjects, out)}"]
    typer.echo("\n".join(lines))


@app.command()
def plan(
    book: BookPath,
    out: Annotated[
        Path | None, typer.Option(metavar="FOLDER", help="Folder for it; reports/<book name> plan if left out.")
    ] = None,
    member: MemberNames = None,
) -> None:
    """Before a test: what every gauge should read, with stop values, and what the test will determine."""
    from fieldfit.fieldbook import read_book  # noqa: PLC0415
    from fieldfit.report.words import printable  # noqa: PLC0415
    from fieldfit.work import plan as planned  # noqa: PLC0415

    with _refusals():
        made = planned(read_book(book), member or ())
        sheet = made.write(out)
    for name, sentences in made.says.items():
        typer.echo("\n  ".join([f"{printable(name)}:", *map(printable, sentences)]))
    typer.echo("Stop values are an aid: the licensed engineer in charge of the test decides.")
    typer.echo(f"Site sheet: {sheet}")


@app.command()
def blank(
    path: Annotated[Path, typer.Argument(metavar="PATH", help="A new folder, or a new file that ends in .xlsx.")],
) -> None:
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


def _say_findings(findings: "Findings") -> None:
    from rich.console import Console  # noqa: PLC0415

    from fieldfit.report import say_findings  # noqa: PLC0415

    say_findings(findings.verdicts, Console())


def _say_record(findings: "Findings") -> None:
    from json import dumps  # noqa: PLC0415

    from fieldfit.report import every_action, result_record  # noqa: PLC0415

    record = result_record(findings.book, findings.verdicts, every_action(findings.verdicts))
    typer.echo(dumps(record, indent=1, ensure_ascii=False, allow_nan=False))


def main() -> None:
    """Entry point of the ``fieldfit`` command."""
    app()


if __name__ == "__main__":
    main()
