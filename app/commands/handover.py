"""`luffmark handover --from T --to T [--out FILE]`: the sheet as PDF, or the same words as text."""

from __future__ import annotations

import argparse
import sys
from pathlib import Path

from app.commands.context import Context
from app.operations import handover as operations
from app.plain_handover import handover_text
from app.sheet.content import sheet_content
from app.sheet.shapes import SheetContent
from core.record.local_time import zoned_iso

_TEXT = (".txt", ".text", ".md")


def run(context: Context, args: argparse.Namespace) -> int:
    """Write or print the handover of a shift."""
    suffix = args.out.suffix.lower() if args.out else ""
    if suffix not in ("", ".pdf", *_TEXT):
        print(f"luffmark: '{args.out}' must end in .pdf or .txt", file=sys.stderr)
        return 2
    reader = context.reader()
    with context.open(read_only=True) as store:
        request = operations.HandoverRequest(args.start, args.end, args.as_known_at)
        gathered = operations.prepare(store, context.by, context.now(), request).value
    content = sheet_content(gathered, reader, given_by=args.given_by, taken_by=args.taken_by)
    value = {
        "from": zoned_iso(args.start, reader.zone), "to": zoned_iso(args.end, reader.zone),
        "head": gathered.printed_head, "episodes": [s.episode for s in gathered.shift.episodes],
        "see_first": content.ward.see_first,
    }  # fmt: skip
    if args.out is None:
        context.answer(handover_text(content).rstrip(), value | {"text": handover_text(content)})
        return 0
    if suffix == ".pdf":
        pages = _write_pdf(content, args.out, args.paper)
        context.answer(f"{args.out}: {pages} pages, {len(content.episodes)} episodes. {content.head}.",
                       value | {"file": str(args.out), "pages": pages, "paper": args.paper})  # fmt: skip
        return 0
    args.out.write_text(handover_text(content), "utf-8")
    context.answer(f"{args.out}: {len(content.episodes)} episodes. {content.head}.", value | {"file": str(args.out)})
    return 0


def _write_pdf(content: SheetContent, path: Path, paper: str) -> int:
    from app.off_screen import gui_application
    from app.sheet.printing import write_pdf

    with gui_application():
        return write_pdf(content, path, paper)
