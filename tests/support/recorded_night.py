"""Random nights for tests of what was known when: things are recorded late, corrected, withdrawn, moved."""

from __future__ import annotations

from dataclasses import dataclass, replace

from hypothesis import strategies as st

from core.record.entries import Action, Entry, NewEntry, recorded
from core.record.instant import MINUTE, Instant
from tests.support.log import moment

BEGIN: Instant = moment("-20:00")
KEYS = ("E1", "E2")
_NUMBERS = {"ph": (7.10, 7.45), "paco2": (40.0, 95.0), "pao2": (50.0, 90.0), "rr": (14.0, 40.0), "spo2": (82.0, 97.0),
            "gcs": (11.0, 15.0), "ipap": (12.0, 24.0), "epap": (4.0, 8.0), "fio2": (0.24, 0.6), "hr": (70.0, 130.0),
            "leak": (5.0, 60.0)}  # fmt: skip
_WORDS = {"mode": ("BPAP-ST", "CPAP", "off"), "indication": ("copd", "pneumonia"),
          "ceiling_of_care": ("full", "comfort"), "mask_off": ("",), "mask_on": ("",), "gas_sent": ("",),
          "label": ("Bed 1", "Bed 2"), "note": ("seen", "quiet")}  # fmt: skip


@dataclass(frozen=True)
class Deed:
    """One thing done to the record: when it was recorded, and the entry; `target` counts earlier entries."""

    recorded_at: Instant
    entry: NewEntry
    target: int | None = None


@st.composite
def _value(draw: st.DrawFn, at: Instant) -> NewEntry:
    key = draw(st.sampled_from(KEYS if draw(st.booleans()) else KEYS[:1]))
    if draw(st.integers(0, 3)):
        channel = draw(st.sampled_from(sorted(_NUMBERS)))
        low, high = _NUMBERS[channel]
        return NewEntry(key, channel, at, number=round(draw(st.floats(low, high)), 2), by="AB")
    channel = draw(st.sampled_from(sorted(_WORDS)))
    return NewEntry(key, channel, at, words=draw(st.sampled_from(_WORDS[channel])), by="AB")


@st.composite
def nights(draw: st.DrawFn, most: int = 30) -> list[Deed]:
    """Deeds in order of recording. Up to three hours late; a third act on an earlier entry."""
    deeds: list[Deed] = []
    now = BEGIN
    for _ in range(draw(st.integers(1, most))):
        now += draw(st.integers(0, 40)) * MINUTE
        at = max(BEGIN, now - draw(st.sampled_from((0, 0, 5, 60, 180))) * MINUTE)
        new = draw(_value(at))
        if deeds and not draw(st.integers(0, 2)):
            target = draw(st.integers(0, len(deeds) - 1))
            deeds.append(Deed(now, _acting(draw, deeds[target].entry, new), target))
        else:
            deeds.append(Deed(now, new))
    return deeds


def _acting(draw: st.DrawFn, old: NewEntry, new: NewEntry) -> NewEntry:
    action = draw(st.sampled_from((Action.CORRECT, Action.WITHDRAW, Action.MOVE)))
    if action is Action.CORRECT:
        number = new.number if old.number is None or new.channel == old.channel else old.number
        return replace(old, action=action, number=number if old.number is not None else None, reason="wrong")
    if action is Action.WITHDRAW:
        return replace(old, action=action, number=None, words=None, reason="not so")
    other = KEYS[1] if old.episode == KEYS[0] else KEYS[0]
    return replace(old, action=action, episode=other, reason="wrong bed")


def ledger(deeds: list[Deed]) -> list[Entry]:
    """The deeds as a ledger keeps them, in order of sequence."""
    out: list[Entry] = []
    for seq, deed in enumerate(deeds, 1):
        target = "" if deed.target is None else out[deed.target].id
        out.append(recorded(replace(deed.entry, replaces=target), seq, f"e{seq}", deed.recorded_at))
    return out
