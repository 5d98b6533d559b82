"""One FHIR R4 Observation becomes results: its own value, its components, its sampled data."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass, replace
from typing import Protocol

import numpy as np

from core.record.channels import CHANNELS, Channel, Kind
from core.record.entries import NewEntry, from_reading
from core.record.instant import Instant, parse
from core.record.message import Message, RecordError, refuse
from core.record.reading import MAX_TEXT, Reading, read_value
from storage.codes import LOCAL_SYSTEM, LOINC, UCUM, Coding, Meaning, meaning_of_codings
from storage.intake.coded_value import CodeBook, code_key, coded_reading
from storage.intake.fhir_bundle import Found, Holdings
from storage.intake.fhir_json import Json, child, objects, text
from storage.intake.fhir_sampled import sampled_points
from storage.intake.fhir_times import observed_at
from storage.intake.findings import Findings
from storage.intake.patients import Patients
from storage.intake.result_versions import PRELIMINARY, Result, Standing, identity
from storage.intake.sample_spool import SampleSpool

LOCAL_ENTRY = "urn:uuid:5d9b5ec4-6f5b-5f0a-9f0b-7a6c1d2e4f12"
"""The system of identifiers that are ids of entries of our own exports."""
BY = "FHIR"
_STATUS = {
    "final": Standing.GIVEN, "preliminary": Standing.GIVEN, "unknown": Standing.GIVEN,
    "amended": Standing.CORRECTED, "corrected": Standing.CORRECTED,
    "cancelled": Standing.GONE, "entered-in-error": Standing.GONE,
}  # fmt: skip
_ARTERIAL_SATURATION = (LOINC, "2708-6")


class _Aside(Protocol):
    def put(self, line: int, column: str, value: str, message: Message) -> None: ...

    def note_code(self, key: str, name: str, example: str, unit: str) -> None: ...


@dataclass(frozen=True, slots=True)
class _About:
    """What holds for all values of one observation."""

    found: Found
    episode: str
    at: Instant
    status: str
    issued: Instant | None
    doubts: tuple[Message, ...]
    site: str
    identity: str
    is_own: bool


class ObservationRows:
    """Reads observations; what is wrong goes to `findings`, what is not for this record to `aside`."""

    def __init__(
        self, now: Instant, book: CodeBook, patients: Patients, holdings: Holdings, findings: Findings,
        aside: _Aside, spool: SampleSpool,
    ) -> None:  # fmt: skip
        self._now, self._book, self._patients, self._holdings = now, book, patients, holdings
        self._findings, self._aside, self._spool = findings, aside, spool

    def read(self, found: Found) -> Iterator[tuple[Result, str]]:
        """The results of an observation, each with the sample site it names."""
        elsewhere = self._holdings.members_elsewhere(found.resource)
        if elsewhere:
            message = Message("fhir.members_elsewhere", {"count": elsewhere})
            self._aside.put(found.number, "hasMember", _name(found.resource), message)
        parts = list(self._parts(found))
        if not parts:
            return
        try:
            about = self._about(found)
        except RecordError as error:
            column = "status" if error.message.key.startswith(("result", "fhir")) else "effective"
            column = "subject" if error.message.key.startswith("patient") else column
            self._findings.refuse(found.number, column, _name(found.resource), error.message)
            return
        if about is None:
            return
        for where, part, meaning in parts:
            try:
                result = self._result(about, where, part, meaning)
            except RecordError as error:
                shown = text(child(part, "valueQuantity"), "value") or _name(part)
                self._findings.refuse(found.number, where or "value", shown, error.message)
                continue
            if result is not None:
                yield result, meaning.site or about.site

    def _parts(self, found: Found) -> Iterator[tuple[str, Json, Meaning]]:
        """The observation itself and its components, where their codes are ours."""
        resource = found.resource
        has_parts = bool(resource.get("component") or resource.get("hasMember"))
        has_value = any(k.startswith("value") for k in resource)
        for where, part in (("", resource), *_components(resource)):
            meaning, why = self._meaning(part, resource)
            if meaning is not None and (has_value or where or not has_parts):
                yield where, part, meaning
            elif meaning is None and (where or has_value or not has_parts):
                self._aside.put(found.number, f"{where} code".strip(), _name(part), why)
                if why.key == "code.not_ours":
                    self._ask(part)

    def _ask(self, part: Json) -> None:
        """Note a code that nobody has said anything of, with what was sent under it."""
        codings = [(text(c, "system"), text(c, "code")) for c in objects(child(part, "code"), "coding")]
        quantity = child(part, "valueQuantity")
        example = text(quantity, "value") or _name({"code": child(part, "valueCodeableConcept")})
        unit = text(quantity, "code") or text(quantity, "unit")
        key = next((code_key(c) for c in codings if c[1]), "")
        self._aside.note_code(key, _name(part), example or text(part, "valueString"), unit)

    def _meaning(self, part: Json, resource: Json) -> tuple[Meaning | None, Message]:
        codings: list[Coding] = [(text(c, "system"), text(c, "code")) for c in objects(child(part, "code"), "coding")]
        code = codings[0][1] if codings else ""
        why = Message("code.not_ours", {"code": code[:60], "name": _name(part)[:80]})
        own = self._book.channel(codings)
        if own == "":
            return None, Message("code.not_wanted", why.values)
        if own is not None and own in CHANNELS:
            return Meaning(own), why
        meaning = meaning_of_codings(codings)
        if meaning is not None and meaning.channel == "sao2" and _ARTERIAL_SATURATION in codings:
            return _saturation(resource, meaning), Message("code.ambiguous_saturation", {"code": "2708-6"})
        return meaning, why

    def _about(self, found: Found) -> _About | None:
        resource = found.resource
        if "modifierExtension" in resource or "implicitRules" in resource:
            raise refuse("fhir.modifier", accepted="an observation without modifierExtension or implicitRules")
        status = text(resource, "status")
        if status == "registered":
            self._aside.put(found.number, "status", status, Message("result.not_yet", {"channel": ""}))
            return None
        if status not in _STATUS:
            raise refuse("result.status_unknown", value=status[:40], accepted=", ".join(_STATUS))
        at, doubts = (self._now, ()) if _STATUS[status] is Standing.GONE else self._moment(found)
        doubts += () if status not in ("preliminary", "unknown") else (Message(PRELIMINARY, {"channel": ""}),)
        episode = self._episode(found)
        ids = [i for i in objects(resource, "identifier") if text(i, "value")]
        own = next((text(i, "value") for i in ids if text(i, "system") == LOCAL_ENTRY), "")
        named = own or self._named(found, ids)
        return _About(found, episode, at, status, self._issued(resource), doubts, self._holdings.site(resource),
                      named, bool(own))  # fmt: skip

    def _moment(self, found: Found) -> tuple[Instant, tuple[Message, ...]]:
        at, doubts = observed_at(found.resource, self._now)
        if at is not None:
            return at, doubts
        panel = self._holdings.panel_of(found) or found.container
        if panel is not None:
            at, doubts = observed_at(panel, self._now)
        if at is None:
            raise refuse("time.none", accepted="effectiveDateTime, effectiveInstant or effectivePeriod")
        return at, (*doubts, Message("time.of_panel"))

    def _episode(self, found: Found) -> str:
        own = self._holdings.own_episode(found.resource)
        if own:
            return own
        identifiers, kind = self._holdings.identifiers(found.resource)
        if kind != "Patient":
            raise refuse("patient.not_a_patient", value=kind[:40], accepted="Patient")
        return self._patients.episode(identifiers, found.number)

    def _named(self, found: Found, ids: list[Json]) -> str:
        """What tells an observation from others: its identifier, else its address and its patient."""
        if ids:
            return f"{text(ids[0], 'system')}|{text(ids[0], 'value')}"
        patient = (self._holdings.identifiers(found.resource)[0] or [""])[0]
        address = found.url or text(found.resource, "id")
        return f"{patient}|{address}" if address else ""

    def _issued(self, resource: Json) -> Instant | None:
        for shown in (text(resource, "issued"), text(child(resource, "meta"), "lastUpdated")):
            try:
                at = parse(shown)
            except RecordError:
                continue
            return at if at <= self._now else None
        return None

    def _result(self, about: _About, where: str, part: Json, meaning: Meaning) -> Result | None:
        known = CHANNELS[meaning.channel]
        number, stated = about.found.number, _STATUS[about.status]
        by = _performer(about.found.resource) if about.is_own else BY
        note = "\n".join(text(n, "text") for n in objects(about.found.resource, "note"))[:MAX_TEXT]
        code = text(next(objects(child(part, "code"), "coding"), {}), "code")
        base = about.identity
        if where or not about.is_own:
            base = identity("fhir", about.identity or f"{about.episode}|{about.at}|{where}", code)
        if stated is Standing.GONE:
            entry = NewEntry(about.episode, known.key, about.at, by=by, note=note)
            return Result(number, base, (about.status,), entry, stated, about.status, about.issued)
        if "valueSampledData" in part:
            self._take_samples(about, part, known)
            return None
        reading = self._reading(number, where, part, known)
        if reading is None:
            return None
        doubts = (*about.doubts, *reading.doubts)
        entry = replace(from_reading(about.episode, about.at, reading, by=by, note=note),
                        doubt=doubts[0].key if doubts else "")  # fmt: skip
        if about.is_own:
            entry = replace(entry, zone=_extension(about.found.resource, "zone") or "UTC",
                            doubt=_extension(about.found.resource, "doubt") or entry.doubt)  # fmt: skip
        version = (about.status, str(about.issued or ""), entry.raw, entry.raw_unit, str(about.at))
        return Result(number, base, version, entry, stated, about.status, about.issued, doubts)

    def _reading(self, number: int, where: str, part: Json, known: Channel) -> Reading | None:
        """The value of an observation or component; None where it states none, with the reason set aside."""
        quantity = child(part, "valueQuantity")
        if quantity:
            if text(quantity, "comparator"):
                shown = text(quantity, "comparator") + text(quantity, "value")
                raise refuse("value.comparator", channel=known.key, value=shown[:40], accepted="one exact number")
            is_ucum = text(quantity, "system") == UCUM
            unit = text(quantity, "code") if is_ucum else ""
            return coded_reading(known, _plain(text(quantity, "value")), unit, is_ucum=is_ucum)
        concept = child(part, "valueCodeableConcept")
        for name in ("valueString", "valueDateTime", "valueInteger", "valueBoolean"):
            if name in part:
                return _worded(known, part, name)
        if concept:
            codes = [text(c, "code") for c in objects(concept, "coding") if text(c, "system") == LOCAL_SYSTEM]
            return read_value(known, (codes or [text(concept, "text") or _name({"code": concept})])[0])
        absent = child(part, "dataAbsentReason")
        why = text(next(objects(absent, "coding"), {}), "code") or text(absent, "text")
        self._aside.put(number, f"{where} value".strip(), why,
                        Message("result.no_value", {"channel": known.key, "why": why[:80]}))  # fmt: skip
        return None

    def _take_samples(self, about: _About, part: Json, known: Channel) -> None:
        unit, t, v, decimals = sampled_points(child(part, "valueSampledData"), known, about.at)
        lines = np.full(t.size, about.found.number, np.int32)
        self._spool.add(about.episode, known, unit, "", t, v, lines, decimals)


def _components(resource: Json) -> Iterator[tuple[str, Json]]:
    for i, part in enumerate(objects(resource, "component")):
        yield f"component[{i}]", part


def _saturation(resource: Json, meaning: Meaning) -> Meaning | None:
    """2708-6 is a pulse oximeter's among vital signs and an analyser's among laboratory results."""
    kinds = {text(c, "code") for category in objects(resource, "category") for c in objects(category, "coding")}
    if "vital-signs" in kinds:
        return Meaning("spo2")
    return meaning if "laboratory" in kinds else None


def _worded(known: Channel, part: Json, name: str) -> Reading:
    if name == "valueBoolean":
        if known.kind is not Kind.MARK or part[name] is not True:
            raise refuse("value.missing", channel=known.key, accepted="a value of its own kind")
        return read_value(known, "")
    return coded_reading(known, text(part, name), "", is_ucum=True)


def _plain(shown: str) -> str:
    """A JSON number without exponent, its digits kept."""
    from decimal import Decimal, InvalidOperation

    if "e" not in shown.lower():
        return shown
    try:
        number = Decimal(shown)
    except InvalidOperation:
        return shown
    return format(number, "f") if -40 < number.adjusted() < 40 else shown


def _name(part: Json) -> str:
    code = child(part, "code")
    coding = next(objects(code, "coding"), {})
    return text(code, "text") or text(coding, "display") or text(coding, "code")


def _performer(resource: Json) -> str:
    return text(next(objects(resource, "performer"), {}), "display")


def _extension(resource: Json, name: str) -> str:
    url = f"{LOCAL_SYSTEM}:{name}"
    return next((text(e, "valueString") for e in objects(resource, "extension") if text(e, "url") == url), "")
