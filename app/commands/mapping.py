"""`luffmark mapping`: how tables are read: list, show, propose for a file, put from a file, forget."""

from __future__ import annotations

import argparse
import json
from dataclasses import replace
from pathlib import Path

from app.commands.context import Context
from app.commands.intake import as_written
from app.operations import mapping as operations
from app.words import sentence
from core.record.message import refuse
from storage.intake.mapping import Mapping, from_text, kept_mapping, open_questions, to_text


def run(context: Context, args: argparse.Namespace) -> int:
    """Do what was asked; a mapping is shown and put as JSON."""
    what = {"list": _list, "show": _show, "propose": _propose, "put": _put, "forget": _forget}[args.what]
    return what(context, args)


def _list(context: Context, args: argparse.Namespace) -> int:
    with context.open(read_only=True) as store:
        found = operations.listed(store, context.by, context.now(), None).value
    text = "\n".join(f"{name}: {' | '.join(m.header) or 'codes'}" for name, m in sorted(found.items()))
    context.answer(text or "No mapping is kept.", {"mappings": {k: _plain(m) for k, m in found.items()}})
    return 0


def _show(context: Context, args: argparse.Namespace) -> int:
    with context.open(read_only=True) as store:
        found = kept_mapping(store, _subject(args, "a mapping's name"))
    context.answer(json.dumps(_plain(found), ensure_ascii=False, indent=2), _plain(found))
    return 0


def _propose(context: Context, args: argparse.Namespace) -> int:
    """Print a proposal as JSON, to be completed and put; what is still open goes along as questions."""
    path = Path(_subject(args, "a table's file"))
    with context.open_or_create() as store:
        request = operations.LookRequest(path, context.local_zone(), as_written(args))
        looked = operations.look(store, context.by, context.now(), request).value
    mapping = replace(looked.proposal.mapping, name=args.name or path.stem, written=looked.said)
    asked = open_questions(mapping, episode_given=False, has_offsets=looked.proposal.has_offsets)
    reader = context.reader()
    words = [sentence(m, reader) for m in (*asked, *looked.proposal.hints.values())]
    value = {"mapping": _plain(mapping), "questions": words}
    context.answer(json.dumps(value, ensure_ascii=False, indent=2), value)
    return 0


def _put(context: Context, args: argparse.Namespace) -> int:
    path = Path(_subject(args, "a file with a mapping"))
    text = path.read_text("utf-8")
    try:
        wrapped = json.loads(text)
    except json.JSONDecodeError as error:
        raise refuse("mapping.unreadable", detail=error.msg, accepted="JSON as `mapping propose` prints it") from None
    if isinstance(wrapped, dict) and "mapping" in wrapped:
        text = json.dumps(wrapped["mapping"])
    mapping = from_text(text)
    mapping = replace(mapping, name=args.name or mapping.name)
    with context.open_or_create() as store:
        operations.keep(store, context.by, context.now(), mapping)
    context.answer(f"Kept mapping {mapping.name}.", {"name": mapping.name})
    return 0


def _forget(context: Context, args: argparse.Namespace) -> int:
    name = _subject(args, "a mapping's name")
    with context.open() as store:
        operations.forget(store, context.by, context.now(), name)
    context.answer(f"Forgot mapping {name}.", {"name": name})
    return 0


def _subject(args: argparse.Namespace, accepted: str) -> str:
    if not args.subject:
        raise refuse("mapping.nothing_named", accepted=accepted)
    return str(args.subject)


def _plain(mapping: Mapping) -> dict[str, object]:
    found: dict[str, object] = json.loads(to_text(mapping))
    return found
