"""The look: colours by role, one type scale, one spacing grid, and what tells a verdict apart without colour.

Colours
- Channel inks, verdicts and tiers come from two published palettes made for colour-blind readers:
  Okabe M, Ito K. Color Universal Design (2008), and Tol P. Colour Schemes, SRON/EPS/TN/09-002, "muted"
  and "bright". tests/app/look/test_theme.py simulates three kinds of colour blindness on them.
- Text reaches a contrast of 4.5:1 and marks 3:1 (WCAG 2.2, 1.4.3 and 1.4.11) on `ground` and `raised`.
- No meaning hangs on colour: each verdict, tier and state of a gas also has a shape (`app.chart.marks`) and
  a word (`verdict_word`, `tier_word`, `state_word`).

Sizes are pixels at 100 %; `Theme.px` scales them with the text (100-200 %).
"""

from dataclasses import dataclass, replace
from enum import StrEnum
from functools import lru_cache
from typing import Any, Final

from PySide6.QtCore import QT_TRANSLATE_NOOP, QCoreApplication
from PySide6.QtGui import QColor, QFont, QFontDatabase

GRID: Final = 4  # every distance is a multiple of this
RADIUS: Final = 8
LEAST_TEXT_CONTRAST: Final = 4.5
LEAST_MARK_CONTRAST: Final = 3.0


class Verdict(StrEnum):
    """What a gas said about its anchor, in the words of the judgement: what is shown by mistake is no identifier."""

    BETTER = "better"
    WORSE = "worse"
    MIXED = "mixed"
    NO_CLEAR_CHANGE = "no clear change"
    OVER_CORRECTION = "over-correction"
    NOT_YET_KNOWN = "not yet known"
    NOT_JUDGED = "not judged"


class GasState(StrEnum):
    """How acid the gas itself is; this, not the verdict, gives its shape."""

    SEVERE = "severe"
    ACIDOTIC = "acidotic"
    RESOLVED = "resolved"
    UNKNOWN = "unknown"


class Tier(StrEnum):
    """How strong a marker is."""

    REMARK = "remark"
    CONCERN = "concern"
    ESCALATE = "escalate"


_VERDICT_WORDS: Final[dict[Verdict, Any]] = {
    Verdict.BETTER: QT_TRANSLATE_NOOP("verdict", "better"),
    Verdict.WORSE: QT_TRANSLATE_NOOP("verdict", "worse"),
    Verdict.MIXED: QT_TRANSLATE_NOOP("verdict", "mixed"),
    Verdict.NO_CLEAR_CHANGE: QT_TRANSLATE_NOOP("verdict", "no clear change"),
    Verdict.OVER_CORRECTION: QT_TRANSLATE_NOOP("verdict", "over-correction"),
    Verdict.NOT_YET_KNOWN: QT_TRANSLATE_NOOP("verdict", "not yet known"),
    Verdict.NOT_JUDGED: QT_TRANSLATE_NOOP("verdict", "not judged"),
}
_STATE_WORDS: Final[dict[GasState, Any]] = {
    GasState.SEVERE: QT_TRANSLATE_NOOP("state", "severe"),
    GasState.ACIDOTIC: QT_TRANSLATE_NOOP("state", "acidotic"),
    GasState.RESOLVED: QT_TRANSLATE_NOOP("state", "resolved"),
    GasState.UNKNOWN: QT_TRANSLATE_NOOP("state", "state not known"),
}
_TIER_WORDS: Final[dict[Tier, Any]] = {
    Tier.REMARK: QT_TRANSLATE_NOOP("tier", "remark"),
    Tier.CONCERN: QT_TRANSLATE_NOOP("tier", "concern"),
    Tier.ESCALATE: QT_TRANSLATE_NOOP("tier", "escalate"),
}


def verdict_word(verdict: Verdict) -> str:
    """The verdict in the reader's language."""
    return QCoreApplication.translate("verdict", _VERDICT_WORDS[verdict])


def state_word(state: GasState) -> str:
    """The state of a gas in the reader's language."""
    return QCoreApplication.translate("state", _STATE_WORDS[state])


def tier_word(tier: Tier) -> str:
    """The tier in the reader's language."""
    return QCoreApplication.translate("tier", _TIER_WORDS[tier])


