"""What is found in files of results and tables: why a value is refused, set aside or doubtful, and what to do."""

from typing import Final

RESULTS: Final[dict[str, str]] = {
    "code.ambiguous_saturation":
        "Code {code} does not say whether a pulse oximeter or an analyser measured the saturation: left aside.",
    "code.not_ours": "Code {code}[[ ({name})]] is no quantity of this log: it was left aside.",
    "code.not_wanted": "Code {code}[[ ({name})]] is not wanted here, as somebody has said: it was left aside.",
    "fhir.members_elsewhere": "{count} member(s) of this panel are not in the file: they were left aside.",
    "fhir.modifier": "The observation carries marks that change its meaning. Accepted: {accepted}.",
    "fhir.no_resource": "This is no FHIR resource. Accepted: {accepted}.",
    "fhir.other_resource": "{count} resource(s) of kind {kind} are no observations: they were left aside.",
    "gas.two_sites": "{channel:name} was measured in a {second} sample, others of that moment in a {first} one. "
        "Accepted: {accepted}.",
    "hl7.message_too_long": "A message has no end within {accepted} bytes.",
    "hl7.too_many_fields": "A message has more than {accepted} fields: that is no message of results.",
    "hl7.no_message": "This is no HL7 v2 message. Accepted: {accepted}.",
    "hl7.not_a_result": "A message of kind '{value}' holds no results. Accepted: {accepted}.",
    "hl7.unreadable": "The message cannot be cut into segments ({detail}). Accepted: {accepted}.",
    "json.double_key": "A key stands twice in one object. Accepted: {accepted}.",
    "json.no_number": "This is no number of JSON. Accepted: {accepted}.",
    "json.too_deep": "The JSON is nested too deep to be a resource. Accepted: {accepted}.",
    "json.too_many_values":
        "The JSON holds more values than can be read at once. Accepted: what takes {accepted} MB of memory; send it "
        "in parts.",
    "json.unreadable": "The JSON cannot be read: {detail}. Accepted: {accepted}.",
    "patient.more_than_one":
        "The file holds more than one patient[[ ({value})]]: one episode cannot stand for all. Accepted: {accepted}.",
    "patient.no_identifier": "The result names no patient. Accepted: {accepted}.",
    "patient.not_a_patient": "The subject is of kind {value}. Accepted: {accepted}.",
    "patient.several_episodes":
        "The patient {value} has several episodes here: {episodes}. Accepted: {accepted}.",
    "patient.unknown": "It is not known which episode the patient {value} belongs to. Accepted: {accepted}.",
    "result.no_value": "{channel:name} was sent without a value[[ ({why})]]: it was left aside.",
    "result.not_yet": "[[{channel:name}: ]]the result is not there yet: it was left aside.",
    "result.nothing_to_withdraw":
        "{channel:name} was called back (status {status}), but it had not been taken in: nothing to withdraw.",
    "result.preliminary": "[[{channel:name}: ]]the result is preliminary; a final one may differ.",
    "result.status_unknown": "'{value}' is no status of a result. Accepted: {accepted}.",
    "sampled.unreadable":
        "The sampled data of {channel:name} are not of the form that is read. Accepted: {accepted}.",
    "time.date_only": "'{value}' is a date without a time of day. Accepted: {accepted}.",
    "time.needs_zone": "The time '{value}' has no offset, and no time zone was named. Accepted: {accepted}.",
    "time.none": "No time of observation is given. Accepted: {accepted}.",
    "time.not_a_moment": "'{value}' is no moment. Accepted: {accepted}.",
    "time.of_panel": "It has no time of its own: that of its panel was taken.",
    "time.start_of_span": "It was observed from {start} to {end}: the start was taken.",
    "unit.missing": "{channel:name} {value} has no unit. Accepted: {accepted}.",
    "value.comparator": "{channel:name} {value} is a limit and no value. Accepted: {accepted}.",
}  # fmt: skip

TEMPLATES: Final[dict[str, str]] = RESULTS
