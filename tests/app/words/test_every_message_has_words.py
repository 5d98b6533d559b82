"""Every message key in the sources has a template, and every value a template needs is given by its message.

Keys are found in the syntax tree: the first argument of `Message`, `refuse` and `store_error`, and any other
text that is written like a key (`room.what`) of a family that messages use.
"""

import ast
import re
from collections.abc import Iterator
from pathlib import Path

import pytest

from app.words import templates
from app.words.template import MISSING, Reader, all_fields, fields, fill
from core.judgement.policy import shipped_policy
from core.physiology.classification import Disturbance
from core.record.channels import SITES

ROOT = Path(__file__).parents[3]
MAKERS = {"Message", "refuse", "store_error"}
KEY = re.compile(r"[a-z][a-z0-9_]*\.[a-z][a-z0-9_]*")
NOT_KEYS = re.compile(r".*\.(py|toml|csv|md|svg|luff|txt|json|pdf|png|key|new|seq)$|core\..*|storage\..*|app\..*")
LOG = {"entry.log", "entry.correct", "entry.withdraw", "entry.move", "entry.undo", "episode.begin"}
"""Names of operations in the ledger, written like keys."""

POLICY = shipped_policy()
DYNAMIC = {
    "marker.": sorted(POLICY.markers),
    "due_item.": sorted(POLICY.due),
    "group.": sorted({m.group for m in POLICY.markers.values()}),
    "gas_class.": [d.name.lower() for d in Disturbance],
    "specimen.": [f"{s}_is_not_arterial" for s in SITES],
    "response.": ["serves_as_baseline", "before_baseline", "baseline_early", "early", "capillary",
                  "venous_only", "off_support", "unconfirmed", "inconsistent", "corrected", "disputed"],
    "effect.": ["fio2", "o2_flow", "ti", "interface", "mode"],
}  # fmt: skip
"""Keys made at run time: what stands before the brace, and every end it can get."""


def sources() -> list[Path]:
    found = (p for room in ("core", "storage", "app") for p in (ROOT / room).rglob("*.py"))
    return sorted(p for p in found if "words" not in p.parts)


def calls() -> Iterator[tuple[Path, ast.Call]]:
    for path in sources():
        for node in ast.walk(ast.parse(path.read_text("utf-8"))):
            if isinstance(node, ast.Call):
                name = node.func.id if isinstance(node.func, ast.Name) else getattr(node.func, "attr", "")
                if name in MAKERS and node.args:
                    yield path, node


def literal_keys() -> dict[str, Path]:
    found: dict[str, Path] = {}
    for path in sources():
        for node in ast.walk(ast.parse(path.read_text("utf-8"))):
            if isinstance(node, ast.Constant) and isinstance(node.value, str) and KEY.fullmatch(node.value):
                found.setdefault(node.value, path)
    return found


def families() -> set[str]:
    keys = {c.args[0].value for _, c in calls() if isinstance(c.args[0], ast.Constant)}
    return {str(k).partition(".")[0] for k in keys} | {p.rstrip(".") for p in DYNAMIC} | {"undefined"}


def wanted() -> dict[str, Path]:
    known = families()
    found = {
        k: p for k, p in literal_keys().items()
        if k.partition(".")[0] in known and not NOT_KEYS.fullmatch(k) and k not in LOG
    }  # fmt: skip
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
        key = call.args[0]
        if isinstance(key, ast.JoinedStr):
            start = key.values[0]
            assert isinstance(start, ast.Constant), (path, ast.unparse(call))
            assert start.value in DYNAMIC, (path, ast.unparse(call))


def given_values(call: ast.Call) -> set[str] | None:
    """The values a call names, or None where they are made elsewhere."""
    name = call.func.id if isinstance(call.func, ast.Name) else getattr(call.func, "attr", "")
    if name != "Message":
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
        key, given = call.args[0], given_values(call)
        if isinstance(key, ast.Constant) and given is not None and key.value in templates():
            seen += 1
            needed = fields(templates()[str(key.value)])
            assert needed <= given, (str(path.relative_to(ROOT)), key.value, needed - given)
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
