"""Looking back and counting: the night as it was known, shift figures, files for others."""

from __future__ import annotations

from typing import TYPE_CHECKING

from app.deeds.closing import ClosingDeeds
from app.deeds.policy import PolicyDeeds
from app.deeds.ward import WardDeeds
from app.operations.outcome import Outcome
from app.session.failure import Failure
from app.ward.moves import labels_told_apart
from app.window.shell import Shell
from app.words import sentence
from core.record.instant import MINUTE, Instant
from core.record.message import RecordError

if TYPE_CHECKING:
    from app.operations.as_known import Beside, CameLater
    from core.figures.ward_statistics import WardStatistics

STEP_MIN = 15


class ReviewDeeds(ClosingDeeds):
    """Serves the menu Review."""

    _direction = 0
    _known: CameLater | None = None
    _known_at: Instant = 0
    _span: tuple[Instant, Instant] | None = None

    def __init__(self, window: Shell, ward: WardDeeds, policy: PolicyDeeds) -> None:
        super().__init__(window, ward)
        self._policy = policy

    # as it was known

    def do_look_back(self) -> None:
        """Begin to look back, at the newest recording; or go live again."""
        if self.model.session.is_live:
            self.look_beside(-1)
        else:
            self.model.look_back(None)

    def do_known_back(self) -> None:
        """A quarter of an hour back."""
        self.step(-STEP_MIN)

    def do_known_forward(self) -> None:
        """A quarter of an hour on."""
        self.step(STEP_MIN)

    def do_known_before(self) -> None:
        """To the recording before."""
        self.look_beside(-1)

    def do_known_after(self) -> None:
        """To the recording after."""
        self.look_beside(1)

    def do_known_live(self) -> None:
        """Live again."""
        self.model.look_back(None)

    def step(self, minutes: int) -> None:
        """So many minutes on or back; past now is live."""
        self.look_at(self.model.session.moment() + minutes * MINUTE)

    def look_at(self, at: Instant) -> None:
        """See a moment as it was known then; one that is not past is live."""
        self.model.look_back(at if at < self.model.session.now() else None)

    def look_beside(self, direction: int) -> None:
        """See the recording before or after the moment that is looked at."""
        from app.operations import as_known

        self._direction = direction
        self.model.ask(as_known.beside, self.model.session.moment(), done=self._beside, subject="beside")

    def _beside(self, outcome: Outcome[Beside]) -> None:
        found = outcome.value.before if self._direction < 0 else outcome.value.after
        if found is not None:
            self.look_at(found)
        elif self._direction > 0:
            self.model.look_back(None)

    def look_at_typed(self, text: str) -> None:
        """See the time of day that was typed, the newest one that is past."""
        from core.record.local_time import latest_wall_time

        hour, _, minute = text.strip().replace(".", ":").partition(":")
        session = self.model.session
        try:
            if not (hour.isdigit() and minute.isdigit()):
                hour, minute = "99", "99"
            self.look_at(latest_wall_time(int(hour), int(minute), now=session.now(), zone=session.zone))
        except RecordError as error:
            self.window.known.say(sentence(error.message, self.window.reader))

    def count_later(self) -> None:
        """Ask how much came later than the moment that is looked at."""
        from app.operations import as_known

        at = self.model.session.as_known_at
        if at is None:
            self._known = None
            self._mark({})
        else:
            self._known_at = at
            self.model.ask(as_known.came_later, as_known.LaterRequest(at), done=self._counted, subject="came later")

    def _counted(self, outcome: Outcome[CameLater]) -> None:
        if self.model.session.as_known_at is None:
            return
        self._known = outcome.value
        self._mark(outcome.value)
        self.window.known.show_later(sum(len(told) for told in outcome.value.values()))

    def _mark(self, found: CameLater) -> None:
        self.pages.ward.mark_later({key: len(told) for key, told in found.items()})
        if self.window.episode_feed is not None:
            self.window.episode_feed.mark_later(found)

    def do_came_later(self) -> None:
        """List what came later than the moment that is looked at."""
        if self._known is None or self.model.session.as_known_at is None:
            self.window.say(self.tr("The window is live: nothing can have come later."))
            return
        from app.dialogs.table import TableDialog
        from app.telling.later_words import later_table

        answers = self.window.feed.answers if self.window.feed is not None else {}
        labels = labels_told_apart(answers, self.model.session.moment(), self.model.session.zone)
        table = later_table(self._known, labels, self._known_at, self.window.reader)
        TableDialog(table, self.window.theme, self.window).open()

    # the policy

    def do_policy(self) -> None:
        """The policy in force."""
        self._policy.show()

    # shift figures

    def do_show_statistics(self) -> None:
        """The shift figures of the ward."""
        self.window.show_page("statistics")

    def count_shift(self, start: Instant | None = None, end: Instant | None = None) -> None:
        """Count a span, or the shift that is looked at."""
        from app.operations import statistics

        shift, session = self.window.shift(), self.model.session
        self._span = None if start is None or end is None else (start, end)
        begin, stop = self._span or (shift.start, shift.end)
        stop = min(stop, session.moment())
        self.pages.statistics.show_span(begin, stop, self.window.plain_reader.zone)
        self.pages.statistics.say(self.tr("Counting..."))
        request = statistics.StatisticsRequest(begin, stop, session.as_known_at)
        self.model.ask(statistics.of_ward, request, done=self._figures, failed=self._no_figures, subject="statistics")

    def refresh_statistics(self) -> None:
        """Count again what is shown: something was recorded, or another moment is looked at."""
        self.count_shift(*(self._span or (None, None)))

    def _figures(self, outcome: Outcome[WardStatistics]) -> None:
        self.pages.statistics.show_figures(outcome.value, self.window.plain_reader)

    def _no_figures(self, failure: Failure) -> None:
        self.pages.statistics.say(sentence(failure.message, self.window.reader))

    def do_save_statistics(self) -> None:
        """Ask where, write the shift figures as CSV."""
        from app.statistics.measures import as_csv

        self.window.show_page("statistics")
        found = self.pages.statistics.found
        if found is None:
            self.window.say(self.tr("The shift figures are still being counted."))
            return
        data = as_csv(found, self.window.plain_reader).encode("utf-8")
        path = self.ask_path(self.tr("Save shift figures"), "shift-figures.csv", self.tr("CSV (*.csv)"))
        if path is not None:
            self.write(path, data)
