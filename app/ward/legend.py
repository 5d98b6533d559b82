"""What the shapes of the ward view mean, in one quiet row."""

from __future__ import annotations

from PySide6.QtWidgets import QHBoxLayout, QLabel, QWidget

from app.signs import Sign
from app.theme import GasState, Theme, state_word


class Legend(QWidget):
    """State of a gas by its outline, each with its word."""

    def __init__(self, theme: Theme) -> None:
        super().__init__()
        row = QHBoxLayout(self)
        row.setContentsMargins(0, 0, 0, 0)
        row.setSpacing(theme.px(4))
        for state in (GasState.SEVERE, GasState.ACIDOTIC, GasState.RESOLVED):
            word = QLabel(self._word(state))
            word.setProperty("role", "caption")
            row.addWidget(Sign(theme, state))
            row.addWidget(word)
            row.addSpacing(theme.px(8))

    def _word(self, state: GasState) -> str:
        """One shape serves both: what was never acidotic has not resolved."""
        return self.tr("resolved, or not acidotic") if state is GasState.RESOLVED else state_word(state)
