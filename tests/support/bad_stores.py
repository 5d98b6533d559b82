"""Bad stores and bad backups, one at a time: opened or refused in words, whole or not at all, nothing left behind."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path

from core.record.message import RecordError
from storage.keys import envelope_path
from storage.salvage import salvage
from storage.store import Store, StoreError
from tests.support.flips import CHEAP, NOW, SECRET, filled, read_all
from tests.support.mutations import Edit, changed


class _Bad:
    """A sound store, and the place where changed copies of it lie one after the other, in a folder of their own."""

    def __init__(self, folder: Path, *, encrypted: bool) -> None:
        self.source = filled(folder / "sound.luff", encrypted=encrypted)
        self.secret = SECRET if encrypted else None
        self.sound = self.source.read_bytes()
        self.envelope = envelope_path(self.source).read_bytes() if encrypted else b""
        self.path = folder / "bad" / "a.luff"
        self.path.parent.mkdir()

    def write(self, data: bytes, envelope: bytes | None = None) -> None:
        """Lay a copy there, with its key file where it has one: the sound one unless another is given."""
        self.path.write_bytes(data)
        if self.envelope:
            envelope_path(self.path).write_bytes(self.envelope if envelope is None else envelope)


def opening(folder: Path, *, encrypted: bool, key_too: bool = False) -> Callable[[list[Edit]], str]:
    """Opens a changed store (or one whose key file is changed), reads and verifies it."""
    bad = _Bad(folder, encrypted=encrypted)
    path = bad.path

    def tried(made: list[Edit]) -> str:
        data = bad.sound if key_too else changed(bad.sound, made)
        bad.write(data, changed(bad.envelope, made) if key_too else bad.envelope)
        try:
            with Store.open(path, passphrase=SECRET) as store:
                sound_still = not store.verify()
                read_all(store)
            ended = "opened" if sound_still else "opened and found by verify"
        except (StoreError, RecordError):
            ended = "refused"
            assert path.read_bytes() == data, "a refused file was written to"
        finally:
            clear(path.parent)
        return ended

    return tried


def restoring(folder: Path, *, encrypted: bool) -> Callable[[list[Edit]], str]:
    """Restores a changed backup: the new store says what was recorded, or there is none."""
    bad = _Bad(folder, encrypted=encrypted)
    path, secret = bad.path, bad.secret
    with Store.open(bad.source, passphrase=secret) as store:
        truth = read_all(store)

    def tried(made: list[Edit]) -> str:
        bad.write(changed(bad.sound, made))
        before = {p.name for p in path.parent.iterdir()}
        new = path.with_name("new.luff")
        try:
            Store.restore(path, new, passphrase=secret)
            with Store.open(new, passphrase=secret) as store:
                assert read_all(store)[:4] == truth[:4], "restored to something else"
            ended = "restored"
        except (StoreError, RecordError):
            assert {p.name for p in path.parent.iterdir()} == before, "a refused restore left something"
            ended = "refused"
        finally:
            clear(path.parent)
        return ended

    return tried


def salvaging(folder: Path, *, encrypted: bool) -> Callable[[list[Edit]], str]:
    """Salvages a changed store: what is not marked doubtful was recorded, and the new store is sound."""
    bad = _Bad(folder, encrypted=encrypted)
    path, secret = bad.path, bad.secret
    with Store.open(bad.source, passphrase=secret) as store:
        truth = {
            e.id: (e.episode, e.channel, e.number, e.note) for k in store.episode_keys() for e in store.entries(k)
        }

    def tried(made: list[Edit]) -> str:
        bad.write(changed(bad.sound, made))
        before = {p.name: p.read_bytes() for p in path.parent.iterdir()}
        new = path.with_name("new.luff")
        try:
            salvage(path, new, secret, by="AB", now=NOW, cost=CHEAP)
            with Store.open(new, passphrase=secret) as store:
                assert store.verify() == ()
                for key in store.episode_keys():
                    for e in store.entries(key):
                        assert e.doubt or truth[e.id] == (e.episode, e.channel, e.number, e.note), "made up"
            ended = "saved"
        except (StoreError, RecordError):
            assert not new.exists(), "a refused salvage left something"
            ended = "refused"
        finally:
            assert all((path.parent / n).read_bytes() == data for n, data in before.items()), "the old one changed"
            clear(path.parent)
        return ended

    return tried


def clear(folder: Path) -> None:
    """Empty a folder."""
    for left in folder.iterdir():
        left.unlink()
