"""The envelope: the right secret opens it, and what failed is told apart."""

from __future__ import annotations

import json
import subprocess
import sys
from collections.abc import Callable
from pathlib import Path

import pytest

from core.record.message import RecordError
from storage import keys
from storage.store import Store, StoreError
from tests.storage.conftest import CHEAP, NOW, PASSPHRASE


def key_of(text: str, secret: str) -> bytes:
    return keys.open_envelope(text, secret)


@pytest.fixture(scope="module")
def made() -> keys.NewKey:
    return keys.new_key("store-1", PASSPHRASE, CHEAP)


def test_passphrase_and_recovery_code_open_the_same_key(made: keys.NewKey) -> None:
    assert key_of(made.envelope, PASSPHRASE) == made.key
    assert key_of(made.envelope, made.recovery_code) == made.key
    assert len(made.key) == 32


def test_a_recovery_code_may_be_typed_as_people_do(made: keys.NewKey) -> None:
    typed = made.recovery_code.lower().replace("-", " ").replace("0", "o").replace("1", "l")
    assert key_of(made.envelope, typed) == made.key


def test_a_passphrase_is_the_same_however_its_letters_are_composed() -> None:
    new = keys.new_key("s", "n\u00e4chste Wache", CHEAP)
    assert key_of(new.envelope, "na\u0308chste Wache") == new.key


@pytest.mark.parametrize("secret", ["", "wrong horse ward 7", "correct horse ward 7 ", "0000-" * 8])
def test_a_wrong_passphrase_is_called_wrong(made: keys.NewKey, secret: str) -> None:
    with pytest.raises(StoreError, match=r"key.wrong_passphrase"):
        key_of(made.envelope, secret)


def test_every_altered_character_of_an_envelope_is_called_altered(made: keys.NewKey) -> None:
    text = made.envelope
    for i in range(0, len(text), 7):
        if text[i] in " \n":
            continue
        wrong = text[:i] + ("0" if text[i] != "0" else "1") + text[i + 1 :]
        with pytest.raises(StoreError, match=r"key.envelope_(altered|newer)"):
            key_of(wrong, PASSPHRASE)


def test_an_envelope_altered_with_care_is_found_once_it_opens(made: keys.NewKey) -> None:
    envelope = json.loads(made.envelope)
    envelope["wraps"][1]["sealed"] = "00" * 48
    envelope["checksum"] = keys._checksum(envelope)
    with pytest.raises(StoreError, match=r"key.envelope_altered"):
        key_of(json.dumps(envelope), PASSPHRASE)


@pytest.mark.parametrize(
    ("field", "value"),
    [("memory_kib", 2**31), ("passes", 10**6), ("lanes", 0), ("memory_kib", True), ("salt", "00")],
)
def test_costs_out_of_bounds_are_refused_before_they_are_paid(made: keys.NewKey, field: str, value: object) -> None:
    envelope = json.loads(made.envelope)
    envelope["wraps"][0][field] = value
    envelope["checksum"] = keys._checksum(envelope)
    with pytest.raises(StoreError, match=r"key.envelope_altered"):
        key_of(json.dumps(envelope), PASSPHRASE)


@pytest.mark.parametrize("field", ["kind", "salt", "memory_kib", "passes", "lanes", "nonce", "sealed"])
def test_no_part_of_a_wrap_can_be_changed(made: keys.NewKey, field: str) -> None:
    """Each is bound into the seal of the wrap, so that a wrap cannot be weakened, renamed or moved, whatever the
    checksum says."""
    envelope = json.loads(made.envelope)
    wrap = envelope["wraps"][0]
    changed = {"kind": "recovery", "memory_kib": 128, "passes": 2, "lanes": 2}
    wrap[field] = changed.get(field, ("1" if wrap[field] != "1" else "2") * len(str(wrap[field])))
    if field == "kind":
        envelope["wraps"] = envelope["wraps"][:1]
    envelope["checksum"] = keys._checksum(envelope)
    with pytest.raises(StoreError, match=r"key.(wrong_passphrase|envelope_altered)"):
        key_of(json.dumps(envelope), PASSPHRASE)


