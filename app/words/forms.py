"""What forms say while they are filled in."""

from typing import Final

TEMPLATES: Final[dict[str, str]] = {
    "form.bicarbonate_difference":
        "The reported bicarbonate differs by {difference:+1} mmol/L (accepted: within {within:trim}).",
    "form.calculated_bicarbonate": "pH and PaCO2 make a bicarbonate of {calculated:1} mmol/L.",
    "form.contraindicated": "Speaks against support absolutely: {items}. Begin all the same?",
    "form.relative": "Speaks against support relatively: {items}.",
    "form.standard_not_checked": "Bicarbonate is standard by the ward's setting, so it is not checked.",
}  # fmt: skip
