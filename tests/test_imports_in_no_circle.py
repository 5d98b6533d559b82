"""Whoever reads a module can read what it rests on first: no import leads back, not even one for types alone."""

import ast
from collections.abc import Iterator
from graphlib import CycleError, TopologicalSorter
from pathlib import Path

import pytest

ROOT = Path(__file__).parent.parent
ROOMS = ("core", "storage", "app", "sample_data")


def modules(root: Path, rooms: tuple[str, ...]) -> dict[str, Path]:
    """Every module of some rooms, by its name."""
    found = {}
    for room in rooms:
        for path in sorted((root / room).rglob("*.py")):
            parts = path.relative_to(root).with_suffix("").parts
            found[".".join(parts[:-1] if parts[-1] == "__init__" else parts)] = path
    return found


def imported(path: Path, known: dict[str, Path]) -> Iterator[str]:
    """The modules that a file names in its imports, wherever in it they stand."""
    for node in ast.walk(ast.parse(path.read_text("utf-8"))):
        if isinstance(node, ast.ImportFrom) and node.module is not None:
            wholes = (f"{node.module}.{name.name}" for name in node.names)
            yield from (whole if whole in known else node.module for whole in wholes)
        elif isinstance(node, ast.Import):
            yield from (name.name for name in node.names)


def in_order(root: Path, rooms: tuple[str, ...]) -> list[str]:
    """The modules, each after those that it imports."""
    known = modules(root, rooms)
    graph = {name: {m for m in imported(path, known) if m in known} for name, path in known.items()}
    return list(TopologicalSorter(graph).static_order())


def test_no_import_leads_back_to_where_it_began() -> None:
    order = in_order(ROOT, ROOMS)
    assert order.index("core.record.instant") < order.index("storage.store") < order.index("app.window.main")


def test_a_circle_is_found_and_named(tmp_path: Path) -> None:
    room = tmp_path / "room"
    room.mkdir()
    (room / "above.py").write_text("from room.below import thing\n")
    (room / "below.py").write_text("if TYPE_CHECKING:\n    from room import above\n")
    with pytest.raises(CycleError) as told:
        in_order(tmp_path, ("room",))
    assert {"room.above", "room.below"} <= set(told.value.args[1])
