"""`luffmark taken`: the files that were taken in; `--withdraw ID` withdraws one whole."""

from __future__ import annotations

import argparse
from typing import TYPE_CHECKING, Any

from app.commands.context import Context
from app.look.formats import counted, wall
from app.operations import intake as operations
from app.telling.withdrawn_words import withdrawn_words
from core.record.instant import iso
from core.record.message import refuse

if TYPE_CHECKING:
    from storage.reading_sources import TakenSource


def run(context: Context, args: argparse.Namespace) -> int:
    """List the files, or withdraw the one whose id begins as given."""
    with context.open(read_only=not args.withdraw) as store:
        found, zone = operations.taken(store, context.by, context.now(), None).value, context.local_zone()
        if not args.withdraw:
            gone = {str(s.facts.get("of", "")) for s in found if s.kind == "withdrawal"}
            text = "\n".join(_line(s, zone, s.id in gone) for s in found) or "No file was taken in."
            context.answer(text, {"taken": [{**_json(s), "withdrawn": s.id in gone} for s in found]})
            return 0
        meant = [s for s in found if s.id.startswith(args.withdraw)]
        if len(meant) != 1:
            raise refuse("intake.unknown_source", value=args.withdraw, accepted="the beginning of one id of the list")
        made = operations.withdraw(store, context.by, context.now(), meant[0].id).value
    value = {"file": made.name, "entries": made.entries, "sample_spans": made.sample_spans, "kept": made.kept,
             "emptied": list(made.emptied), "relied_on": list(made.relied_on)}  # fmt: skip
    context.answer(withdrawn_words(made), value)
    return 0


KINDS = {"log_csv": "log file", "table": "table", "hl7v2": "HL7 v2", "fhir": "FHIR", "withdrawal": "withdrawal"}


def _line(s: TakenSource, zone: str, is_withdrawn: bool) -> str:
    entries, samples = counted(s.entries, "entry", "entries"), counted(s.samples, "device sample", "device samples")
    kind = KINDS.get(s.kind, s.kind)
    brought = f"{entries}, {samples}" + (" (withdrawn)" if is_withdrawn else "")
    return f"{s.id[:8]}  {wall(s.recorded_at, zone)}  {s.by or 'not named'}  {kind}  {s.name}: {brought}"


def _json(s: TakenSource) -> dict[str, Any]:
    return {"id": s.id, "kind": s.kind, "name": s.name, "sha256": s.sha, "size": s.size, "by": s.by,
            "recorded_at": iso(s.recorded_at), "entries": s.entries, "samples": s.samples,
            "facts": dict(s.facts)}  # fmt: skip
