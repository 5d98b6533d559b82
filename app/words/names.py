"""Names of markers, groups of flags, due items and levers, as they stand in a list or a heading."""

from typing import Final

TEMPLATES: Final[dict[str, str]] = {
    "due_item.gas": "blood gas",
    "group.acidosis": "acidosis",
    "marker.ph_below_severe": "pH below 7.25",
}
