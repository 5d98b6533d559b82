"""Pictures of every screen in both looks, from the sample shift, at the least size."""

import numpy as np
from PySide6.QtGui import QImage

from app.look.theme import THEMES
from app.window import screens

EXPECTED = {
    "first", "ward", "strip", "episode", "episode-crosshair", "compare", "handover", "explain", "panels",
    "figures-folded", "figures-gas", "figures-oxygenation", "figures-breathing", "explain-doubt", "explain-none",
    "explain-class", "explain-score", "new-episode", "correct", "map", "statistics", "as-known", "table", "help",
    "about", "policy", "settings-form", "gas-form", "vitals-form", "facts-form", "end-support", "settle-flag",
    "close-due", "problem-report", "export", "files-taken", "people", "archive", "backups", "restore", "salvage",
    "key-file", "close-handover", "closed-handovers", "print-preview", "take-in", "mapping", "policy-file",
    "find-action", "sign-in", "first-lead", "pin-by-code", "new-store", "open-store", "change-passphrase",
    "recovery-code", "second-passphrase", "device-span", "came-later", "locked",
}  # fmt: skip


def colours_of(image: QImage) -> int:
    """How many colours a picture has, by every seventh pixel of every seventh line."""
    plain = image.convertToFormat(QImage.Format.Format_RGB32)
    pixels = np.frombuffer(plain.constBits(), np.uint32).reshape(plain.height(), plain.bytesPerLine() // 4)
    return len(np.unique(pixels[::7, : plain.width() : 7]))


def test_every_screen_is_drawn(qapp, tmp_path, monkeypatch):
    monkeypatch.setattr(screens, "SIZES", ((1280, 800),))
    made = screens.draw_all(tmp_path / "pictures")
    names = {p.name for p in made}
    assert names == {f"{screen}-{theme}-1280x800.png" for screen in EXPECTED for theme in THEMES}
    for path in made:
        image = QImage(str(path))
        assert image.width() >= 300
        assert colours_of(image) > 4, path.name
    ward = QImage(str(tmp_path / "pictures" / "ward-light-1280x800.png"))
    assert (ward.width(), ward.height()) == (1280, 800)


def test_an_empty_store_has_a_ward_too(qapp, tmp_path, monkeypatch):
    from storage.store import Store

    monkeypatch.setattr(screens, "SIZES", ((1280, 800),))
    path = tmp_path / "empty.luffmark"
    Store.create(path, now=1_774_000_000_000_000, by="AB").close()
    made = screens.draw_all(tmp_path / "pictures", path)
    assert {p.name.split("-")[0] for p in made} == {"first", "ward"}
