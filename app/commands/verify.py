"""`luffmark verify`: the store is checked whole, and says in sentences what is wrong."""

from __future__ import annotations

import argparse
import sys

from app.commands.context import Context
from app.operations import store as operations
from app.words import sentence
from storage import witness


def run(context: Context, args: argparse.Namespace) -> int:
    """Check the store. Exit 1 with every finding on stderr where something is wrong."""
    with context.open(read_only=True, check=False) as store:
        findings = operations.verify(store, context.by, context.now(), None).value
        if args.witness is not None:
            findings = (*findings, *witness.findings(args.witness, store))
        if args.add_witness is not None and not findings:
            witness.add(args.add_witness, store, context.now())
        head = store.printed_head()
        path = str(store.path)
    texts = [sentence(f) for f in findings]
    value = {"store": path, "head": head, "sound": not findings,
             "findings": [{"key": f.key, "values": dict(f.values), "text": t}
                          for f, t in zip(findings, texts, strict=True)]}  # fmt: skip
    if not findings:
        context.answer(f"{path} is sound. Head {head}.", value)
        return 0
    if context.json:
        context.answer("", value)
    print(f"luffmark: {path} is not sound: {len(findings)} finding(s).", file=sys.stderr)
    for text in texts:
        print(f"  {text}", file=sys.stderr)
    return 1
