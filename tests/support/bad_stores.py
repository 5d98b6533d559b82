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


def opening(folder: Path, *, encrypted: bool, key_too: bool = False) -> Callable[[list[Edit]], str]:
    """Opens a changed store (or one whose key file is changed), reads and verifies it."""
    sound = filled(folder / "sound.luff", encrypted=encrypted).read_bytes()
    envelope = envelope_path(folder / "sound.luff").read_bytes() if encrypted else b""
    path = folder / "bad" / "a.luff"
    path.parent.mkdir()

    def tried(made: list[Edit]) -> str:
        data = sound if key_too else changed(sound, made)
        path.write_bytes(data)
        if encrypted:
            envelope_path(path).write_bytes(changed(envelope, made) if key_too else envelope)
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
    source = filled(folder / "sound.luff", encrypted=encrypted)
    secret = SECRET if encrypted else None
    with Store.open(source, passphrase=secret) as store:
        truth = read_all(store)
    sound = source.read_bytes()
    envelope = envelope_path(source).read_bytes() if encrypted else b""
    path = folder / "bad" / "a.luff"
    path.parent.mkdir()

    def tried(made: list[Edit]) -> str:
        path.write_bytes(changed(sound, made))
        if encrypted:
            envelope_path(path).write_bytes(envelope)
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
    source = filled(folder / "sound.luff", encrypted=encrypted)
    secret = SECRET if encrypted else None
    with Store.open(source, passphrase=secret) as store:
        truth = {
            e.id: (e.episode, e.channel, e.number, e.note) for k in store.episode_keys() for e in store.entries(k)
        }
    sound = source.read_bytes()
    envelope = envelope_path(source).read_bytes() if encrypted else b""
    path = folder / "bad" / "a.luff"
    path.parent.mkdir()

    def tried(made: list[Edit]) -> str:
        path.write_bytes(changed(sound, made))
        if encrypted:
            envelope_path(path).write_bytes(envelope)
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
