"""What the handover sheet says, every word ready and none drawn: one page for the ward, one per episode.

Print, screen and plain text are made from the same content, so that they cannot differ. Missing data are said to be
missing; nothing is left blank.
"""

from __future__ import annotations

from dataclasses import replace

from app.look import formats
from app.look.formats import zone_name
from app.operations.handover import Handover
from app.sheet.episode_content import EpisodeWriter
from app.sheet.shapes import SheetContent
from app.sheet.ward_content import WardWriter
from app.telling.language import in_language as tr
from app.ward.moves import told_apart
from app.words import Reader
from core.record.instant import HOUR


def _told_apart(handover: Handover, zone: str) -> Handover:
    """The handover with labels that two episodes share told apart, wherever they are printed."""
    shift = handover.shift
    ward = [s.now for s in shift.episodes]
    named = [replace(s, now=replace(s.now, label=told_apart(s.now, ward, shift.end, zone))) for s in shift.episodes]
    return replace(handover, shift=replace(shift, episodes=tuple(named)))


def sheet_content(
    handover: Handover, reader: Reader, *, given_by: str = "", taken_by: str = "", title: str = ""
) -> SheetContent:
    """Everything a handover says, for one reader. With both names it is one to close: its time is printed too."""
    handover = _told_apart(handover, reader.zone)
    shift = handover.shift
    reader = replace(reader, near=(shift.start - 2 * HOUR, handover.end + 10 * HOUR))
    prepared = formats.wall(handover.prepared_at, reader.zone)
    printed = tr("Printed {prepared} ({zone_name})").format(prepared=prepared, zone_name=zone_name(reader.zone))
    if handover.as_known_at is not None:
        printed += tr("; as known at {wall}").format(wall=formats.wall(handover.as_known_at, reader.zone))
    writer = EpisodeWriter(handover, reader)
    return SheetContent(
        WardWriter(handover, reader).ward(
            title or (tr("Handover") if handover.as_known_at is None else tr("Handover, reviewed"))
        ),
        tuple(writer.episode(n, s) for n, s in enumerate(shift.episodes, 1)),
        tr("Ledger head {head}").format(head=handover.printed_head), printed, given_by, taken_by,
        gas_unit=reader.gas_unit,
        signed_at=prepared if given_by and taken_by else "",
    )  # fmt: skip