def verdict_of(text: str) -> Verdict:
    """The verdict that the judgement gave; ValueError where there is none of that name.

    >>> verdict_of("over-correction")
    <Verdict.OVER_CORRECTION: 'over-correction'>
    """
    return Verdict(text)


@dataclass(frozen=True, slots=True)
class Colours:
    """Colours by role, as #rrggbb.

    ground, raised, sunken  the window, cards on it, wells in it (fields, tracks)
    ink, ink_quiet          text; both readable on ground, raised and sunken
    line, edge              decorative hairlines; borders of controls (3:1)
    accent, on_accent       what can be acted on, and text upon it
    wash                    the accent thinned out: selected rows, hovered buttons
    support                 the band of pressure support
    target                  the range a value should be in
    verdicts, tiers         marks (3:1); one hue for each, light or dark
    verdict_inks            words of a verdict, in its hue; as readable as any text
    """

    ground: str
    raised: str
    sunken: str
    ink: str
    ink_quiet: str
    line: str
    edge: str
    accent: str
    on_accent: str
    wash: str
    support: str
    support_edge: str
    target: str
    channels: tuple[str, ...]
    verdicts: dict[Verdict, str]
    verdict_inks: dict[Verdict, str]
    tiers: dict[Tier, str]
    on_tier: dict[Tier, str]


LIGHT_COLOURS: Final = Colours(
    ground="#f4f3ef",
    raised="#ffffff",
    sunken="#ecebe6",
    ink="#1c2126",
    ink_quiet="#575f68",
    line="#dddbd4",
    edge="#82878d",
    accent="#1d5a68",
    on_accent="#ffffff",
    wash="#e1ecee",
    support="#cfe0e3",
    support_edge="#3b7b89",
    target="#e7eedd",
    channels=("#0072b2", "#d55e00", "#009e73", "#882255", "#332288"),
    verdicts={
        Verdict.BETTER: "#0072b2",
        Verdict.WORSE: "#d55e00",
        Verdict.MIXED: "#882255",
        Verdict.NO_CLEAR_CHANGE: "#575f68",
        Verdict.OVER_CORRECTION: "#332288",
        Verdict.NOT_YET_KNOWN: "#575f68",
        Verdict.NOT_JUDGED: "#82878d",
    },
    verdict_inks={
        Verdict.BETTER: "#0064a0",
        Verdict.WORSE: "#a34800",
        Verdict.MIXED: "#882255",
        Verdict.NO_CLEAR_CHANGE: "#575f68",
        Verdict.OVER_CORRECTION: "#332288",
        Verdict.NOT_YET_KNOWN: "#575f68",
        Verdict.NOT_JUDGED: "#575f68",
    },
    tiers={Tier.REMARK: "#575f68", Tier.CONCERN: "#d55e00", Tier.ESCALATE: "#882255"},
    on_tier={Tier.REMARK: "#ffffff", Tier.CONCERN: "#0b0d0f", Tier.ESCALATE: "#ffffff"},
)

DARK_COLOURS: Final = Colours(
    ground="#14171a",
    raised="#1c2024",
    sunken="#101315",
    ink="#e9e6df",
    ink_quiet="#a3a9ae",
    line="#30363b",
    edge="#757d84",
    accent="#8cc3cd",
    on_accent="#10252a",
    wash="#233238",
    support="#2b4a52",
    support_edge="#6fa9b5",
    target="#2a3a2f",
    channels=("#56b4e9", "#e69f00", "#009e73", "#cc79a7", "#f0e442"),
    verdicts={
        Verdict.BETTER: "#56b4e9",
        Verdict.WORSE: "#e69f00",
        Verdict.MIXED: "#cc79a7",
        Verdict.NO_CLEAR_CHANGE: "#a3a9ae",
        Verdict.OVER_CORRECTION: "#f0e442",
        Verdict.NOT_YET_KNOWN: "#a3a9ae",
        Verdict.NOT_JUDGED: "#757d84",
    },
    verdict_inks={
        Verdict.BETTER: "#56b4e9",
        Verdict.WORSE: "#e69f00",
        Verdict.MIXED: "#d894bb",
        Verdict.NO_CLEAR_CHANGE: "#a3a9ae",
        Verdict.OVER_CORRECTION: "#f0e442",
        Verdict.NOT_YET_KNOWN: "#a3a9ae",
        Verdict.NOT_JUDGED: "#a3a9ae",
    },
    tiers={Tier.REMARK: "#a3a9ae", Tier.CONCERN: "#e69f00", Tier.ESCALATE: "#cc79a7"},
    on_tier={Tier.REMARK: "#14171a", Tier.CONCERN: "#14171a", Tier.ESCALATE: "#14171a"},
)


