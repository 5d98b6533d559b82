"""What stood at the crosshair: the moment, the settings in force, every panel's value and how old it is."""

from __future__ import annotations

from collections.abc import Iterable
from html import escape

from PySide6.QtCore import Qt
from PySide6.QtWidgets import QFrame, QLabel, QSizePolicy, QVBoxLayout

from app.chart.shapes import Look, Reading
from app.look.formats import fixed, lately, minutes, wall
from app.look.theme import Theme
from app.telling.phrases import settings_line
from app.telling.support_course import Stretch
from core.record.instant import MINUTE, Instant
from core.record.support import SupportTime

FRESH = 2 * MINUTE
"""A value younger than this is told without its age."""


class Readout(QFrame):
    """Two lines that never move anything: moment and settings, then values with their ages."""

    def __init__(self, theme: Theme) -> None:
        super().__init__()
        self._theme = theme
        self._rolling = False
        self._settings, self._values = QLabel(), QLabel()
        for label in (self._settings, self._values):
            label.setTextFormat(Qt.TextFormat.RichText)
            label.setSizePolicy(QSizePolicy.Policy.Ignored, QSizePolicy.Policy.Fixed)
        self._values.setWordWrap(True)
        self._settings.setWordWrap(True)
        self._settings.setAlignment(Qt.AlignmentFlag.AlignTop)
        self._values.setAlignment(Qt.AlignmentFlag.AlignTop)
        column = QVBoxLayout(self)
        column.setContentsMargins(0, 0, 0, 0)
        column.setSpacing(2)
        column.addWidget(self._settings)
        column.addWidget(self._values)
        self.setAccessibleName(self.tr("Values at the crosshair"))
        self._values.setToolTip(
            self.tr(
                "Single readings. Figures and levers take medians of what a device measured, and say of which span."
            )
        )
        self.set_theme(theme)

    def set_theme(self, theme: Theme) -> None:
        """Take another look or text size."""
        self._theme = theme
        self._fit()

    def set_rolling(self, rolling: bool) -> None:
        """Rolling with the charts, it takes the height that its words need; standing, it never moves anything."""
        self._rolling = rolling
        self._fit()

    def _fit(self) -> None:
        theme = self._theme
        if self._rolling:
            for label in (self._settings, self._values):
                label.setMinimumHeight(0)
                label.setMaximumHeight(16_777_215)
                label.setSizePolicy(QSizePolicy.Policy.Ignored, QSizePolicy.Policy.Minimum)
            return
        line = round(theme.px(theme.type.body) * 1.45)
        self._settings.setFixedHeight(line * (1 if theme.text_scale < 1.3 else 2 if theme.text_scale < 1.75 else 3))
        self._values.setFixedHeight(line * (2 if theme.text_scale < 1.3 else 3 if theme.text_scale < 1.75 else 4))

    def show_moment(
        self, at: Instant, zone: str, stretch: Stretch | None, readings: Iterable[Reading], *, pointed: bool,
        support: SupportTime | None = None, events: Iterable[str] = (), then: bool = False,
    ) -> None:  # fmt: skip
        """Say what stood at a moment; `pointed`: the crosshair is there, else it is now, or with `then` the moment
        that is looked back to. `support` says whether the settings acted then. `events`, which the chart writes at
        the crosshair, are for screen readers."""
        newest = self.tr("Then, {time}") if then else self.tr("Now, {time}")
        head = wall(at, zone) if pointed else newest.format(time=wall(at, zone))
        told = self._not_acting(at, zone, stretch, support) or self._in_force(at, stretch)
        self._settings.setText(f"<b>{escape(head)}</b> &nbsp; {told}")
        parts = [self._value(r, at) for r in _once(readings)]
        values = f"{self._quiet(self.tr('Readings:'))}&nbsp; " + " &nbsp;&nbsp; ".join(parts)
        self._values.setText(values if parts else escape(self.tr("Nothing logged yet at this moment")))
        self._values.setAccessibleName("\n".join((self.plain(), *events)))

    def _in_force(self, at: Instant, stretch: Stretch | None) -> str:
        if stretch is None:
            return escape(self.tr("no settings recorded"))
        age = self.tr("for {length}").format(length=minutes((at - stretch.start) / MINUTE))
        return f"{escape(settings_line(stretch.settings))} {self._quiet(age)}"

    def _not_acting(self, at: Instant, zone: str, stretch: Stretch | None, support: SupportTime | None) -> str:
        """That no setting acts, first and strongly, then what was set, as such; "" where support runs."""
        if support is None:
            return ""
        if support.end is not None and at >= support.end:
            return f"<b>{escape(self.tr('support ended {time}').format(time=lately(support.end, at, zone)))}</b>"
        off = support.break_at(at)
        if off is None:
            return ""
        told = self.tr("mask off since {time} ({length})").format(
            time=lately(off.start, at, zone), length=minutes(off.minutes(at))
        )
        if stretch is None or stretch.settings.is_off:
            return f"<b>{escape(told)}</b>"
        # what is typed while the mask is off was not in force when it came off
        before = self.tr("set before: {settings}") if stretch.start <= off.start else self.tr("set since: {settings}")
        return f"<b>{escape(told)}</b> &nbsp; {self._quiet(before.format(settings=settings_line(stretch.settings)))}"

    def _quiet(self, text: str) -> str:
        return f"<span style='color:{self._theme.colours.ink_quiet}'>{escape(text)}</span>"

    def plain(self) -> str:
        """Both lines in plain words."""
        from PySide6.QtGui import QTextDocumentFragment

        texts = (self._settings.text(), self._values.text())
        return "\n".join(QTextDocumentFragment.fromHtml(t).toPlainText() for t in texts)

    def _value(self, r: Reading, at: Instant) -> str:
        quiet = self._theme.colours.ink_quiet
        unit = "" if r.unit == "pH" else f"&nbsp;{escape(r.unit).replace('/', '/&#8288;')}"
        name = escape(r.name).replace(" ", "&nbsp;")
        text = f"<span style='color:{quiet}'>{name}</span>&nbsp;<b>{fixed(r.value, r.decimals)}</b>{unit}"
        told = [self._look_word(r)] if self._look_word(r) else []
        if at - r.at >= FRESH:
            told.append(self.tr("{age} old").format(age=minutes((at - r.at) / MINUTE)))
        if told:
            words = escape(", ".join(told)).replace(" ", "&nbsp;")
            text += f"&nbsp;<span style='color:{quiet}'>({words})</span>"
        return text

    def _look_word(self, r: Reading) -> str:
        words = {
            Look.DOUBTFUL: self.tr("doubtful"),
            Look.CORRECTED: self.tr("corrected"),
            Look.DISPUTED: self.tr("disputed"),
        }
        return r.doubt or words.get(r.look, "")


def _once(readings: Iterable[Reading]) -> list[Reading]:
    """Each trace once, though several panels may hold it."""
    return list({r.key: r for r in readings if r.value == r.value}.values())
