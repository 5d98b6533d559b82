"""Every computed figure beside the panels: one calm line for each group, its rows when it is unfolded."""

from __future__ import annotations

from PySide6.QtCore import Qt, Signal
from PySide6.QtGui import QKeyEvent, QMouseEvent
from PySide6.QtWidgets import QApplication, QFrame, QLabel, QVBoxLayout, QWidget

from app.explain.fact import Fact, heading
from app.explain.figures import explain_row
from app.figures.rows import FigureGroup, FigureRow
from app.look.formats import opened
from app.look.theme import Theme
from app.telling.phrases import translate
from app.telling.taken import when_words
from app.words import Reader
from core.record.instant import Instant

FOLDED, UNFOLDED = "\N{BLACK RIGHT-POINTING SMALL TRIANGLE}", "\N{BLACK DOWN-POINTING SMALL TRIANGLE}"


class FigureList(QFrame):
    """The card of the figures. Rows are made only when their group is unfolded: a folded list costs nothing."""

    explain_wanted = Signal(object)

    def __init__(self, theme: Theme, groups: tuple[FigureGroup, ...], reader: Reader, now: Instant) -> None:
        super().__init__()
        self.setProperty("card", True)
        column = QVBoxLayout(self)
        px = theme.px
        column.setContentsMargins(px(6), px(8), px(6), px(6))
        column.setSpacing(0)
        label = heading(translate("side", "Every figure"))
        label.setContentsMargins(px(8), 0, px(8), 0)
        column.addWidget(label)
        column.addWidget(_note(theme, translate("side", "F5 unfolds all, F2 or Why explains one.")))
        self.folds = tuple(FigureFold(theme, group, reader, now) for group in groups)
        for fold in self.folds:
            fold.explain_wanted.connect(self.explain_wanted)
            column.addWidget(fold)

    @property
    def is_unfolded(self) -> bool:
        """Whether any group is."""
        return any(fold.head.is_unfolded for fold in self.folds)

    def set_unfolded(self, shown: bool) -> None:
        """Unfold every group, or fold them all."""
        for fold in self.folds:
            if fold.head.is_unfolded != shown:
                fold.head.unfold()


class FigureFold(QWidget):
    """A group: its head, and under it its rows; those without a value stand folded at the end."""

    explain_wanted = Signal(object)

    def __init__(self, theme: Theme, group: FigureGroup, reader: Reader, now: Instant) -> None:
        super().__init__()
        self._theme, self._group, self._reader, self._now = theme, group, reader, now
        self._column = QVBoxLayout(self)
        self._column.setContentsMargins(0, 0, 0, 0)
        self._column.setSpacing(0)
        self.head = FoldHead(theme, group.title, group.summary, f"figures.{group.key}")
        self.head.toggled.connect(self._toggle)
        self._column.addWidget(self.head)
        self._rows: list[QWidget] = []

    def _toggle(self, shown: bool) -> None:
        if not shown:
            if _holds_focus(self._rows):
                self.head.setFocus()
            for widget in self._rows:
                widget.hide()
                widget.deleteLater()
            self._rows = []
            return
        if self._group.note:
            self._add(_note(self._theme, f"{self._group.note}."))
        for row in self._group.known:
            self._add(self._fact(row))
        absent = self._group.without_value
        if absent:
            self._add(AbsentFold(self._theme, f"figures.{self._group.key}.absent", [self._fact(r) for r in absent]))
        self._order_of_tab()

    def _add(self, widget: QWidget) -> None:
        for fact in [widget, *widget.findChildren(Fact)]:
            if isinstance(fact, Fact):
                fact.explain_wanted.connect(self.explain_wanted)
        self._column.addWidget(widget)
        widget.show()  # at once, so that the focus can go there with the next key
        self._rows.append(widget)

    def _order_of_tab(self) -> None:
        """Rows made later come after their head, not at the end of the window."""
        before: QWidget = self.head
        for fact in self.findChildren(Fact)[1:]:
            QWidget.setTabOrder(before, fact)
            before = fact

    def _fact(self, row: FigureRow) -> Fact:
        return FigureFact(self._theme, row, self._group.note, self._reader, self._now)


