"""What stands on the pages of a PDF. Reading one takes longer than printing it, so each is read once."""

import re
from functools import lru_cache
from io import BytesIO

from pypdf import PdfReader


@lru_cache(maxsize=32)
def page_texts(data: bytes) -> tuple[str, ...]:
    """The text of each page, as it is extracted."""
    return tuple(page.extract_text() for page in PdfReader(BytesIO(data)).pages)


def flat(text: str) -> str:
    """A text without its spaces: a line may be broken anywhere."""
    return re.sub("[\\s\N{WORD JOINER}]+", "", text)


def flat_pages(data: bytes) -> list[str]:
    """The text of each page without its spaces."""
    return [flat(text) for text in page_texts(data)]
