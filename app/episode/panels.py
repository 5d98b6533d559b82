"""The user's panels: named charts filled with channels. An immutable set; each change makes a new one.

A panel has one or two units, because it has one or two scales. The set is kept as JSON in the store's layout
table and moves between stores as TOML.
"""

from __future__ import annotations

import json
import tomllib
from collections.abc import Mapping
from dataclasses import asdict, dataclass, replace
from math import isfinite
from typing import Any, Final

from core.record.channels import CHANNELS, HYPOXAEMIC, Group, Kind
from core.record.message import refuse

COMPUTED: Final = {"pf": "mmHg", "pressure_support": "cmH2O", "hco3_calculated": "mmol/L", "sbe": "mmol/L"}
"""Channels that are computed and can be drawn beside logged ones, with their unit."""
LEAST_HEIGHT, MOST_HEIGHT = 0.5, 3.0
MOST_PANELS: Final = 12
MOST_CHANNELS: Final = 5
FORMAT: Final = 2
"""2 brought a range for the second unit's axis; format 1 is read as before."""
_ENDS: Final = ("low", "high", "second_low", "second_high")


@dataclass(frozen=True, slots=True)
class Panel:
    """One chart. `low`/`high` fix the first unit's axis, `second_low`/`second_high` the second's, in canonical
    units; None lets an end follow the values. `height` is a share of the room, 1 for an ordinary panel. `bands`:
    draw target and policy limits."""

    key: str
    title: str
    channels: tuple[str, ...]
    height: float = 1.0
    low: float | None = None
    high: float | None = None
    bands: bool = True
    second_low: float | None = None
    second_high: float | None = None

    @property
    def ends(self) -> tuple[tuple[float | None, float | None], ...]:
        """The fixed ends of each unit's axis."""
        return (self.low, self.high), (self.second_low, self.second_high)


def can_be_drawn(channel: str) -> bool:
    """Whether a channel can stand in a panel: a number that changes with time."""
    if channel in COMPUTED:
        return True
    c = CHANNELS.get(channel)
    return c is not None and c.kind is Kind.NUMBER and c.group is not Group.PROFILE


def drawable() -> tuple[str, ...]:
    """Every channel that can stand in a panel, in the registry's order, computed ones last."""
    return (*(k for k in CHANNELS if can_be_drawn(k)), *COMPUTED)


def unit_of(channel: str) -> str:
    """The canonical unit of a channel that can be drawn."""
    return COMPUTED[channel] if channel in COMPUTED else CHANNELS[channel].unit


def units_of(channels: tuple[str, ...]) -> tuple[str, ...]:
    """The units of some channels, each once, in order."""
    return tuple(dict.fromkeys(unit_of(c) for c in channels))


def checked(panel: Panel) -> Panel:
    """The panel itself.

    Raises:
        RecordError: `panel.*` naming what is wrong and what is accepted.
    """
    if not panel.title.strip():
        raise refuse("panel.no_name", accepted="a name")
    if not panel.channels:
        raise refuse("panel.empty", title=panel.title, accepted="one channel or more")
    for c in panel.channels:
        if not can_be_drawn(c):
            raise refuse("panel.channel_unknown", title=panel.title, channel=c, accepted=", ".join(drawable()))
    if len(panel.channels) > MOST_CHANNELS:
        raise refuse("panel.too_many_channels", title=panel.title, count=len(panel.channels), accepted=MOST_CHANNELS)
    if len(units_of(panel.channels)) > 2:
        raise refuse(
            "panel.too_many_units",
            title=panel.title,
            units=", ".join(units_of(panel.channels)),
            accepted="one or two units",
        )
    for low, high in panel.ends:
        _check_axis(panel.title, low, high)
    height = min(max(panel.height, LEAST_HEIGHT), MOST_HEIGHT)
    return replace(panel, title=panel.title.strip(), height=height)


def _check_axis(title: str, low: float | None, high: float | None) -> None:
    for end in (low, high):
        if end is not None and not isfinite(end):
            raise refuse("panel.axis_unreadable", title=title, value=str(end), accepted="a number")
    if low is not None and high is not None and low >= high:
        accepted = "the low end below the high end"
        raise refuse("panel.axis_upside_down", title=title, low=low, high=high, accepted=accepted)


