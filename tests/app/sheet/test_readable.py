"""Every text of the handover can be read: on the screen in both themes, and in print."""

import re

import pytest

from app.handover.page_html import page_html
from app.look.theme import LEAST_TEXT_CONTRAST, THEMES, contrast
from app.sheet.press import GREY, INK, PALE
from app.sheet.shapes import SheetContent

_COLOUR = re.compile(r"(?<![-\w])color:(#[0-9a-f]{6})")


@pytest.mark.parametrize("name", list(THEMES))
def test_every_colour_of_text_on_the_page_has_contrast(content: SheetContent, name: str) -> None:
    theme = THEMES[name]
    used = set(_COLOUR.findall(page_html(content, theme)))
    assert theme.colours.ink_quiet in used
    assert len(used) >= 3  # quiet words, links, and what got worse
    for colour in used:
        for ground in (theme.colours.ground, theme.colours.raised):
            assert contrast(colour, ground) >= LEAST_TEXT_CONTRAST, colour


def test_every_ink_of_the_print_has_contrast() -> None:
    for ink in (INK, GREY):
        for ground in ("#ffffff", PALE):
            assert contrast(ink, ground) >= LEAST_TEXT_CONTRAST
