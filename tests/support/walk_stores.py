"""Stores and files that a random walk finds: plain ones, one with a passphrase, one whose people sign in."""

from __future__ import annotations

from collections.abc import Callable
from functools import partial
from pathlib import Path
from random import Random
from typing import TYPE_CHECKING, Final

from PySide6.QtWidgets import QApplication

from app.operations import entry, episode, panel, people, policy
from app.window.screen_dialogs import LOG_FILE, TABLE_FILE
from core.judgement.policy import shipped_text
from storage import keys as store_keys
from storage import people as store_people
from storage.keys import Cost
from storage.store import Store
from tests.support.open_window import NOW, ZONE, make_store
from tests.support.walk_watch import front_dialog

if TYPE_CHECKING:
    from tests.support.random_walk import Walker

SECRET, PIN = "four quiet boats tonight", "2580"
CHEAP: Final = Cost(64, 1, 1)
HOUR: Final = 3_600_000_000
BUSY_S: Final = 0.3
COTS = {"cot-1": ("Cot 1", ("22:10 ph 7.21 paco2 80 pao2 55", "22:30 bpap-st 16/6 35", "05:00 rr 33 spo2 86")),
        "cot-2": ("Cot 2", ("23:00 cpap 8 40", "05:00 rr 22 spo2 94"))}  # fmt: skip


def make_secrets_cheap() -> None:
    """What is slow on purpose is quick here."""
    Store.create.__func__.__kwdefaults__["cost"] = CHEAP  # type: ignore[attr-defined]
    Store.open.__func__.__kwdefaults__["busy_seconds"] = BUSY_S  # type: ignore[attr-defined]
    for name in ("new_key", "change_passphrase", "change_recovery_code", "change_second"):
        getattr(store_keys, name).__defaults__ = (CHEAP,)
    store_people.hashed.__defaults__ = (CHEAP,)


class Files:
    """Every file that a walk may meet, in one folder."""

    def __init__(self, folder: Path) -> None:
        self.folder = folder
        (folder / "out").mkdir()
        (folder / "way").symlink_to(folder)
        self.plain = make_store(folder / "ward.luffmark")
        self.other = _cots(folder / "cots.luffmark", None)
        self.secret = _cots(folder / "secret.luffmark", SECRET)
        self.signed = _cots(folder / "signed.luffmark", None)
        with Store.open(self.signed) as store:
            people.add(store, "AB", NOW - HOUR, people.NewPerson("AB", PIN, store_people.LEAD))
        self.broken = folder / "broken.luffmark"
        self.broken.write_bytes(b"no store at all" * 100)
        self.stores = [self.plain, self.other, self.secret, self.signed, self.broken, folder / "gone.luffmark"]
        self.readable = self._readable()

    def _readable(self) -> list[Path]:
        shipped = shipped_text()
        other = shipped.replace("severe_below_ph = { value = 7.25", "severe_below_ph = { value = 7.20")
        log = LOG_FILE.replace("Bed 11", "bed-7").replace(",191,", ",91,")
        texts = {"vitals.csv": LOG_FILE, "log.csv": log, "gases.csv": TABLE_FILE, "policy.toml": other,
                 "wrong.toml": "a = 1", "empty.csv": "", "garbage.bin": "\x00\x01 nothing"}  # fmt: skip
        for name, text in texts.items():
            (self.folder / name).write_text(text, "utf-8")
        return [*(self.folder / name for name in texts), self.folder / "not-there.csv"]

    def secret_of(self, path: Path) -> str | None:
        """What opens a store as another connection."""
        return SECRET if path.name == self.secret.name else None

    def as_others_name_it(self, path: Path) -> Path:
        """The same file by another way: what this program keeps of a store it opened is not the other program's."""
        return self.folder / "way" / path.name if path.parent == self.folder else path


def _cots(path: Path, secret: str | None) -> Path:
    with Store.create(path, passphrase=secret, now=NOW - 12 * HOUR, by="AB", cost=CHEAP) as store:
        for key, (label, lines) in COTS.items():
            facts = {"label": label, "indication": "copd", "location": "Annexe"}
            episode.begin(store, "AB", NOW - 8 * HOUR, episode.BeginRequest(key, facts, zone=ZONE))
            for line in lines:
                entry.log_line(store, "AB", NOW, entry.LineRequest(key, line, ZONE, confirmed=True))
    return path


# what is done with them


def opens_store(walker: Walker, chance: Random) -> str:
    """Another store, while whatever is open is open: as the list of recent ones does it."""
    if front_dialog() is not None:
        return "open: not now"
    path = chance.choice(walker.files.stores)
    walker.say(f"opens {path.name}")
    walker.opens(path)
    return ""


