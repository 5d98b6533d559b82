"""What a file of FHIR holds: its observations, and how references among its resources are followed."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass, field

from storage.codes import LOCAL_EPISODE
from storage.intake.fhir_json import Json, child, objects, text
from storage.intake.patients import identifier_text

_SPECIMENS = {"BLDA": "arterial", "BLDV": "venous", "BLDC": "capillary"}
"""Codes of HL7 table 0487, which FHIR uses for kinds of specimen."""
_MOST_NESTED = 8


@dataclass(frozen=True, slots=True)
class Found:
    """One resource with its number in the file (from 1) and the address its bundle gives it."""

    number: int
    resource: Json
    url: str = ""
    container: Json | None = None


@dataclass(slots=True)
class Holdings:
    """All resources of a file, by reference."""

    observations: list[Found] = field(default_factory=list)
    others: list[Found] = field(default_factory=list)
    by_reference: dict[str, Json] = field(default_factory=dict)
    panel_times: dict[str, Json] = field(default_factory=dict)

    @classmethod
    def of(cls, resources: list[Json]) -> Holdings:
        """Sort the resources of a file; bundles and contained resources are opened."""
        made = cls()
        for number, (resource, url, container) in enumerate(_flat(resources), 1):
            found = Found(number, resource, url, container)
            kind = text(resource, "resourceType")
            for reference in (url, f"{kind}/{text(resource, 'id')}"):
                if reference.strip("/"):
                    made.by_reference.setdefault(reference, resource)
            (made.observations if kind == "Observation" else made.others).append(found)
        for found in made.observations:
            for member in objects(found.resource, "hasMember"):
                made.panel_times.setdefault(text(member, "reference"), found.resource)
        return made

    def followed(self, reference: str, container: Json) -> Json | None:
        """The resource a reference names, inside its container (`#id`) or in the file."""
        if reference.startswith("#"):
            return next((r for r in objects(container, "contained") if text(r, "id") == reference[1:]), None)
        found = self.by_reference.get(reference)
        if found is None and "/" in reference:
            found = self.by_reference.get("/".join(reference.rsplit("/", 2)[-2:]))
        return found

    def panel_of(self, found: Found) -> Json | None:
        """The observation that names this one as its member."""
        own = text(found.resource, "id")
        for reference in (found.url, f"Observation/{own}", f"#{own}"):
            if reference and reference in self.panel_times:
                return self.panel_times[reference]
        return None

    def members_elsewhere(self, observation: Json) -> int:
        """How many members a panel names that are not in the file."""
        references = [text(m, "reference") for m in objects(observation, "hasMember")]
        return sum(self.followed(r, observation) is None for r in references)

    def identifiers(self, observation: Json) -> tuple[list[str], str]:
        """The identifiers of an observation's subject, and the kind of resource the subject is."""
        subject = child(observation, "subject")
        given = child(subject, "identifier")
        found = [identifier_text(text(given, "system"), text(given, "value"))] if text(given, "value") else []
        reference = text(subject, "reference")
        kind = reference.rsplit("/", 2)[-2] if "/" in reference and ":" not in reference.split("/")[-2] else "Patient"
        patient = self.followed(reference, observation) if reference else None
        if patient is not None:
            kind = text(patient, "resourceType")
            found += [identifier_text(text(i, "system"), text(i, "value"))
                      for i in objects(patient, "identifier") if text(i, "value")]  # fmt: skip
        if reference and not reference.startswith("#"):
            found.append(reference)
        return found, kind

    def own_episode(self, observation: Json) -> str:
        """The episode that an export of ours names as the subject; empty elsewhere."""
        given = child(child(observation, "subject"), "identifier")
        return text(given, "value") if text(given, "system") == LOCAL_EPISODE else ""

    def site(self, observation: Json) -> str:
        """The sample site by the observation's specimen; empty where it does not say."""
        specimen = self.followed(text(child(observation, "specimen"), "reference"), observation)
        for coding in objects(child(specimen, "type"), "coding"):
            if text(coding, "code") in _SPECIMENS:
                return _SPECIMENS[text(coding, "code")]
        return ""


def _flat(resources: list[Json]) -> Iterator[tuple[Json, str, Json | None]]:
    """Every resource of the file, in its order, with its address; a contained one with its container."""
    waiting: list[tuple[Json, str, Json | None, int]] = [(r, "", None, 0) for r in reversed(resources)]
    while waiting:
        resource, url, container, depth = waiting.pop()
        inner: list[tuple[Json, str, Json | None, int]] = []
        if text(resource, "resourceType") == "Bundle":
            for entry in objects(resource, "entry"):
                if child(entry, "resource"):
                    inner.append((child(entry, "resource"), text(entry, "fullUrl"), None, depth + 1))
        else:
            yield resource, url, container
            kept = [r for r in objects(resource, "contained") if text(r, "resourceType") == "Observation"]
            inner = [(r, "", resource, depth + 1) for r in kept]
        if depth < _MOST_NESTED:
            waiting += reversed(inner)
