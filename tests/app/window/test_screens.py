"""Pictures of every screen in both looks, from the sample shift, at the least size."""

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


def test_every_screen_is_drawn(qapp, tmp_path, monkeypatch):
    monkeypatch.setattr(screens, "SIZES", ((1280, 800),))
    made = screens.draw_all(tmp_path / "pictures")
    names = {p.name for p in made}
    assert names == {f"{screen}-{theme}-1280x800.png" for screen in EXPECTED for theme in THEMES}
    for path in made:
        image = QImage(str(path))
        assert image.width() >= 300
        colours = {
            image.pixelColor(x, y).rgb() for x in range(0, image.width(), 7) for y in range(0, image.height(), 7)
        }
        assert len(colours) > 4, path.name
    ward = QImage(str(tmp_path / "pictures" / "ward-light-1280x800.png"))
    assert (ward.width(), ward.height()) == (1280, 800)


def test_an_empty_store_has_a_ward_too(qapp, tmp_path, monkeypatch):
    from storage.store import Store

    monkeypatch.setattr(screens, "SIZES", ((1280, 800),))
    path = tmp_path / "empty.luffmark"
    Store.create(path, now=1_774_000_000_000_000, by="AB").close()
    made = screens.draw_all(tmp_path / "pictures", path)
    assert {p.name.split("-")[0] for p in made} == {"first", "ward"}
