"""`luffmark intake FILE...`: files into the store, each whole or not at all: the log CSV, tables, HL7 v2, FHIR."""

from __future__ import annotations

import argparse
import sys
import time
from collections.abc import Callable
from pathlib import Path
from typing import TYPE_CHECKING, Any

from app.commands.context import Context
from app.look.formats import counted, plain, some_of
from app.operations import intake as operations
from app.operations.mapping import keep_codes
from app.operations.outcome import watched
from app.words import Reader, sentence
from core.record.channels import channel
from core.record.message import RecordError
from storage.intake.writing import Writing, check_writing, delimiter_said

if TYPE_CHECKING:
    from storage.intake.findings import Doubt, Intake, Refusal
    from storage.store import Store

_DOUBTS_SHOWN = 20
_CODES_SHOWN = 6
_HINTS = {
    "patient.unknown": "Say whose results these are: luffmark intake --patient '{value}=EPISODE' {path}",
    "table.names_a_bed": "Say whose values these are: luffmark intake --patient '{value}=EPISODE' {path}",
    "patient.no_identifier": "Say whose results these are: luffmark intake --episode EPISODE {path}",
}
"""What to type next, by what was refused."""
_ATTEMPTS = 3
"""Readings of one file, where others keep recording of its episodes meanwhile."""


def run(context: Context, args: argparse.Namespace) -> int:
    """Take the files in order. A refused file ends it: the ones before it stay taken."""
    _check_there(args.files)
    reader = context.reader()
    taken: list[dict[str, Any]] = []
    codes = {key: name and channel(name).key for key, name in args.code}
    with context.open_or_create(imported=args.keep_recording_times) as store:
        if codes:
            keep_codes(store, context.by, context.now(), codes)
        for path in args.files:
            request = _request(context, path, args)
            made = _read_and_take(context, store, request, reader, leave_out=args.leave_out_refused)
            if isinstance(made, dict):
                taken.append(made)
                continue
            if context.json and made.refusals:
                context.answer("", {"taken": taken, "refused": _refused_json(path, made, reader)})
            return 1
        context.copy_policy(store)
    context.answer("\n".join(t.pop("text") for t in taken), {"taken": taken})
    return 0


def _read_and_take(
    context: Context, store: Store, request: operations.ReadRequest, reader: Reader, *, leave_out: bool
) -> dict[str, Any] | Intake:
    """What a file brought; its intake where it was not taken, the reason being told. Read again when overtaken."""
    for attempt in range(_ATTEMPTS):
        with watched(_progress(request.path)):
            intake = operations.read(store, context.by, context.now(), request).value
        may_leave_out = leave_out and intake.whole
        if (intake.refusals and not may_leave_out) or not intake.whole:
            _tell_refused(request.path, intake, reader)
            return intake
        if not (intake.entries or intake.chunks or intake.repeated_in_store or intake.aside or intake.refusals):
            print(f"luffmark: {request.path} has no rows under its header: nothing was taken.", file=sys.stderr)
            return intake
        try:
            return _take(context, store, request.path, intake, reader, leave_out=may_leave_out)
        except RecordError as error:
            if error.message.key != "intake.overtaken" or attempt + 1 == _ATTEMPTS:
                raise
    raise AssertionError("every attempt ends by returning or raising")


def _check_there(files: list[Path]) -> None:
    """A missing file is told before anything is taken, or a store made."""
    for path in files:
        with path.open("rb"):
            pass


def _request(context: Context, path: Path, args: argparse.Namespace) -> operations.ReadRequest:
    return operations.ReadRequest(
        path, None, args.mapping, args.episode, dict(args.patient), context.local_zone(), args.clock_shift, args.leak,
        as_written(args),
    )  # fmt: skip


def as_written(args: argparse.Namespace) -> Writing:
    """What was said of how a table is written.

    Raises:
        RecordError: `table.delimiter`, `table.encoding_unknown`, `table.header_line`.
    """
    said = Writing(args.encoding, delimiter_said(args.delimiter), args.header_line, args.sheet)
    check_writing(said)
    return said


def _progress(path: Path) -> Callable[[int, int], None]:
    """Time left on a terminal, for files that take longer than a moment; silent elsewhere."""
    started = time.monotonic()
    shown = [started]

    def step(done: int, total: int) -> None:
        now = time.monotonic()
        if sys.stderr.isatty() and done and total and now - shown[0] > 1:
            shown[0] = now
            left = (now - started) * (total - done) / done
            print(f"{path}: {100 * done // total} %, {left:.0f} s left", file=sys.stderr)

    return step


