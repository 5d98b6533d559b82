"""`luffmark export --out FILE`: what stands, as a log file that intake takes; or de-identified."""

from __future__ import annotations

import argparse
from typing import TYPE_CHECKING

from app.commands.context import Context
from app.operations import export as operations

if TYPE_CHECKING:
    from storage.store import Store


def run(context: Context, args: argparse.Namespace) -> int:
    """Write the file; over one that is there only with --replace."""
    request = operations.ExportRequest(
        args.out,
        tuple(args.episode),
        args.as_known_at,
        tuple(args.channel),
        args.start,
        args.end,
        args.dictionary,
        args.replace,
    )
    value: dict[str, object] = {"file": str(args.out)}
    with context.open() as store:
        if args.deidentified:
            return _deidentified(context, store, request, value)
        as_fhir = args.format == "fhir" or (not args.format and args.out.suffix == ".json")
        write = operations.write_fhir if as_fhir else operations.write
        rows = write(store, context.by, context.now(), request).value
    context.answer(f"{args.out}: {rows:,} rows.", value | {"rows": rows})
    return 0


def _deidentified(context: Context, store: Store, request: operations.ExportRequest, value: dict[str, object]) -> int:
    from app.telling.export_words import statement_text

    told = operations.write_deidentified(store, context.by, context.now(), request).value
    value |= {"rows": told.rows, "episodes": told.episodes, "remains": dict(told.remains),
              "removed": dict(told.removed)}  # fmt: skip
    context.answer(f"{request.path}\n\n{statement_text(told)}".rstrip(), value)
    return 0
