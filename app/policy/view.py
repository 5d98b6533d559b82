"""The policy in the window: every rule with its limits, source and certainty, and what is other than shipped."""

from __future__ import annotations

from collections.abc import Sequence

from PySide6.QtCore import Qt, Signal
from PySide6.QtWidgets import (
    QFrame,
    QHBoxLayout,
    QHeaderView,
    QLabel,
    QPushButton,
    QTreeWidget,
    QTreeWidgetItem,
    QVBoxLayout,
    QWidget,
)

from app.look.choice_row import ChoiceRow
from app.look.copying import can_be_copied
from app.look.fitted import FittedDialog, RollArea, fit
from app.look.flow_row import FlowRow
from app.look.formats import wall
from app.look.theme import Theme, Tier, tier_word
from app.operations.policy import PolicyInForce
from app.policy.words import Rule, rules
from app.words import Reader, sentence
from core.judgement.policy_check import check

_RULE = Qt.ItemDataRole.UserRole
_WIDTHS = (286, 84, 256, 180, 148)
"""Pixels of the columns at the smallest text: rule, strength, limits, for whom, how sure; then source."""
_SOURCE = 260
"""What the source needs at least."""


class PolicyDialog(FittedDialog):
    """Shows one policy. It changes nothing itself: a file is looked at first, by whoever listens."""

    file_wanted = Signal()
    save_wanted = Signal()

    def __init__(self, found: PolicyInForce, reader: Reader, theme: Theme, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._theme = theme
        self.setWindowTitle(self.tr("Policy"))
        self.setAttribute(Qt.WidgetAttribute.WA_DeleteOnClose)
        self.title, self.put_by = QLabel(), QLabel()
        self.title.setProperty("role", "title")
        self.put_by.setProperty("role", "quiet")
        self.put_by.setWordWrap(True)
        self.notice = QLabel()
        self.notice.setWordWrap(True)
        self.notice.setTextFormat(Qt.TextFormat.PlainText)
        self.notice.setProperty("role", "strong")
        self.shown = ChoiceRow(self.tr("Show"), (
            ("all", self.tr("all rules")), ("differs", self.tr("other than shipped")),
            ("off", self.tr("switched off")), ("unsure", self.tr("from memory"))))  # fmt: skip
        self.tree = self._made_tree()
        self.detail = QLabel()
        self.take_in = QPushButton(self.tr("Take in a file..."))
        self.save = QPushButton(self.tr("Save as a file..."))
        self.close_it = QPushButton(self.tr("Close"))
        self._lay_out()
        self.shown.chosen.connect(self._choose)
        self.tree.currentItemChanged.connect(self._tell)
        self.take_in.clicked.connect(self.file_wanted)
        self.save.clicked.connect(self.save_wanted)
        self.close_it.clicked.connect(self.close)
        self.show_policy(found, reader)
        fit(self, theme, 1640, 960)
        self._share_width()

    def _made_tree(self) -> QTreeWidget:
        tree = QTreeWidget()
        can_be_copied(tree)
        tree.setAccessibleName(self.tr("Rules"))
        tree.setHeaderLabels([self.tr("Rule"), self.tr("Strength"), self.tr("Limits"), self.tr("For whom"),
                              self.tr("How sure"), self.tr("Source")])  # fmt: skip
        tree.setRootIsDecorated(False)
        tree.setIndentation(self._theme.px(10))
        tree.setUniformRowHeights(True)
        tree.setAllColumnsShowFocus(True)
        tree.setHorizontalScrollBarPolicy(Qt.ScrollBarPolicy.ScrollBarAlwaysOff)
        header = tree.header()
        header.setStretchLastSection(True)
        header.setSectionResizeMode(QHeaderView.ResizeMode.Interactive)
        for column, width in enumerate(_WIDTHS):
            tree.setColumnWidth(column, self._theme.px(width))
        return tree

    def _share_width(self) -> None:
        """Every column in view, however large the text: what a column cuts stands under the list."""
        room, wanted = self.width() - self._theme.px(48), self._theme.px(sum(_WIDTHS) + _SOURCE)
        share = min(room / wanted, 1.0)
        for column, width in enumerate(_WIDTHS):
            self.tree.setColumnWidth(column, round(self._theme.px(width) * share))

    def _lay_out(self) -> None:
        px = self._theme.px
        over = QWidget()
        head = FlowRow(over, px(12))
        head.setContentsMargins(0, 0, 0, 0)
        head.addWidget(self.title)
        head.add_right(self.shown)
        self.detail.setWordWrap(True)
        self.detail.setTextFormat(Qt.TextFormat.PlainText)
        self.detail.setAlignment(Qt.AlignmentFlag.AlignTop)
        self.detail.setAccessibleName(self.tr("About the chosen rule"))
        card = QFrame()
        card.setProperty("card", True)
        inside = QVBoxLayout(card)
        inside.setContentsMargins(px(14), px(10), px(14), px(10))
        inside.addWidget(RollArea(self.detail))
        card.setFixedHeight(min(px(132), 200))
        foot = QHBoxLayout()
        foot.addWidget(self.take_in)
        foot.addWidget(self.save)
        foot.addStretch(1)
        foot.addWidget(self.close_it)
        column = QVBoxLayout(self)
        column.setContentsMargins(px(16), px(12), px(16), px(12))
        column.setSpacing(px(8))
        column.addWidget(over)
        column.addWidget(self.put_by)
        column.addWidget(self.notice)
        column.addWidget(self.tree, 1)
        column.addWidget(card)
        column.addLayout(foot)

    # what is shown

    def show_policy(self, found: PolicyInForce, reader: Reader) -> None:
        """Show a policy and what had to be passed over for it."""
        policy = found.policy
        self.found = found
        self.rules = rules(policy, check(found.text).differences)
        self.title.setText(self.tr("{name}, version {version}").format(name=policy.name, version=policy.version))
        self.put_by.setText(self._history_line(found, reader))
        self.notice.setText("\n".join(sentence(m, reader) for m in found.passed_over))
        self.notice.setVisible(bool(found.passed_over))
        differing = sum(bool(r.differs) for r in self.rules)
        self.shown.button("differs").setText(self.tr("other than shipped ({count})").format(count=differing))
        self._fill()

    def _history_line(self, found: PolicyInForce, reader: Reader) -> str:
        told = self.tr("SHA-256 {hash}, recorded with every flag.").format(hash=found.policy.hash[:16])
        if found.at is None:
            return self.tr("The shipped policy, for want of one in the store. ") + told
        by = self.tr(" by {who}").format(who=found.by) if found.by else ""
        return self.tr("Put in force {time}{by}. ").format(time=wall(found.at, reader.zone), by=by) + told

    def _choose(self, _key: str) -> None:
        self._fill()

    def _fill(self) -> None:
        self.tree.clear()
        wanted = [r for r in self.rules if _is_wanted(r, self.shown.key)]
        group = ""
        for rule in wanted:
            if rule.group != group:
                group = rule.group
                self._add_heading(group)
            self._add(rule)
        if not wanted:
            self._add_heading(self.tr("None"))
            self.detail.setText("")
        first = next((i for i in self._items() if i.data(0, _RULE) is not None), None)
        if first is not None:
            self.tree.setCurrentItem(first)

    def _add_heading(self, text: str) -> None:
        item = QTreeWidgetItem(self.tree, [text])
        item.setFirstColumnSpanned(True)
        item.setFont(0, self._theme.font(bold=True))
        item.setFlags(Qt.ItemFlag.ItemIsEnabled)

    def _add(self, rule: Rule) -> None:
        strength = tier_word(Tier(rule.tier)) if rule.tier else ""
        if not rule.on:
            strength = self.tr("off")
        mark = self.tr("* ") if rule.differs else ""
        item = QTreeWidgetItem(self.tree, [f"   {mark}{rule.name}", strength, rule.limits, rule.population,
                                           rule.sure, rule.source])  # fmt: skip
        item.setData(0, _RULE, rule)
        for column in range(6):
            item.setToolTip(column, item.text(column).strip())
            if not rule.on:
                item.setForeground(column, self._theme.colour("ink_quiet"))
        if rule.differs:
            item.setFont(0, self._theme.font(bold=True))
        item.setData(0, Qt.ItemDataRole.AccessibleTextRole, ". ".join((rule.name, *(w for _, w in rule.lines()))))

    def _items(self) -> Sequence[QTreeWidgetItem]:
        found = (self.tree.topLevelItem(n) for n in range(self.tree.topLevelItemCount()))
        return [item for item in found if item is not None]

    def _tell(self, item: QTreeWidgetItem | None, _before: object = None) -> None:
        rule = item.data(0, _RULE) if item is not None else None
        if rule is not None:
            lines = (f"{what}: {words}" if what else words for what, words in rule.lines())
            self.detail.setText("\n".join((rule.name, *lines)))


def _is_wanted(rule: Rule, shown: str) -> bool:
    if shown == "differs":
        return bool(rule.differs)
    if shown == "off":
        return not rule.on
    if shown == "unsure":
        return rule.sure == "from memory"
    return True
