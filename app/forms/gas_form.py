"""A blood gas by form, with a check while it is typed that the gas agrees with itself."""

from __future__ import annotations

from html import escape
from math import isnan

from PySide6.QtCore import Qt
from PySide6.QtWidgets import QLabel

from app.forms.entry_form import EntryForm, worded
from app.forms.gas_check import GasCheck, check_of
from app.forms.gas_values import GasValues
from app.look.formats import fraction
from app.words import sentence


class GasForm(EntryForm):
    """One sample, at the moment it was taken."""

    def build(self) -> None:
        self.set_name(self.tr("Blood gas"))
        self.time.setAccessibleName(self.tr("When the sample was taken: now, 14:20, or 20m ago"))
        self.time.setToolTip(self.time.accessibleName())
        self.gas = GasValues(self.gas_unit, self.theme)
        self.gas.edited.connect(self.edited)
        self.stack.addWidget(self.gas)
        self.check = QLabel()
        self.check.setTextFormat(Qt.TextFormat.RichText)
        self.check.setWordWrap(True)
        self.card(self.tr("Does it agree with itself?")).add_line(self.check)
        self.fit(880, 700)
        self.first = self.gas.site.buttons["arterial"]

    def items(self) -> str:
        return worded(self.gas.typed())

    def lacks(self) -> str:
        return self.gas.lacks()

    def show_extra(self) -> None:
        """Calculated bicarbonate, whether the reported one belongs to it, and what usually explains it if not."""
        setting = self.in_force().fio2
        told = self.tr("set: not known") if isnan(setting) else self.tr("set {value}").format(value=fraction(setting))
        self.gas.cells["gas_fio2"].tell(told)
        if self.preview is None:
            self.check.setText(self._waiting())
        else:
            check = check_of(self.preview.line.readings, setting, self.model.session.policy)
            self.check.setText(self._check_html(check))
        self.check.setAccessibleName(self.check_plain())

    def _waiting(self) -> str:
        return escape(self.tr("Type pH and PaCO2: the bicarbonate they make is shown here."))

    def _check_html(self, check: GasCheck) -> str:
        reader, quiet = self.reader(), self.theme.colours.ink_quiet
        if not check.facts:
            return self._waiting()
        told = escape(" ".join(sentence(m, reader) for m in check.facts))
        if check.agrees is None:
            return told
        if check.agrees:
            return f"<b>{escape(self.tr('Agrees.'))}</b> {told}"
        why = escape(" ".join(sentence(m, reader) for m in check.explanations))
        verdict = escape(self.tr("These values do not belong together."))
        return f"<b>{verdict}</b> {told} <span style='color:{quiet}'>{why}</span>"

    def check_plain(self) -> str:
        """The check in plain words."""
        from PySide6.QtGui import QTextDocumentFragment

        return QTextDocumentFragment.fromHtml(self.check.text()).toPlainText()
