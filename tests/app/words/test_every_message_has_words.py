"""Every message key in the sources has a template, and every value a template needs is given by its message.

Keys are found in the syntax tree: the arguments of `Message`, `refuse`, `store_error` and `unreadable`, and any other
text that is written like a key (`room.what`) of a family that messages use.
"""

import ast
import re
from collections.abc import Iterator
from functools import cache
from pathlib import Path

import pytest

from app.words import templates
from app.words.template import MISSING, Reader, all_fields, fields, fill
from core.judgement.expected_co2 import EXPLAIN_HIGHER, EXPLAIN_LOWER
from core.judgement.policy import shipped_policy
from core.physiology.classification import Disturbance
from core.record.channels import SITES

ROOT = Path(__file__).parents[3]
MAKERS = {"Message": 0, "refuse": 0, "store_error": 0, "unreadable": 2}
"""What makes a message, and which of its arguments is the key."""
KEY = re.compile(r"[a-z][a-z0-9_]*\.[a-z][a-z0-9_]*")
NOT_KEYS = re.compile(
    r".*\.(py|toml|csv|md|svg|luff(mark)?|txt|json|pdf|png|key|new|seq)$|core\..*|storage\..*|app\..*"
)
NAMES_OF_NUMBERS = {"policy_limits.py"}
"""Modules that name numbers of the policy by their path, written like keys; their messages are calls."""
OPERATIONS = {
    "episode.begin",
    "entry.log",
    "entry.correct",
    "entry.withdraw",
    "entry.move",
    "entry.undo",
    "intake.withdraw",
}
"""Names of operations in the ledger, written like keys; those given by name are found by `operations`."""


POLICY = shipped_policy()


@cache
def nodes(path: Path) -> tuple[ast.AST, ...]:
    """Everything in a module's syntax tree; read once, since every test here looks at all of them."""
    return tuple(ast.walk(ast.parse(path.read_text("utf-8"))))


def first_arguments(path: Path, function: str) -> list[str]:
    """Literal first arguments of a module's own helper that puts a family before its key."""
    found = []
    for node in nodes(path):
        if isinstance(node, ast.Call) and isinstance(node.func, ast.Name) and node.func.id == function:
            arms = [node.args[0]]
            if isinstance(arms[0], ast.IfExp):
                arms = [arms[0].body, arms[0].orelse]
            found += [a.value for a in arms if isinstance(a, ast.Constant)]
    return sorted({str(f) for f in found})


def assigned_keys(path: Path) -> list[str]:
    """Texts assigned to a name `key` in a module."""
    found: list[str] = []
    for node in nodes(path):
        if isinstance(node, ast.Assign) and any(isinstance(t, ast.Name) and t.id == "key" for t in node.targets):
            arms = [node.value.body, node.value.orelse] if isinstance(node.value, ast.IfExp) else [node.value]
            found += [a.value for a in arms if isinstance(a, ast.Constant) and isinstance(a.value, str)]
    return found


def functions_of(folder: Path) -> list[str]:
    """Every function of the marker modules that finds spells: its name is the marker's key."""
    found = []
    for path in folder.glob("*.py"):
        for node in ast.parse(path.read_text("utf-8")).body:
            returns = ast.unparse(node.returns) if isinstance(node, ast.FunctionDef) and node.returns else ""
            if isinstance(node, ast.FunctionDef) and not node.name.startswith("_") and returns == "Iterable[Spell]":
                found.append(node.name)
    return found


JUDGEMENT = ROOT / "core" / "judgement"
LEVERS = JUDGEMENT / "levers.py"
DYNAMIC = {
    "marker.": sorted({*POLICY.markers, *functions_of(JUDGEMENT / "markers")}),
    "due_item.": sorted(POLICY.due),
    "group.": sorted({m.group for m in POLICY.markers.values()}),
    "lever_name.": first_arguments(LEVERS, "_lever"),
    "lever.": sorted({*first_arguments(LEVERS, "_say"), *assigned_keys(LEVERS)}),
    "due.": ["mask_check", "oxygen_review"],
    "expected.": [*EXPLAIN_HIGHER, *EXPLAIN_LOWER, "within_band"],
    "gas_class.": [d.name.lower() for d in Disturbance],
    "specimen.": [f"{s}_is_not_arterial" for s in SITES],
    "response.": ["serves_as_baseline", "before_baseline", "baseline_early", "early", "capillary",
                  "venous_only", "unconfirmed", "unusual", "implausible", "inconsistent",
                  "corrected", "disputed"],
    "effect.": ["fio2", "o2_flow", "ti", "interface", "mode"],
}  # fmt: skip
"""Keys made at run time: what stands before the brace, and every end it can get."""


