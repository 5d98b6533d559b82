"""What a handover sheet says, as shapes with every word ready: one page for the ward, one per episode."""

from __future__ import annotations

from dataclasses import dataclass

from app.sheet.chart_data import ShiftChart
from app.sheet.gas_table import GasRow

CAUTION = (
    "Supports and never replaces clinical judgement. It is no alarm and no monitor. Local policy and licensed "
    "practice come first. Sources marked 'from memory' or 'common practice' are to be confirmed locally."
)
Fact = tuple[str, str]


@dataclass(frozen=True, slots=True)
class FlagLine:
    """One flag: its tier, its head on one line, its evidence, and where the marker comes from."""

    tier: str
    head: str
    evidence: str
    source: str
    is_open: bool
    is_strongest: bool = True


@dataclass(frozen=True, slots=True)
class ChangeLine:
    """One change of the shift: when, what, and what it did in words."""

    at: str
    what: str
    response: str
    verdict: str = ""


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
    missing: tuple[str, ...]
    skin: str = ""
    """All checks of the skin that are due, in one line."""
    quiet: str = ""
    """That nothing was logged for any episode since a moment well before the shift's end; "" elsewhere."""


@dataclass(frozen=True, slots=True)
class EpisodePage:
    """The page of one episode."""

    label: str
    subtitle: str
    place: int
    tier: str
    standing: str
    facts: tuple[Fact, ...]
    settings: str
    changes: tuple[ChangeLine, ...]
    chart: ShiftChart
    gases: tuple[GasRow, ...]
    leak: str
    flags: tuple[FlagLine, ...]
    due: tuple[str, ...]
    care: tuple[Fact, ...]
    told: tuple[str, ...]
    plan: str
    jobs: str
    remark: str
    to_check: tuple[str, ...]
    left_out_changes: int = 0
    left_out_gases: int = 0
    left_out_flags: int = 0
    left_out_checks: int = 0
    left_out_evidence: int = 0


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
