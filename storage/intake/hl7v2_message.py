"""One ORU^R01 message becomes results: which patient, which result, what value, what the sender says of it."""

from __future__ import annotations

import re
from collections.abc import Iterator, Sequence
from dataclasses import dataclass, field, replace
from typing import TYPE_CHECKING, Protocol

from core.record import instant
from core.record.channels import CHANNELS
from core.record.entries import NewEntry, from_reading
from core.record.instant import Instant
from core.record.message import Message, RecordError, refuse
from core.record.reading import MAX_TEXT
from storage.codes import LOINC, Coding, Meaning, meaning_of_codings
from storage.intake.coded_value import CodeBook, code_key, coded_reading
from storage.intake.findings import CLOCK_LEAD, Findings
from storage.intake.hl7v2_messages import RawMessage
from storage.intake.patients import Patients, identifier_text
from storage.intake.result_versions import PRELIMINARY, Result, Standing, identity
from storage.intake.wall_times import parse_dtm

if TYPE_CHECKING:
    from collections.abc import Iterable

_STATUS = {
    "F": Standing.GIVEN, "P": Standing.GIVEN, "R": Standing.GIVEN, "U": Standing.GIVEN, "": Standing.GIVEN,
    "V": Standing.GIVEN, "S": Standing.GIVEN, "A": Standing.GIVEN, "B": Standing.GIVEN,
    "C": Standing.CORRECTED, "D": Standing.GONE, "X": Standing.GONE, "W": Standing.GONE,
}  # fmt: skip
"""OBX-11 (table 0085). X: no result can be obtained; W: posted to the wrong patient."""
_PRELIMINARY = ("P", "R", "S")
_NOT_YET = ("I", "O", "N")
_SITES = {"ARTERIAL": "arterial", "BLDA": "arterial", "ABLD": "arterial", "ART": "arterial", "BLDV": "venous",
          "VENOUS": "venous", "VBLD": "venous", "BLDC": "capillary", "CAPILLARY": "capillary"}  # fmt: skip
"""Specimens of table 0487 (BLDA, BLDV, BLDC) and the plain words."""
_ESCAPE = re.compile(r"\\(F|S|T|R|E|\.br|X[0-9A-Fa-f]*)\\")
BY = "HL7"


class _Aside(Protocol):
    def put(self, line: int, column: str, value: str, message: Message) -> None: ...

    def note_code(self, key: str, name: str, example: str, unit: str) -> None: ...


@dataclass(slots=True)
class _Order:
    """What holds for the results under one OBR."""

    filler: str = ""
    at_text: str = ""
    site: str = ""
    seen: dict[tuple[str, str], int] = field(default_factory=dict)


@dataclass(slots=True)
class _Observed:
    """One OBX while its notes are gathered."""

    line: int
    fields: Sequence[str]
    order: _Order
    notes: list[str] = field(default_factory=list)