@dataclass(frozen=True, slots=True)
class PanelSet:
    """Panels from top to bottom."""

    panels: tuple[Panel, ...]

    def index(self, key: str) -> int:
        """Where a panel stands.

        Raises:
            RecordError: `panel.unknown`.
        """
        for i, p in enumerate(self.panels):
            if p.key == key:
                return i
        raise refuse("panel.unknown", panel=key, accepted=", ".join(p.key for p in self.panels))

    def get(self, key: str) -> Panel:
        """The panel of that key."""
        return self.panels[self.index(key)]

    def added(self, title: str, channels: tuple[str, ...]) -> PanelSet:
        """With a new panel at the foot."""
        if len(self.panels) >= MOST_PANELS:
            raise refuse("panel.too_many", count=len(self.panels), accepted=MOST_PANELS)
        return PanelSet((*self.panels, checked(Panel(self._free_key(), title, channels))))

    def changed(self, key: str, **values: Any) -> PanelSet:
        """With other values of one panel: title, channels, height, low, high, bands."""
        i = self.index(key)
        new = checked(replace(self.panels[i], **values))
        return PanelSet((*self.panels[:i], new, *self.panels[i + 1 :]))

    def moved(self, key: str, places: int) -> PanelSet:
        """With a panel moved up (negative) or down, stopping at the ends."""
        i = self.index(key)
        rest = list(self.panels)
        panel = rest.pop(i)
        rest.insert(min(max(i + places, 0), len(rest)), panel)
        return PanelSet(tuple(rest))

    def removed(self, key: str) -> PanelSet:
        """Without a panel. The last one stays: an episode is always drawn by something."""
        if len(self.panels) == 1:
            raise refuse("panel.last", accepted="at least one panel")
        i = self.index(key)
        return PanelSet(self.panels[:i] + self.panels[i + 1 :])

    def duplicated(self, key: str, title: str) -> PanelSet:
        """With a copy of a panel right under it."""
        if len(self.panels) >= MOST_PANELS:
            raise refuse("panel.too_many", count=len(self.panels), accepted=MOST_PANELS)
        i = self.index(key)
        copy = checked(replace(self.panels[i], key=self._free_key(), title=title))
        return PanelSet((*self.panels[: i + 1], copy, *self.panels[i + 1 :]))

    def _free_key(self) -> str:
        taken = {p.key for p in self.panels}
        return next(k for n in range(1, MOST_PANELS * 4) if (k := f"own-{n}") not in taken)


def family_of(indication: str | None) -> str:
    """Which kind of panels an indication begins with: one for failure of oxygen, one for all others."""
    return "hypoxaemic" if indication in HYPOXAEMIC else "usual"


def shipped(family: str, titles: Mapping[str, str]) -> PanelSet:
    """The panels a family begins with; `titles` in the reader's language by key
    (gas, oxygen, breathing, both, leak)."""
    gas = Panel("gas", titles["gas"], ("ph", "paco2"), 1.4)
    leak = Panel("leak", titles["leak"], ("leak", "vte"))
    if family == "hypoxaemic":
        oxygen = Panel("oxygen", titles["oxygen"], ("spo2", "pf"), 1.4)
        return PanelSet(
            (
                oxygen,
                Panel("breathing", titles["breathing"], ("rr", "rr_total", "vte")),
                replace(gas, height=1.0),
            )
        )
    return PanelSet((gas, Panel("breathing", titles["both"], ("spo2", "rr", "rr_total")), leak))


def to_json(panels: PanelSet) -> str:
    """The set as kept in the store."""
    return json.dumps({"format": FORMAT, "panels": [asdict(p) for p in panels.panels]}, sort_keys=True)


def from_json(text: str) -> PanelSet:
    """Read a kept set.

    Raises:
        RecordError: `panel.unreadable`, `panel.format_newer` or what `checked` refuses.
    """
    try:
        return _from_plain(json.loads(text))
    except (json.JSONDecodeError, KeyError, TypeError, AttributeError) as error:
        raise refuse("panel.unreadable", detail=str(error), accepted="panels as saved here") from None


def to_toml(panels: PanelSet) -> str:
    """The set as TOML, to be carried to another store."""
    lines = [f"format = {FORMAT}", ""]
    for p in panels.panels:
        lines += [
            "[[panels]]",
            f"key = {json.dumps(p.key)}",
            f"title = {json.dumps(p.title, ensure_ascii=False)}",
            f"channels = {json.dumps(list(p.channels))}",
            f"height = {float(p.height)!r}",
        ]
        lines += [f"{k} = {float(v)!r}" for k in _ENDS if (v := getattr(p, k)) is not None]
        lines += [f"bands = {'true' if p.bands else 'false'}", ""]
    return "\n".join(lines)


def from_toml(text: str) -> PanelSet:
    """Read a carried set.

    Raises:
        RecordError: `panel.unreadable`, `panel.format_newer` or what `checked` refuses.
    """
    try:
        return _from_plain(tomllib.loads(text))
    except (tomllib.TOMLDecodeError, KeyError, TypeError, AttributeError) as error:
        raise refuse("panel.unreadable", detail=str(error), accepted="panels as saved here") from None


def _from_plain(plain: dict[str, Any]) -> PanelSet:
    if plain["format"] > FORMAT:
        raise refuse("panel.format_newer", format=plain["format"], accepted=f"format {FORMAT} or older")
    rows = plain["panels"]
    if not 1 <= len(rows) <= MOST_PANELS:
        raise refuse("panel.too_many" if rows else "panel.last", count=len(rows), accepted=MOST_PANELS)
    panels = tuple(checked(Panel(**{**row, "channels": tuple(row["channels"])})) for row in rows)
    if len({p.key for p in panels}) < len(panels):
        raise refuse("panel.unreadable", detail="a key stands twice", accepted="each key once")
    return PanelSet(panels)
