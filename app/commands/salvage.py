"""`luffmark salvage OLD NEW`: what can be read of a damaged store goes into a new one, and what was lost is said."""

from __future__ import annotations

import argparse
from dataclasses import asdict

from app.commands.context import Context, remark
from app.operations import salvage as operations
from app.words import sentence
from core.record.instant import iso


def run(context: Context, args: argparse.Namespace) -> int:
    """Save it. Exit 0 also where something was lost: the answer says what."""
    request = operations.SalvageRequest(args.old, args.new, context.passphrase())
    found = operations.salvage(None, context.by, context.now(), request).value
    if found.recovery_code:
        remark(f"Recovery code of the new store, shown once, keep it safe: {found.recovery_code}")
    told = [sentence(m, context.reader()) for m in operations.told(found)]
    lines = [f"{args.new} was made from {args.old}.", *told]
    if operations.lost_nothing(found):
        lines.append("Nothing was lost.")
    value = {k: v for k, v in asdict(found).items() if k not in ("new", "recovery_code", "lost_at")}
    value |= {"store": str(args.new), "lost_at": [iso(t) for t in found.lost_at] if found.lost_at else None}
    context.answer("\n".join(lines), value)
    return 0
