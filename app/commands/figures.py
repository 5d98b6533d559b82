"""`luffmark figures [EPISODE]`: computed figures, as text or as JSON."""

from __future__ import annotations

import argparse

from app.commands.context import Context
from app.operations import figures as operations
from app.words import sentence
from core.figures.json_form import to_json
from core.judgement.shapes import EpisodeFigures
from core.record.message import refuse
from storage.errors import store_error


def run(context: Context, args: argparse.Namespace) -> int:
    """Figures of one episode or of all, in order of concern, as of a moment and as known at one."""
    as_of = context.now() if args.as_of is None else args.as_of
    reader = context.reader()
    with context.open(read_only=True) as store:
        found: tuple[EpisodeFigures, ...]
        if args.episode is not None:
            one = operations.EpisodeRequest(args.episode, as_of, args.as_known_at)
            of_one = operations.of_episode(store, context.by, context.now(), one).value
            if of_one.record.is_empty:
                raise refuse("episode.nothing_stands", episode=args.episode,
                             accepted="an episode of which something stands at that moment")  # fmt: skip
            found = (of_one.figures,)
        else:
            ward = operations.WardRequest(as_of, args.as_known_at, everything=True)
            answer = operations.of_ward(store, context.by, context.now(), ward).value
            if answer.unread:  # a list that lacks a patient would be taken for whole
                raise store_error("store.episode_not_as_written", episode=", ".join(answer.unread))
            found = answer.figures
    if context.json:
        value = {"episodes": [to_json(f, lambda m: sentence(m, reader)) for f in found]}
        context.answer("", value)
        return 0
    from app.figures.plain import episode_text

    context.answer("\n\n".join(episode_text(f, reader) for f in found) or "No episode had begun by then.", None)
    return 0
