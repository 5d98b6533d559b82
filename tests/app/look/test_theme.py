"""The look: contrast, colour blindness, shapes and words, sizes."""

from dataclasses import replace
from itertools import combinations

import numpy as np
import pytest
from PySide6.QtCore import QRectF, Qt
from PySide6.QtGui import QColor, QFontMetricsF, QImage, QPainter
from PySide6.QtWidgets import (
    QApplication,
    QCheckBox,
    QComboBox,
    QLabel,
    QLineEdit,
    QPushButton,
    QTableWidget,
    QTableWidgetItem,
    QVBoxLayout,
    QWidget,
)

from app.chart.marks import gas_mark, pennant, spot, verdict_sign
from app.chart.shapes import Look
from app.look.style_sheet import apply_theme, style_sheet
from app.look.theme import (
    LEAST_MARK_CONTRAST,
    LEAST_TEXT_CONTRAST,
    THEMES,
    GasState,
    Tier,
    Verdict,
    contrast,
    state_word,
    tier_word,
    verdict_of,
    verdict_word,
)

BOTH = pytest.mark.parametrize("theme", THEMES.values(), ids=list(THEMES))

# Machado GM, Oliveira MM, Fernandes LAF. A physiologically-based model for simulation of color vision
# deficiency. IEEE Trans Vis Comput Graph 2009;15:1291-1298, matrices for severity 1.0 (on linear RGB).
BLINDNESS = {
    "none": np.eye(3),
    "protan": [[0.152286, 1.052583, -0.204868], [0.114503, 0.786281, 0.099216], [-0.003882, -0.048116, 1.051998]],
    "deutan": [[0.367322, 0.860646, -0.227968], [0.280085, 0.672501, 0.047413], [-0.011820, 0.042940, 0.968881]],
    "tritan": [[1.255528, -0.076749, -0.178779], [-0.078411, 0.930809, 0.147602], [0.004733, 0.691367, 0.303900]],
}


def linear(colour: str) -> np.ndarray:
    parts = np.array([int(colour[i : i + 2], 16) / 255 for i in (1, 3, 5)])
    return np.where(parts <= 0.04045, parts / 12.92, ((parts + 0.055) / 1.055) ** 2.4)


def lab(rgb: np.ndarray) -> np.ndarray:
    """CIE L*a*b* of linear sRGB, white D65 (IEC 61966-2-1)."""
    to_xyz = [[0.4124, 0.3576, 0.1805], [0.2126, 0.7152, 0.0722], [0.0193, 0.1192, 0.9505]]
    xyz = np.asarray(to_xyz) @ np.clip(rgb, 0, 1) / np.array([0.9505, 1.0, 1.089])
    f = np.where(xyz > (6 / 29) ** 3, np.cbrt(xyz), xyz / (3 * (6 / 29) ** 2) + 4 / 29)
    return np.array([116 * f[1] - 16, 500 * (f[0] - f[1]), 200 * (f[1] - f[2])])


@BOTH
@pytest.mark.parametrize("ground", ["ground", "raised", "sunken", "wash"])
def test_text_can_be_read(theme, ground):
    c = theme.colours
    for ink in (c.ink, c.ink_quiet, c.accent):
        assert contrast(ink, getattr(c, ground)) >= LEAST_TEXT_CONTRAST


@BOTH
@pytest.mark.parametrize("ground", ["ground", "raised", "sunken", "wash"])
def test_words_of_a_verdict_are_read_as_easily_as_any_text(theme, ground):
    c = theme.colours
    for verdict in Verdict:
        assert contrast(c.verdict_inks[verdict], getattr(c, ground)) >= LEAST_TEXT_CONTRAST


@pytest.mark.parametrize("tier", [Tier.CONCERN, Tier.ESCALATE])
def test_a_tier_keeps_its_hue_in_the_dark(tier):
    light, dark = (QColor(t.colours.tiers[tier]).hsvHue() for t in THEMES.values())
    assert abs(light - dark) <= 20


