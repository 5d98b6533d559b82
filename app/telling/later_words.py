"""What came later, in words: for the list beside the window and for a printed review."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import TYPE_CHECKING

from app.look.formats import quantity, wall
from app.telling.phrases import channel_name, translate
from app.words import Reader
from core.record.channels import CHANNELS, Kind
from core.record.entries import Entry
from core.record.hindsight import Hindsight, Later
from core.record.instant import Instant

if TYPE_CHECKING:
    from app.telling.table import Table


def later_word(what: Later) -> str:
    """What came later, in one or two words."""
    return {
        Later.RECORDED: translate("later", "recorded later"),
        Later.CORRECTED: translate("later", "corrected later"),
        Later.WITHDRAWN: translate("later", "withdrawn later"),
        Later.MOVED_AWAY: translate("later", "moved to another episode later"),
    }[what]


def value_words(entry: Entry | None, reader: Reader) -> str:
    """A value as it is read; "-" where nothing was known."""
    if entry is None:
        return "-"
    kind = CHANNELS[entry.channel].kind
    if kind is Kind.INSTANT and entry.number is not None:
        return wall(int(entry.number), reader.zone)
    if kind is Kind.MARK:
        return quantity(entry.channel, entry.words) if entry.words else translate("later", "yes")
    value = entry.number if kind is Kind.NUMBER else entry.words
    return quantity(entry.channel, value, reader.gas_unit)


def later_sentence(h: Hindsight, reader: Reader) -> str:
    """One value in a sentence, e.g. `02:10 pH 7.25, corrected later (03:05, CD): 7.29`."""
    name, at = channel_name(h.entry.channel), reader.time(h.entry.at)
    moved = ""
    if h.then is not None and h.now is not None and h.then.at != h.now.at:
        moved = translate("later", ", now of {time}").format(time=reader.time(h.now.at))
    then, now = value_words(h.then, reader), value_words(h.now, reader)
    known, by = reader.time(h.known_at), _by(h)
    if h.what is Later.RECORDED:
        return translate("later", "{at} {name} {now}: recorded later, {known}{by}").format(
            at=at, name=name, now=now, known=known, by=by)  # fmt: skip
    told = translate("later", "{at} {name} {then}: {what}, {known}{by}").format(
        at=at, name=name, then=then, what=later_word(h.what), known=known, by=by)  # fmt: skip
    return told if h.now is None else translate("later", "{told}: now {now}{moved}").format(
        told=told, now=now, moved=moved)  # fmt: skip


def _by(h: Hindsight) -> str:
    by = h.now.by if h.now is not None else ""
    return f" ({by})" if by else ""


def later_table(
    found: Mapping[str, Sequence[Hindsight]], labels: Mapping[str, str], known_at: Instant, reader: Reader
) -> Table:
    """Everything that came later, by episode and time."""
    from app.telling.table import Table

    heads = (
        translate("later", "Episode"), translate("later", "Happened"), translate("later", "What"),
        translate("later", "Known then"), translate("later", "Known now"), translate("later", "Why it differs"),
        translate("later", "Recorded"), translate("later", "By"),
    )  # fmt: skip
    rows = tuple(
        (labels.get(key, key), wall(h.entry.at, reader.zone), channel_name(h.entry.channel),
         value_words(h.then, reader), value_words(h.now, reader), later_word(h.what), wall(h.known_at, reader.zone),
         h.now.by if h.now is not None else "")
        for key, told in sorted(found.items(), key=lambda x: labels.get(x[0], x[0])) for h in told
    )  # fmt: skip
    title = translate("later", "What came later than {time}").format(time=wall(known_at, reader.zone))
    text = "\n".join(
        f"{labels.get(key, key)}: {later_sentence(h, reader)}" for key, told in found.items() for h in told
    )
    return Table(title, heads, rows, text)
