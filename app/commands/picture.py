"""`luffmark picture EPISODE... --what panels|map|compare --out FILE`: PNG, SVG or PDF, drawn at its own size."""

from __future__ import annotations

import argparse
import sys
from dataclasses import replace
from typing import TYPE_CHECKING

from app.commands.context import Context, remark
from app.formats import wall
from app.operations import episode as episodes
from app.operations import figures as operations
from app.operations import panel as panels
from app.operations import policy as policies
from app.picture import SUFFIXES, Picture, write_picture
from app.whole_file import claim
from core.record.instant import HOUR, Instant

if TYPE_CHECKING:
    from app.episode_shown import EpisodeOnScreen
    from app.theme import Theme
    from storage.store import Store

RECENT = 24 * HOUR


def run(context: Context, args: argparse.Namespace) -> int:
    """Draw an episode's panels (those the user has for its kind, or the shipped ones), its map, or a comparison."""
    if args.out.suffix.lower() not in SUFFIXES:
        print(f"luffmark: '{args.out}' must end in {', '.join(SUFFIXES)}", file=sys.stderr)
        return 2
    if (len(args.episode) > 1) != (args.what == "compare"):
        wanted = "two to eight episodes" if args.what == "compare" else "one episode"
        print(f"luffmark: picture --what {args.what} needs {wanted}", file=sys.stderr)
        return 2
    claim(args.out, replace=args.replace)
    from app.off_screen import gui_application
    from app.theme import THEMES

    with context.open(read_only=True) as store, gui_application():
        as_of = _moment(context, store, args) if args.as_of is None else args.as_of
        requests = [operations.EpisodeRequest(key, as_of, args.as_known_at) for key in args.episode]
        theme = THEMES[args.theme]
        picture = _MADE[args.what](context, store, requests, theme)
        write_picture(picture if args.size is None else replace(picture, size=args.size), theme, args.out)
    context.answer(f"{args.out}", {"file": str(args.out), "what": args.what, "episodes": args.episode})
    return 0


def _moment(context: Context, store: Store, args: argparse.Namespace) -> Instant:
    """Now; of an episode in which nothing was logged for a day its newest logged moment, and that is said: panels end
    at the moment asked for, and would be empty."""
    now = context.now()
    if args.what == "compare":
        return now
    record = episodes.load(store, args.episode[0], args.as_known_at).until(now)
    moments = [int(s.t[-1]) for s in record.series.values() if len(s)]
    moments += [int(w.t[-1]) for w in record.words.values() if len(w)]
    newest = max(moments, default=now)
    if newest >= now - RECENT:
        return now
    at = wall(newest, context.local_zone())
    remark(f"Nothing was logged in the last 24 h: drawn as of {at}, the newest logged moment (--as-of: another).")
    return newest


def _panels(context: Context, store: Store, requests: list[operations.EpisodeRequest], theme: Theme) -> Picture:
    from app.episode.stack_words import stack_of

    shown = _shown(context, store, requests[0])
    return Picture(stack_of(shown, requests[0].as_of), shown.figures.label)


def _map(context: Context, store: Store, requests: list[operations.EpisodeRequest], theme: Theme) -> Picture:
    from app.map_words import titled_spec

    figures = operations.of_episode(store, context.by, context.now(), requests[0]).value.figures
    spec = titled_spec(figures, context.reader())
    return Picture(spec, spec.name, (900, 760))


def _compare(context: Context, store: Store, requests: list[operations.EpisodeRequest], theme: Theme) -> Picture:
    from app.compare.courses import compare
    from app.compare.picture import ComparisonPicture
    from app.course import course_of
    from app.ward.lane_words import OnWard

    answers = {r.episode: operations.of_episode(store, context.by, context.now(), r).value for r in requests}
    chosen = [OnWard(a.figures, course_of(a.record, a.figures.as_of)) for a in answers.values()]
    title = "Episodes by hours since the start of support"
    return Picture(ComparisonPicture(compare(chosen, answers, context.gas_unit), theme, title), title, (1280, 960))


_MADE = {"panels": _panels, "map": _map, "compare": _compare}


def _shown(context: Context, store: Store, request: operations.EpisodeRequest) -> EpisodeOnScreen:
    from app.course import course_of
    from app.episode_feed import shipped_titles
    from app.episode_shown import EpisodeOnScreen
    from app.panels import family_of, from_json, shipped

    now = context.now()
    answer = operations.of_episode(store, context.by, now, request).value
    indication = answer.figures.profile.get("indication")
    family = family_of(str(indication) if indication else None)
    kept = panels.load(store, context.by, now, None).value.get(f"panels.{family}")
    chosen = from_json(kept) if kept else shipped(family, shipped_titles())
    course = course_of(answer.record.until(request.as_of), request.as_of)
    policy = policies.in_force(store)
    return EpisodeOnScreen(
        answer.record.until(request.as_of), answer.figures, course, policy, chosen, context.gas_unit
    )
