"""The key of an encrypted store: a random data key, wrapped in an envelope that lies beside the store.

The data key never changes, so a new passphrase rewrites only the envelope. It is wrapped once under the
passphrase, once under a recovery code, and where a ward lead set one under a second passphrase
(ChaCha20-Poly1305, RFC 8439, under Argon2id, RFC 9106).

What failed is told apart. The envelope carries a checksum: when that is wrong it was altered or damaged. When
it is right and no wrap opens, the passphrase is wrong. Once a wrap opens, a seal keyed with the data key shows
an envelope that was altered with care. A page of the store that fails afterwards is damage of the store.
"""

from __future__ import annotations

import errno
import hmac
import json
import os
import secrets
import sys
import unicodedata
from dataclasses import dataclass, field
from hashlib import sha256
from pathlib import Path
from typing import Any

from core.record.message import refuse
from storage.errors import StoreError, os_failure, store_error

KEY_BYTES = 32
MIN_PASSPHRASE = 8
_ALPHABET = "0123456789ABCDEFGHJKMNPQRSTVWXYZ"  # Crockford's base 32: no I, L, O, U
_CODE_LENGTH = 32
PASSPHRASE, RECOVERY, SECOND = "passphrase", "recovery", "second"
"""Kinds of wraps."""
_MAX_ENVELOPE = 100_000


@dataclass(frozen=True, slots=True)
class Cost:
    """How hard a passphrase is to try: Argon2id memory in KiB, passes and lanes."""

    memory_kib: int = 65_536
    passes: int = 3
    lanes: int = 4


DEFAULT_COST = Cost()
_MOST = Cost(1_048_576, 20, 16)


@dataclass(frozen=True, slots=True)
class NewKey:
    """A fresh data key with its envelope's text and the recovery code, which is shown once and never kept."""

    key: bytes = field(repr=False)
    envelope: str = field(repr=False)
    recovery_code: str = field(repr=False)


def envelope_path(store: Path) -> Path:
    """Where the envelope of a store lies: beside it, so that a copy of the folder has both."""
    return store.with_name(store.name + ".key")


def check_passphrase(passphrase: str) -> None:
    """Refuse a passphrase that is too short.

    Raises:
        RecordError: `passphrase.too_short`.
    """
    if len(_normal(passphrase)) < MIN_PASSPHRASE:
        raise refuse("passphrase.too_short", length=len(passphrase), accepted=f"{MIN_PASSPHRASE} or more characters")


def new_key(store_id: str, passphrase: str, cost: Cost = DEFAULT_COST) -> NewKey:
    """Make a data key and wrap it under the passphrase and under a new recovery code."""
    check_passphrase(passphrase)
    key, code = secrets.token_bytes(KEY_BYTES), new_recovery_code()
    wraps = [
        _wrap(key, store_id, PASSPHRASE, passphrase, cost),
        _wrap(key, store_id, RECOVERY, code, cost),
    ]
    return NewKey(key, _sealed(store_id, wraps, key), code)


def plain_code(secret: str) -> str:
    """A recovery code without the ways of writing it: small letters, groups, letters that look like digits.

    >>> plain_code("na43-sjzo")
    'NA43SJZ0'
    """
    return _code(secret)


def new_recovery_code() -> str:
    """A code of 160 random bits in groups of four, easy to write down."""
    text = "".join(secrets.choice(_ALPHABET) for _ in range(_CODE_LENGTH))
    return "-".join(text[i : i + 4] for i in range(0, _CODE_LENGTH, 4))


def check_envelope(text: str) -> None:
    """Refuse an envelope that was altered or is damaged, before a passphrase is asked for.

    Raises:
        StoreError: `key.envelope_altered`, `key.envelope_newer`.
    """
    _read(text)


def open_envelope(text: str, secret: str) -> bytes:
    """The data key, by passphrase or recovery code.

    Raises:
        StoreError: `key.wrong_passphrase` or `key.envelope_altered`.
    """
    return _opened(text, secret)[0]


def is_recovery_code(text: str, secret: str) -> bool:
    """Whether a secret is the recovery code, and not the passphrase that a whole ward knows.

    Raises:
        StoreError: `key.wrong_passphrase` or `key.envelope_altered`.
    """
    return _opened(text, secret)[1] == RECOVERY


def _opened(text: str, secret: str) -> tuple[bytes, str]:
    """The data key, and the kind of wrap that the secret opened."""
    envelope = _read(text)
    for wrap in envelope["wraps"]:
        key = _unwrap(wrap, envelope["store_id"], secret)
        if key is not None:
            if not hmac.compare_digest(envelope["seal"], _seal(envelope, key)):
                raise store_error("key.envelope_altered", detail="seal")
            return key, str(wrap["kind"])
    raise store_error("key.wrong_passphrase")


