"""The end of an episode of support, with its reason."""

from __future__ import annotations

from PySide6.QtWidgets import QLineEdit

from app.forms.answer_row import AnswerRow
from app.forms.cells import Cell
from app.forms.entry_form import EntryForm
from app.look.formats import wall
from app.telling.phrases import channel_name
from core.record.channels import END_REASONS


class EndForm(EntryForm):
    """Records that support stopped and why; a restart within two days goes on in the same episode."""

    def build(self) -> None:
        self.set_name(self.tr("Log the end of support"))
        words = {
            "weaned": self.tr("weaned"), "escalated": self.tr("escalated"), "ceiling": self.tr("ceiling reached"),
            "transferred": self.tr("transferred"), "died": self.tr("died"),
            "not tolerated": self.tr("not tolerated"), "other": self.tr("other"),
        }  # fmt: skip
        self.reason = AnswerRow(channel_name("end_reason"), [(r, words[r]) for r in END_REASONS], self.theme)
        self.reason.chosen.connect(self.edited)
        self.remark = QLineEdit()
        self.remark.setPlaceholderText(self.tr("where to, agreed with whom"))
        self.remark.textEdited.connect(self.edited)
        card = self.card(
            "",
            self.tr("Records only: the ventilator is not changed. Support stopped at the moment above; if it "
                    "starts again within two days the episode goes on, and nothing is lost."),
        )  # fmt: skip
        card.add_line(Cell(channel_name("end_reason"), self.reason, self.theme, width=0, noted=False))
        card.add_line(Cell(self.tr("Comment"), self.remark, self.theme, width=0, noted=False))
        self.fit(700, 440)
        self.first = self.reason.buttons["weaned"]

    def items(self) -> str:
        if not self.reason.key:
            return ""
        remark = " ".join(self.remark.text().split())
        return f"stopped end_reason {self.reason.key}" + (f" note {remark}" if remark else "")

    def lacks(self) -> str:
        stopped = self.patient.record.text("stopped")
        if len(stopped) and not self.reason.key:
            at = wall(int(stopped.t[-1]), self.model.session.zone)
            told = self.tr("Support was last stopped at {time}. Choose a reason to record another end.")
            return told.format(time=at)
        return "" if self.reason.key else self.tr("Choose why support ends.")
