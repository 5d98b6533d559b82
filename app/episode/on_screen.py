"""What the episode view knows of the episode in hand. No Qt, no drawing: the ward shows before charts load."""

from __future__ import annotations

from dataclasses import dataclass

from app.episode.panels import PanelSet
from app.telling.support_course import Course
from core.judgement.policy import Policy
from core.judgement.shapes import EpisodeFigures
from core.record.episode import Episode
from core.record.hindsight import Hindsight


@dataclass(frozen=True, slots=True)
class EpisodeOnScreen:
    """One episode, its figures and course, by which policy, in which panels, in which unit."""

    record: Episode
    figures: EpisodeFigures
    course: Course
    policy: Policy
    panels: PanelSet
    gas_unit: str
    live: bool = True
    """False where the past is looked at."""
    later: tuple[Hindsight, ...] = ()
    """What was recorded or changed only after the moment that is looked at."""

    @property
    def zone(self) -> str:
        """The zone that its times are shown in."""
        return self.figures.zone
