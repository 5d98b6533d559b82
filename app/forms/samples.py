"""What is typed into forms for their pictures: invented values, never recorded."""

from __future__ import annotations

from PySide6.QtWidgets import QDialog

_GAS = {"ph": "7.30", "paco2": "66", "pao2": "60", "hco3": "25.5", "gas_fio2": "35"}
_LABEL = "Bed 11"
_VITALS = {"rr": "28", "spo2": "90", "hr": "112", "gcs": "13"}


def fill(dialog: QDialog) -> None:
    """Type a sample into a form; any other dialog is left as it is."""
    from app.forms.begin_form import BeginForm
    from app.forms.end_form import EndForm
    from app.forms.gas_form import GasForm
    from app.forms.settings_form import SettingsForm
    from app.forms.vitals_form import VitalsForm

    if isinstance(dialog, SettingsForm):
        dialog.fields["ipap"].box.stepBy(2)
    elif isinstance(dialog, GasForm):
        dialog.gas.site.choose("arterial")
        dialog.gas.pressure_unit.choose("mmHg")
        for key, text in _GAS.items():
            dialog.gas.fields[key].set_text(text)
        dialog.edited()
    elif isinstance(dialog, VitalsForm):
        for key, text in _VITALS.items():
            dialog.fields[key].set_text(text)
        dialog.rows["acvpu"].choose("confusion")
        dialog.edited()
    elif isinstance(dialog, EndForm):
        dialog.reason.choose("weaned")
        dialog.edited()
    elif isinstance(dialog, BeginForm):
        dialog.words["label"].setText(_LABEL)
        dialog.indication.setCurrentIndex(dialog.indication.findData("copd"))
        dialog.edited()
