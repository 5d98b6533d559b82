"""The catalogue tells the truth: functions and checks exist, and no formula is left out."""

import ast
from importlib import import_module
from pathlib import Path

import pytest

from core.figures.catalogue import CATALOGUE, CERTAINTIES, SECTIONS, FigureEntry
from core.physiology.formula import PLANS

ROOT = Path(__file__).parents[3]
ENTRIES = [entry for entries in SECTIONS.values() for entry in entries]


def test_keys_are_unique() -> None:
    assert len(CATALOGUE) == len(ENTRIES)


@pytest.mark.parametrize("entry", ENTRIES, ids=lambda e: e.key)
def test_an_entry_points_at_what_exists(entry: FigureEntry) -> None:
    assert callable(getattr(import_module(entry.module), entry.function.rpartition(".")[2]))
    path, _, name = entry.check.partition("::")
    tree = ast.parse((ROOT / path).read_text(encoding="utf-8"))
    assert name in {node.name for node in tree.body if isinstance(node, ast.FunctionDef)}
    assert entry.certainty in CERTAINTIES
    assert all((entry.key, entry.name, entry.formula, entry.source))


def test_every_formula_is_listed() -> None:
    listed = {entry.function.removeprefix("core.physiology.") for entry in ENTRIES}
    assert set(PLANS) <= listed, "a formula needs its line in the catalogue"


def test_what_is_from_memory_says_so_in_its_docstring() -> None:
    for entry in ENTRIES:
        if entry.certainty == "from memory":
            module = import_module(entry.module)
            found = getattr(module, entry.function.rpartition(".")[2])
            told = (found.__doc__ or "") + (import_module(found.__module__).__doc__ or "")
            assert "from memory" in told.lower().replace("\n", " "), entry.key
