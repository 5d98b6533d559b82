"""What to draw: frozen dataclasses with ready arrays and ready words.

Every instant is int64 microseconds UTC. Every word is already in the reader's language. `payload` is
handed back untouched when the reader picks the thing.
"""

from dataclasses import dataclass, field
from enum import IntEnum, StrEnum
from typing import Any
from zoneinfo import ZoneInfo

import numpy as np
from numpy.typing import NDArray

from app.look.theme import GasState, Tier, Verdict

Instants = NDArray[np.int64]
Values = NDArray[np.float64]
MICROSECONDS = 1_000_000


class Look(IntEnum):
    """How sure a value is; each has its own symbol."""

    FRESH = 0
    DOUBTFUL = 1
    CORRECTED = 2
    CARRIED = 3
    DISPUTED = 4


class Drawn(StrEnum):
    """How the values of a trace are drawn."""

    LINE = "line"  # dense device data
    SPOTS = "spots"  # values taken now and then
    SPOTS_JOINED = "spots_joined"
    STEPS = "steps"  # a setting: holds until the next value


@dataclass(frozen=True, slots=True)
class Span:
    """A stretch of time with a word: a break, uncertain minutes, a night."""

    start: int
    end: int
    word: str = ""


@dataclass(frozen=True, slots=True)
class Scale:
    """The range of a value axis, set by the caller and never by the drawing."""

    unit: str
    low: float
    high: float
    decimals: int = 0


@dataclass(frozen=True, slots=True, eq=False)
class Trace:
    """One channel in a panel.

    t, v      shape (n,); v not finite is missing and leaves a gap
    looks     shape (n,), values of Look; None: all fresh
    gap       largest spacing in microseconds still joined by a line; None joins all
    doubts    stretches in which the values are uncertain, with the reason
    ink       number of the channel ink; None: its place in the panel
    """

    key: str
    name: str
    unit: str
    t: Instants
    v: Values
    drawn: Drawn = Drawn.LINE
    decimals: int = 0
    gap: int | None = None
    looks: NDArray[np.uint8] | None = None
    doubts: tuple[Span, ...] = ()
    ink: int | None = None


@dataclass(frozen=True, slots=True)
class Band:
    """A range of values over the whole clock (a target, a limit) in one of the panel's units."""

    low: float
    high: float
    unit: str
    word: str = ""


@dataclass(frozen=True, slots=True, eq=False)
class Area:
    """A range that changes with time, e.g. an expected course with its uncertainty; NaN breaks it."""

    t: Instants
    low: Values
    high: Values
    unit: str
    word: str = ""


@dataclass(frozen=True, slots=True)
class Bracket:
    """A response window over a gas panel: from 30 to 120 minutes after the anchor, with its verdict."""

    anchor: int
    start: int
    end: int
    verdict: Verdict
    word: str
    state: GasState | None = None
    state_word: str = ""
    still_open: bool = False
    payload: Any = None


@dataclass(frozen=True, slots=True)
class Tick:
    """An event under the clock: a small tick with words."""

    at: int
    word: str
    doubtful: bool = False
    payload: Any = None


@dataclass(frozen=True, slots=True)
class PanelSpec:
    """One panel: up to a few traces over one or two scales (one for each unit)."""

    key: str
    title: str
    traces: tuple[Trace, ...]
    scales: tuple[Scale, ...]
    bands: tuple[Band, ...] = ()
    areas: tuple[Area, ...] = ()
    brackets: tuple[Bracket, ...] = ()
    weight: float = 1.0

    def __post_init__(self) -> None:
        units = [scale.unit for scale in self.scales]
        if not 1 <= len(units) <= 2 or len(set(units)) != len(units):
            raise ValueError(f"panel {self.title!r} has scales {units}: one or two units are accepted")
        for scale in self.scales:
            if not scale.low < scale.high:
                raise ValueError(f"scale {scale.unit}: low {scale.low:g} must lie below high {scale.high:g}")
        used = {t.unit for t in self.traces} | {b.unit for b in self.bands} | {a.unit for a in self.areas}
        for unit in sorted(used.difference(units)):
            raise ValueError(f"unit {unit!r} in panel {self.title!r}: {units} are accepted")


@dataclass(frozen=True, slots=True)
class RibbonStep:
    """Settings in force from `start` to `end`.

    Two levels (epap, ipap) or one (cpap in `epap`, ipap None); neither: no pressure, `word` says what
    (high-flow oxygen, off). fio2_word is written where it changes; empty writes nothing.
    """

    start: int
    end: int
    epap: float | None
    ipap: float | None
    mode: str
    fio2_word: str = ""
    fio2_known: bool = True
    doubtful: bool = False
    word: str = ""
    payload: Any = None


@dataclass(frozen=True, slots=True)
class RibbonSpec:
    """The pressure ribbon: steps, breaks (gaps with a word) and ticks for what was changed."""

    title: str
    unit: str
    steps: tuple[RibbonStep, ...]
    breaks: tuple[Span, ...] = ()
    ticks: tuple[Tick, ...] = ()
    high: float = 30.0


