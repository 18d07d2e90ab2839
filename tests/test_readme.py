"""The README's first book, commands and Python lines, run as they are printed."""

import re
from pathlib import Path

import pytest
from typer.testing import CliRunner

from fieldfit.cli import app

TOP = Path(__file__).parents[1]
README = (TOP / "README.md").read_text(encoding="utf-8")
CONSOLE = re.findall(r"```console\n\$ fieldfit ([^\n]+)\n(.*?)\n```", README, re.DOTALL)


@pytest.fixture
def site(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    """A folder with the README's first book in it and the demos beside it."""
    book = tmp_path / "first_book"
    book.mkdir()
    for name, text in re.findall(r"^`(\w+\.csv)`[^\n]*\n\n```csv\n(.*?)```", README, re.DOTALL | re.MULTILINE):
        (book / name).write_text(text, encoding="utf-8")
    (tmp_path / "datasets").symlink_to(TOP / "datasets")
    monkeypatch.chdir(tmp_path)
    return tmp_path


@pytest.mark.parametrize(("command", "output"), CONSOLE, ids=[command for command, _ in CONSOLE])
def test_commands_print_what_the_readme_shows(command: str, output: str, site: Path) -> None:
    result = CliRunner().invoke(app, command.split())
    assert result.exit_code == 0
    assert result.output.rstrip() == output
    assert (site / output.splitlines()[-1].removeprefix("Report: ")).is_file()


def test_the_python_lines_run(site: Path) -> None:
    (code,) = re.findall(r"```python\n(.*?)```", README, re.DOTALL)
    names: dict[str, object] = {}
    exec(code, names)
    assert names["findings"]["B1"].verdict == "within"  # type: ignore[index]
    assert (site / "reports" / "first_book" / "report.html").is_file()


def test_every_path_the_readme_points_to_is_there() -> None:
    paths = re.findall(r"\]\((?!http)([^)]+)\)", README)
    assert [path for path in paths if not (TOP / path).exists()] == []
    assert len(CONSOLE) == 3
