"""`luffmark picture EPISODE --out FILE`: an episode's panels as PNG, SVG or PDF, drawn at its own size."""

from __future__ import annotations

import argparse
import sys
from pathlib import Path
from typing import TYPE_CHECKING

from app.commands.context import Context
from app.operations import figures as operations
from app.operations import panel as panels
from app.operations import policy as policies

if TYPE_CHECKING:
    from app.chart.shapes import StackSpec
    from app.episode_shown import EpisodeOnScreen
    from storage.store import Store

SUFFIXES = (".png", ".svg", ".pdf")
_SHARP = 2.0
"""Dots per pixel of a PNG, so that it prints well."""


def run(context: Context, args: argparse.Namespace) -> int:
    """Draw the panels the user has for this kind of episode, or the shipped ones."""
    if args.out.suffix.lower() not in SUFFIXES:
        print(f"luffmark: '{args.out}' must end in {', '.join(SUFFIXES)}", file=sys.stderr)
        return 2
    _check_writable(args.out)
    as_of = context.now() if args.as_of is None else args.as_of
    from app.off_screen import gui_application

    with context.open(read_only=True) as store:
        request = operations.EpisodeRequest(args.episode, as_of, args.as_known_at)
        with gui_application():
            shown = _shown(context, store, request)
            from app.episode.stack_words import stack_of

            _draw(stack_of(shown, as_of), args.out, args.size, args.theme, shown.figures.label)
    context.answer(f"{args.out}", {"file": str(args.out), "episode": args.episode})
    return 0


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


def _draw(spec: StackSpec, path: Path, size: tuple[int, int], theme_name: str, title: str) -> None:
    from app.chart.render import image_of, pdf_of, svg_of
    from app.theme import THEMES

    theme, (width, height) = THEMES[theme_name], size
    suffix = path.suffix.lower()
    if suffix == ".svg":
        svg_of(spec, theme, width, height, path, title)
    elif suffix == ".pdf":
        pdf_of(spec, theme, width, height, path, title)
    elif not image_of(spec, theme, width, height, _SHARP).save(str(path)):
        raise OSError(5, "the picture could not be written", str(path))


def _check_writable(path: Path) -> None:
    """Qt only warns where it cannot write: the reason is told before anything is drawn."""
    existed = path.exists()
    with path.open("ab"):
        pass
    if not existed:
        path.unlink()
