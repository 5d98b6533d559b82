"""What intake says of files from other systems: codes, results, patients and times it cannot take."""

from typing import Final

TEMPLATES: Final[dict[str, str]] = {
    "code.ambiguous_saturation":
        "The code {code} does not say whether the saturation is of a gas or a pulse oximeter.",
    "code.not_ours": "The code {code}[[ ({name})]] names nothing that is kept here.",
    "fhir.modifier": "The observation carries a modifier that may change its meaning. Accepted: {accepted}.",
    "fhir.no_resource": "The file holds no FHIR resource. Accepted: {accepted}.",
    "fhir.other_resource": "{count} resource(s) of kind {kind} were passed over.",
    "gas.two_sites": "{channel:name}: one moment has values of two sites ({first}, {second}). Accepted: {accepted}.",
    "hl7.message_too_long": "The message is too long. Accepted: at most {accepted} bytes.",
    "hl7.no_message": "The file holds no HL7 v2 message. Accepted: {accepted}.",
    "hl7.not_a_result": "The message {value} is not one of results. Accepted: {accepted}.",
    "hl7.unreadable": "The message cannot be read ({detail}). Accepted: {accepted}.",
    "patient.more_than_one": "The identifier {value} names more than one patient. Accepted: {accepted}.",
    "patient.no_identifier": "The result names no patient. Accepted: {accepted}.",
    "patient.not_a_patient": "The subject is of kind {value}. Accepted: {accepted}.",
    "patient.several_episodes": "The patient {value} has several episodes: {episodes}. Accepted: {accepted}.",
    "patient.unknown": "No episode belongs to the patient {value}. Accepted: {accepted}.",
    "result.no_value": "The result[[ of {channel:name}]] has no value[[: {why}]].",
    "result.not_yet": "The result[[ of {channel:name}]] is not there yet.",
    "result.nothing_to_withdraw": "The result[[ of {channel:name}]] was withdrawn, but nothing of it is kept here.",
    "result.preliminary": "The result[[ of {channel:name}]] is preliminary.",
    "result.status_unknown": "The status '{value}' is not known. Accepted: {accepted}.",
    "sampled.unreadable": "The sampled values of {channel:name} cannot be read. Accepted: {accepted}.",
    "time.date_only": "'{value}' is a date without a time. Accepted: {accepted}.",
    "time.needs_zone": "The time '{value}' needs its zone. Accepted: {accepted}.",
    "time.none": "The result has no time. Accepted: {accepted}.",
    "time.not_a_moment": "'{value}' is no moment. Accepted: {accepted}.",
    "time.of_panel": "The time is that of the whole panel.",
    "time.start_of_span": "The time is the start of a span ({start} to {end}).",
    "unit.missing": "{channel:name}[[ {value}]] has no unit. Accepted: {accepted}.",
    "value.comparator": "{channel:name} '{value}' is a bound and no number. Accepted: {accepted}.",
}
