"""`luffmark statistics --from T --to T [--csv FILE]`: shift figures of the ward over any span."""

from __future__ import annotations

import argparse

from app.commands.context import Context
from app.keeping.whole_file import claim, write_whole
from app.operations import statistics as operations
from app.statistics.measures import as_csv, as_json, as_text


def run(context: Context, args: argparse.Namespace) -> int:
    """Count and tell; with --csv write the table."""
    reader = context.reader()
    if args.csv is not None:
        claim(args.csv, replace=args.replace)
    with context.open(read_only=True) as store:
        request = operations.StatisticsRequest(args.start, args.end, args.as_known_at)
        found = operations.of_ward(store, context.by, context.now(), request).value
    value = as_json(found, reader)
    if args.csv is None:
        context.answer(as_text(found, reader), value)
        return 0
    write_whole(args.csv, as_csv(found, reader).encode("utf-8"))
    context.answer(f"{args.csv}: written.", value | {"file": str(args.csv)})
    return 0
