"""Help: the keys, what the log strip understands, and what the shapes mean."""

from __future__ import annotations

from html import escape

from PySide6.QtCore import Qt
from PySide6.QtWidgets import (
    QHBoxLayout,
    QLabel,
    QPushButton,
    QScrollArea,
    QTextBrowser,
    QVBoxLayout,
    QWidget,
)

from app.action_table import DEEDS
from app.actions import help_of, keys_of, name_of
from app.fitted import FittedDialog, fit
from app.signs import Sign
from app.theme import GasState, Theme, Tier, Verdict, state_word, tier_word, verdict_word

LINES = (
    ("16/6 35", "IPAP 16, EPAP 6 cmH2O, FiO2 35 %"),
    ("ps 10 epap 5", "IPAP 15, EPAP 5 cmH2O"),
    ("14:20 rr 28 spo2 91 gcs 14", "at 14:20; 23:50 typed at 00:10 is yesterday"),
    ("20m ago ph 7,28 paco2 8.3 kPa", "decimal comma or point, mmHg or kPa"),
    ("cpap 10 fio2 60%", "CPAP mode"),
    ("flow 4", "oxygen by flow, L/min; FiO2 is not known then"),
    ("gas sent | mask off | mask on", "events"),
    ("note ... | told ... | handover remark ...", "words to the end of the line"),
)


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
            f"<tr><td><b>{escape(line)}</b></td><td style='color:{quiet}'>{escape(what)}</td></tr>"
            for line, what in LINES
        ]
        parts += ["</table>", f"<h3>{escape(self.tr('Keys'))}</h3>", "<table cellpadding=4>"]
        parts += [
            f"<tr><td><b>{escape(keys_of(d))}</b></td><td>{escape(name_of(d).rstrip('.'))}</td>"
            f"<td style='color:{quiet}'>{escape(help_of(d))}</td></tr>"
            for d in DEEDS
        ]
        chart = self.tr(
            "On the panels: arrows move, + and - zoom, Home start, End now, 0 all, Esc back to the ward. "
            "On the ward: up and down choose a patient, left and right an item, Enter opens."
        )
        parts += ["</table>", f"<p>{escape(chart)}</p>"]
        return "".join(parts)


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