@BOTH
@pytest.mark.parametrize("kind", BLINDNESS)
def test_tiers_stay_apart_to_every_eye(theme, kind):
    matrix, tiers = np.asarray(BLINDNESS[kind]), theme.colours.tiers
    one, other = tiers[Tier.CONCERN], tiers[Tier.ESCALATE]
    assert np.linalg.norm(lab(matrix @ linear(one)) - lab(matrix @ linear(other))) >= 15


@BOTH
def test_text_on_colour_can_be_read(theme):
    c = theme.colours
    pairs = [(c.on_accent, c.accent), (c.ink, c.support), (c.ink, c.target), (c.raised, c.ink)]
    pairs += [(c.on_tier[tier], c.tiers[tier]) for tier in Tier]
    for ink, under in pairs:
        assert contrast(ink, under) >= LEAST_TEXT_CONTRAST


@BOTH
@pytest.mark.parametrize("ground", ["ground", "raised"])
def test_marks_can_be_seen(theme, ground):
    c = theme.colours
    marks = [*c.channels, *c.verdicts.values(), *c.tiers.values(), c.edge, c.support_edge, c.accent]
    for mark in marks:
        assert contrast(mark, getattr(c, ground)) >= LEAST_MARK_CONTRAST
    assert contrast(c.support_edge, c.support) >= LEAST_MARK_CONTRAST


@BOTH
@pytest.mark.parametrize("kind", BLINDNESS)
def test_the_first_three_inks_of_a_panel_stay_apart_to_every_eye(theme, kind):
    """15 in CIE76: well above what can just be told apart side by side (about 2.3, Mahy 1994)."""
    matrix = np.asarray(BLINDNESS[kind])
    for one, other in combinations(theme.colours.channels[:3], 2):
        assert np.linalg.norm(lab(matrix @ linear(one)) - lab(matrix @ linear(other))) >= 15


@BOTH
@pytest.mark.parametrize("kind", BLINDNESS)
def test_better_and_worse_stay_apart_to_every_eye(theme, kind):
    matrix, c = np.asarray(BLINDNESS[kind]), theme.colours
    better, worse = (lab(matrix @ linear(c.verdicts[v])) for v in (Verdict.BETTER, Verdict.WORSE))
    assert np.linalg.norm(better - worse) >= 30


def drawn(theme, draw) -> bytes:
    image = QImage(40, 40, QImage.Format.Format_Grayscale8)  # no colour: only shape is left
    image.fill(255)
    painter = QPainter(image)
    draw(painter, theme)
    painter.end()
    return bytes(image.constBits())


def test_shapes_alone_tell_verdicts_states_tiers_and_looks_apart(qapp):
    one_ink = dict.fromkeys(Verdict, "#000000")
    light = THEMES["light"]
    colours = replace(light.colours, verdicts=one_ink, tiers=dict.fromkeys(Tier, "#000000"), ink_quiet="#000000")
    plain = replace(light, colours=colours)
    box = QRectF(10, 10, 20, 20)
    pictures = [drawn(plain, lambda p, t, v=v: verdict_sign(p, t, v, box)) for v in Verdict]
    pictures += [
        drawn(plain, lambda p, t, v=v, s=s: gas_mark(p, t, s, v, 20, 20, 14)) for v in Verdict for s in GasState
    ]
    pictures += [drawn(plain, lambda p, t, tier=tier: pennant(p, t, tier, 12, 34, 20)) for tier in Tier]
    pictures += [
        drawn(plain, lambda p, _, look=look: spot(p, QColor("black"), QColor("white"), look, 20, 20, 8))
        for look in Look
    ]
    assert len(set(pictures)) == len(pictures)


def test_every_meaning_has_a_word_of_its_own():
    words = [verdict_word(v) for v in Verdict] + [state_word(s) for s in GasState] + [tier_word(t) for t in Tier]
    assert all(words)
    assert len(set(words)) == len(words)