@dataclass(frozen=True, slots=True)
class TypeScale:
    """Text sizes in pixels at 100 %."""

    caption: int = 12
    body: int = 14
    emphasis: int = 16
    title: int = 20
    display: int = 28


@dataclass(frozen=True, slots=True)
class Theme:
    """All that a widget or a chart needs to know to look right."""

    name: str
    dark: bool
    colours: Colours
    type: TypeScale = TypeScale()
    text_scale: float = 1.0

    def px(self, size: float) -> int:
        """Pixels of a size given at 100 %."""
        return round(size * self.text_scale)

    def font(self, size: int | None = None, *, bold: bool = False) -> QFont:
        """A font of the platform's sans with figures of equal width; `size` from `type`, default body."""
        return font_of(self.px(self.type.body if size is None else size), bold=bold)

    def colour(self, role: str, alpha: float = 1.0) -> QColor:
        """The colour of a role of `Colours`, at an opacity from 0 to 1."""
        return tint(getattr(self.colours, role), alpha)

    def channel(self, number: int) -> QColor:
        """The ink of the panel's channel `number`, counted from 0 and taken round."""
        return QColor(self.colours.channels[number % len(self.colours.channels)])

    def scaled(self, text_scale: float) -> "Theme":
        """The same theme with larger text; ValueError outside 1.0 to 2.0."""
        if not 1.0 <= text_scale <= 2.0:
            raise ValueError(f"text scale {text_scale:g}: 1.0 to 2.0 is accepted")
        return replace(self, text_scale=text_scale)


LIGHT: Final = Theme("light", False, LIGHT_COLOURS)
DARK: Final = Theme("dark", True, DARK_COLOURS)
THEMES: Final = {"light": LIGHT, "dark": DARK}


def tint(colour: str, alpha: float = 1.0) -> QColor:
    """`colour` at an opacity from 0 to 1."""
    made = QColor(colour)
    made.setAlphaF(alpha)
    return made


def blend(over: str, under: str, share: float) -> QColor:
    """An opaque mix with `share` of `over`: opaque pens draw fast, translucent ones do not."""
    a, b = QColor(over), QColor(under)
    channels = zip((a.red(), a.green(), a.blue()), (b.red(), b.green(), b.blue()), strict=True)
    return QColor(*(round(x * share + y * (1 - share)) for x, y in channels))


@lru_cache(maxsize=64)
def font_of(pixels: int, *, bold: bool = False) -> QFont:
    """The platform's sans, DejaVu Sans after it, with tabular figures, `pixels` high. Copy before changing it:
    the same one is handed out again, for charts ask at every step."""
    font = QFontDatabase.systemFont(QFontDatabase.SystemFont.GeneralFont)
    family = font.family()
    font.setFamilies([family, "DejaVu Sans"])
    font.setPixelSize(pixels)
    font.setWeight(QFont.Weight.DemiBold if bold else QFont.Weight.Normal)
    font.setFeature(QFont.Tag("tnum"), 1)
    font.setHintingPreference(QFont.HintingPreference.PreferVerticalHinting)
    return font


def contrast(one: str, other: str) -> float:
    """Contrast ratio of two colours, 1 to 21 (WCAG 2.2, relative luminance of sRGB).

    >>> contrast("#000000", "#ffffff")
    21.0
    """
    a, b = sorted((_luminance(one), _luminance(other)), reverse=True)
    return (a + 0.05) / (b + 0.05)


def _luminance(colour: str) -> float:
    parts = [int(colour[i : i + 2], 16) / 255 for i in (1, 3, 5)]
    red, green, blue = (p / 12.92 if p <= 0.04045 else ((p + 0.055) / 1.055) ** 2.4 for p in parts)
    return 0.2126 * red + 0.7152 * green + 0.0722 * blue
