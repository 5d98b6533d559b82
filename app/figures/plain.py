"""Figures of an episode as plain text, whole, for reading in a console or pasting."""

from __future__ import annotations

from collections.abc import Iterator

from app.figures.groups import EXPECTED, figure_groups
from app.figures.rows import FigureGroup, FigureRow
from app.look import formats
from app.look.theme import verdict_word
from app.telling.certainty import star_note
from app.telling.finding_names import lever_name
from app.telling.headline import headline, off_mask_word, state_now
from app.telling.lever_words import lever_reasons, lever_standing
from app.telling.taken import when_words
from app.words import Reader, sentence
from app.words.figure_lines import FigureLines
from app.words.verdict_loss import with_loss
from core.judgement.concern import UNCONFIRMED
from core.judgement.response_shapes import ResponseFigure
from core.judgement.shapes import EpisodeFigures
from core.record.channels import CHANNELS, Kind

_HIDDEN = frozenset({"label", "plan", "agreed_with", "breaks_and_night", "jobs", "handover_remark"})


_EMPTY = {"Flags": "none", "Due": "none", "Scores": "none"}
"""What is computed may be none; what is logged may only be none recorded."""


def episode_text(figures: EpisodeFigures, reader: Reader) -> str:
    """Everything computed for one episode, under headings."""
    lines = FigureLines(reader).of(figures)
    head = f"{figures.label} ({figures.episode}), as of {formats.wall(figures.as_of, reader.zone)}"
    parts = [head, "=" * len(head)]
    if figures.concern.why is not None:
        parts.append(sentence(figures.concern.why, reader))
    for heading, body in _sections(figures, lines):
        rows = list(body)
        parts += ["", heading, *(f"  {row}" for row in rows or [lines.tr(_EMPTY.get(heading, "none recorded"))])]
    return "\n".join([*parts, "", star_note()] if any(f.sure in UNCONFIRMED for f in figures.flags) else parts)


def _sections(f: EpisodeFigures, lines: FigureLines) -> Iterator[tuple[str, Iterator[str]]]:
    yield "Now", _now(f, lines)
    yield "Support", iter((lines.settings(f.support), lines.on_mask(f.support), *_absent(f, lines)))
    yield "Profile", _profile(f, lines)
    yield "Flags", _flags(f, lines)
    yield "Due", (lines.due(d) for d in f.due if d.state != "done")
    yield "Responses", (row for r in f.responses for row in _response(r, lines))
    yield "Gases", (lines.gas(g) for g in f.gases)
    yield "Scores", (lines.score(name, s) for name, s in f.scores.items() if s.enabled)
    for group in (g for g in figure_groups(f, lines.reader) if g.key != EXPECTED):
        yield f"Figures: {group.title[:1].lower()}{group.title[1:]}", _group(group, f, lines)
    if f.levers:
        yield "Levers (a qualified person decides)", _levers(f, lines)
    warnings = [*f.warnings, *(w for g in f.gases for w in g.warnings)]
    if warnings:
        yield "To check", (sentence(w, lines.reader) for w in dict.fromkeys(warnings))


def _now(f: EpisodeFigures, lines: FigureLines) -> Iterator[str]:
    """How the patient stands, in the words of the ward's view."""
    gas = next((g for g in reversed(f.gases) if g.site != "venous"), None)
    if off := off_mask_word(f, lines.reader.zone):
        yield off[:1].upper() + off[1:]
    if gas is not None:
        yield f"State: {state_now(f, gas, lines.reader.gas_unit, lines.reader.zone)}"
    if (told := headline(f)) is not None:
        yield f"Response: {told.word}"
        if told.since_start is not None:
            yield f"Since the start: {verdict_word(told.since_start)}"
    if f.now.last_logged_at is not None:
        yield f"Last logged: {formats.wall(f.now.last_logged_at, lines.reader.zone)}"


