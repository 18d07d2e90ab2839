"""The house: imports run one way, and each package says what it gives."""

import ast
from importlib import import_module
from pathlib import Path

import pytest

PACKAGE = Path(__file__).parents[1] / "fieldfit"
ORDER = ["errors", "beam", "fieldbook", "observe", "fit", "judge", "report", "work", "cli"]
STRANGERS = {("fieldbook", "beam")}  # neither knows of the other
SOURCES = sorted(PACKAGE.rglob("*.py"))


def room_of(module: str) -> str | None:
    parts = module.split(".")
    return parts[1] if parts[0] == "fieldfit" and len(parts) > 1 else None


@pytest.mark.parametrize("source", SOURCES, ids=lambda path: str(path.relative_to(PACKAGE)))
def test_imports_run_one_way(source: Path) -> None:
    own = source.relative_to(PACKAGE).with_suffix("").parts[0]
    if own == "__init__":
        return
    modules = [
        node.module
        for node in ast.walk(ast.parse(source.read_text(encoding="utf-8")))
        if isinstance(node, ast.ImportFrom) and node.module and node.level == 0
    ]
    for room in filter(None, map(room_of, modules)):
        assert ORDER.index(room) <= ORDER.index(own), f"{own} imports {room}, which stands after it"
        assert (own, room) not in STRANGERS


def test_no_relative_imports() -> None:
    for source in SOURCES:
        tree = ast.parse(source.read_text(encoding="utf-8"))
        assert not [n for n in ast.walk(tree) if isinstance(n, ast.ImportFrom) and n.level], source


@pytest.mark.parametrize("room", [room for room in ORDER if room != "work"])
def test_every_name_announced_is_there(room: str) -> None:
    module = import_module(f"fieldfit.{room}")
    assert [name for name in module.__all__ if not hasattr(module, name)] == []


def test_the_public_names_come_when_asked_for() -> None:
    import fieldfit  # noqa: PLC0415

    assert [name for name in fieldfit.__all__ if not hasattr(fieldfit, name)] == []
    with pytest.raises(AttributeError, match="no attribute 'nothing'"):
        _ = fieldfit.nothing
