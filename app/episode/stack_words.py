"""One episode as a stack to draw: ribbon, panels with brackets and bands, events. Draws what figures say."""

from __future__ import annotations

from collections.abc import Iterator
from zoneinfo import ZoneInfo

import numpy as np

from app.chart.shapes import Area, Bracket, PanelSpec, RibbonSpec, RibbonStep, Span, StackSpec, Tick
from app.episode.limits import bands_of
from app.episode.on_screen import EpisodeOnScreen
from app.episode.panels import Panel
from app.episode.scales import scales_of
from app.episode.traces import TraceMaker, shown_as
from app.look.formats import clock, quantity
from app.look.theme import verdict_of
from app.telling.headline import in_doubt, lost_gain, response_state_word, sign_of, verdict_with_loss
from app.telling.later_words import later_word
from app.telling.phrases import change_sentence, change_word, channel_name, known, oxygen_word, state_of, translate
from app.ward.lane_words import anchor_name
from core.judgement.response_shapes import ResponseFigure
from core.record.channels import Group, by_group
from core.record.instant import HOUR, MINUTE, Instant
from core.record.settings import Settings

RIBBON_HIGH = 25.0
LONG = 36 * HOUR
"""An episode longer than this opens on its newest day; all of it is one key away."""


JUDGED = {"ph", "paco2", "pao2", "pf"}
"""What the arms of a verdict are read from: a panel with one of them carries the brackets."""


def stack_of(on: EpisodeOnScreen, now: Instant) -> StackSpec:
    """Everything of the episode, ready to draw."""
    start = _start(on)
    maker = TraceMaker(
        on.record, on.figures, on.course, on.gas_unit, on.policy.leak.doubt_tidal_volume_above_L_per_min.value
    )
    end = _end(on)
    if on.course.support.end is None and now - on.course.until <= HOUR:
        end = max(end, now)  # the clock has run on since the figures were computed
    end = max(end, start + 30 * MINUTE)
    return StackSpec(
        zone=ZoneInfo(on.zone),
        start=start,
        end=end,
        panels=tuple(_panel(on, p, maker) for p in on.panels.panels),
        ribbon=_ribbon(on),
        events=tuple(_events(on)),
        now=now if start <= now <= end else None,
        now_word=translate("stack", "now") if on.live else translate("stack", "then"),
        window=(max(start, end - 24 * HOUR), end) if end - start > LONG else None,
        reduced_word=translate("stack", "Lowest and highest value of each pixel are drawn. Zoom in for each value."),
        name=translate("stack", "Panels of {label} on one clock").format(label=on.figures.label),
        summary=summary_of(on),
    )


def _end(on: EpisodeOnScreen) -> Instant:
    """Now, or the end of a window still open; where support has ended, that end or the last gas after it."""
    until = on.course.until
    if on.course.support.end is not None:
        return max(on.course.support.end, *(g.at for g in on.figures.gases), 0)
    open_ends = [r.window_to for r in on.figures.responses if r.headline == "not yet known"]
    return min(max(until, *open_ends, 0), until + 3 * HOUR)


def _start(on: EpisodeOnScreen) -> Instant:
    moments = [m for m in (on.record.first_at, on.course.support.start) if m is not None]
    moments += [g.at for g in on.figures.gases[:1]]
    return min(moments, default=on.course.until - HOUR) - 10 * MINUTE


def _panel(on: EpisodeOnScreen, panel: Panel, maker: TraceMaker) -> PanelSpec:
    traces = tuple(t for n, c in enumerate(panel.channels) for t in maker.traces(c, n))
    areas = tuple(_areas(on, panel))
    scales = scales_of(panel, traces, on.gas_unit, areas)
    judged = bool(JUDGED & set(panel.channels))
    return PanelSpec(
        panel.key,
        panel.title,
        traces,
        scales,
        bands_of(on, panel) if panel.bands else (),
        areas,
        tuple(_brackets(on)) if judged else (),
        panel.height,
    )


def _areas(on: EpisodeOnScreen, panel: Panel) -> Iterator[Area]:
    expected = on.figures.expected_co2
    if expected is None or not expected.t or "paco2" not in panel.channels:
        return
    shown = shown_as("paco2", on.gas_unit)
    yield Area(
        np.array(expected.t, np.int64),
        np.array(expected.low_mmHg) * shown.factor,
        np.array(expected.high_mmHg) * shown.factor,
        shown.unit,
        translate("stack", "PaCO2 expected, not measured"),
    )


