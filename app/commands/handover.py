"""`luffmark handover --from T --to T [--out FILE]`: the sheet as PDF, or the same words as text."""

from __future__ import annotations

import argparse
import sys
from pathlib import Path
from typing import TYPE_CHECKING

from app.commands.context import Context
from app.handover.plain import handover_text
from app.keeping.whole_file import claim, write_whole
from app.operations import handover as operations
from app.sheet.content import sheet_content
from app.sheet.shapes import SheetContent
from core.record.local_time import zoned_iso

if TYPE_CHECKING:
    from app.operations.handover import Handover
    from storage.store import Store

_TEXT = (".txt", ".text", ".md")


def run(context: Context, args: argparse.Namespace) -> int:
    """Write or print the handover of a shift; keep it as closed; or write the form to fill in by hand."""
    suffix = args.out.suffix.lower() if args.out else ""
    if suffix not in ("", ".pdf", *_TEXT):
        print(f"luffmark: '{args.out}' must end in .pdf or .txt", file=sys.stderr)
        return 2
    if args.text and (suffix == ".pdf" or args.close or args.blank):
        print("luffmark: handover --text goes to the screen or into a .txt file", file=sys.stderr)
        return 2
    if args.close and not (args.given_by and args.taken_by):
        print("luffmark: a handover is closed with --given-by and --taken-by", file=sys.stderr)
        return 2
    if args.blank and suffix != ".pdf":
        print("luffmark: handover --blank needs --out FILE.pdf", file=sys.stderr)
        return 2
    if not args.blank and (args.start is None or args.end is None):
        print("luffmark: handover needs --from and --to (or --blank)", file=sys.stderr)
        return 2
    if args.out:
        claim(args.out, replace=args.replace)
    return _blank(context, args.out, args.paper) if args.blank else _gathered(context, args, suffix)


def _gathered(context: Context, args: argparse.Namespace, suffix: str) -> int:
    reader = context.reader()
    with context.open(read_only=not (args.close or args.out)) as store:
        request = operations.HandoverRequest(args.start, args.end, args.as_known_at)
        gathered = operations.prepare(store, context.by, context.now(), request).value
        content = sheet_content(gathered, reader, given_by=args.given_by, taken_by=args.taken_by)
        if args.close:
            return _close(context, store, gathered, content, args)
        told = _answer(context, args, gathered, content, suffix)
        if args.out:
            operations.note_print(store, context.by, context.now(), f"{content.ward.shift}, {content.head}")
    context.answer(*told)
    return 0


def _answer(
    context: Context, args: argparse.Namespace, gathered: Handover, content: SheetContent, suffix: str
) -> tuple[str, dict[str, object]]:
    """Write what was asked for; the answer in words and as a value."""
    zone = context.reader().zone
    value: dict[str, object] = {
        "from": zoned_iso(args.start, zone), "to": zoned_iso(args.end, zone),
        "as_of": zoned_iso(gathered.shift.end, zone), "head": gathered.printed_head,
        "episodes": [s.episode for s in gathered.shift.episodes], "see_first": content.ward.see_first,
    }  # fmt: skip
    if args.out is None:
        return handover_text(content).rstrip(), value | {"text": handover_text(content)}
    value["file"] = str(args.out)
    if suffix == ".pdf":
        pages = _write_pdf(content, args.out, args.paper)
        told = f"{args.out}: {pages} pages, {len(content.episodes)} episodes. {content.head}."
        return told, value | {"pages": pages, "paper": args.paper}
    write_whole(args.out, handover_text(content).encode("utf-8"))
    return f"{args.out}: {len(content.episodes)} episodes. {content.head}.", value


def _close(
    context: Context, store: Store, gathered: Handover, content: SheetContent, args: argparse.Namespace
) -> int:
    """Keep the sheet in the ledger as it was printed, and write the very same bytes where --out says."""
    from app.look.off_screen import gui_application
    from app.sheet.printing import pdf_bytes

    with gui_application():
        data, pages = pdf_bytes(content, args.paper)
    name = operations.closed_name(content.ward.shift, args.given_by, args.taken_by)
    closing = operations.ClosedHandover(name, data, operations.facts_of(gathered))
    kept = operations.close(store, context.by, context.now(), closing)
    context.answer(f"Closed as {kept.value}: {name}, {pages} pages. {content.head}.",
                   {"id": kept.value, "name": name, "pages": pages, "head": store.printed_head()})  # fmt: skip
    if args.out is not None:
        write_whole(args.out, data)  # it is told before that it is kept: a full disk takes only the copy
    return 0


def _blank(context: Context, path: Path, paper: str) -> int:
    """The same sheet, empty."""
    from app.look.off_screen import gui_application
    from app.sheet.blank import blank_bytes

    with gui_application():
        data, pages = blank_bytes(paper)
    write_whole(path, data)
    context.answer(f"{path}: {pages} pages, blank.", {"file": str(path), "pages": pages, "paper": paper})
    return 0


def _write_pdf(content: SheetContent, path: Path, paper: str) -> int:
    from app.look.off_screen import gui_application
    from app.sheet.printing import write_pdf

    with gui_application():
        return write_pdf(content, path, paper)
