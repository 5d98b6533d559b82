"""What the shapes of the ward view mean, in one quiet row: outlines, fillings, and the star."""

from __future__ import annotations

from PySide6.QtWidgets import QHBoxLayout, QLabel, QWidget

from app.look.signs import Sign
from app.look.theme import GasState, Theme, Verdict, state_word, verdict_word
from app.telling.certainty import star_note

FILLINGS = (Verdict.BETTER, Verdict.WORSE, Verdict.MIXED, Verdict.NO_CLEAR_CHANGE)


class Legend(QWidget):
    """State of a gas by its outline, its verdict by the filling, each with its word; then what a star means."""

    def __init__(self, theme: Theme) -> None:
        super().__init__()
        self.signs = QWidget()
        """All but the star, which stands wherever starred names do."""
        whole = QHBoxLayout(self)
        whole.setContentsMargins(0, 0, 0, 0)
        whole.setSpacing(theme.px(4))
        whole.addWidget(self.signs)
        row = QHBoxLayout(self.signs)
        row.setContentsMargins(0, 0, 0, 0)
        row.setSpacing(theme.px(4))
        for state in (GasState.SEVERE, GasState.ACIDOTIC, GasState.RESOLVED):
            self._add(row, theme, Sign(theme, state), self._word(state))
        for verdict in FILLINGS:
            self._add(row, theme, Sign(theme, GasState.RESOLVED, verdict=verdict), verdict_word(verdict))
        star = QLabel(self.tr("* confirm locally"))
        star.setToolTip(star_note())
        star.setProperty("role", "caption")
        whole.addWidget(star)

    @staticmethod
    def _add(row: QHBoxLayout, theme: Theme, sign: Sign, text: str) -> None:
        word = QLabel(text)
        word.setProperty("role", "caption")
        row.addWidget(sign)
        row.addWidget(word)
        row.addSpacing(theme.px(6))

    def _word(self, state: GasState) -> str:
        """One shape serves both: what was never acidotic has not resolved."""
        return self.tr("resolved, or not acidotic") if state is GasState.RESOLVED else state_word(state)
