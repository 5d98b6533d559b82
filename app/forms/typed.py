"""What stands in a form's fields, by names that outlive the program: kept as a draft, and put back."""

from __future__ import annotations

from collections.abc import Iterator, Mapping

from PySide6.QtWidgets import QComboBox, QLineEdit, QWidget

from app.forms.answer_row import AnswerRow
from app.forms.number_field import NumberField

Field = QLineEdit | QComboBox | NumberField | AnswerRow
_CHOSEN_FIRST = (AnswerRow, QComboBox)
"""A unit or a mode says what the numbers beside it mean, and which there are."""


def fields_of(owner: QWidget, prefix: str = "") -> dict[str, Field]:
    """Every field of a form and of the parts it is made of, by the name of the attribute that holds it: `time`,
    `words.label`, `gas.fields.ph`. A name that a later version has not is passed over, never guessed."""
    return dict(_fields(owner, prefix))


def _fields(owner: QWidget, prefix: str) -> Iterator[tuple[str, Field]]:
    for name, value in vars(owner).items():
        if name.startswith("_") or name == "first":
            continue
        many = value.items() if isinstance(value, dict) else [("", value)]
        for key, one in many:
            path = f"{prefix}{name}.{key}" if key else f"{prefix}{name}"
            held = one if isinstance(one, QWidget) else getattr(one, "widget", None)
            if isinstance(held, Field):
                yield path, held
            elif isinstance(one, QWidget) and not key and type(one).__module__.startswith("app.forms"):
                yield from _fields(one, f"{path}.")


def read(field: Field) -> str:
    """What a person put there; "" for nothing."""
    if isinstance(field, NumberField | QLineEdit):
        return field.text if isinstance(field, NumberField) else field.text()
    return field.key if isinstance(field, AnswerRow) else str(field.currentData() or "")


def put(fields: Mapping[str, Field], typed: Mapping[str, str]) -> None:
    """Put texts back, as if they were typed: what hangs on a field follows it."""
    there = [(fields[name], text) for name, text in typed.items() if name in fields]
    for field, text in sorted(there, key=lambda pair: not isinstance(pair[0], _CHOSEN_FIRST)):
        _put(field, text)


def _put(field: Field, text: str) -> None:
    if isinstance(field, NumberField):
        field.set_text(text)
        field.edited.emit()
    elif isinstance(field, QLineEdit):
        field.setText(text)
        field.textEdited.emit(text)
    elif isinstance(field, AnswerRow):
        if text in field.buttons or not text:
            field.choose(text)
            field.chosen.emit()
    elif (index := field.findData(text)) >= 0:
        field.setCurrentIndex(index)
        field.activated.emit(index)