def test_all_that_a_wrap_says_is_authenticated_with_the_key_it_holds() -> None:
    wrap = {"kind": "passphrase", "salt": "00" * 16, "memory_kib": 64, "passes": 1, "lanes": 1}
    others = [{**wrap, key: "01" if isinstance(value, str) else value + 1} for key, value in wrap.items()]
    bound = [keys._bound("store-1", wrap), keys._bound("store-2", wrap), *(keys._bound("store-1", w) for w in others)]
    assert len(set(bound)) == len(wrap) + 2


def test_a_wrap_of_another_store_opens_nothing(made: keys.NewKey) -> None:
    envelope = json.loads(made.envelope) | {"store_id": "store-2"}
    envelope["checksum"] = keys._checksum(envelope)
    with pytest.raises(StoreError, match=r"key.wrong_passphrase"):
        key_of(json.dumps(envelope), PASSPHRASE)


def test_wraps_beyond_their_kinds_are_refused_before_they_are_tried(made: keys.NewKey) -> None:
    for wraps in ([], "twice", "unknown"):
        envelope = json.loads(made.envelope)
        first = envelope["wraps"][0]
        envelope["wraps"] = {"twice": [first] * 200, "unknown": [{**first, "kind": "other"}]}.get(str(wraps), [])
        envelope["checksum"] = keys._checksum(envelope)
        with pytest.raises(StoreError, match=r"key.envelope_altered"):
            keys.check_envelope(json.dumps(envelope))


def test_no_nonce_and_no_salt_is_used_twice(made: keys.NewKey) -> None:
    texts = [made.envelope]
    for n in range(6):
        texts.append(keys.change_passphrase(texts[-1], made.recovery_code, f"another ward {n}", CHEAP))
    wraps = [w for text in texts for w in json.loads(text)["wraps"] if w["kind"] == keys.PASSPHRASE]
    for field in ("nonce", "salt", "sealed"):
        assert len({w[field] for w in wraps}) == len(texts)


def test_the_shipped_cost_is_that_of_rfc_9106(make_store: Callable[..., Store]) -> None:
    """Its second recommended choice, for where 2 GiB are too much: 64 MiB, 3 passes, 4 lanes, a salt of 128 bits."""
    cost = keys.DEFAULT_COST
    assert (cost.memory_kib, cost.passes, cost.lanes) == (64 * 1024, 3, 4)
    assert len(keys.new_recovery_code().replace("-", "")) * 5 == 160


@pytest.mark.parametrize("text", ["", "{}", "[]", "null", '{"format": 1}', "[" * 100_000, '{"format": 2}'])
def test_what_is_no_envelope_is_refused(text: str) -> None:
    with pytest.raises(StoreError, match=r"key.envelope_(altered|newer)"):
        key_of(text, PASSPHRASE)


def test_a_short_passphrase_is_refused() -> None:
    with pytest.raises(RecordError, match=r"passphrase.too_short"):
        keys.new_key("s", "short", CHEAP)


def test_a_new_passphrase_keeps_data_and_recovery_code(make_store: Callable[..., Store]) -> None:
    store = make_store(encrypted=True)
    code = store.recovery_code
    assert code is not None
    store.put_layout("a", "b")
    with pytest.raises(StoreError, match=r"key.wrong_passphrase"):
        store.change_passphrase("not it at all", "another ward 8", CHEAP)
    store.change_passphrase(PASSPHRASE, "another ward 8", CHEAP)
    store.close()
    with pytest.raises(StoreError, match=r"key.wrong_passphrase"):
        Store.open(store.path, passphrase=PASSPHRASE)
    for secret in ("another ward 8", code):
        with Store.open(store.path, passphrase=secret) as again:
            assert again.layout("a") == "b"
            assert again.recovery_code is None


def test_a_new_recovery_code_takes_the_place_of_the_old_one(make_store: Callable[..., Store]) -> None:
    store = make_store(encrypted=True)
    old = store.recovery_code or ""
    assert store.opens_with(old)
    with pytest.raises(StoreError, match=r"key.wrong_passphrase"):
        store.new_recovery_code("not the passphrase", CHEAP)
    new = store.new_recovery_code(old, CHEAP)
    assert [store.opens_with(s) for s in (PASSPHRASE, new, old)] == [True, True, False]
    store.close()
    Store.open(store.path, passphrase=new).close()