def _note(theme: Theme, text: str) -> QLabel:
    label = QLabel(text)
    label.setTextFormat(Qt.TextFormat.PlainText)
    label.setWordWrap(True)
    label.setProperty("role", "caption")
    label.setContentsMargins(theme.px(10), theme.px(1), theme.px(8), theme.px(5))
    return label


class FigureFact(Fact):
    """One figure: its name, value with unit, doubt, age and what goes with it; F2 explains it."""

    def __init__(self, theme: Theme, row: FigureRow, said: str, reader: Reader, now: Instant) -> None:
        told = when_words(row.at, row.median_of, now, reader)
        age = [opened(told)] if told else []
        notes = [f"{note}." for note in row.notes if note != said]
        super().__init__(
            theme,
            row.name,
            [*age, *notes] if row.is_known else [f"{row.why}."],
            explanation=explain_row(row, reader, now),
            quiet=True,
            value=row.value,
            value_below=row.wide,
            marks=(f"{row.doubt}.",) if row.doubt else (),
            payload=row,
        )


class FoldHead(Fact):
    """The line of a group. Enter, Space, a click, Right or Left unfold and fold it."""

    toggled = Signal(bool)

    def __init__(self, theme: Theme, title: str, summary: str, key: str, *, quiet: bool = False) -> None:
        super().__init__(theme, f"{FOLDED}  {title}", (summary,) if summary else (), quiet=quiet)
        self._key, self._name, self._unfolded = key, title, False
        self.setAccessibleName(". ".join(p for p in (title, translate("side", "folded"), summary) if p))

    @property
    def key(self) -> str:
        return self._key

    @property
    def is_unfolded(self) -> bool:
        return self._unfolded

    def unfold(self) -> None:
        self._unfolded = not self._unfolded
        self.set_title(f"{UNFOLDED if self._unfolded else FOLDED}  {self._name}")
        told = translate("side", "unfolded") if self._unfolded else translate("side", "folded")
        self.setAccessibleName(f"{self._name}. {told}")
        self.toggled.emit(self._unfolded)

    def keyPressEvent(self, event: QKeyEvent) -> None:
        wanted = {Qt.Key.Key_Right: True, Qt.Key.Key_Left: False}.get(Qt.Key(event.key()))
        if event.key() in (Qt.Key.Key_Return, Qt.Key.Key_Enter, Qt.Key.Key_Space) or (
            wanted is not None and wanted != self._unfolded
        ):
            self.unfold()
            return
        super().keyPressEvent(event)

    def mousePressEvent(self, event: QMouseEvent) -> None:
        self.setFocus(Qt.FocusReason.MouseFocusReason)
        self.unfold()
        event.accept()


def _holds_focus(widgets: list[QWidget]) -> bool:
    focus = QApplication.focusWidget()
    return focus is not None and any(w is focus or w.isAncestorOf(focus) for w in widgets)


class AbsentFold(QWidget):
    """Figures without a value, and why."""

    def __init__(self, theme: Theme, key: str, facts: list[Fact]) -> None:
        super().__init__()
        column = QVBoxLayout(self)
        column.setContentsMargins(0, 0, 0, 0)
        column.setSpacing(0)
        title = translate("side", "No value: {count}").format(count=len(facts))
        self.head = FoldHead(theme, title, "", key, quiet=True)
        self.head.toggled.connect(self._toggle)
        column.addWidget(self.head)
        self._facts = facts
        for fact in facts:
            column.addWidget(fact)
            fact.hide()

    def _toggle(self, shown: bool) -> None:
        for fact in self._facts:
            fact.setVisible(shown)