class MessageRows:
    """Reads messages; what is wrong goes to `findings`, what is not for this record to `aside`."""

    def __init__(
        self, now: Instant, zone: str, book: CodeBook, patients: Patients, findings: Findings, aside: _Aside
    ) -> None:
        self._now, self._zone, self._book, self._patients = now, zone, book, patients
        self._findings, self._aside = findings, aside
        self._meanings: dict[str, Meaning | None] = {}
        self.count = 0

    def read(self, raw: RawMessage) -> Iterator[tuple[Result, str]]:
        """The results of a message, each with the sample site it names."""
        self.count += 1
        try:
            message = _Message(raw)
            message.check()
            issued = self._issued(message)
        except RecordError as error:
            self._findings.refuse(raw.line, "MSH", raw.text[:60], error.message)
            return
        for observed in message.observations():
            try:
                found = self._result(message, observed, issued)
            except RecordError as error:
                self._findings.refuse(observed.line, _column(error), _get(observed.fields, 5), error.message)
                continue
            if found is not None:
                yield found

    def _issued(self, message: _Message) -> Instant | None:
        """When the message was sent; None where it does not say."""
        text = message.part(message.header, 6)
        at = parse_dtm(text, self._zone) if text else None
        return at if at is None or at <= self._now + CLOCK_LEAD else None

    def _result(self, message: _Message, o: _Observed, issued: Instant | None) -> tuple[Result, str] | None:
        meaning = self._meaning(message, o)
        if meaning is None:
            return None
        status = _get(o.fields, 11).strip().upper()
        if status in _NOT_YET:
            self._aside.put(o.line, "OBX-11", status, Message("result.not_yet", {"channel": meaning.channel}))
            return None
        if status not in _STATUS:
            raise refuse("result.status_unknown", value=status[:20], accepted=" ".join(k for k in _STATUS if k))
        stated = _STATUS[status]
        at = self._moment(o)
        episode = self._patients.episode(message.identifiers(), o.line)
        entry, doubts = self._entry(message, o, meaning, episode, at, stated)
        if entry is None:
            return None
        if status in _PRELIMINARY:
            doubts = (*doubts, Message(PRELIMINARY, {"channel": meaning.channel}))
            entry = replace(entry, doubt=entry.doubt or PRELIMINARY)
        base = self._base(message, o, at)
        version = (status, str(issued or ""), entry.raw, entry.raw_unit, str(at))
        why = f"status {status}" if status else ""
        return Result(o.line, base, version, entry, stated, why, issued, doubts), meaning.site or o.order.site

    def _base(self, message: _Message, o: _Observed, at: Instant) -> str:
        """What stays the same in every version of a result."""
        code, sub = _get(o.fields, 3).split(message.component)[0], _get(o.fields, 4)
        patient = (message.identifiers() or [""])[0]
        alone = bool(o.order.filler) and o.order.seen.get((code, sub), 0) == 1
        return identity("hl7v2", patient, o.order.filler, code, sub, "" if alone else str(at))

    def _meaning(self, message: _Message, o: _Observed) -> Meaning | None:
        text = _get(o.fields, 3)
        if text not in self._meanings:
            self._meanings[text] = self._looked_up(message.codings(text))
        found = self._meanings[text]
        if found is None:
            self._put_aside(message, o, text)
        return found

    def _looked_up(self, codings: list[Coding]) -> Meaning | None:
        own = self._book.channel(codings)
        if own == "":
            return None
        return Meaning(own) if own is not None and own in CHANNELS else meaning_of_codings(codings)

    def _put_aside(self, message: _Message, o: _Observed, text: str) -> None:
        """A result whose code is no quantity of the log: named, and asked about where nobody has said anything."""
        parts, codings = text.split(message.component), message.codings(text)
        values = {"code": parts[0][:60], "name": message.plain(_get(parts, 1))[:80]}
        if self._book.channel(codings) == "":
            self._aside.put(o.line, "OBX-3", text[:80], Message("code.not_wanted", values))
            return
        self._aside.put(o.line, "OBX-3", text[:80], Message("code.not_ours", values))
        example = message.plain(_get(o.fields, 5).replace(message.component, " ")).strip()
        unit = message.plain(_get(o.fields, 6).split(message.component)[0])
        key = code_key(codings[0]) if codings else ""
        self._aside.note_code(key, message.plain(_get(parts, 1)) or parts[0], example, unit)

    def _moment(self, o: _Observed) -> Instant:
        text = (_get(o.fields, 14) or o.order.at_text).strip()
        if not text:
            raise refuse("time.none", accepted="OBX-14 or OBR-7")
        at = parse_dtm(text, self._zone)
        if at > self._now + CLOCK_LEAD:
            raise refuse("instant.in_future", value=text, now=instant.iso_second(self._now),
                         accepted="at most 5 min ahead of the clock")  # fmt: skip
        return at

    def _entry(
        self, message: _Message, o: _Observed, meaning: Meaning, episode: str, at: Instant, stated: Standing
    ) -> tuple[NewEntry | None, tuple[Message, ...]]:
        known = CHANNELS[meaning.channel]
        note = message.plain("\n".join(o.notes))[:MAX_TEXT]
        zone = self._zone or "UTC"
        text = message.value(_get(o.fields, 2).strip(), _get(o.fields, 5), known.key)
        if stated is Standing.GONE:
            return NewEntry(episode, known.key, at, raw=text, zone=zone, by=BY, note=note), ()
        if not text or text == '""':
            values = {"channel": known.key}
            self._aside.put(o.line, "OBX-5", "", Message("result.no_value", values))
            return None, ()
        units = _get(o.fields, 6).split(message.component)
        is_ucum = _get(units, 2).upper() == "UCUM"
        reading = coded_reading(known, text, message.plain(units[0]), is_ucum=is_ucum)
        return from_reading(episode, at, reading, by=BY, zone=zone, note=note), reading.doubts


