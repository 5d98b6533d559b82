"""Words about people, their PINs, and what only a ward lead may do. No PIN ever stands in a sentence."""

from typing import Final

TEMPLATES: Final[dict[str, str]] = {
    "people.bad_initials":
        "'{value}' are no initials. Accepted: letters, digits and hyphens, at most {accepted}.",
    "people.bad_pin": "That is no PIN. Accepted: {accepted}.",
    "people.bad_role": "'{value}' is no role. Accepted: {accepted}.",
    "people.exists": "{person} is in use already. Accepted: {accepted}.",
    "people.first_is_lead": "The first person of a store looks after the others. Accepted: {accepted}.",
    "people.last_lead": "{person} is the only ward lead. Accepted: {accepted}.",
    "people.lead_needed": "Only a ward lead may do that[[; {person} is none]]. Accepted: {accepted}.",
    "people.nobody": "Nobody is named who does it. Accepted: {accepted}.",
    "people.pin_needed": "People of this store sign in with a PIN. Name who does it (--by) and give the PIN "
        "(--pin-fd N).",
    "people.unknown": "'{value}' is not one of the people of this store. Accepted: {accepted}.",
    "people.wait": "Too many wrong PINs for {person}. Wait {seconds:0} s and try again.",
    "people.wait_counted": "Too many wrong PINs for {person}. Wait {seconds} s and try again.",
    "people.weak_pin": "That PIN is guessed first. Accepted: {accepted}.",
    "people.wrong_code": "That is not the recovery code. Accepted: {accepted}.",
    "people.wrong_pin": "The PIN of {person} is wrong.",
}  # fmt: skip