@cache
def sources() -> list[Path]:
    found = (p for room in ("core", "storage", "app") for p in (ROOT / room).rglob("*.py"))
    return sorted(p for p in found if "words" not in p.parts)


def calls() -> Iterator[tuple[Path, ast.Call]]:
    for path in sources():
        for node in nodes(path):
            if isinstance(node, ast.Call):
                place = MAKERS.get(name_of(node))
                if place is not None and len(node.args) > place:
                    yield path, node


def name_of(call: ast.Call) -> str:
    return call.func.id if isinstance(call.func, ast.Name) else str(getattr(call.func, "attr", ""))


def key_of(call: ast.Call) -> ast.expr:
    return call.args[MAKERS[name_of(call)]]


def literal_key(call: ast.Call) -> str:
    """The key a call names, or an empty text where it is made at run time."""
    key = key_of(call)
    return key.value if isinstance(key, ast.Constant) and isinstance(key.value, str) else ""


def literal_keys() -> dict[str, Path]:
    found: dict[str, Path] = {}
    for path in sources():
        for node in nodes(path):
            if isinstance(node, ast.Constant) and isinstance(node.value, str) and KEY.fullmatch(node.value):
                found.setdefault(node.value, path)
    return found


def operations() -> set[str]:
    """What the ledger calls its batches: texts given as `operation`."""
    found = set()
    for path in sources():
        for node in nodes(path):
            if isinstance(node, ast.keyword) and node.arg == "operation" and isinstance(node.value, ast.Constant):
                found.add(str(node.value.value))
    return found


def families() -> set[str]:
    keys = {literal_key(c) for _, c in calls()} - {""}
    return {k.partition(".")[0] for k in keys} | {p.rstrip(".") for p in DYNAMIC} | {"undefined"}


@cache
def wanted() -> dict[str, Path]:
    known, names = families(), OPERATIONS | operations()
    found = {
        k: p for k, p in literal_keys().items()
        if k.partition(".")[0] in known and not NOT_KEYS.fullmatch(k) and k not in names
        and p.name not in NAMES_OF_NUMBERS
    }  # fmt: skip
    found |= {literal_key(c): p for p, c in calls() if literal_key(c)}
    for prefix, ends in DYNAMIC.items():
        found |= {prefix + end: ROOT for end in ends}
    return found


def test_every_key_has_words() -> None:
    without = {k: str(p.relative_to(ROOT)) for k, p in wanted().items() if k not in templates()}
    assert not without


def test_no_template_is_left_over() -> None:
    assert not set(templates()) - set(wanted())


def test_every_key_made_at_run_time_is_listed() -> None:
    for path, call in calls():
        key = key_of(call)
        if isinstance(key, ast.JoinedStr):
            start = key.values[0]
            assert isinstance(start, ast.Constant), (path, ast.unparse(call))
            assert start.value in DYNAMIC, (path, ast.unparse(call))


def given_values(call: ast.Call) -> set[str] | None:
    """The values a call names, or None where they are made elsewhere."""
    if name_of(call) != "Message":
        return None if any(k.arg is None for k in call.keywords) else {str(k.arg) for k in call.keywords}
    if len(call.args) == 1 and not call.keywords:
        return set()
    values = call.args[1] if len(call.args) > 1 else call.keywords[0].value
    if isinstance(values, ast.Dict) and all(isinstance(k, ast.Constant) for k in values.keys):
        return {str(k.value) for k in values.keys if isinstance(k, ast.Constant)}
    return None


def test_no_template_needs_a_value_that_its_message_does_not_give() -> None:
    seen = 0
    for path, call in calls():
        key, given = literal_key(call), given_values(call)
        if given is not None and key in templates():
            seen += 1
            needed = fields(templates()[key])
            assert needed <= given, (str(path.relative_to(ROOT)), key, needed - given)
    assert seen > 100


@pytest.mark.parametrize("key", sorted(templates()))
def test_every_way_of_writing_in_a_template_is_known(key: str) -> None:
    template = templates()[key]
    for value in (1.0, "word", None, True):
        text = fill(template, dict.fromkeys(all_fields(template), value), Reader())
        assert "{" not in text
        assert "[[" not in text
        assert MISSING not in text or MISSING in template


def test_templates_are_sentences_or_parts_of_one_without_markup() -> None:
    for key, template in templates().items():
        assert "<" not in template, key
        assert "  " not in template, key
        assert template == template.strip(), key