def _brackets(on: EpisodeOnScreen) -> Iterator[Bracket]:
    for r in on.figures.responses:
        still_open = r.headline == "not yet known" and r.superseded_at is None and r.window_to > on.course.until
        if r.superseded_at is not None and r.superseded_at <= r.window_from:
            continue  # its window never opened: a later change took its place
        end = r.window_to if r.superseded_at is None else min(r.window_to, r.superseded_at)
        verdict, lost = verdict_of(r.headline), lost_gain(r)
        said = verdict_with_loss(verdict, lost=lost)
        yield Bracket(
            r.anchor_at,
            r.window_from,
            end,
            sign_of(verdict, lost=lost),
            in_doubt(said) if r.in_doubt else said,
            None if r.state is None else state_of(r.state),
            "" if r.state is None else response_state_word(on.figures, r),
            still_open,
            r,
        )


def _ribbon(on: EpisodeOnScreen) -> RibbonSpec:
    steps = []
    start = on.course.support.start
    for s in on.course.stretches:
        begin = s.start if start is None else max(s.start, start)
        if s.end <= begin:
            continue
        v = s.settings
        epap = v.low_pressure if known(v.low_pressure) else None
        ipap = v.ipap if v.is_bilevel and known(v.ipap) else None
        steps.append(
            RibbonStep(
                begin,
                s.end,
                epap if not v.is_off else None,
                ipap if epap is not None else None,
                v.mode or "",
                "" if v.is_off else _fio2(v),
                known(v.fio2),
                s.doubtful,
                _unsaid(v),
                s,
            )
        )
    breaks = tuple(Span(b.start, b.end or on.course.until, translate("stack", "off")) for b in on.course.breaks)
    ticks = tuple(Tick(s.start, change_word(s), s.doubtful, s) for s in on.course.stretches[1:])
    top = max((s.ipap or s.epap or 0.0 for s in steps), default=0.0)
    return RibbonSpec(
        translate("stack", "Pressure, EPAP to IPAP"),
        "cmH2O",
        tuple(steps),
        breaks,
        ticks,
        max(RIBBON_HIGH, 5 * (int(top) // 5 + 1.0)),
    )


def _fio2(settings: object) -> str:
    return f"FiO2 {oxygen_word(settings)}" if known(settings.fio2) else oxygen_word(settings)  # type: ignore[attr-defined, arg-type]


def _unsaid(v: Settings) -> str:
    """What stands over a stretch: that it is off, its mode, or what of both was not recorded."""
    if v.is_off:
        return translate("stack", "off")
    if v.mode:
        return v.mode
    if known(v.low_pressure):
        return translate("stack", "mode not recorded")
    missing = translate("stack", "EPAP not recorded"), translate("stack", "pressure not recorded")
    return missing[0] if known(v.ipap) else missing[1]


def _events(on: EpisodeOnScreen) -> Iterator[Tick]:
    found: list[Tick] = []
    for channel in by_group(Group.EVENT):
        words = on.record.text(channel.key).until(on.course.until)
        for t, text in zip(words.t, words.v, strict=True):
            name = channel_name(channel.key)
            word = f"{name}: {quantity(channel.key, text)}" if text else name
            found.append(Tick(int(t), word, payload=channel.key))
    yield from sorted((*found, *_came_later(on)), key=lambda tick: tick.at)


def _came_later(on: EpisodeOnScreen) -> Iterator[Tick]:
    """What the record holds now of this time and did not hold then, one doubtful tick for each moment."""
    words: dict[Instant, list[str]] = {}
    for h in on.later:
        words.setdefault(h.entry.at, []).append(f"{channel_name(h.entry.channel)} {later_word(h.what)}")
    for at, told in words.items():
        yield Tick(at, "; ".join(told), doubtful=True)


def summary_of(on: EpisodeOnScreen) -> str:
    """The chart in words: span, changes with their verdicts, the newest gas."""
    f, zone = on.figures, on.zone
    parts = [
        translate("stack", "{label}, support from {start}.").format(
            label=f.label, start=clock(on.course.support.start, zone) if on.course.support.start else "?"
        )
    ]
    for s in on.course.stretches[1:]:
        parts.append(f"{clock(s.start, zone)} {change_sentence(s.changed, s.settings)}.")
    parts += [_response_words(r, zone) for r in f.responses]
    return " ".join(parts)


def _response_words(r: ResponseFigure, zone: str) -> str:
    verdict = verdict_with_loss(verdict_of(r.headline), lost=lost_gain(r))
    text = translate("stack", "After {anchor} at {time}: {verdict}.")
    return text.format(anchor=anchor_name(r), time=clock(r.anchor_at, zone), verdict=verdict)
