"""Every sentence: a message key with named values becomes text. The one place where core's findings get words.

Text made here is plain. Where Qt could take it for rich text, pass it through `app.look.formats.inert`.
"""

from __future__ import annotations

import logging
import re
from collections.abc import Mapping
from functools import lru_cache
from types import MappingProxyType

from app.words.template import Reader, fill
from core.record.message import Message

__all__ = ["Reader", "sentence", "templates"]

_log = logging.getLogger("luffmark")
DEFAULT = Reader()
_NAME_FIRST = re.compile(r"\{\w+:(name|marker|due)\}")
_LIST_FIRST = re.compile(r"\[\[[^\]]*, \]\]")
"""A list whose first members may be left out, so that any of them may begin the sentence."""


@lru_cache(maxsize=1)
def templates() -> Mapping[str, str]:
    """Every template by its message key.

    Raises:
        ValueError: two catalogues name the same key.
    """
    from app.words import (
        exchange,
        findings,
        forms,
        judgements,
        names,
        notices,
        people,
        refusals,
        responses,
        surroundings,
        tables,
    )

    found: dict[str, str] = {}
    catalogues = (refusals, surroundings, findings, responses, judgements, names, people, exchange, tables, forms,
                  notices)  # fmt: skip
    for catalogue in catalogues:
        twice = found.keys() & catalogue.TEMPLATES.keys()
        if twice:
            raise ValueError(f"message keys with two templates: {', '.join(sorted(twice))}")
        found |= catalogue.TEMPLATES
    return MappingProxyType(found)


def sentence(message: Message, reader: Reader = DEFAULT) -> str:
    """The message in words; its first letter is large where a template begins with a quantity's name.

    A key without words is shown with its values rather than hidden: a finding must not vanish.

    >>> sentence(Message("value.missing", {"channel": "rr", "accepted": "a number"}))
    'Respiratory rate has no value. Accepted: a number.'
    """
    template = templates().get(message.key)
    if template is None:
        _log.warning("no words for message %s", message.key)
        values = ", ".join(f"{k} {v}" for k, v in message.values.items())
        return f"{message.key}: {values}" if values else message.key
    text = fill(reader.translate(template), message.values, reader)
    starts_small = _NAME_FIRST.match(template) or _LIST_FIRST.match(template)
    return text[:1].upper() + text[1:] if starts_small and text[:2] != "pH" else text
