"""Every dialog of the window, brought up as a person would see it: for pictures, and for tests that walk them all.

Nothing here records anything: what is typed are invented samples, and every dialog is left again.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator
from pathlib import Path
from typing import TYPE_CHECKING, Final

from PySide6.QtWidgets import QApplication, QDialog

if TYPE_CHECKING:
    from app.window.main import MainWindow

BY_ACTION: Final = (
    ("explain", "explain"), ("panels", "panels"), ("new-episode", "new_episode"), ("correct", "correct"),
    ("device-span", "device_span"), ("policy", "policy"), ("table", "table"), ("help", "help"), ("about", "about"),
    ("settings-form", "settings_form"), ("gas-form", "gas_form"), ("vitals-form", "vitals_form"),
    ("facts-form", "facts_form"), ("end-support", "end_episode"), ("settle-flag", "settle_flag"),
    ("close-due", "close_due"), ("problem-report", "report_problem"), ("export", "export_values"),
    ("files-taken", "taken"), ("people", "people"), ("archive", "archive"), ("backups", "backups"),
    ("restore", "restore"), ("salvage", "salvage"), ("key-file", "key_file"), ("close-handover", "close_handover"),
    ("closed-handovers", "closed_handovers"), ("print-preview", "print_handover"),
)  # fmt: skip
"""Name of the picture, and the action that brings the dialog up."""

TABLE_FILE: Final = "Date;Time;pH;pCO2\n27-03-2026;23:40;7,26;9,1\n28-03-2026;01:05;7,27;8,9\n"
LOG_FILE: Final = (
    "episode,at,channel,value,unit,by,note\n"
    "Bed 11,2026-03-28T04:00:00+00:00,rr,26,/min,AB,\n"
    "Bed 11,2026-03-28T04:00:00+00:00,spo2,191,%,AB,\n"
)
_CODE: Final = "4F7K-92QM-TX3B-HW8D"


def dialogs(window: MainWindow, scratch: Path, settle: Callable[[], None]) -> Iterator[tuple[str, QDialog]]:
    """(name, dialog on show), one after the other; the caller leaves each before it asks for the next.

    `scratch`: a folder for two sample files. `settle` waits until the window has its answers.
    """
    for name, key in BY_ACTION:
        window.actions_by_key[key].trigger()
        settle()
        dialog = on_show(window)
        if dialog is not None:
            yield name, dialog
    for name, make in _made(window, scratch).items():
        made = make()
        made.open()
        settle()
        yield name, made


def on_show(window: MainWindow) -> QDialog | None:
    """The dialog that stands in front."""
    front = QApplication.activeModalWidget()
    if isinstance(front, QDialog):
        return front
    return next((w for w in window.findChildren(QDialog) if w.isVisible()), None)


def _made(window: MainWindow, scratch: Path) -> dict[str, Callable[[], QDialog]]:
    """Dialogs that stand behind a question of the system, such as which file, or behind a lock."""
    return {**_of_files(window, scratch), **_of_people(window), **_of_secrets(window)}


def _of_files(window: MainWindow, scratch: Path) -> dict[str, Callable[[], QDialog]]:
    from app.dialogs.intake import IntakeDialog
    from app.dialogs.policy_file import PolicyFileDialog
    from app.intake_window.mapping_dialog import MappingDialog
    from core.judgement.policy import shipped_text

    table, log = scratch / "gases.csv", scratch / "vitals.csv"
    table.write_text(TABLE_FILE, "utf-8")
    log.write_text(LOG_FILE, "utf-8")
    model, reader, theme = window.doers.file.model, window.reader, window.theme
    shipped = shipped_text()
    other = shipped.replace("severe_below_ph = { value = 7.25", "severe_below_ph = { value = 7.20")
    return {
        "take-in": lambda: IntakeDialog(model, log, reader, theme, window),
        "mapping": lambda: MappingDialog(model, table, reader, theme, window),
        "policy-file": lambda: PolicyFileDialog(
            scratch / "policy.toml", other, shipped, reader, lambda _text: None, theme, window
        ),
    }


def _of_people(window: MainWindow) -> dict[str, Callable[[], QDialog]]:
    from app.dialogs.action_finder import ActionFinder
    from app.dialogs.first_lead import FirstLeadDialog
    from app.dialogs.pin_by_code import PinByCodeDialog
    from app.dialogs.sign_in import SignInDialog

    model, reader, theme = window.doers.file.model, window.reader, window.theme
    return {
        "find-action": lambda: ActionFinder(window.actions_by_key, theme, window),
        "sign-in": lambda: SignInDialog(model.session.person, theme, window),
        "first-lead": lambda: FirstLeadDialog(model, model.session.person, reader, theme, window),
        "pin-by-code": lambda: PinByCodeDialog(model, model.session.person, reader, theme, window),
    }


def _of_secrets(window: MainWindow) -> dict[str, Callable[[], QDialog]]:
    from app.dialogs import passphrase
    from app.dialogs.second_passphrase import SecondPassphraseDialog

    model, reader, theme, name = window.doers.file.model, window.reader, window.theme, "ward.luffmark"
    return {
        "new-store": lambda: passphrase.NewStoreDialog(name, theme, window),
        "open-store": lambda: passphrase.OpenStoreDialog(name, "", theme, window),
        "change-passphrase": lambda: passphrase.ChangePassphraseDialog(lambda *_: None, theme, window),
        "second-passphrase": lambda: SecondPassphraseDialog(model, reader, theme, window),
        "recovery-code": lambda: passphrase.RecoveryCodeDialog(name, _CODE, theme, window),
    }
