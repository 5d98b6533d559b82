"""The table of actions: each with its key, menu, name, shortcuts and help. Nothing else stands here."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING, Final

if TYPE_CHECKING:

    def QT_TRANSLATE_NOOP(context: str, text: str) -> str:  # the stub says object
        """Mark a text for translation and give it back."""

else:
    from PySide6.QtCore import QT_TRANSLATE_NOOP


@dataclass(frozen=True, slots=True)
class Deed:
    """One action. `keys` in Qt's portable spelling; the first stands in the menu. `needs_episode`: greyed
    where no episode is selected; `needs_store`: greyed before a store is open."""

    key: str
    menu: str
    name: str
    keys: tuple[str, ...]
    help: str
    needs_episode: bool = False
    needs_store: bool = True
    checkable: bool = False
    parted: bool = False
    """A line stands above it in the menu."""

    @property
    def records(self) -> bool:
        """Whether it writes into the record; greyed while the past is looked at."""
        also = ("take_in", "taken", "close_handover")
        return (self.menu == "log" and self.key != "focus_strip") or self.key in also

    @property
    def slot(self) -> str:
        """The method that carries it out."""
        return f"do_{self.key}"


MENUS: Final = (
    ("file", QT_TRANSLATE_NOOP("action", "&File")),
    ("store", QT_TRANSLATE_NOOP("action", "&Store")),
    ("log", QT_TRANSLATE_NOOP("action", "&Log")),
    ("ward", QT_TRANSLATE_NOOP("action", "&Ward")),
    ("episode", QT_TRANSLATE_NOOP("action", "&Episode")),
    ("review", QT_TRANSLATE_NOOP("action", "&Review")),
    ("view", QT_TRANSLATE_NOOP("action", "&View")),
    ("help", QT_TRANSLATE_NOOP("action", "&Help")),
)

# fmt: off
DEEDS: Final = (
    Deed("new_store", "file", QT_TRANSLATE_NOOP("action", "New store..."), ("Ctrl+Shift+N",),
         QT_TRANSLATE_NOOP("action", "Make an empty store for this ward."), needs_store=False),
    Deed("open_store", "file", QT_TRANSLATE_NOOP("action", "Open store..."), ("Ctrl+O",),
         QT_TRANSLATE_NOOP("action", "Open a store that exists."), needs_store=False),
    Deed("sample_shift", "file", QT_TRANSLATE_NOOP("action", "Open the sample shift"), ("Ctrl+Shift+D",),
         QT_TRANSLATE_NOOP("action", "Open an invented night shift in a throw-away store."), needs_store=False),
    Deed("take_in", "file", QT_TRANSLATE_NOOP("action", "Take in a file..."), ("Ctrl+T",),
         QT_TRANSLATE_NOOP("action", "Read a log file, a table or results. You see first what it holds."),
         parted=True),
    Deed("taken", "file", QT_TRANSLATE_NOOP("action", "Files taken in..."), ("Ctrl+Alt+T",),
         QT_TRANSLATE_NOOP("action", "Which files were taken in and what each brought. One can be withdrawn whole.")),
    Deed("save_handover", "file", QT_TRANSLATE_NOOP("action", "Save handover as PDF..."), ("Ctrl+P",),
         QT_TRANSLATE_NOOP("action", "Write the handover sheet of this shift as a PDF.")),
    Deed("save_picture", "file", QT_TRANSLATE_NOOP("action", "Save picture of this page..."), ("Ctrl+Shift+S",),
         QT_TRANSLATE_NOOP("action", "Draw what the page shows as PDF, SVG or PNG, at print size.")),
    Deed("sign_in", "file", QT_TRANSLATE_NOOP("action", "Change person..."), ("Ctrl+I",),
         QT_TRANSLATE_NOOP("action", "Say by initials who is logging from now on."), parted=True),
    Deed("quit", "file", QT_TRANSLATE_NOOP("action", "Quit"), ("Ctrl+Q",),
         QT_TRANSLATE_NOOP("action", "Close the window. Everything logged is already kept."), needs_store=False),
    Deed("lock", "store", QT_TRANSLATE_NOOP("action", "Lock"), ("Ctrl+Shift+X",),
         QT_TRANSLATE_NOOP("action", "Hide every screen now. What is being typed is kept.")),
    Deed("lock_after", "store", QT_TRANSLATE_NOOP("action", "Lock after..."), ("Ctrl+Shift+I",),
         QT_TRANSLATE_NOOP("action", "After how many minutes without key or mouse the window locks, or only hides."),
         needs_store=False),
    Deed("backups", "store", QT_TRANSLATE_NOOP("action", "Backups..."), ("Ctrl+Shift+A",),
         QT_TRANSLATE_NOOP("action", "The backups taken by the hour, where they lie, one more now."), parted=True),
    Deed("restore", "store", QT_TRANSLATE_NOOP("action", "Restore a backup..."), ("Ctrl+Shift+R",),
         QT_TRANSLATE_NOOP("action", "Make a new store of a backup, and list what the old one holds beyond it."),
         needs_store=False),
    Deed("check_store", "store", QT_TRANSLATE_NOOP("action", "Check this store"), ("Ctrl+Shift+V",),
         QT_TRANSLATE_NOOP("action", "Pages, chain, safeguards and rules; every finding in a sentence.")),
    Deed("salvage", "store", QT_TRANSLATE_NOOP("action", "Save from a damaged store..."), ("Ctrl+Shift+G",),
         QT_TRANSLATE_NOOP("action", "Read what is left of a damaged file into a new store; what was lost is said."),
         needs_store=False),
    Deed("key_file", "store", QT_TRANSLATE_NOOP("action", "Put a key file back..."), ("Ctrl+Alt+K",),
         QT_TRANSLATE_NOOP("action", "Where the key file beside a store was altered or lost: that of a backup, tried "
                           "first."), needs_store=False),
    Deed("people", "store", QT_TRANSLATE_NOOP("action", "People..."), ("Ctrl+Shift+P",),
         QT_TRANSLATE_NOOP("action", "Who signs in with a PIN: add, retire, give a new PIN."), parted=True),
    Deed("archive", "store", QT_TRANSLATE_NOOP("action", "Ended episodes..."), ("Ctrl+Shift+W",),
         QT_TRANSLATE_NOOP("action", "Copy ended episodes into an archive; remove them when their time is over.")),
    Deed("change_passphrase", "store", QT_TRANSLATE_NOOP("action", "Change passphrase..."), ("Ctrl+Shift+Y",),
         QT_TRANSLATE_NOOP("action", "A new passphrase for this store, and a new recovery code if you like.")),
    Deed("second_passphrase", "store", QT_TRANSLATE_NOOP("action", "Second passphrase..."), ("Ctrl+Alt+Y",),
         QT_TRANSLATE_NOOP("action", "One that the ward lead holds, and that opens this store too.")),
    Deed("focus_strip", "log", QT_TRANSLATE_NOOP("action", "Log a line"), ("Ctrl+L", "/"),
         QT_TRANSLATE_NOOP("action", "Go to the log strip, for the selected patient."), needs_episode=True),
    Deed("gas_sent", "log", QT_TRANSLATE_NOOP("action", "Gas sent"), ("F6",),
         QT_TRANSLATE_NOOP("action", "Say that a blood gas was sent. Enter records it."),
         needs_episode=True, parted=True),
    Deed("mask", "log", QT_TRANSLATE_NOOP("action", "Mask off / on"), ("F7",),
         QT_TRANSLATE_NOOP("action", "Say that the mask came off, or went on again. Enter records it."),
         needs_episode=True),
    Deed("checked", "log", QT_TRANSLATE_NOOP("action", "Checked, no change"), ("F8",),
         QT_TRANSLATE_NOOP("action", "Say that you looked and changed nothing. Enter records it."),
         needs_episode=True),
    Deed("told", "log", QT_TRANSLATE_NOOP("action", "Told..."), ("F9",),
         QT_TRANSLATE_NOOP("action", "Say whom you told and what they answered. Enter records it."),
         needs_episode=True),
    Deed("settings_form", "log", QT_TRANSLATE_NOOP("action", "Log a settings change..."), ("F10",),
         QT_TRANSLATE_NOOP("action", "Settings in force as a form, with what a change can act on. Records only."),
         needs_episode=True, parted=True),
    Deed("gas_form", "log", QT_TRANSLATE_NOOP("action", "Blood gas..."), ("F11",),
         QT_TRANSLATE_NOOP("action", "A gas as a form that checks while you type whether it agrees with itself."),
         needs_episode=True),
    Deed("vitals_form", "log", QT_TRANSLATE_NOOP("action", "Vital signs..."), ("F12",),
         QT_TRANSLATE_NOOP("action", "Vital signs as a form, the last values beside it with their age."),
         needs_episode=True),
    Deed("facts_form", "log", QT_TRANSLATE_NOOP("action", "Patient facts..."), ("Shift+F11",),
         QT_TRANSLATE_NOOP("action", "Bed move, ceiling of care, resuscitation, targets, usual PaCO2, who answers: "
                           "what changes later, with its time."), needs_episode=True),
    Deed("flag_seen", "log", QT_TRANSLATE_NOOP("action", "Flag seen"), ("F3",),
         QT_TRANSLATE_NOOP("action", "Say that you have seen the chosen flag, else the strongest one."),
         needs_episode=True, parted=True),
    Deed("settle_flag", "log", QT_TRANSLATE_NOOP("action", "Settle flag..."), ("F4",),
         QT_TRANSLATE_NOOP("action", "Settle the chosen flag, else the strongest one, with the reason."),
         needs_episode=True),
    Deed("close_due", "log", QT_TRANSLATE_NOOP("action", "Close due item..."), ("Shift+F8",),
         QT_TRANSLATE_NOOP("action", "Say that something due is done, or not needed here and why."),
         needs_episode=True),
    Deed("new_episode", "log", QT_TRANSLATE_NOOP("action", "New episode..."), ("Ctrl+N",),
         QT_TRANSLATE_NOOP("action", "Begin an episode of support for a bed."), parted=True),
    Deed("end_episode", "log", QT_TRANSLATE_NOOP("action", "Log the end of support..."), ("Ctrl+W",),
         QT_TRANSLATE_NOOP("action", "Say that support stopped and why: weaned, escalated, ceiling, transferred, "
                           "died."), needs_episode=True),
    Deed("correct", "log", QT_TRANSLATE_NOOP("action", "Correct or withdraw..."), ("Ctrl+E",),
         QT_TRANSLATE_NOOP("action", "Correct or withdraw something logged for this patient."), needs_episode=True),
    Deed("device_span", "log", QT_TRANSLATE_NOOP("action", "Correct device samples..."), ("Ctrl+Alt+E",),
         QT_TRANSLATE_NOOP("action", "Leave out a span that a device wrote wrongly, or move it to the right time."),
         needs_episode=True),
    Deed("undo", "log", QT_TRANSLATE_NOOP("action", "Undo"), ("Ctrl+Z",),
         QT_TRANSLATE_NOOP("action", "Undo the last thing done here. The record keeps both.")),
    Deed("show_ward", "ward", QT_TRANSLATE_NOOP("action", "Ward"), ("Ctrl+1",),
         QT_TRANSLATE_NOOP("action", "All episodes along the shift's clock.")),
    Deed("show_handover", "ward", QT_TRANSLATE_NOOP("action", "Handover"), ("Ctrl+4",),
         QT_TRANSLATE_NOOP("action", "What changed this shift, who is at risk, what is due.")),
    Deed("show_compare", "ward", QT_TRANSLATE_NOOP("action", "Compare"), ("Ctrl+3",),
         QT_TRANSLATE_NOOP("action", "Episodes laid over each other by hours since start.")),
    Deed("sort_concern", "ward", QT_TRANSLATE_NOOP("action", "Sort by concern"), ("Alt+1",),
         QT_TRANSLATE_NOOP("action", "Whom to see first stands on top."), parted=True),
    Deed("sort_bed", "ward", QT_TRANSLATE_NOOP("action", "Sort by bed"), ("Alt+2",),
         QT_TRANSLATE_NOOP("action", "Lanes in the order of the beds.")),
    Deed("sort_due", "ward", QT_TRANSLATE_NOOP("action", "Sort by next due"), ("Alt+3",),
         QT_TRANSLATE_NOOP("action", "What is due first stands on top.")),
    Deed("filter_all", "ward", QT_TRANSLATE_NOOP("action", "Show all"), ("Alt+4",),
         QT_TRANSLATE_NOOP("action", "Every episode of the shift."), parted=True),
    Deed("filter_not_responding", "ward", QT_TRANSLATE_NOOP("action", "Show not responding or flagged"), ("Alt+5",),
         QT_TRANSLATE_NOOP("action", "Worse, mixed, gain lost or nothing changed; and every open flag of concern.")),
    Deed("filter_due", "ward", QT_TRANSLATE_NOOP("action", "Show due soon"), ("Alt+6",),
         QT_TRANSLATE_NOOP("action", "Only episodes with something due soon or overdue.")),
    Deed("find_episode", "ward", QT_TRANSLATE_NOOP("action", "Find an episode"), ("Ctrl+F",),
         QT_TRANSLATE_NOOP("action", "Type a part of a bed or label.")),
    Deed("show_episode", "episode", QT_TRANSLATE_NOOP("action", "Open episode"), ("Ctrl+2",),
         QT_TRANSLATE_NOOP("action", "Ribbon, panels, flags, due items and levers of the selected episode."),
         needs_episode=True),
    Deed("show_map", "episode", QT_TRANSLATE_NOOP("action", "Acid-base map"), ("Ctrl+6",),
         QT_TRANSLATE_NOOP("action", "The gases as a path over pH and PaCO2, each with its class and why."),
         needs_episode=True),
    Deed("next_episode", "episode", QT_TRANSLATE_NOOP("action", "Next episode"), ("Ctrl+Down",),
         QT_TRANSLATE_NOOP("action", "The next episode in the ward's order."), needs_episode=True),
    Deed("previous_episode", "episode", QT_TRANSLATE_NOOP("action", "Previous episode"), ("Ctrl+Up",),
         QT_TRANSLATE_NOOP("action", "The episode before it in the ward's order."), needs_episode=True),
    Deed("panels", "episode", QT_TRANSLATE_NOOP("action", "Panels..."), ("Ctrl+B",),
         QT_TRANSLATE_NOOP("action", "Add, name, fill, order and remove the panels."),
         needs_episode=True, parted=True),
    Deed("go_start", "episode", QT_TRANSLATE_NOOP("action", "Go to start"), ("Ctrl+Home",),
         QT_TRANSLATE_NOOP("action", "Show the start of support."), needs_episode=True),
    Deed("go_now", "episode", QT_TRANSLATE_NOOP("action", "Go to now"), ("Ctrl+End",),
         QT_TRANSLATE_NOOP("action", "Show the newest hours."), needs_episode=True),
    Deed("next_anchor", "episode", QT_TRANSLATE_NOOP("action", "Next change"), ("Ctrl+Shift+Right",),
         QT_TRANSLATE_NOOP("action", "Put the crosshair on the next start or settings change."),
         needs_episode=True),
    Deed("previous_anchor", "episode", QT_TRANSLATE_NOOP("action", "Previous change"), ("Ctrl+Shift+Left",),
         QT_TRANSLATE_NOOP("action", "Put the crosshair on the start or settings change before."),
         needs_episode=True),
    Deed("look_back", "review", QT_TRANSLATE_NOOP("action", "As known at..."), ("Ctrl+J",),
         QT_TRANSLATE_NOOP("action", "See every screen as the store knew it then; again to go back to now.")),
    Deed("known_before", "review", QT_TRANSLATE_NOOP("action", "Recording before"), ("Alt+Shift+Left",),
         QT_TRANSLATE_NOOP("action", "See what was known when something was last recorded before.")),
    Deed("known_after", "review", QT_TRANSLATE_NOOP("action", "Recording after"), ("Alt+Shift+Right",),
         QT_TRANSLATE_NOOP("action", "See what was known when something was next recorded.")),
    Deed("known_back", "review", QT_TRANSLATE_NOOP("action", "15 minutes back"), ("Alt+Left",),
         QT_TRANSLATE_NOOP("action", "See what was known a quarter of an hour earlier.")),
    Deed("known_forward", "review", QT_TRANSLATE_NOOP("action", "15 minutes on"), ("Alt+Right",),
         QT_TRANSLATE_NOOP("action", "See what was known a quarter of an hour later.")),
    Deed("known_live", "review", QT_TRANSLATE_NOOP("action", "Back to now"), ("Alt+Home",),
         QT_TRANSLATE_NOOP("action", "Follow the clock again, with all that is recorded.")),
    Deed("came_later", "review", QT_TRANSLATE_NOOP("action", "What came later..."), ("Ctrl+Shift+L",),
         QT_TRANSLATE_NOOP("action", "Late entries and later corrections of the moment that is looked at.")),
    Deed("show_statistics", "review", QT_TRANSLATE_NOOP("action", "Shift figures"), ("Ctrl+5",),
         QT_TRANSLATE_NOOP("action", "Starts, times, gases, hours, responses and flags of the ward over a "
                           "span."), parted=True),
    Deed("save_statistics", "review", QT_TRANSLATE_NOOP("action", "Save shift figures as CSV..."), ("Ctrl+Shift+F",),
         QT_TRANSLATE_NOOP("action", "Write the shift figures as a table that spreadsheets read.")),
    Deed("print_handover", "review", QT_TRANSLATE_NOOP("action", "Print handover..."), ("Ctrl+Alt+P",),
         QT_TRANSLATE_NOOP("action", "See the sheet as it will be printed, and print it."), parted=True),
    Deed("close_handover", "review", QT_TRANSLATE_NOOP("action", "Close handover..."), ("Ctrl+Shift+H",),
         QT_TRANSLATE_NOOP("action", "Keep this shift's sheet in the ledger as it is printed now, for good.")),
    Deed("closed_handovers", "review", QT_TRANSLATE_NOOP("action", "Closed handovers..."), ("Ctrl+Shift+O",),
         QT_TRANSLATE_NOOP("action", "Open a closed handover again, exactly as printed.")),
    Deed("blank_form", "review", QT_TRANSLATE_NOOP("action", "Blank paper form..."), ("Ctrl+Shift+B",),
         QT_TRANSLATE_NOOP("action", "The handover as a form to fill in by hand, for when machines are down."),
         needs_store=False),
    Deed("shift_times", "review", QT_TRANSLATE_NOOP("action", "Shift times..."), ("Ctrl+Shift+M",),
         QT_TRANSLATE_NOOP("action", "The times of day at which the ward's shifts begin."), needs_store=False),
    Deed("policy", "review", QT_TRANSLATE_NOOP("action", "Policy..."), ("Ctrl+Shift+J",),
         QT_TRANSLATE_NOOP("action", "Every rule with its limits, source and how sure; take in another, or save it."),
         parted=True),
    Deed("export_values", "review", QT_TRANSLATE_NOOP("action", "Export values..."), ("Ctrl+Shift+E",),
         QT_TRANSLATE_NOOP("action", "Write values as CSV: all or some, with names or de-identified."),
         parted=True),
    Deed("explain", "view", QT_TRANSLATE_NOOP("action", "Explain this"), ("F2", "?"),
         QT_TRANSLATE_NOOP("action", "Say how the selected figure, flag or verdict came about.")),
    Deed("show_figures", "view", QT_TRANSLATE_NOOP("action", "Every figure"), ("F5",),
         QT_TRANSLATE_NOOP("action", "Unfold or fold all computed figures beside the panels; F2 explains each."),
         needs_episode=True),
    Deed("table", "view", QT_TRANSLATE_NOOP("action", "As a table..."), ("Ctrl+Shift+T",),
         QT_TRANSLATE_NOOP("action", "The screen's chart as a table and in words; both can be copied.")),
    Deed("dark", "view", QT_TRANSLATE_NOOP("action", "Dark"), ("Ctrl+Shift+K",),
         QT_TRANSLATE_NOOP("action", "Dark look for the night, light look for the day."),
         needs_store=False, checkable=True, parted=True),
    Deed("text_larger", "view", QT_TRANSLATE_NOOP("action", "Larger text"), ("Ctrl++", "Ctrl+="),
         QT_TRANSLATE_NOOP("action", "Text in steps up to 200 %."), needs_store=False),
    Deed("text_smaller", "view", QT_TRANSLATE_NOOP("action", "Smaller text"), ("Ctrl+-",),
         QT_TRANSLATE_NOOP("action", "Text in steps down to 100 %."), needs_store=False),
    Deed("pressure_unit", "view", QT_TRANSLATE_NOOP("action", "Gas pressures in kPa"), ("Ctrl+Shift+U",),
         QT_TRANSLATE_NOOP("action", "Show gas pressures in kPa; unticked in mmHg."),
         needs_store=False, checkable=True),
    Deed("help", "help", QT_TRANSLATE_NOOP("action", "Help"), ("F1",),
         QT_TRANSLATE_NOOP("action", "Keys, the log strip's words, and what the shapes mean."), needs_store=False),
    Deed("find_action", "help", QT_TRANSLATE_NOOP("action", "Find an action..."), ("Ctrl+K",),
         QT_TRANSLATE_NOOP("action", "Every action by name, with its keys."), needs_store=False),
    Deed("report_problem", "help", QT_TRANSLATE_NOOP("action", "Report a problem..."), ("Ctrl+Shift+F1",),
         QT_TRANSLATE_NOOP("action", "A report to read and save, with nothing of a patient in it."),
         needs_store=False),
    Deed("about", "help", QT_TRANSLATE_NOOP("action", "About and cautions"), ("Shift+F1",),
         QT_TRANSLATE_NOOP("action", "What this tool is for, and what it is not."), needs_store=False),
)
# fmt: on