class _Message:
    """One message cut into segments of fields, by its own separators."""

    def __init__(self, raw: RawMessage) -> None:
        import hl7

        try:
            hl7.parse(raw.text)
        except Exception as error:  # the parser raises whatever its slicing meets
            raise refuse("hl7.unreadable", detail=type(error).__name__, accepted="an HL7 v2 message") from None
        # what the parser found to be a message is cut into fields here: to ask it for texts would join them anew
        marks = raw.text[3:8].ljust(5)
        self._segments = [line.split(marks[0]) for line in raw.text.split("\r")]
        self._segments[0].insert(1, marks[0])  # MSH counts its separator as a field
        self._kinds = [fields[0] for fields in self._segments]
        self.component, self.repetition, self._escape = marks[1], marks[2], marks[3]
        self._subcomponent, self._mark = marks[4], marks[0]
        self._line = raw.line
        self.header = self._segments[0]
        self._patient: list[str] | None = None

    def check(self) -> None:
        """Refuse what is no ORU^R01.

        Raises:
            RecordError: `hl7.not_a_result`.
        """
        kind = _get(self.header, 9).split(self.component)
        if kind[:2] != ["ORU", "R01"] and kind[:1] != ["ORU"]:
            raise refuse("hl7.not_a_result", value=_get(self.header, 9)[:40], accepted="ORU^R01")

    def part(self, fields: Sequence[str], index: int) -> str:
        """The first component of a field of the header, which counts its separator as a field."""
        return _get(fields, index + 1).split(self.component)[0]

    def identifiers(self) -> list[str]:
        """The patient's identifiers, each with the authority that gave it."""
        if self._patient is None:
            self._patient = []
            for segment in self._segments:
                if segment[0] == "PID":
                    self._patient = list(self._identifiers(_get(segment, 3)))
        return self._patient

    def _identifiers(self, text: str) -> Iterable[str]:
        for one in text.split(self.repetition):
            parts = one.split(self.component)
            if parts[0].strip():
                authority = _get(parts, 3).split(self._subcomponent)[0]
                yield identifier_text(self.plain(authority), self.plain(parts[0]))

    def observations(self) -> list[_Observed]:
        """The OBX of the message with the order they stand under and the notes behind them."""
        order = _Order()
        found: list[_Observed] = []
        last: _Observed | None = None
        for number, segment in enumerate(self._segments):
            kind = self._kinds[number]
            if kind == "OBR":
                order = _Order(_get(segment, 3).split(self.component)[0], _get(segment, 7), self._site(segment, 15))
                last = None
            elif kind == "SPM":
                order.site = self._site(segment, 4) or order.site
            elif kind == "OBX":
                last = _Observed(self._line + number, segment, order)
                key = (_get(segment, 3).split(self.component)[0], _get(segment, 4))
                order.seen[key] = order.seen.get(key, 0) + 1
                found.append(last)
            elif kind == "NTE" and last is not None:
                last.notes.append(_get(segment, 3))
        return found

    def _site(self, segment: Sequence[str], index: int) -> str:
        text = _get(segment, index)
        for part in text.replace(self._subcomponent, self.component).split(self.component):
            word = part.strip().upper()
            if word in _SITES:
                return _SITES[word]
            for name in ("ARTERIAL", "VENOUS", "CAPILLARY"):
                if word.startswith(name):
                    return _SITES[name]
        return ""

    def codings(self, text: str) -> list[Coding]:
        """The codes of a coded field, the alternate one too, by the names HL7 gives their systems."""
        parts = text.split(self.component)
        pairs = [(_get(parts, 2), parts[0]), (_get(parts, 5), _get(parts, 3))]
        return [(LOINC if system.strip().upper() in ("LN", "LOINC") else system.strip(), self.plain(code).strip())
                for system, code in pairs if code.strip()]  # fmt: skip

    def value(self, kind: str, text: str, channel: str) -> str:
        """OBX-5 as text: a structured number (SN) is put together, a coded value gives its words."""
        first = text.split(self.repetition, maxsplit=1)[0] if kind in ("NM", "SN") else text
        parts = first.split(self.component)
        if kind == "SN":
            comparator, separator = _get(parts, 0).strip(), _get(parts, 2).strip()
            shown = "".join(p.strip() for p in parts)
            if separator:
                raise refuse("value.comparator", channel=channel, value=shown[:40], accepted="one exact number")
            return (comparator if comparator != "=" else "") + _get(parts, 1).strip()
        if kind in ("CE", "CWE", "CNE"):
            return self.plain(_get(parts, 1) or parts[0]).strip()
        if kind in ("ED", "RP"):
            raise refuse("value.not_a_number", channel=channel, value=kind, accepted="NM, SN, ST, TX, CE or CWE")
        return self.plain(first).strip()

    def plain(self, text: str) -> str:
        """Text with its escape sequences undone."""
        if self._escape not in text or self._escape != "\\":
            return text
        marks = {"F": self._mark, "S": self.component, "T": self._subcomponent, "R": self.repetition,
                 "E": self._escape, ".br": "\n"}  # fmt: skip

        def undone(found: re.Match[str]) -> str:
            name = found[1]
            if name.startswith("X"):
                digits = name[1:]
                return bytes.fromhex(digits).decode("latin-1") if len(digits) % 2 == 0 else ""
            return marks[name]

        return _ESCAPE.sub(undone, text)


def _get(fields: Sequence[str], index: int) -> str:
    return fields[index] if index < len(fields) else ""


def _column(error: RecordError) -> str:
    room = error.message.key.partition(".")[0]
    return {"unit": "OBX-6", "patient": "PID-3", "time": "OBX-14", "instant": "OBX-14"}.get(room, "OBX-5")