@pytest.mark.parametrize("verdict", Verdict)
def test_a_verdict_is_known_by_its_word(verdict):
    assert verdict_of(verdict_word(verdict)) is verdict


def test_an_unknown_verdict_is_refused():
    with pytest.raises(ValueError, match="splendid"):
        verdict_of("splendid")


@BOTH
@pytest.mark.parametrize("scale", [1.0, 1.5, 2.0])
def test_text_and_targets_grow_together(theme, scale):
    larger = theme.scaled(scale)
    assert larger.font(14).pixelSize() == round(14 * scale)
    assert f"min-height: {round(24 * scale)}px" in style_sheet(larger)


@pytest.mark.parametrize("scale", [0.9, 2.1, float("nan")])
def test_a_text_scale_out_of_range_is_refused(scale):
    with pytest.raises(ValueError, match="is accepted"):
        THEMES["light"].scaled(scale)


@BOTH
def test_the_sheet_dresses_widgets_and_shows_focus(qapp, qtbot, theme):
    before = qapp.styleSheet(), qapp.palette(), qapp.font()
    try:
        apply_theme(qapp, theme)
        page = QWidget()
        qtbot.addWidget(page)
        column = QVBoxLayout(page)
        button, other = QPushButton("a"), QLineEdit("b")
        for widget in (button, other, QCheckBox("c"), QComboBox(), QLabel("d")):
            column.addWidget(widget)
        page.show()
        page.activateWindow()
        qtbot.waitUntil(page.isActiveWindow)
        button.setFocus()
        qapp.processEvents()
        focused = button.grab().toImage()
        other.setFocus()
        qapp.processEvents()
        assert button.grab().toImage() != focused
        assert button.height() >= 24
    finally:
        qapp.setStyleSheet(before[0])
        qapp.setPalette(before[1])
        qapp.setFont(before[2])


def test_figures_are_equally_wide(qapp):
    metrics = QFontMetricsF(THEMES["light"].font(14))
    assert len({round(metrics.horizontalAdvance(figure), 3) for figure in "0123456789"}) == 1


@BOTH
def test_what_a_field_waits_for_can_be_read(qtbot, theme):
    """The words in an empty field are words: Qt alone would thin them out to half their contrast."""
    apply_theme(QApplication.instance(), theme)
    field = QLineEdit()
    field.setPlaceholderText("MMMMMM 8 characters or more")
    other = QPushButton("x")
    for widget in (field, other):
        qtbot.addWidget(widget)
    field.resize(300, 40)
    field.show()
    image = field.grab().toImage()
    inner = image.copy(14, 6, 270, 28)
    ground = theme.colours.raised
    seen = {inner.pixelColor(x, y).name() for x in range(inner.width()) for y in range(inner.height())}
    assert max(contrast(colour, ground) for colour in seen) >= LEAST_TEXT_CONTRAST


@BOTH
def test_a_field_that_offers_choices_shows_so_and_a_row_can_be_ticked(qtbot, theme):
    """An arrow in every combo box; the box before a row of a table is seen on its ground."""
    apply_theme(QApplication.instance(), theme)
    choices, table = QComboBox(), QTableWidget(1, 1)
    choices.addItem("")
    cell = QTableWidgetItem("")
    cell.setCheckState(Qt.CheckState.Unchecked)
    table.setItem(0, 0, cell)
    table.horizontalHeader().hide()
    table.verticalHeader().hide()
    table.setShowGrid(False)
    for widget, left in ((choices, 160), (table, 0)):
        qtbot.addWidget(widget)
        widget.resize(200, 60)
        widget.show()
        image = widget.grab().toImage().copy(left + 5, 5, 30, 50)
        colours = {image.pixelColor(x, y).name() for x in range(image.width()) for y in range(image.height())}
        assert max(contrast(c, theme.colours.raised) for c in colours) >= LEAST_MARK_CONTRAST
