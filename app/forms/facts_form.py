"""Facts that change while support runs, each a timed entry: bed, ceiling, targets, who answers, the machine."""

from __future__ import annotations

from dataclasses import replace

from app.forms.cells import Cell
from app.forms.entry_form import EntryForm
from app.forms.fact_fields import FactField
from app.forms.typed_time import typed_iso, typed_time
from app.look.formats import since, wall
from app.operations import facts
from app.operations.facts import FactsRequest
from app.ward.lane_words import indication_word
from app.words import sentence
from core.record.channels import Kind
from core.record.instant import DAY, Instant
from core.record.message import Message, RecordError

_STARTS = {"age": 65.0, "height": 170.0, "weight": 75.0, "usual_paco2": 45.0, "target_spo2_low": 88.0,
           "target_spo2_high": 92.0, "sofa": 4.0, "apache": 20.0}  # fmt: skip
"""Where the first press of a button goes from while nothing is known; no advice."""


class FactsForm(EntryForm):
    """What stands is in the fields; what differs is recorded for the moment at the head."""

    _wrong: Message | None = None

    def build(self) -> None:
        self.set_name(self.tr("Patient facts"))
        self.time.setAccessibleName(self.tr("Since when it holds: now, 14:20, or 20m ago"))
        self.time.setToolTip(self.time.accessibleName())
        self.fields: dict[str, FactField] = {}
        self.cells: dict[str, Cell] = {}
        self._since: dict[str, Instant | None] = {}
        for heading, keys in self._groups():
            self._add_group(heading, keys)
        self._take()
        self.time.textEdited.connect(self._moment_typed)
        self.fit(980, 776)
        self.first = self.fields["label"].widget

    def _groups(self) -> tuple[tuple[str, tuple[str, ...]], ...]:
        return (
            (self.tr("Where, and who answers"), ("label", "location", "contact")),
            (self.tr("How far support goes"), ("ceiling_of_care", "resuscitation")),
            (self.tr("Targets"), ("target_spo2_low", "target_spo2_high", "usual_paco2", "spo2_scale")),
            (self.tr("Machine and mask"), ("device", "interface_size", "humidifier", "leak_definition")),
            (self.tr("Patient"), ("indication", "home_support", "age", "height", "weight", "sex")),
            (self.tr("What scores ask"), ("sofa", "apache", "immunosuppression", "septic_shock", "pulmonary_ards",
                                          "pneumonia")),
            (self.tr("Pressures kept low: why"), ("support_reason",)),
            (self.tr("For the next shift"), ("plan", "jobs", "feeding", "isolation")),
            (self.tr("Times"), ("arrived_at", "decided_at", "deciding_gas_at", "started_at")),
        )  # fmt: skip

    def _add_group(self, heading: str, keys: tuple[str, ...]) -> None:
        card = self.card(heading)
        for key in keys:
            field = self.fields[key] = FactField(key, self.gas_unit, self.theme, self.choice_word, _STARTS.get(key))
            field.connect(self.edited)
            cell = self.cells[key] = Cell(field.name, field.widget, self.theme, width=field.width)
            if field.width:
                card.add(cell)
            else:
                card.add_line(cell)

    def choice_word(self, key: str, choice: str) -> str:
        """A choice in the reader's language; "" is none yet."""
        if not choice:
            return self.tr("not known yet")
        return indication_word(choice) if key == "indication" else self.tr(choice)

    # what stands

    def _take(self) -> None:
        at, zone = self.moment(), self.model.session.zone
        for key, field in self.fields.items():
            self._since[key] = field.take(self.patient.record, at, lambda t: wall(t, zone))

    def _moment_typed(self) -> None:
        """Other facts stood at another moment; what was typed stays."""
        typed = {key: f.text for key, f in self.fields.items() if f.differs}
        self._take()
        for key, text in typed.items():
            self.fields[key].put(text)
        self.edited()

    # what is asked

    def request(self) -> FactsRequest | None:  # type: ignore[override]
        self._wrong = None
        now, zone = self.model.session.now(), self.model.session.zone
        try:
            at = typed_time(self.time.text(), now, zone)
            values = {key: self._typed(f) for key, f in self.fields.items() if f.differs}
        except RecordError as error:
            self._wrong = error.message
            return None
        if not values:
            return None
        return FactsRequest(self.patient.record.key, now if at is None else at, values, zone)

    def _typed(self, field: FactField) -> str:
        if field.channel.kind is not Kind.INSTANT:
            return field.typed
        return typed_iso(field.text, self.model.session.now(), self.model.session.zone)

    def lacks(self) -> str:
        return sentence(self._wrong, self.reader()) if self._wrong is not None else ""

    def ask_preview(self, request: FactsRequest) -> None:  # type: ignore[override]
        self.model.ask(facts.preview, request, done=self.previewed, failed=self.refused, subject="form preview")

    def ask_record(self, request: FactsRequest, *, confirmed: bool) -> None:  # type: ignore[override]
        request = replace(request, confirmed=confirmed)
        self.model.ask(facts.record, request, done=self.was_recorded, failed=self.refused)

    # beside the preview

    def show_extra(self) -> None:
        """Each changed fact names what it was; each other one since when it stands."""
        at = self.moment()
        for key, field in self.fields.items():
            if field.differs:
                was = self.choice_word(key, field.shown) if field.channel.kind is Kind.CHOICE else field.shown
                self.cells[key].tell(self.tr("was {value}").format(value=was or "?"), strong=True)
            elif field.shown and not field.text:
                self.cells[key].tell(self.tr("To take it back, withdraw it (Ctrl+E)."), strong=True)
            else:
                self.cells[key].tell(self._since_words(self._since[key], at))

    def _since_words(self, stood: Instant | None, at: Instant) -> str:
        if stood is None:
            return self.tr("not recorded")
        zone = self.model.session.zone
        return since(stood, at) if at - stood < DAY else self.tr("since {time}").format(time=wall(stood, zone))