def change_passphrase(text: str, secret: str, new: str, cost: Cost = DEFAULT_COST) -> str:
    """The envelope with a new passphrase; the recovery code stays. `secret` is the old passphrase or the code."""
    check_passphrase(new)
    key, envelope = open_envelope(text, secret), _read(text)
    kept = [w for w in envelope["wraps"] if w["kind"] != PASSPHRASE]
    return _sealed(envelope["store_id"], [_wrap(key, envelope["store_id"], PASSPHRASE, new, cost), *kept], key)


def change_recovery_code(text: str, secret: str, cost: Cost = DEFAULT_COST) -> tuple[str, str]:
    """The envelope with a new recovery code, and the code; the old one opens nothing any more."""
    key, envelope = open_envelope(text, secret), _read(text)
    code = new_recovery_code()
    kept = [w for w in envelope["wraps"] if w["kind"] != RECOVERY]
    wraps = [*kept, _wrap(key, envelope["store_id"], RECOVERY, code, cost)]
    return _sealed(envelope["store_id"], wraps, key), code


def change_second(text: str, secret: str, second: str | None, cost: Cost = DEFAULT_COST) -> str:
    """The envelope with a second passphrase beside the first, for who holds it; None takes it away. The passphrase
    and the recovery code stay.

    Raises:
        StoreError: `key.wrong_passphrase` or `key.envelope_altered`.
        RecordError: `passphrase.too_short`.
    """
    if second is not None:
        check_passphrase(second)
    key, envelope = open_envelope(text, secret), _read(text)
    kept = [w for w in envelope["wraps"] if w["kind"] != SECOND]
    more = [] if second is None else [_wrap(key, envelope["store_id"], SECOND, second, cost)]
    return _sealed(envelope["store_id"], [*kept, *more], key)


def has_second(text: str) -> bool:
    """Whether a second passphrase opens the envelope too.

    Raises:
        StoreError: `key.envelope_altered`.
    """
    return any(wrap["kind"] == SECOND for wrap in _read(text)["wraps"])


def read_envelope(path: Path) -> str:
    """The envelope's text.

    Raises:
        StoreError: `key.envelope_missing` or `key.envelope_altered`.
    """
    try:
        if path.stat().st_size > _MAX_ENVELOPE:
            raise store_error("key.envelope_altered", detail="size")
        return path.read_text("ascii")
    except FileNotFoundError:
        raise store_error("key.envelope_missing", path=path.name) from None
    except UnicodeDecodeError:
        raise store_error("key.envelope_altered", detail="text") from None


def write_envelope(path: Path, text: str) -> None:
    """Write the envelope so that either the old or the new one is there, whole, whatever happens.

    Raises:
        StoreError: `store.disk_full`, `key.unwritable`; the old one stays.
    """
    temporary = path.with_name(path.name + ".new")
    try:
        descriptor = os.open(temporary, os.O_WRONLY | os.O_CREAT | os.O_TRUNC, 0o600)
        with os.fdopen(descriptor, "w", encoding="ascii") as file:
            file.write(text)
            file.flush()
            os.fsync(file.fileno())
        os.replace(temporary, path)
        sync_folder(path.parent)  # a store whose key file a power cut takes away is lost whole
    except OSError as error:
        raise os_failure(error, "key.unwritable", path) from error
    finally:
        temporary.unlink(missing_ok=True)


def sync_folder(folder: Path) -> None:
    """Ask the disk to keep the names in a folder. Windows, and some file systems, cannot and need not."""
    if os.name == "nt":
        return
    descriptor = os.open(folder, os.O_RDONLY)
    try:
        os.fsync(descriptor)
    except OSError as error:
        if error.errno not in (errno.EINVAL, errno.ENOTSUP):
            raise
    finally:
        os.close(descriptor)


def _normal(secret: str) -> bytes:
    """The passphrase's bytes, the same whichever way a keyboard composes its letters."""
    return unicodedata.normalize("NFKC", secret).encode()


def _code(secret: str) -> str:
    """A recovery code as typed: small letters, spaces, and the letters that look like digits."""
    plain = "".join(c for c in secret.upper() if c.isalnum())
    return plain.translate(str.maketrans("OIL", "011"))


def forbid_core_dumps() -> None:
    """From now on a crash of this process writes no image of its memory, which holds the key, to the disk.

    Python keeps copies of bytes that nobody can wipe, so the memory of a running program counts as readable by who
    may read it; the disk does not. Windows keeps such images only where an administrator asks for them.
    """
    if sys.platform != "win32":
        import resource

        resource.setrlimit(resource.RLIMIT_CORE, (0, 0))