def _take(
    context: Context, store: Store, path: Path, intake: Intake, reader: Reader, *, leave_out: bool
) -> dict[str, Any]:
    request = operations.TakeRequest(intake, leave_out)
    made = operations.take(store, context.by, context.now(), request).value
    text = (
        f"{path}: {counted(made.entries, 'entry', 'entries')} and "
        f"{counted(made.samples, 'device sample', 'device samples')} taken, "
        f"{made.repeated:,} were in the store already; {counted(len(made.episodes), 'episode', 'episodes')}."
    )
    if made.new_episodes:
        text += f"\n  New: {some_of(made.new_episodes)}."
    if made.overlaid:
        before = counted(made.overlaid, "device sample that was taken in before lies",
                         "device samples that were taken in before lie")  # fmt: skip
        text += f"\n  {before} under it and no longer count."
    if made.doubtful:
        text += f"\n  {made.doubtful} doubtful row(s), taken and marked:"
        text += "".join(f"\n    {_row(d, reader)}" for d in intake.doubts[:_DOUBTS_SHOWN])
        if made.doubtful > _DOUBTS_SHOWN:
            text += f"\n    ... and {made.doubtful - _DOUBTS_SHOWN} more (see --json)"
    if made.left_out:
        text += f"\n  {made.left_out} refused row(s) left out, as asked:"
        text += "".join(f"\n    {_row(r, reader)}" for r in intake.refusals[:_DOUBTS_SHOWN])
    if made.aside:
        text += f"\n  {made.aside} value(s) left aside:"
        text += "".join(f"\n    {_row(r, reader)}" for r in intake.aside[:_DOUBTS_SHOWN])
        text += _what_codes_are(intake, path)
    return {
        "text": text, "file": str(path), "entries": made.entries, "samples": made.samples,
        "repeated": made.repeated, "overlaid": made.overlaid, "episodes": list(made.episodes),
        "new_episodes": list(made.new_episodes),
        "doubts": [_row_json(d, reader) for d in intake.doubts],
        "left_out": [_row_json(r, reader) for r in intake.refusals],
        "aside": [_row_json(r, reader) for r in intake.aside],
        "unknown_codes": [c.key for c in intake.unknown_codes], "source": made.source_id,
    }  # fmt: skip


def _what_codes_are(intake: Intake, path: Path) -> str:
    """How to say what the codes are that nobody has said yet: it is kept, and the file read again brings them."""
    said = " ".join(f"--code '{plain(c.key)}=CHANNEL'" for c in intake.unknown_codes[:_CODES_SHOWN])
    if not said:
        return ""
    return (f"\n  Say what a code measures, once: luffmark intake {said} {path}"
            "\n  ('luffmark channels' lists the channels; CODE=none: not wanted)")  # fmt: skip


def _tell_refused(path: Path, intake: Intake, reader: Reader) -> None:
    """One clear line, then every bad row."""
    print(f"luffmark: {path} was not taken: {intake.refused_rows} row(s) refused; the store is untouched.",
          file=sys.stderr)  # fmt: skip
    for refusal in intake.refusals:
        print(f"  {_row(refusal, reader)}", file=sys.stderr)
    hidden = intake.refused_rows - len({r.line for r in intake.refusals})
    if hidden > 0:
        print(f"  ... and {hidden} more row(s)", file=sys.stderr)
    hints = [(r.message.key, plain(str(r.message.values.get("value", "")))) for r in intake.refusals]
    for key, value in dict.fromkeys(h for h in hints if h[0] in _HINTS):
        print(f"  {_HINTS[key].format(path=path, value=value)}", file=sys.stderr)


def _row(found: Refusal | Doubt, reader: Reader) -> str:
    where = f"line {found.line}" + (f", {found.column}" if found.column else "")
    value = f" '{found.value}'" if found.value else ""
    return plain(f"{where}{value}: {sentence(found.message, reader)}")


def _row_json(found: Refusal | Doubt, reader: Reader) -> dict[str, Any]:
    return {"line": found.line, "column": found.column, "value": found.value, "key": found.message.key,
            "values": dict(found.message.values), "text": sentence(found.message, reader)}  # fmt: skip


def _refused_json(path: Path, intake: Intake, reader: Reader) -> dict[str, Any]:
    return {"file": str(path), "rows": intake.refused_rows, "whole": intake.whole,
            "refusals": [_row_json(r, reader) for r in intake.refusals]}  # fmt: skip
