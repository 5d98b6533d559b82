"""What a de-identified export says of itself: what was left out, what was changed, what remains."""

from __future__ import annotations

from typing import TYPE_CHECKING

from app.telling.phrases import channel_name, translate

if TYPE_CHECKING:
    from storage.export.deidentified import Statement


def statement_text(told: Statement) -> str:
    """The statement that goes with the file. It holds counts and names of channels, nothing of a person."""
    removed = [f"  {_named(key)}: {count}" for key, count in told.removed.items()]
    remains = [f"  {channel_name(key)}: {count}" for key, count in told.remains.items()]
    return "\n".join((
        translate("export", "De-identified export: {episodes} episodes, {rows} rows.").format(
            episodes=told.episodes, rows=told.rows),
        "",
        translate("export", "Changed"),
        translate("export", "  Episodes are numbered in an order drawn by chance."),
        translate("export", "  Every time of an episode is moved by one offset drawn by chance, kept nowhere: dates "
                            "and times of day are not true, lengths of time inside an episode are."),
        translate("export", "  Ages of 90 and more are written as 90."),
        "",
        translate("export", "Left out (values)"), *removed,
        translate("export", "  Who entered a value, when it was recorded, and its text as typed, of every row."),
        "",
        translate("export", "Remains (rows)"), *remains,
        "",
        translate("export", "De-identified is not anonymous: an unusual course, or a rare combination of age, size "
                            "and indication, can still single a person out. Whoever passes the file on answers "
                            "for it."),
        "",
    ))  # fmt: skip


def _named(key: str) -> str:
    if key == "remark beside a value":
        return translate("export", "Remark beside a value")
    channel, _, more = key.partition(" ")
    return f"{channel_name(channel)} {more}".rstrip()
