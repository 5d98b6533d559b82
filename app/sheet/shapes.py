"""What a handover sheet says, as shapes with every word ready: one page for the ward, one per episode."""

from __future__ import annotations

from dataclasses import dataclass

from app.sheet.chart_data import ShiftChart
from app.sheet.gas_table import GasRow
from app.telling.caution_texts import CAUTION

Fact = tuple[str, str]
TIERS = ("escalate", "concern", "remark")


@dataclass(frozen=True, slots=True)
class FlagLine:
    """One flag: its tier, its head on one line, its evidence, and where the marker comes from."""

    tier: str
    head: str
    evidence: str
    source: str
    is_open: bool
    is_strongest: bool = True
    marker: str = ""
    """Its name and tier alone, e.g. `SpO2 below range (concern)`."""
    spell: str = ""
    """From when until when it was met, or when and by whom it was settled."""
    is_settled: bool = False
    """Whether somebody settled it; a closed flag that nobody settled is no longer met."""


@dataclass(frozen=True, slots=True)
class ChangeLine:
    """One change of the shift: when, what, and what followed in words."""

    at: str
    what: str
    response: str
    verdict: str = ""
    brief: str = ""
    """What followed in a few words, for a page that has no room for all of them."""


@dataclass(frozen=True, slots=True)
class WardRow:
    """One episode on the ward's page. `tier` is its strongest open flag's, or "" for none."""

    number: int
    label: str
    who: str
    tier: str
    state: str
    change_of_state: str
    support: str
    response: str
    flags: tuple[str, ...]
    remarks: str
    due: str
    limits: str
    ended: bool = False
    action: str = ""
    """What is planned and who was told, where something is to be done; "" elsewhere."""
    sign: str = ""
    """The verdict that its sign shows: never a better that hides a relapse."""
    is_limited: bool = False
    """Whether treatment has a limit."""

    @property
    def is_grave(self) -> bool:
        """Whether the response is to be read as strongly as the state."""
        return self.sign in ("worse", "mixed")


@dataclass(frozen=True, slots=True)
class WardPage:
    """The page for the ward."""

    title: str
    shift: str
    see_first: str
    rows: tuple[WardRow, ...]
    due: tuple[str, ...]
    """Gases that are due, a line each."""
    missing: tuple[str, ...]
    skin: str = ""
    """All checks of the skin that are due, in one line."""
    quiet: str = ""
    """That nothing was logged for any episode since a moment well before the shift's end; "" elsewhere."""
    due_other: tuple[str, ...] = ()
    """Other due items, a line for each kind."""
    compared: str = ""
    """What the pages of the episodes are compared with: the last closed handover, or the shift's start."""


@dataclass(frozen=True, slots=True)
class PageBrevity:
    """How much of a page is said shorter or left out so that it fits; what is left out is said to be."""

    since: bool = False
    """Flags raised and gone since the last handover are counted, not named twice."""
    due: bool = False
    """Due items without their reasons."""
    ended: bool = False
    """Flags no longer met by their names alone."""
    weaker_evidence: bool = False
    """Evidence of flags that stand under a stronger one is left to the record."""
    checks: int = 0
    """So many things to check are left out, the last first."""
    changes: int = 0
    """So many of the oldest changes stand in one paragraph with their verdict alone."""
    changes_out: int = 0
    gases_out: int = 0
    """So many of the oldest are left out."""
    evidence_of: frozenset[str] = frozenset(TIERS)
    """Tiers whose flags stand with their evidence; that of the others is left to the record."""


@dataclass(frozen=True, slots=True)
class EpisodePage:
    """The page of one episode."""

    label: str
    subtitle: str
    place: int
    tier: str
    standing: str
    facts: tuple[Fact, ...]
    support: tuple[Fact, ...]
    """Since when, hours on the mask, settings now, leak and interface."""
    changes: tuple[ChangeLine, ...]
    chart: ShiftChart
    gases: tuple[GasRow, ...]
    flags: tuple[FlagLine, ...]
    due: tuple[str, ...]
    care: tuple[Fact, ...]
    told: tuple[str, ...]
    """Calls made, each with whom and the answer."""
    plan: tuple[Fact, ...]
    """If this by then, do that; agreed with whom; breaks and night; jobs not done."""
    remark: str
    to_check: tuple[str, ...]
    levers: tuple[str, ...] = ()
    """What could act, each with its reason and what limits it."""
    since_head: str = ""
    since: tuple[str, ...] = ()
    """What is otherwise than was handed over, a sentence each."""
    since_short: tuple[str, ...] = ()
    """The same with its flags counted: they stand with their times among the flags of the page."""
    brief: PageBrevity = PageBrevity()


@dataclass(frozen=True, slots=True)
class SheetContent:
    """A whole handover, its foot lines and who gives and takes it ("" leaves a line to sign)."""

    ward: WardPage
    episodes: tuple[EpisodePage, ...]
    head: str
    printed: str
    given_by: str = ""
    taken_by: str = ""
    caution: str = CAUTION
    gas_unit: str = "mmHg"
    signed_at: str = ""
    """When it was given and taken, for one that is closed; "" leaves room to write it."""
