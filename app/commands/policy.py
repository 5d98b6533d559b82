"""`luffmark policy show | check FILE | put FILE | history`."""

from __future__ import annotations

import argparse
import sys
from pathlib import Path

from app.commands.context import Context
from app.policy.file import text_of
from core.judgement.policy import Policy, read_policy, shipped_policy, shipped_text
from core.record.instant import iso


def run(context: Context, args: argparse.Namespace) -> int:
    """Show the policy in force, check a file, or put one in force."""
    if args.what in ("show", "history"):
        return _show(context) if args.what == "show" else _history(context)
    if args.file is None:
        print(f"luffmark: policy {args.what} needs a FILE", file=sys.stderr)
        return 2
    text = text_of(args.file)
    if args.what == "check":
        return _check(context, args.file, text)
    return _put(context, args.file, text)


def _put(context: Context, path: Path, text: str) -> int:
    """Put a policy in force, or say every fault and what stays in force."""
    from app.operations import policy as operations
    from core.judgement.policy_check import check

    with context.open() as store:
        if not check(text).usable:
            stays = operations.in_force(store)
            code = _check(context, path, text)
            print(f"In force as before: {_named(stays)}", file=sys.stderr)
            return code
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
    value = _facts(found.policy) | {"text": found.text, "shipped": found.is_shipped}
    context.answer(found.text, value | {"passed_over": [dict(m.values) for m in found.passed_over]})
    return 0


def _history(context: Context) -> int:
    """Every policy that was put in force, the newest first."""
    from app.look.formats import wall
    from app.operations import policy as operations

    with context.open(read_only=True) as store:
        kept = operations.history(store, context.by, context.now(), None).value
    zone = context.local_zone()
    lines = [f"{wall(k.at, zone)}  {k.hash[:16]}  {k.name or 'cannot be read'}"
             + (f", version {k.version}" if k.name else "") + (f"  by {k.by}" if k.by else "")
             for k in kept]  # fmt: skip
    value = [{"at": iso(k.at), "hash": k.hash, "name": k.name or None, "version": k.version if k.name else None,
              "by": k.by} for k in kept]  # fmt: skip
    context.answer("\n".join(lines) or "The store has no policy of its own: the shipped one is in force.", value)
    return 0


def _named(policy: Policy) -> str:
    return f"{policy.name}, version {policy.version}, SHA-256 {policy.hash[:16]}."


def _facts(policy: Policy) -> dict[str, object]:
    return {"name": policy.name, "version": policy.version, "hash": policy.hash}