def _derived(secret: str, kind: str, salt: bytes, cost: Cost) -> bytes:
    from cryptography.hazmat.primitives.kdf.argon2 import Argon2id

    forbid_core_dumps()
    material = _code(secret).encode() if kind == RECOVERY else _normal(secret)
    kdf = Argon2id(salt=salt, length=KEY_BYTES, iterations=cost.passes, lanes=cost.lanes, memory_cost=cost.memory_kib)
    return kdf.derive(material)


def _bound(store_id: str, wrap: dict[str, Any]) -> bytes:
    """What the wrap is tied to, so that it cannot be moved to another store or given other costs."""
    fields = [store_id, *(wrap[k] for k in ("kind", "salt", "memory_kib", "passes", "lanes"))]
    return json.dumps(fields).encode()


def _wrap(key: bytes, store_id: str, kind: str, secret: str, cost: Cost) -> dict[str, Any]:
    from cryptography.hazmat.primitives.ciphers.aead import ChaCha20Poly1305

    salt, nonce = os.urandom(16), os.urandom(12)
    wrap: dict[str, Any] = {"kind": kind, "salt": salt.hex(), "memory_kib": cost.memory_kib,
                            "passes": cost.passes, "lanes": cost.lanes, "nonce": nonce.hex()}  # fmt: skip
    cipher = ChaCha20Poly1305(_derived(secret, kind, salt, cost))
    wrap["sealed"] = cipher.encrypt(nonce, key, _bound(store_id, wrap)).hex()
    return wrap


def _unwrap(wrap: dict[str, Any], store_id: str, secret: str) -> bytes | None:
    from cryptography.exceptions import InvalidTag
    from cryptography.hazmat.primitives.ciphers.aead import ChaCha20Poly1305

    if wrap["kind"] == RECOVERY and len(_code(secret)) != _CODE_LENGTH:
        return None
    cost = Cost(wrap["memory_kib"], wrap["passes"], wrap["lanes"])
    cipher = ChaCha20Poly1305(_derived(secret, wrap["kind"], bytes.fromhex(wrap["salt"]), cost))
    try:
        return cipher.decrypt(bytes.fromhex(wrap["nonce"]), bytes.fromhex(wrap["sealed"]), _bound(store_id, wrap))
    except InvalidTag:
        return None


def _body(envelope: dict[str, Any]) -> bytes:
    return json.dumps([envelope["format"], envelope["store_id"], envelope["wraps"]], sort_keys=True).encode()


def _seal(envelope: dict[str, Any], key: bytes) -> str:
    return hmac.new(key, b"luffmark envelope" + _body(envelope), sha256).hexdigest()


def _sealed(store_id: str, wraps: list[dict[str, Any]], key: bytes) -> str:
    envelope: dict[str, Any] = {"format": 1, "store_id": store_id, "wraps": wraps}
    envelope["seal"] = _seal(envelope, key)
    envelope["checksum"] = _checksum(envelope)
    return json.dumps(envelope, indent=1) + "\n"


def _checksum(envelope: dict[str, Any]) -> str:
    return sha256(_body(envelope) + envelope["seal"].encode()).hexdigest()


def _read(text: str) -> dict[str, Any]:
    try:
        envelope = json.loads(text)
        if envelope["format"] != 1:
            raise store_error("key.envelope_newer", format=str(envelope["format"])[:20])
        if not hmac.compare_digest(envelope["checksum"], _checksum(envelope)):
            raise store_error("key.envelope_altered", detail="checksum")
        _check_shape(envelope)
    except StoreError:
        raise
    except (ValueError, KeyError, TypeError, AttributeError, RecursionError) as error:
        raise store_error("key.envelope_altered", detail="text") from error
    return dict(envelope)


def _check_shape(envelope: dict[str, Any]) -> None:
    """Costs out of bounds, or more wraps than there are kinds, are refused before they are paid."""
    kinds = [wrap["kind"] for wrap in envelope["wraps"]]
    if not kinds or len(set(kinds)) != len(kinds) or not set(kinds) <= {PASSPHRASE, RECOVERY, SECOND}:
        raise ValueError("kinds")
    for wrap in envelope["wraps"]:
        cost = Cost(wrap["memory_kib"], wrap["passes"], wrap["lanes"])
        within = all(type(c) is int and 1 <= c <= m for c, m in zip(_costs(cost), _costs(_MOST), strict=True))
        if not within or cost.memory_kib < 8 * cost.lanes:
            raise ValueError("cost")
        if [len(bytes.fromhex(wrap[k])) for k in ("salt", "nonce", "sealed")] != [16, 12, KEY_BYTES + 16]:
            raise ValueError("length")


def _costs(cost: Cost) -> tuple[int, int, int]:
    return cost.memory_kib, cost.passes, cost.lanes
