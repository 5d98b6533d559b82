"""`luffmark picture EPISODE... --what panels|map|compare --out FILE`: PNG, SVG or PDF, drawn at its own size."""

from __future__ import annotations

import argparse
import sys
from dataclasses import replace
from pathlib import Path
from typing import TYPE_CHECKING

from app.commands.context import Context, remark
from app.keeping.whole_file import claim
from app.look.formats import wall
from app.operations import episode as episodes
from app.operations import figures as operations
from app.operations import panel as panels
from app.operations import policy as policies
from app.picture.drawn import SUFFIXES, Picture, Titled, compare_title, moment_words, write_picture
from core.record.instant import HOUR, Instant
from core.record.message import refuse

if TYPE_CHECKING:
    from app.episode.on_screen import EpisodeOnScreen
    from app.episode.panels import PanelSet
    from app.look.theme import Theme
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
    if args.panels and args.what != "panels":
        print(f"luffmark: picture --what {args.what} has no panels to choose", file=sys.stderr)
        return 2
    claim(args.out, replace=args.replace)
    from app.look.off_screen import gui_application
    from app.look.theme import THEMES

    with context.open(read_only=True) as store, gui_application():
        as_of = _moment(context, store, args) if args.as_of is None else args.as_of
        requests = [operations.EpisodeRequest(key, as_of, args.as_known_at) for key in args.episode]
        theme = THEMES[args.theme]
        if args.panels:
            picture = _panels(context, store, requests, theme, _named(context, store, args.panels))
        else:
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


def _panels(
    context: Context, store: Store, requests: list[operations.EpisodeRequest], theme: Theme,
    chosen: PanelSet | None = None,
) -> Picture:  # fmt: skip
    from app.episode.stack_words import stack_of

    shown = _shown(context, store, requests[0], chosen)
    title = f"{shown.figures.label} ({shown.figures.episode}), {_words(context, requests[0])}"
    return Picture(Titled(stack_of(shown, requests[0].as_of), theme, title), title)


def _words(context: Context, request: operations.EpisodeRequest) -> str:
    return moment_words(request.as_of, request.as_known_at, context.local_zone())


def _map(context: Context, store: Store, requests: list[operations.EpisodeRequest], theme: Theme) -> Picture:
    from app.map.words import titled_spec

    figures = operations.of_episode(store, context.by, context.now(), requests[0]).value.figures
    spec = titled_spec(figures, context.reader())
    return Picture(spec, spec.name, (900, 760))


def _compare(context: Context, store: Store, requests: list[operations.EpisodeRequest], theme: Theme) -> Picture:
    from app.compare.courses import compare
    from app.compare.picture import ComparisonPicture
    from app.telling.support_course import course_of
    from app.ward.lane_words import OnWard

    answers = {r.episode: operations.of_episode(store, context.by, context.now(), r).value for r in requests}
    chosen = [OnWard(a.figures, course_of(a.record, a.figures.as_of)) for a in answers.values()]
    title = compare_title(_words(context, requests[0]))
    return Picture(ComparisonPicture(compare(chosen, answers, context.gas_unit), theme, title), title, (1280, 960))


_MADE = {"panels": _panels, "map": _map, "compare": _compare}


def _named(context: Context, store: Store, name: str) -> PanelSet:
    """The panels of a file as the window saves them, or the set that the store keeps under a name.

    Raises:
        RecordError: `panel.no_set`, or what is wrong with the file.
        OSError: the file cannot be read.
    """
    from app.episode.panels import from_json, from_toml

    if name.endswith(".toml"):
        return from_toml(Path(name).read_text("utf-8"))
    layouts = panels.load(store, context.by, context.now(), None).value
    sets = {key.removeprefix("panelset."): text for key, text in layouts.items() if key.startswith("panelset.")}
    if name not in sets:
        raise refuse("panel.no_set", name=name, accepted=", ".join(sorted(sets)) or "a .toml file of panels")
    return from_json(sets[name])


def _shown(
    context: Context, store: Store, request: operations.EpisodeRequest, chosen: PanelSet | None = None
) -> EpisodeOnScreen:
    """What the window would show; `chosen` panels, or those kept for its indication, its kind, or shipped."""
    from app.episode.feed import shipped_titles
    from app.episode.on_screen import EpisodeOnScreen
    from app.episode.panels import family_of, from_json, shipped
    from app.telling.support_course import course_of

    now = context.now()
    answer = operations.of_episode(store, context.by, now, request).value
    indication = str(answer.figures.profile.get("indication") or "")
    family = family_of(indication or None)
    layouts = panels.load(store, context.by, now, None).value
    if chosen is None:
        kept = layouts.get(f"panels.{indication}") or layouts.get(f"panels.{family}")
        chosen = from_json(kept) if kept else shipped(family, shipped_titles())
    course = course_of(answer.record.until(request.as_of), request.as_of)
    policy = policies.in_force(store)
    return EpisodeOnScreen(
        answer.record.until(request.as_of),
        answer.figures,
        course,
        policy,
        chosen,
        context.gas_unit,
        live=request.as_of >= now,
    )
