"""Beginning an episode: who, why and how far, what speaks against it, the first gas, what ran before logging."""

from __future__ import annotations

import re
from collections.abc import Iterable

from PySide6.QtWidgets import QLineEdit, QWidget

from app.forms.answer_row import AnswerRow
from app.forms.cells import Card, Cell, QuietChooser
from app.forms.gas_values import GasValues
from app.forms.number_field import NumberField
from app.forms.previewed_form import PreviewedForm
from app.forms.readiness import ABSOLUTE, RELATIVE
from app.forms.readiness_card import ReadinessCard
from app.forms.running_card import RunningCard
from app.forms.typed_time import typed_iso, typed_time
from app.look.formats import clock, day
from app.operations import episode
from app.operations.begun_target import BegunTarget, begun_target
from app.operations.episode import BeginRequest, Given
from app.strip.preview_words import reading_words
from app.telling.phrases import channel_name
from app.ward.lane_words import indication_word
from app.words import sentence
from core.record.channels import CEILINGS, CHANNELS, INDICATIONS, RESUSCITATION, Group
from core.record.instant import Instant
from core.record.message import Message, RecordError

_WORDS = ("label", "location", "contact", "home_support")
_NUMBERS = {"age": 65.0, "height": 170.0, "weight": 75.0, "usual_paco2": 45.0}
_TARGETS = {"target_spo2_low": 88.0, "target_spo2_high": 92.0}
_TIMES = ("arrived_at", "decided_at", "deciding_gas_at")


