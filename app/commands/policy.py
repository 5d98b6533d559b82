"""`luffmark policy show | check FILE | put FILE`."""

from __future__ import annotations

import argparse
import sys
from pathlib import Path

from app.commands.context import Context
from core.judgement.policy import Policy, read_policy, shipped_policy, shipped_text


def run(context: Context, args: argparse.Namespace) -> int:
    """Show the policy in force, check a file, or put one in force."""
    if args.what == "show":
        return _show(context)
    if args.file is None:
        print(f"luffmark: policy {args.what} needs a FILE", file=sys.stderr)
        return 2
    text = _text_of(args.file)
    if args.what == "check":
        return _check(context, args.file, text)
    from app.operations import policy as operations

    with context.open() as store:
        put = operations.put(store, context.by, context.now(), text).value
    context.answer(f"In force now: {_named(put)}", _facts(put))
    return 0


def _check(context: Context, path: Path, text: str) -> int:
    """Every fault with its line, and what differs from the shipped policy."""
    from app.words import sentence
    from core.judgement.policy_check import ERROR, check

    found = check(text)
    rows = [(f, sentence(f.message)) for f in found.findings]
    value = {
        "file": str(path), "usable": found.usable, "hash": found.hash,
        "findings": [{"line": f.line, "path": f.path, "kind": f.kind, "key": f.message.key, "text": said}
                     for f, said in rows],
        "differences": [{"path": d.path, "shipped": d.shipped, "own": d.own} for d in found.differences],
    }  # fmt: skip
    remarks = [f"  line {f.line}: {said}" for f, said in rows if f.kind != ERROR]
    changes = [f"  {d.path}: {d.own} (shipped {d.shipped})" for d in found.differences]
    if found.usable:
        head = f"{path} is a usable policy. {_named(read_policy(text))}"
        listed = [*remarks, *(["Different from the shipped policy:", *changes] if changes else [])]
        context.answer("\n".join([head, *listed]), value)
        return 0
    if context.json:
        context.answer("", value)
    faults = [f"  line {f.line}: {said}" for f, said in rows if f.kind == ERROR]
    print(f"luffmark: {path} is no usable policy: {len(faults)} fault(s).", *faults, sep="\n", file=sys.stderr)
    return 1


def _show(context: Context) -> int:
    """The policy in force; the shipped one where there is no store yet."""
    if not context.store_path.exists() and not context.store_given:
        context.answer(shipped_text(), _facts(shipped_policy()) | {"text": shipped_text(), "shipped": True})
        return 0
    from app.operations import policy as operations

    with context.open(read_only=True) as store:
        found = operations.show(store, context.by, context.now(), None).value
    context.answer(found.text, _facts(found.policy) | {"text": found.text, "shipped": found.is_shipped})
    return 0


def _text_of(path: Path) -> str:
    from core.record.message import refuse

    try:
        return path.read_text("utf-8")
    except UnicodeDecodeError as error:
        raise refuse("policy.unreadable", detail=f"not UTF-8 ({error.reason})") from None


def _named(policy: Policy) -> str:
    return f"{policy.name}, version {policy.version}, SHA-256 {policy.hash[:16]}."


def _facts(policy: Policy) -> dict[str, object]:
    return {"name": policy.name, "version": policy.version, "hash": policy.hash}