def test_what_failed_to_open_is_told_apart(make_store: Callable[..., Store], tmp_path: Path) -> None:
    store = make_store(encrypted=True)
    store.put_layout("a", "b")
    store.close()
    envelope, path = keys.envelope_path(store.path), store.path
    kept_envelope, kept = envelope.read_text(), path.read_bytes()

    def failure(secret: str | None) -> str:
        try:
            Store.open(path, passphrase=secret).close()
        except StoreError as error:
            return error.message.key
        return "opened"

    assert failure(None) == "store.needs_passphrase"
    assert failure("wrong horse ward 7") == "key.wrong_passphrase"
    envelope.write_text(kept_envelope.replace("recovery", "recovere"))
    assert failure(PASSPHRASE) == "key.envelope_altered"
    envelope.unlink()
    assert failure(PASSPHRASE) == "key.envelope_missing"
    envelope.write_text(kept_envelope)
    wrong = bytearray(kept)
    wrong[100] ^= 1
    path.write_bytes(wrong)
    assert failure(PASSPHRASE) == "store.damaged"
    path.write_bytes(kept)
    assert failure(PASSPHRASE) == "opened"


def test_nothing_typed_is_readable_in_an_encrypted_store(make_store: Callable[..., Store], tmp_path: Path) -> None:
    from core.record.entries import NewEntry

    store = make_store(encrypted=True)
    marks = [b"Zanzibar Bed", b"quinquereme", b"tachymeter", b"night.pdf"]
    store.append(
        [NewEntry("Zanzibar Bed", "label", NOW, words="Zanzibar Bed", raw="Zanzibar Bed", note="quinquereme")],
        by="AB", operation="log", now=NOW,
    )  # fmt: skip
    store.put_draft("log strip", "tachymeter", NOW)
    store.put_document("handover", "night.pdf", b"quinquereme" * 1000, "AB", NOW)
    store.backup(tmp_path / "copy.luff")
    live = {p: p.read_bytes() for p in tmp_path.iterdir()}
    store.close()
    for path, data in {**live, **{p: p.read_bytes() for p in tmp_path.iterdir()}}.items():
        for mark in marks:
            for form in (mark, mark.decode().encode("utf-16-le"), mark.hex().encode()):
                assert form not in data, path.name
    assert {"ward.luff", "ward.luff-wal", "copy.luff", "copy.luff.key"} <= {p.name for p in live}


def test_no_secret_stands_in_what_is_printed_of_a_store(make_store: Callable[..., Store]) -> None:
    store = make_store(encrypted=True)
    shown = repr(store) + repr(keys.new_key("s", PASSPHRASE, CHEAP))
    key = store._opened.key
    assert key is not None
    assert store.recovery_code is not None
    for secret in (repr(key), key.hex(), store.recovery_code, PASSPHRASE):
        assert secret not in shown


@pytest.mark.skipif(sys.platform == "win32", reason="rights of files as POSIX has them")
def test_only_the_owner_may_read_a_store_and_its_backup(make_store: Callable[..., Store], tmp_path: Path) -> None:
    store = make_store(encrypted=True)
    store.put_layout("a", "b")
    store.backup(tmp_path / "copy.luff")
    Store.restore(tmp_path / "copy.luff", tmp_path / "new.luff")
    names = (
        "ward.luff",
        "ward.luff.key",
        "ward.luff-wal",
        "copy.luff",
        "copy.luff.key",
        "new.luff",
        "new.luff.key",
    )
    assert {name: oct((tmp_path / name).stat().st_mode & 0o777) for name in names} == dict.fromkeys(names, "0o600")


@pytest.mark.skipif(sys.platform == "win32", reason="images of a crashed program as POSIX makes them")
def test_a_program_that_holds_a_key_leaves_no_image_of_its_memory(make_store: Callable[..., Store]) -> None:
    store = make_store(encrypted=True)
    code = (
        "import resource, sys; from storage.store import Store; s = Store.open(sys.argv[1], passphrase=sys.argv[2]); "
        "print(resource.getrlimit(resource.RLIMIT_CORE))"
    )
    command = [sys.executable, "-c", code, str(store.path), PASSPHRASE]
    done = subprocess.run(command, capture_output=True, text=True, cwd=Path(__file__).parents[2], check=True)
    assert done.stdout.strip() == "(0, 0)"