class BeginForm(PreviewedForm):
    """Records one batch: the profile, the answers of the checklist, and values of earlier moments."""

    timed = False
    _wrong: Message | None = None
    begun = ""
    """The key of the episode that was begun."""

    def build(self) -> None:
        self.title.setText(self.tr("New episode"))
        self.setWindowTitle(self.title.text())
        self.go.setText(self.tr("Begin"))
        self.words: dict[str, QLineEdit] = {}
        self.numbers: dict[str, NumberField] = {}
        self.cells: dict[str, Cell] = {}
        self.indication = QuietChooser()
        self._build_patient()
        self._build_reach()
        self.readiness = ReadinessCard(self.theme)
        self.readiness.edited.connect(self.edited)
        self.stack.addWidget(self.readiness)
        self._build_gas()
        self.running = RunningCard(self.theme)
        self.running.edited.connect(self.edited)
        self.stack.addWidget(self.running)
        self.fit(980, 776)
        self.first = self.words["label"]

    def _build_patient(self) -> None:
        card = self.card(self.tr("Patient"))
        holds = {"label": self.tr("Bed 4"), "location": self.tr("ward, bay or bed"),
                 "contact": self.tr("name or bleep of the clinician"), "home_support": ""}  # fmt: skip
        names = {"label": self.tr("Bed or label, no name")}
        for key in _WORDS:
            field = self.words[key] = QLineEdit()
            field.setPlaceholderText(holds[key])
            field.textEdited.connect(self.edited)
            self._add(card, key, names.get(key, channel_name(key)), field, width=210)
        self.sex = AnswerRow(channel_name("sex"), [(c, self.tr(c)) for c in CHANNELS["sex"].choices], self.theme)
        self.sex.chosen.connect(self.edited)
        for key, start in _NUMBERS.items():
            self._add_number(card, key, start)
        self._add(card, "sex", channel_name("sex"), self.sex, width=0)

    def _build_reach(self) -> None:
        card = self.card(self.tr("Why, and how far"))
        self.indication.addItem(self.tr("not known yet"), "")
        for key in INDICATIONS:
            self.indication.addItem(indication_word(key), key)
        self.indication.currentIndexChanged.connect(self.edited)
        self._add(card, "indication", channel_name("indication"), self.indication, width=340)
        for key, start in _TARGETS.items():
            self._add_number(card, key, start)
        ceilings = [(c, self.tr(c)) for c in CEILINGS]
        self.ceiling = AnswerRow(channel_name("ceiling_of_care"), ceilings, self.theme)
        decisions = [(c, self.tr(c)) for c in RESUSCITATION]
        self.resuscitation = AnswerRow(channel_name("resuscitation"), decisions, self.theme)
        for key, row in (("ceiling_of_care", self.ceiling), ("resuscitation", self.resuscitation)):
            row.chosen.connect(self.edited)
            self.cells[key] = Cell(channel_name(key), row, self.theme, width=0)
            card.add_line(self.cells[key])
        for key in _TIMES:
            field = self.words[key] = QLineEdit()
            field.setPlaceholderText(self.tr("14:20"))
            field.textEdited.connect(self.edited)
            self._add(card, key, channel_name(key), field, width=210)

    def _build_gas(self) -> None:
        card = self.card(self.tr("Baseline gas"), self.tr("The last gas before support, or before logging began."))
        self.gas = GasValues(self.gas_unit, self.theme, flat=True)
        self.gas.edited.connect(self.edited)
        self.gas_time = QLineEdit()
        self.gas_time.setPlaceholderText(self.tr("now"))
        self.gas_time.textEdited.connect(self.edited)
        card.add_line(self.gas)
        self._add(card, "gas_time", self.tr("Taken at"), self.gas_time, width=210)

    def _add(self, card: Card, key: str, name: str, field: QWidget, width: int) -> None:
        noted = key in _TARGETS or key in ("ceiling_of_care", "resuscitation")
        self.cells[key] = Cell(name, field, self.theme, width=width, noted=noted or key == "indication")
        card.add(self.cells[key])

    def _add_number(self, card: Card, key: str, start: float) -> None:
        c = CHANNELS[key]
        unit = self.gas_unit if key == "usual_paco2" else c.unit
        name = f"{channel_name(key)}, {self.tr('years') if unit == 'y' else unit}"
        if key == "usual_paco2" and unit == "kPa":
            start /= 7.5
        field = self.numbers[key] = NumberField(key, name, self.theme, starts_at=start)
        field.edited.connect(self.edited)
        self._add(card, key, name, field, width=210)

    # what is asked

    def request(self) -> BeginRequest | None:
        label = self.words["label"].text().strip()
        if not label:
            return None
        try:
            facts = self._facts(label)
            given = tuple(self._given())
        except RecordError as error:
            self._wrong = error.message
            return None
        now, zone = self.model.session.now(), self.model.session.zone
        return BeginRequest(key_of(label, now, zone), facts, zone=zone, given=given)

    def _facts(self, label: str) -> dict[str, str]:
        self._wrong = None
        found = {"label": label} | {k: self.words[k].text().strip() for k in _WORDS[1:]}
        found |= {key: self._number(key) for key in (*_NUMBERS, *_TARGETS)}
        found |= {
            "sex": self.sex.key, "indication": str(self.indication.currentData() or ""),
            "ceiling_of_care": self.ceiling.key, "resuscitation": self.resuscitation.key,
        }  # fmt: skip
        found |= {key: self._iso(self.words[key].text()) for key in _TIMES}
        started = self.running.started()
        return {k: v for k, v in (found | self.readiness.answers() | {"started_at": self._iso(started)}).items() if v}

    def _number(self, key: str) -> str:
        text = self.numbers[key].text
        return text + self.gas_unit if text and key == "usual_paco2" else text

    def _iso(self, text: str) -> str:
        return typed_iso(text, self.model.session.now(), self.model.session.zone)

    def _given(self) -> Iterable[Given]:
        now = self.model.session.now()
        gas, settings = self.gas.typed(), self.running.typed()
        if gas:
            at = typed_time(self.gas_time.text(), now, self.model.session.zone)
            yield Given(now if at is None else at, gas)
        if settings:
            yield Given(now, settings)

    def lacks(self) -> str:
        if not self.words["label"].text().strip():
            return self.tr("Type a bed or a label.")
        if self._wrong is not None:
            return sentence(self._wrong, self.reader())
        return self.gas.lacks() or self.running.lacks()

    def ask_preview(self, request: BeginRequest) -> None:
        self.model.ask(
            episode.preview_begin, request, done=self.previewed, failed=self.refused, subject="form preview"
        )

    def ask_record(self, request: BeginRequest, *, confirmed: bool) -> None:
        from dataclasses import replace

        self.begun = request.episode
        self.model.ask(
            episode.begin, replace(request, confirmed=confirmed), done=self.was_recorded, failed=self.refused
        )

    # what is said

    def questions(self) -> tuple[str, ...]:
        against = self.readiness.against(ABSOLUTE)
        said = [Message("form.contraindicated", {"items": ", ".join(against)})] if against else []
        return tuple(sentence(m, self.reader()) for m in (*said, *self.preview.questions))

    def told(self) -> tuple[str, str, str]:
        now, zone = self.model.session.now(), self.model.session.zone
        parts = []
        for at, readings in self.preview.read:
            texts = [reading_words(r, self.reader()) for r in readings if not self._is_answer(r.channel.key)]
            parts.append((f"{clock(at, zone)} " if at != now else "") + ", ".join(texts))
        answers = self.readiness.answers()
        if answers:
            parts.append(self.tr("{count} answers of the checklist").format(count=len(answers)))
        against = self.readiness.against(RELATIVE)
        relative = Message("form.relative", {"items": ", ".join(against)})
        effects = sentence(relative, self.reader()) if against else ""
        head = self.tr("{label}, from now ({time})").format(label=self.words["label"].text(), time=clock(now, zone))
        return head, "; ".join(parts), effects

    def _is_answer(self, key: str) -> bool:
        return CHANNELS[key].group is Group.PROFILE and key in self.readiness.rows

    def _target(self) -> BegunTarget:
        """The range by what is typed so far; a moment that cannot be read is taken as now."""
        now = self.model.session.now()
        facts = {"indication": str(self.indication.currentData() or "")}
        facts |= {key: self._number(key) for key in _TARGETS}
        gas = {k: v for k, v in self.gas.typed().items() if v}
        given = (Given(now, gas),) if gas else ()
        return begun_target({k: v for k, v in facts.items() if v}, given, now, self.model.session.policy)

    def show_extra(self) -> None:
        """The target that the risk calls for, and what the typed values answer of the checklist."""
        policy, found = self.model.session.policy, self._target()
        oxygen = policy.oxygen
        low, high = (
            (oxygen.risk_target_low, oxygen.risk_target_high)
            if found.at_risk
            else (oxygen.target_low, oxygen.target_high)
        )
        for key, limit in (("target_spo2_low", low), ("target_spo2_high", high)):
            self.numbers[key].box.starts_at = limit.value
            self.cells[key].tell(self.tr("{value:g} % if left empty").format(value=limit.value))
        kind = self.tr("hypercapnic risk") if found.at_risk else self.tr("no hypercapnic risk known")
        if found.by_gas:
            kind = self.tr("hypercapnic risk, by the gas typed below")
        told = not found.by_gas and (found.at_risk or self.indication.currentData())
        self.cells["indication"].tell(f"{kind}; {low.source.partition(';')[0]}" if told else kind)
        self.cells["ceiling_of_care"].tell(self.tr("How far support goes. Resuscitation is recorded separately."))
        self.cells["resuscitation"].tell(self.tr("What is done if the heart stops."))
        values = {r.channel.key: r for _, readings in (self.preview.read if self.preview else ()) for r in readings}
        self.readiness.tell_measured(values)


def key_of(label: str, now: Instant, zone: str) -> str:
    """A key of one word that holds no name: the label's letters and the moment.

    >>> key_of("Bed 4", 0, "UTC")
    'bed-4-01-Jan-1970-0000'
    """
    word = re.sub(r"[^a-z0-9]+", "-", label.casefold()).strip("-")[:30] or "episode"
    return f"{word}-{day(now, zone)}-{clock(now, zone)[:5].replace(':', '')}"
