"""The user's panels: add, name, fill with channels, fix the axis, order, duplicate, remove, reset, carry away."""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from pathlib import Path

from PySide6.QtCore import Qt, Signal
from PySide6.QtGui import QKeySequence, QShortcut
from PySide6.QtWidgets import (
    QCheckBox,
    QFileDialog,
    QGridLayout,
    QHBoxLayout,
    QLabel,
    QLineEdit,
    QListWidget,
    QListWidgetItem,
    QPushButton,
    QScrollArea,
    QSlider,
    QVBoxLayout,
    QWidget,
)

from app.dialogs.axis_fields import AxisFields
from app.dialogs.panel_sets import PanelSets
from app.episode.feed import shipped_titles
from app.episode.panels import Panel, PanelSet, drawable, from_toml, shipped, to_toml
from app.episode.traces import shown_as
from app.keeping.whole_file import write_whole
from app.look.fitted import FittedDialog, fit
from app.look.theme import Theme
from app.session.failure import failure_of
from app.telling.phrases import computed_name
from app.words import Reader, sentence
from core.record.message import RecordError, refuse

_KEY = Qt.ItemDataRole.UserRole


class PanelEditor(FittedDialog):
    """`kept(PanelSet)` when the person keeps them, `kept(None)` for the shipped ones; `sets.scope` says for whom.
    `set_kept(name, PanelSet)` when a set was saved under a name, or with None when it was forgotten."""

    kept = Signal(object)
    set_kept = Signal(str, object)

    def __init__(
        self, panels: PanelSet, family: str, theme: Theme, parent: QWidget | None = None, *,
        sets: Mapping[str, PanelSet] | None = None, indication: str = "", own: bool = False,
        gas_unit: str = "mmHg", before: Sequence[PanelSet] = (),
    ) -> None:  # fmt: skip
        """`before`: the panels that were kept before these, oldest first; undo goes back to them too."""
        super().__init__(parent)
        self._gas_unit = gas_unit
        self.sets = PanelSets(sets or {}, family, indication, own, theme)
        self.panels, self._family, self._theme = panels, family, theme
        self._history: list[PanelSet] = list(before)
        self._filling = False
        self._reset = False
        self.setWindowTitle(self.tr("Panels"))
        self.setAttribute(Qt.WidgetAttribute.WA_DeleteOnClose)
        self.list, self.channels = QListWidget(), QListWidget()
        self.name = QLineEdit()
        self.axes = AxisFields(self.tr("Axis")), AxisFields(self.tr("Second axis"))
        self.height_slider = QSlider(Qt.Orientation.Horizontal)
        self.height_slider.setRange(5, 30)
        self.bands = QCheckBox(self.tr("Draw targets and limits"))
        self.wrong = QLabel()
        self.wrong.setWordWrap(True)
        self.wrong.setProperty("role", "strong")
        self._lay_out()
        self._connect()
        self._show(panels.panels[0].key)
        fit(self, theme, 860, 660)

    def _lay_out(self) -> None:
        px = self._theme.px
        self.list.setAccessibleName(self.tr("Panels, top to bottom"))
        for box in (self.list, self.channels):
            box.setHorizontalScrollBarPolicy(Qt.ScrollBarPolicy.ScrollBarAlwaysOff)
        left = QVBoxLayout()
        left.setSpacing(px(6))
        left.addWidget(self.list, 1)
        left.addLayout(self._tools())
        upper = QHBoxLayout()
        upper.setSpacing(px(16))
        upper.addLayout(left, 2)
        upper.addLayout(self._fields(), 3)
        inside = QWidget()
        roll = QScrollArea()
        roll.setWidgetResizable(True)
        roll.setFocusPolicy(Qt.FocusPolicy.NoFocus)
        roll.setWidget(inside)
        outer = QVBoxLayout(self)
        outer.setContentsMargins(0, 0, 0, 0)
        outer.addWidget(roll)
        column = QVBoxLayout(inside)
        column.setContentsMargins(px(16), px(16), px(16), px(16))
        column.addWidget(self.sets)
        column.addLayout(upper, 1)
        column.addWidget(self.wrong)
        column.addLayout(self._foot())

    def _fields(self) -> QGridLayout:
        grid = QGridLayout()
        grid.setSpacing(self._theme.px(8))
        fields = (
            (self.tr("Name"), self.name),
            (self.tr("Channels, of one or two units"), self.channels),
            (self.tr("Height"), self.height_slider),
        )
        for word, widget in fields:
            widget.setAccessibleName(word)
        told = [(QLabel(word), widget) for word, widget in fields]
        rows: list[tuple[QLabel, QWidget]] = [*told[:2], *((axis.label, axis) for axis in self.axes), told[2]]
        for n, (label, field) in enumerate(rows):
            label.setBuddy(field)
            label.setWordWrap(True)
            high = field is self.channels  # the name of a list stands at its top, of a field at its middle
            grid.addWidget(label, n, 0, Qt.AlignmentFlag.AlignTop if high else Qt.AlignmentFlag.AlignVCenter)
            grid.addWidget(field, n, 1)
        grid.addWidget(self.bands, len(rows), 1)
        grid.setColumnStretch(1, 1)
        return grid

    def _tools(self) -> QGridLayout:
        buttons: tuple[tuple[str, Callable[[], None]], ...] = (
            (self.tr("Add"), self.add),
            (self.tr("Duplicate"), self.duplicate),
            (self.tr("Remove"), self.remove),
            (self.tr("Up"), self.up),
            (self.tr("Down"), self.down),
            (self.tr("Undo"), self.undo),
        )
        QShortcut(QKeySequence.StandardKey.Undo, self, self.undo)
        tools = QGridLayout()
        tools.setSpacing(self._theme.px(6))
        for n, (word, slot) in enumerate(buttons):
            tools.addWidget(self._button(word, slot), n // 3, n % 3)
        return tools

    def _foot(self) -> QHBoxLayout:
        foot = QHBoxLayout()
        for word, slot in (
            (self.tr("Reset to shipped"), self.reset),
            (self.tr("Save as file..."), self.save_file),
            (self.tr("Take from file..."), self.take_file),
        ):
            foot.addWidget(self._button(word, slot))
        foot.addStretch(1)
        self.keep_button = self._button(self.tr("Keep"), self.keep)
        self.keep_button.setProperty("role", "primary")
        foot.addWidget(self.keep_button)
        foot.addWidget(self._button(self.tr("Leave"), self.reject))
        return foot

    def _button(self, word: str, slot: Callable[[], None]) -> QPushButton:
        button = QPushButton(word)
        button.setAutoDefault(False)
        button.clicked.connect(slot)
        return button

    def _connect(self) -> None:
        self.list.currentItemChanged.connect(self._chosen)
        self.name.editingFinished.connect(self._edited)
        for axis in self.axes:
            axis.edited.connect(self._edited)
        self.height_slider.sliderReleased.connect(self._edited)
        self.height_slider.valueChanged.connect(self._height_stepped)
        self.bands.clicked.connect(self._edited)
        self.channels.itemChanged.connect(self._channel_ticked)
        self.sets.chosen.connect(self.take_set)
        self.sets.saved.connect(self.save_set)
        self.sets.forgotten.connect(self._set_forgotten)

    # the panel in hand

    @property
    def key(self) -> str:
        """The panel in hand."""
        item = self.list.currentItem()
        return str(item.data(_KEY)) if item is not None else self.panels.panels[0].key

    def _show(self, key: str) -> None:
        self._filling = True
        self.list.clear()
        for p in self.panels.panels:
            item = QListWidgetItem(p.title)
            item.setData(_KEY, p.key)
            self.list.addItem(item)
        self.list.setCurrentRow(self.panels.index(key))
        self._fill()
        self._filling = False

    def _fill(self) -> None:
        panel = self.panels.get(self.key)
        self.name.setText(panel.title)
        self._fill_axes(panel)
        self.height_slider.setValue(round(panel.height * 10))
        self.bands.setChecked(panel.bands)
        self.channels.clear()
        order = (*panel.channels, *(c for c in drawable() if c not in panel.channels))
        for channel in order:
            item = QListWidgetItem(_named(channel, self._gas_unit))
            item.setData(_KEY, channel)
            item.setFlags(item.flags() | Qt.ItemFlag.ItemIsUserCheckable)
            item.setCheckState(Qt.CheckState.Checked if channel in panel.channels else Qt.CheckState.Unchecked)
            self.channels.addItem(item)

    def _fill_axes(self, panel: Panel) -> None:
        shown = {s.unit: s for s in (shown_as(c, self._gas_unit) for c in reversed(panel.channels))}
        units = [shown[u] for u in dict.fromkeys(shown_as(c, self._gas_unit).unit for c in panel.channels)]
        for n, axis in enumerate(self.axes):
            axis.show_ends(*panel.ends[n], units[n] if n < len(units) else None)

    def _chosen(self) -> None:
        if not self._filling:
            self._filling = True
            self._fill()
            self._filling = False

    def _edited(self) -> None:
        """Take what the fields say; what cannot be read stays in its field and is said."""
        if self._filling:
            return
        try:
            made = self._as_filled()
        except RecordError as error:
            self.wrong.setText(sentence(error.message, Reader()))
            return
        self._become(lambda: made)

    def _height_stepped(self) -> None:
        """Keys move the slider in steps; while the mouse drags it, its last place counts."""
        if not self.height_slider.isSliderDown():
            self._edited()

    def _as_filled(self) -> PanelSet:
        title = self.name.text()
        (low, high), (second_low, second_high) = (axis.ends(title) for axis in self.axes)
        return self.panels.changed(
            self.key, title=title, low=low, high=high, second_low=second_low, second_high=second_high,
            height=self.height_slider.value() / 10, bands=self.bands.isChecked(),
        )  # fmt: skip

    def _channel_ticked(self, _item: QListWidgetItem) -> None:
        if self._filling:
            return
        items = (self.channels.item(n) for n in range(self.channels.count()))
        ticked = tuple(i.data(_KEY) for i in items if i.checkState() is Qt.CheckState.Checked)
        self._become(self.panels.changed, self.key, channels=ticked)

    def _become(self, change: Callable[..., PanelSet], *args: object, **values: object) -> None:
        """Take a changed set; a refused change is said and shown undone."""
        key = self.key
        try:
            made = change(*args, **values)
        except RecordError as error:
            self.wrong.setText(sentence(error.message, Reader()))
            self._show(key)
            return
        self.wrong.setText("")
        if made == self.panels:
            return
        self._reset = False
        self._history.append(self.panels)
        self.panels = made
        kept = [p.key for p in made.panels]
        self._show(key if key in kept else kept[-1])

    # buttons

    def add(self) -> None:
        """A new panel at the foot."""
        self._become(self.panels.added, self.tr("New panel"), ("spo2",))
        self.list.setCurrentRow(len(self.panels.panels) - 1)
        self.name.setFocus()
        self.name.selectAll()

    def duplicate(self) -> None:
        """A copy under the panel in hand."""
        title = self.tr("{title}, copy").format(title=self.panels.get(self.key).title)
        self._become(self.panels.duplicated, self.key, title)

    def remove(self) -> None:
        """Without the panel in hand."""
        self._become(self.panels.removed, self.key)

    def up(self) -> None:
        """One place up."""
        self._become(self.panels.moved, self.key, -1)

    def down(self) -> None:
        """One place down."""
        self._become(self.panels.moved, self.key, 1)

    def undo(self) -> None:
        """Back to the set before the last change."""
        if self._history:
            key = self.key
            self.panels, self._reset = self._history.pop(), False
            self._show(key if key in [p.key for p in self.panels.panels] else self.panels.panels[0].key)

    def reset(self) -> None:
        """The shipped panels again."""
        self._become(shipped, self._family, shipped_titles())
        self._reset = not self.wrong.text()

    def take_set(self, panels: PanelSet) -> None:
        """Put a named set in place of the panels; undo goes back."""
        self._become(lambda: panels)

    def save_set(self, name: str) -> None:
        """Keep the panels as a set under a name."""
        self.sets.saved_as(name, self.panels)
        self.set_kept.emit(name, self.panels)

    def _set_forgotten(self, name: str) -> None:
        self.set_kept.emit(name, None)

    def keep(self) -> None:
        """Keep the panels for those they are kept for; not while a field cannot be read."""
        self._edited()
        if self.wrong.text():
            return
        self.kept.emit(None if self._reset else self.panels)
        self.accept()

    def save_file(self) -> None:
        """Write them as TOML."""
        chosen, _ = QFileDialog.getSaveFileName(self, self.tr("Save panels"), "panels.toml", "TOML (*.toml)")
        if chosen:
            try:
                write_whole(Path(chosen), to_toml(self.panels).encode())
            except OSError as error:
                self.wrong.setText(sentence(failure_of(error).message, Reader()))

    def take_file(self) -> None:
        """Read them from TOML."""
        chosen, _ = QFileDialog.getOpenFileName(self, self.tr("Take panels"), "", "TOML (*.toml)")
        if chosen:
            self._become(_read_file, Path(chosen))


def _read_file(path: Path) -> PanelSet:
    try:
        return from_toml(path.read_text("utf-8"))
    except OSError as error:
        raise RecordError(failure_of(error).message) from None
    except UnicodeDecodeError as error:
        raise refuse("panel.unreadable", detail=str(error), accepted="panels as saved here") from None


def _named(channel: str, gas_unit: str) -> str:
    """A channel with its unit, where the unit says more than the name."""
    name, unit = computed_name(channel), shown_as(channel, gas_unit).unit
    return name if unit in ("", name) else f"{name}, {unit}"
