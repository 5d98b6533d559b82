"""Beginning an episode: bed, indication, oxygen target suggested from risk, ceiling of care."""

from __future__ import annotations

import re
from collections.abc import Callable

from PySide6.QtWidgets import QLineEdit, QWidget

from app.chooser import Chooser
from app.dialogs.asking import AskingDialog
from app.failure import Failure
from app.formats import day
from app.operations.episode import BeginRequest
from app.theme import Theme
from app.ward.lane_words import indication_word
from app.words import Reader, sentence
from core.judgement.policy import Policy
from core.record.channels import CEILINGS, HYPERCAPNIC_RISK, INDICATIONS, RESUSCITATION
from core.record.instant import Instant

Ask = Callable[[BeginRequest], None]


class NewEpisodeDialog(AskingDialog):
    """Asks for the facts of a new episode and hands a request to `ask`; `failed` shows a refusal."""

    def __init__(
        self,
        policy: Policy,
        now: Instant,
        reader: Reader,
        ask: Ask,
        theme: Theme,
        parent: QWidget | None = None,
    ) -> None:
        super().__init__(self.tr("New episode"), self.tr("Begin"), theme, parent)
        self._policy, self._now, self._reader, self._ask = policy, now, reader, ask
        self.label, self.location, self.age = QLineEdit(), QLineEdit(), QLineEdit()
        self.indication, self.ceiling, self.resuscitation = Chooser(), Chooser(), Chooser()
        self.target_low, self.target_high = QLineEdit(), QLineEdit()
        self.contact = QLineEdit()
        self.indication.addItem(self.tr("not known yet"), "")
        for key in INDICATIONS:
            self.indication.addItem(indication_word(key), key)
        for box, choices in ((self.ceiling, CEILINGS), (self.resuscitation, RESUSCITATION)):
            for choice in reversed(choices):
                box.addItem(choice, choice)
        self.label.setPlaceholderText(self.tr("Bed 4"))
        self.field(self.tr("Bed or label, no name"), self.label)
        self.field(self.tr("Place"), self.location)
        self.field(self.tr("Age, years"), self.age)
        self.field(self.tr("Indication"), self.indication)
        self.field(self.tr("SpO2 target, low %"), self.target_low)
        self.field(self.tr("SpO2 target, high %"), self.target_high)
        self.field(self.tr("Ceiling of care"), self.ceiling)
        self.field(self.tr("Resuscitation decision"), self.resuscitation)
        self.field(self.tr("Responsible clinician"), self.contact)
        self.indication.currentIndexChanged.connect(self._suggest_target)
        self._suggest_target()
        self.resize(theme.px(520), theme.px(520))

    def _suggest_target(self) -> None:
        """The range that the risk calls for; a person may type another."""
        o = self._policy.oxygen
        risk = self.indication.currentData() in HYPERCAPNIC_RISK
        low, high = (o.risk_target_low, o.risk_target_high) if risk else (o.target_low, o.target_high)
        for field, limit in ((self.target_low, low), (self.target_high, high)):
            field.setPlaceholderText(
                self.tr("{value:g} suggested ({source})").format(value=limit.value, source=limit.source)
            )

    def submit(self) -> None:
        label = self.label.text().strip()
        if not label:
            self.refuse(self.tr("Type a bed or a label."))
            return
        typed = {
            "label": label,
            "location": self.location.text(),
            "age": self.age.text(),
            "indication": self.indication.currentData(),
            "target_spo2_low": self.target_low.text(),
            "target_spo2_high": self.target_high.text(),
            "ceiling_of_care": self.ceiling.currentData(),
            "resuscitation": self.resuscitation.currentData(),
            "contact": self.contact.text(),
        }
        facts = {key: text.strip() for key, text in typed.items() if text and text.strip()}
        self.go.setEnabled(False)
        self._ask(BeginRequest(key_of(label, self._now, self._reader.zone), facts, zone=self._reader.zone))

    def failed(self, failure: Failure) -> None:
        """Say why it was refused."""
        self.refuse(sentence(failure.message, self._reader))


def key_of(label: str, now: Instant, zone: str) -> str:
    """A key of one word that holds no name: the label's letters and the moment.

    >>> key_of("Bed 4", 0, "UTC")
    'bed-4-01-Jan-1970-0000'
    """
    from app.formats import clock

    word = re.sub(r"[^a-z0-9]+", "-", label.casefold()).strip("-")[:30] or "episode"
    return f"{word}-{day(now, zone)}-{clock(now, zone)[:5].replace(':', '')}"
