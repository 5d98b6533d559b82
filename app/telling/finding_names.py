"""Short names of markers, due items, levers and groups, as they stand in a lane, a list or a heading."""

from __future__ import annotations

from app.policy.names import by_policy
from app.words import Reader, sentence, templates
from core.record.message import Message

PLAIN = Reader()


def _name(kind: str, key: str, reader: Reader) -> str:
    """The catalogue's name; a key without one is shown in plain letters rather than hidden."""
    full = f"{kind}.{key}"
    text = sentence(Message(full), reader).rstrip(".") if full in templates() else key.replace("_", " ")
    return text if text.startswith("pH") else text[:1].upper() + text[1:]


def marker_name(key: str, reader: Reader = PLAIN) -> str:
    """What a marker is called, with the limits of the policy in force where its name says any."""
    return by_policy(key, _name("marker", key, reader))


def due_name(key: str, reader: Reader = PLAIN) -> str:
    """What is due."""
    return _name("due_item", key, reader)


def lever_name(key: str, reader: Reader = PLAIN) -> str:
    """What a lever is called."""
    return _name("lever_name", key, reader)


def group_name(key: str, reader: Reader = PLAIN) -> str:
    """What a group of flags is about."""
    return _name("group", key, reader)
