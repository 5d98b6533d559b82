"""Help: the keys, what the log strip understands, and what the shapes mean."""

from __future__ import annotations

from html import escape
from typing import Any, Final

from PySide6.QtCore import QT_TRANSLATE_NOOP, QCoreApplication, Qt
from PySide6.QtWidgets import (
    QHBoxLayout,
    QLabel,
    QPushButton,
    QScrollArea,
    QTextBrowser,
    QVBoxLayout,
    QWidget,
)

from app.look.fitted import FittedDialog, fit
from app.look.signs import Sign
from app.look.theme import GasState, Theme, Tier, Verdict, state_word, tier_word, verdict_word
from app.window.action_table import DEEDS, MENUS
from app.window.actions import help_of, keys_of, menu_name, name_of

LINES: Final[tuple[tuple[str, Any], ...]] = (
    ("16/6 35", QT_TRANSLATE_NOOP("help", "IPAP 16, EPAP 6 cmH2O, FiO2 35 %")),
    ("ps 10 epap 5", QT_TRANSLATE_NOOP("help", "IPAP 15, EPAP 5 cmH2O")),
    ("14:20 rr 28 spo2 91 gcs 14", QT_TRANSLATE_NOOP("help", "at 14:20; 23:50 typed at 00:10 is yesterday")),
    ("20m ago ph 7,28 paco2 8.3 pao2 7.9 kPa", QT_TRANSLATE_NOOP(
        "help", "decimal comma or point; mmHg or kPa, once for all pressures of a gas")),
    ("yesterday 23:40 ... | first 01:30 ...", QT_TRANSLATE_NOOP(
        "help", "the day before; first or second of an hour that came twice")),
    ("cpap 10 60", QT_TRANSLATE_NOOP("help", "CPAP 10 cmH2O, FiO2 60 %")),
    ("rr28 spo291", QT_TRANSLATE_NOOP("help", "a value may touch its name")),
    ("flow 4", QT_TRANSLATE_NOOP("help", "oxygen by flow, L/min; FiO2 is not known then")),
    ("gas sent | mask on | mask off 20m ago", QT_TRANSLATE_NOOP("help", "events; a time may stand last as well")),
    ("support started | support started 23:40", QT_TRANSLATE_NOOP(
        "help", "support starts at the time of the line, or started then; its hours count from there")),
    ("label Bed 12", QT_TRANSLATE_NOOP("help", "the patient moved; other facts by the form 'Patient facts'")),
    ("note ... | told ... | handover remark ...", QT_TRANSLATE_NOOP("help", "words to the end of the line")),
)  # fmt: skip
"""What may be typed, and what it means."""


class HelpDialog(FittedDialog):
    """Shows help. Esc closes it."""

    def __init__(self, theme: Theme, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.setWindowTitle(self.tr("Help"))
        self.setAttribute(Qt.WidgetAttribute.WA_DeleteOnClose)
        self.text = QTextBrowser()
        self.text.setAccessibleName(self.tr("Keys and lines"))
        self.text.setHtml(self._html(theme))
        shapes = QScrollArea()
        shapes.setAccessibleName(self.tr("What the shapes mean"))
        shapes.setWidgetResizable(True)
        shapes.setProperty("keys", True)
        shapes.setWidget(_shapes(theme, self.tr("Shapes")))
        shapes.setFixedWidth(theme.px(230))
        row = QHBoxLayout()
        row.addWidget(self.text, 1)
        row.addWidget(shapes)
        close = QPushButton(self.tr("Close"))
        close.clicked.connect(self.close)
        column = QVBoxLayout(self)
        column.addLayout(row, 1)
        column.addWidget(close, 0, Qt.AlignmentFlag.AlignRight)
        fit(self, theme, 980, 640)

    def _html(self, theme: Theme) -> str:
        quiet = theme.colours.ink_quiet
        parts = [f"<h3>{escape(self.tr('The log strip'))}</h3>", "<table cellpadding=4>"]
        parts += [
            f"<tr><td><b>{escape(line)}</b></td><td style='color:{quiet}'>{escape(_t(what))}</td></tr>"
            for line, what in LINES
        ]
        parts += ["</table>", f"<h3>{escape(self.tr('Keys'))}</h3>"]
        for menu, title in MENUS:
            parts += [f"<h4>{escape(menu_name(title))}</h4>", "<table cellpadding=4>"]
            parts += [
                f"<tr><td><b>{escape(keys_of(d))}</b></td><td>{escape(name_of(d).rstrip('.'))}</td>"
                f"<td style='color:{quiet}'>{escape(help_of(d))}</td></tr>"
                for d in DEEDS
                if d.menu == menu
            ]
            parts.append("</table>")
        chart = self.tr(
            "On the panels: arrows move, + and - zoom, Home start, End now, 0 all; Ctrl with an arrow moves "
            "the crosshair, Enter opens the verdict or event under it, Esc takes it away and leads back to the ward. "
            "On the ward: up and down choose a patient, left and right an item, Enter opens."
        )
        parts.append(f"<p>{escape(chart)}</p>")
        return "".join(parts)


def _t(text: str) -> str:
    return QCoreApplication.translate("help", text)


def _shapes(theme: Theme, title: str) -> QWidget:
    inside = QWidget()
    column = QVBoxLayout(inside)
    head = QLabel(title)
    head.setProperty("role", "emphasis")
    column.addWidget(head)
    told = [(Sign(theme, s), state_word(s)) for s in GasState]
    told += [(Sign(theme, v), verdict_word(v)) for v in Verdict]
    told += [(Sign(theme, t), tier_word(t)) for t in Tier]
    for sign, word in told:
        row = QHBoxLayout()
        row.addWidget(sign)
        row.addWidget(QLabel(word), 1)
        column.addLayout(row)
    column.addStretch(1)
    return inside