def _group(group: FigureGroup, f: EpisodeFigures, lines: FigureLines) -> Iterator[str]:
    """A line for each figure: name, value, how old, its doubt, what goes with it; then those without a value."""
    if group.note:
        yield f"({group.note})"
    for row in group.known:
        yield f"{row.name}: {row.value}{_when(row, f, lines)}"
        if row.doubt:
            yield f"  ! {row.doubt}"
        notes = ". ".join(note for note in row.notes if note != group.note)
        if notes:
            yield f"  {notes}"
    by_reason: dict[str, list[str]] = {}
    for row in group.without_value:
        by_reason.setdefault(row.why, []).append(row.name)
    for why, names in by_reason.items():
        yield f"{lines.tr('No value')} ({_lowered(why)}): {'; '.join(names)}"


def _when(row: FigureRow, f: EpisodeFigures, lines: FigureLines) -> str:
    """The moment of a value and how long ago it was."""
    if row.at is None:
        return ""
    return f" ({when_words(row.at, row.median_of, f.as_of, lines.reader)})"


def _lowered(why: str) -> str:
    """A reason inside a sentence; abbreviations keep their letters."""
    first = why.partition(" ")[0]
    return why if any(c.isupper() or c.isdigit() for c in first[1:]) else why[:1].lower() + why[1:]


def _absent(f: EpisodeFigures, lines: FigureLines) -> Iterator[str]:
    """Why a setting is not known."""
    said = dict.fromkeys(sentence(m, lines.reader) for m in f.support.reasons.values())
    if said:
        yield "; ".join(said)


def _profile(f: EpisodeFigures, lines: FigureLines) -> Iterator[str]:
    for key, value in f.profile.items():
        if value is None or key in _HIDDEN:
            continue
        channel = CHANNELS[key]
        if channel.kind is Kind.INSTANT and not isinstance(value, str):
            text = formats.wall(int(value), lines.reader.zone)
        else:
            text = formats.quantity(key, value, lines.reader.gas_unit)
        yield f"{channel.name}: {text}"


def _flags(f: EpisodeFigures, lines: FigureLines) -> Iterator[str]:
    for flag in f.flags:
        indent = "" if flag.strongest else "  "
        yield indent + lines.flag_head(flag)
        yield f"{indent}  {lines.evidence(flag)}"
        yield f"{indent}  {lines.certainty(flag)}"


def _response(r: ResponseFigure, lines: FigureLines) -> Iterator[str]:
    yield f"{formats.wall(r.anchor_at, lines.reader.zone)} {lines.anchor(r)}"
    yield f"  {lines.verdict(r)}"
    if r.baseline_at is not None:
        parts = [f"pH {formats.fixed(r.baseline_ph, 2)}" if r.baseline_ph is not None else "",
                 f"PaCO2 {lines.pressure(r.baseline_paco2_mmHg)}" if r.baseline_paco2_mmHg is not None else "",
                 f"P/F {lines.pressure(r.baseline_pf_mmHg)}" if r.baseline_pf_mmHg is not None else ""]  # fmt: skip
        yield f"  baseline {formats.wall(r.baseline_at, lines.reader.zone)}: {', '.join(p for p in parts if p)}"
    for g in r.gases:
        verdict = with_loss(g.verdict or "not judged", lost=g.since_start.gain_lost)
        yield f"  {formats.wall(g.at, lines.reader.zone)} {verdict}: {lines.deltas(g)}"
        for also in g.also_changed:
            yield f"    in between: {formats.clock(also.at, lines.reader.zone)} {lines.step(also)}"
        if g.why:
            yield f"    {lines.sentences(g.why)}"
        since = g.since_start
        if since.verdict:
            yield f"    since the start: {with_loss(since.verdict, lost=since.gain_lost)}"


def _levers(f: EpisodeFigures, lines: FigureLines) -> Iterator[str]:
    for lever in f.levers:
        said = " ".join(lever_reasons(lever, lines.reader))
        yield f"{lever_name(lever.key, lines.reader)}: {lever_standing(lever, lines.reader)}. {said}".rstrip()