def leaves_store(walker: Walker, chance: Random) -> str:
    """The window is closed and opened again, by the user or by a signal, which leaves dialogs first."""
    by_signal = chance.random() < 0.5
    if front_dialog() is not None and not by_signal:
        return "close: not now"
    walker.say(f"closes the window{' as on a signal' if by_signal else ''} and starts anew")
    for dialog in QApplication.topLevelWidgets():
        if by_signal and dialog.isModal() and dialog is not walker.window:
            dialog.close()
    walker.starts_anew()
    walker.opens(chance.choice((walker.files.plain, walker.files.other)))
    return ""


def opens_sample(walker: Walker, _chance: Random) -> str:
    """The invented night."""
    if front_dialog() is not None or walker.window.keeping.lock.is_locked:
        return "sample: not now"
    walker.say("opens the sample shift")
    walker.window.doers.file.do_sample_shift()
    return ""


def takes_in(walker: Walker, chance: Random) -> str:
    """A file, or two in turn; the dialogs that come are left to other steps."""
    if front_dialog() is not None or not walker.window.actions_by_key["take_in"].isEnabled():
        return "take in: not now"
    readable = [p for p in walker.files.readable if p.suffix == ".csv" and p.exists()]
    paths = chance.sample(readable, chance.choice((1, 2)))
    walker.say(f"takes in {[p.name for p in paths]}")
    walker.window.doers.file.take_in(*paths)
    return ""


def others_begin(walker: Walker, chance: Random) -> str:
    """Another program begins an episode, withdraws its beginning, or lays out panels."""
    if walker.window.model is None or walker.window.feed is None:
        return "other: no store"
    key = f"new-{chance.randrange(4)}"
    take_back = chance.random() < 0.5
    walker.say(f"another program {'withdraws all of' if take_back else 'begins'} {key}")
    walker.beside(partial(_take_back if take_back else _begin, key))
    return ""


def _begin(key: str, store: Store, now: int) -> None:
    facts = {"label": f"Bed {key}", "indication": "copd"}
    episode.begin(store, "ZZ", now, episode.BeginRequest(key, facts, zone=ZONE))
    entry.log_line(store, "ZZ", now, entry.LineRequest(key, "16/6 30", ZONE, confirmed=True))


def _take_back(key: str, store: Store, now: int) -> None:
    from app.operations import correction
    from core.record.knowledge import standing

    ids = tuple(s.entry.id for s in standing(store.entries(key)))
    if ids:
        correction.undo(store, "ZZ", now, correction.UndoRequest(key, ids))


def others_care(walker: Walker, chance: Random) -> str:
    """Another program puts another policy in force, lays out panels, or adds somebody who signs in."""
    model = walker.window.model
    if model is None:
        return "other: no store"
    what = chance.choice(("policy", "policy", "panels", "panels", "people"))
    if what == "people" and model.session.store_path != walker.files.signed:
        what = "panels"
    walker.say(f"another program: {what}")
    text = chance.choice((shipped_text(), (walker.files.folder / "policy.toml").read_text("utf-8")))
    initials = f"P{chance.randrange(100)}"
    walker.beside({
        "policy": lambda store, now: policy.put(store, "ZZ", now, text),
        "panels": lambda store, now: panel.keep(store, "ZZ", now, panel.Layout("panels.copd", None)),
        "people": lambda store, now: people.add(store, "AB", now, people.NewPerson(initials, PIN)),
    }[what])  # fmt: skip
    return ""


def others_hold(walker: Walker, chance: Random) -> str:
    """Another program holds the store's write lock for a while."""
    if walker.window.model is None:
        return "hold: no store"
    walker.say("another program holds the store")
    walker.holds(chance.choice((1, 2, 4)))
    return ""


Step = Callable[["Walker", Random], str]
ALONE: Final[tuple[tuple[int, Step], ...]] = (
    (3, opens_store), (1, opens_sample), (1, leaves_store), (3, takes_in), (2, others_begin),
    (1, others_hold), (1, others_care),
)  # fmt: skip
IN_DIALOG: Final[tuple[tuple[int, Step], ...]] = (
    (1, leaves_store), (2, others_begin), (1, others_hold), (1, others_care),
)  # fmt: skip
LOCKED: Final[tuple[tuple[int, Step], ...]] = ((1, opens_store), (1, leaves_store), (1, others_begin))
NO_STORE: Final[tuple[tuple[int, Step], ...]] = ((12, opens_store), (3, opens_sample), (1, leaves_store))