@dataclass(frozen=True, slots=True)
class StackSpec:
    """A whole episode on one clock.

    start, end  the episode's extent: Home goes to start, panning stops there
    now         the instant of the now line, None: no line; `now_word` stands at it
    window      the part shown first; None: all of it
    reduced_word  written where data are reduced to their extremes per pixel
    """

    zone: ZoneInfo
    start: int
    end: int
    panels: tuple[PanelSpec, ...]
    ribbon: RibbonSpec | None = None
    events: tuple[Tick, ...] = ()
    now: int | None = None
    now_word: str = ""
    window: tuple[int, int] | None = None
    reduced_word: str = ""
    name: str = ""
    summary: str = ""


@dataclass(frozen=True, slots=True)
class Reading:
    """A trace's value at or before an instant: its own instant tells its age."""

    panel: str
    key: str
    name: str
    unit: str
    decimals: int
    at: int
    value: float
    look: Look
    doubt: str = ""


class LaneKind(StrEnum):
    """What can be picked in a lane."""

    GAS = "gas"
    SETTING = "setting"
    WINDOW = "window"
    BREAK = "break"
    FLAG = "flag"


@dataclass(frozen=True, slots=True)
class LaneItem:
    """One thing in a lane.

    end       for windows and breaks
    word      short, drawn where there is room (`16/6`, `gas due`)
    sentence  the whole of it, for hovering, selection and screen readers
    settled   a flag that is seen or settled is drawn quietly
    """

    kind: LaneKind
    at: int
    sentence: str
    end: int | None = None
    word: str = ""
    verdict: Verdict | None = None
    state: GasState | None = None
    tier: Tier | None = None
    settled: bool = False
    doubtful: bool = False
    payload: Any = None


@dataclass(frozen=True, slots=True)
class SupportPiece:
    """A stretch of support for the bar: pressure support in cmH2O gives the thickness.

    pressure None: support without two levels (CPAP, high-flow), drawn as a thin line with its word.
    """

    start: int
    end: int
    pressure: float | None
    word: str = ""


@dataclass(frozen=True, slots=True)
class Lane:
    """One episode on the ward view, with its words ready.

    tier, flag_word   the strongest open flag
    state_word, verdict_word  the state now and the headline at the right
    state_shorter     the state where `state_word` has no room, the longest first
    doubtful          the gas of that state holds a doubtful value
    due_word, due_late  the next due item
    first_word        written where this lane is the one to see first
    """

    key: str
    title: str
    subtitle: str = ""
    support: tuple[SupportPiece, ...] = ()
    items: tuple[LaneItem, ...] = ()
    state: GasState | None = None
    state_word: str = ""
    state_shorter: tuple[str, ...] = ()
    doubtful: bool = False
    verdict: Verdict | None = None
    verdict_word: str = ""
    tier: Tier | None = None
    flag_word: str = ""
    due_word: str = ""
    due_late: bool = False
    first_word: str = ""
    closed: bool = False
    off_mask: bool = False
    """The mask is off: no setting is in force."""
    sentence: str = ""
    payload: Any = None


@dataclass(frozen=True, slots=True)
class LanesSpec:
    """The ward on one clock, from `start` to `end`; lanes in the order they are to stand."""

    zone: ZoneInfo
    start: int
    end: int
    lanes: tuple[Lane, ...]
    now: int | None = None
    now_word: str = ""
    lane_heading: str = ""
    state_heading: str = ""
    empty_word: str = ""
    name: str = ""


@dataclass(frozen=True, slots=True)
class MapGas:
    """A gas on the acid-base map; the path joins them in order, but for those with `joined` False.

    mark      a short word beside the number, e.g. `venous`
    """

    number: int
    at: int
    ph: float
    paco2: float
    state: GasState
    verdict: Verdict | None = None
    word: str = ""
    doubtful: bool = False
    payload: Any = None
    mark: str = ""
    joined: bool = True


@dataclass(frozen=True, slots=True, eq=False)
class MapLine:
    """An iso-bicarbonate line: paco2 and ph of shape (n,), and the word at its end."""

    paco2: Values
    ph: Values
    word: str


@dataclass(frozen=True, slots=True, eq=False)
class MapBand:
    """The acute or chronic band: lowest and highest pH at each paco2, and its word."""

    paco2: Values
    low: Values
    high: Values
    word: str


@dataclass(frozen=True, slots=True)
class MapSpec:
    """The acid-base map; the caller sets both ranges and gives the axis words with their units."""

    paco2_scale: Scale
    ph_scale: Scale
    paco2_word: str
    ph_word: str
    lines: tuple[MapLine, ...] = ()
    bands: tuple[MapBand, ...] = ()
    gases: tuple[MapGas, ...] = ()
    normal: tuple[float, float, float, float] | None = None  # paco2 low, high, ph low, high
    normal_word: str = ""
    name: str = ""
    summary: str = ""
    notes: tuple[str, ...] = field(default=())
