"""Reads the hazard log and the proofs of DEVELOPERS.md."""

from __future__ import annotations

import ast
import re
from functools import lru_cache
from pathlib import Path

ROOT = Path(__file__).parents[2]
COLUMNS = ("no", "hazard", "cause", "harm", "control", "proved by")
_NAMED = re.compile(r"`(tests/[\w/]+\.py)::(test_\w+)`")
_COMMAND = re.compile(r"`pytest (?:-m soak )?(tests/[\w/]+\.py)(?: -k (\"[^\"]+\"|\w+))?`")


def section(heading: str) -> str:
    """The text under a heading of DEVELOPERS.md."""
    text = (ROOT / "DEVELOPERS.md").read_text("utf-8")
    _, _, rest = text.partition(f"\n## {heading}\n")
    return rest.partition("\n## ")[0]


def hazards() -> list[dict[str, str]]:
    """Every hazard by the columns of the table."""
    rows = [line for line in section("Hazard log").splitlines() if line.startswith("| H")]
    return [dict(zip(COLUMNS, (c.strip() for c in row.strip("|").split("|")), strict=True)) for row in rows]


def named_tests(text: str) -> list[tuple[str, str]]:
    """The tests that a cell names: (path, function)."""
    return _NAMED.findall(text)


def commands() -> list[tuple[str, str]]:
    """The commands of the proofs: (path, a word that must be found in a test's name, or "")."""
    found = []
    for path, words in _COMMAND.findall(section("Proofs")):
        options = words.strip('"').split(" or ") if words else [""]
        found += [(path, w) for w in options]
    return found


@lru_cache(maxsize=64)
def _functions(path: str) -> frozenset[str]:
    file = ROOT / path
    if not file.is_file():
        return frozenset()
    tree = ast.parse(file.read_text("utf-8"))
    return frozenset(n.name for n in ast.walk(tree) if isinstance(n, ast.FunctionDef) and n.name.startswith("test_"))


def is_there(path: str, name: str) -> bool:
    """Whether a file has a test of that name, or for a part of a name one that holds it."""
    found = _functions(path)
    return name in found if name.startswith("test_") else any(name in f for f in found)
