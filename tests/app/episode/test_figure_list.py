"""The list of figures beside the panels: folded it is calm, one key unfolds it, one key explains any row."""

import pytest
from PySide6.QtCore import QPoint, Qt
from PySide6.QtGui import QGuiApplication
from PySide6.QtWidgets import QApplication

from app.episode.figure_list import FigureFact, FoldHead
from app.explain.dialog import ExplainDialog
from app.explain.fact import Fact
from tests.support.open_window import make_store, open_window, settled, until


@pytest.fixture
def window(qtbot, tmp_path):
    with open_window(qtbot, make_store(tmp_path / "two-beds.luffmark")) as opened:
        opened.open_episode("bed-7")
        settled(qtbot, opened)
        until(qtbot, lambda: opened.pages.episode.side.figures is not None)
        yield opened


def figures(window):
    return window.pages.episode.side.figures


def row(window, key):
    return next(f for f in figures(window).findChildren(FigureFact) if f.payload.key == key)


def dialog(window):
    return next((d for d in window.findChildren(ExplainDialog) if d.isVisible()), None)


def test_folded_there_are_only_heads(window):
    assert [f.head.key for f in figures(window).folds][:2] == ["figures.gas", "figures.oxygenation"]
    assert figures(window).findChildren(FigureFact) == []
    assert not figures(window).is_unfolded


def test_one_key_unfolds_and_folds_again(window):
    window.actions_by_key["show_figures"].trigger()
    assert figures(window).is_unfolded
    assert row(window, "gas_class").isVisible()
    assert figures(window).folds[0].head.hasFocus()
    window.actions_by_key["show_figures"].trigger()
    assert not figures(window).is_unfolded
    assert [f for f in figures(window).findChildren(FigureFact) if f.isVisible()] == []


def test_a_row_tells_name_value_and_age_to_a_screen_reader(window):
    figures(window).set_unfolded(True)
    name = row(window, "pf").accessibleName()
    assert name.startswith("P/F. ")
    assert "mmHg" in name
    assert "ago" in name


def test_down_goes_from_a_head_into_its_rows(window, qtbot):
    window.activateWindow()
    head = figures(window).folds[0].head
    head.setFocus()
    qtbot.keyClick(head, Qt.Key.Key_Right)
    assert head.is_unfolded
    qtbot.keyClick(head, Qt.Key.Key_Down)
    assert isinstance(QApplication.focusWidget(), FigureFact)
    assert QApplication.focusWidget().payload.key == "gas_class"
    qtbot.keyClick(head, Qt.Key.Key_Left)
    assert not head.is_unfolded
    assert head.hasFocus()


@pytest.mark.parametrize("key", ["gas_class", "hco3_expected_chronic", "pf", "usual_paco2_estimate"])
def test_the_key_on_a_row_opens_formula_inputs_source_and_certainty(window, qtbot, key):
    figures(window).set_unfolded(True)
    fact = row(window, key)
    fact.setFocus()
    window.actions_by_key["explain"].trigger()
    until(qtbot, lambda: dialog(window) is not None)
    shown, text = dialog(window), dialog(window).text.toPlainText()
    e = fact.explanation
    assert e.formula in text
    assert e.source in text
    assert "How sure" in text
    assert e.inputs
    for name, value, when in e.inputs:
        assert name in text
        assert value in text
        assert when in text
    shown.copy.click()
    assert QGuiApplication.clipboard().text() == e.as_text()
    qtbot.keyClick(shown.text, Qt.Key.Key_Escape)
    until(qtbot, lambda: dialog(window) is None)


def test_a_figure_without_a_value_says_why_in_its_row_and_in_its_explanation(window, qtbot):
    figures(window).set_unfolded(True)
    absent = next(h for h in figures(window).findChildren(FoldHead) if h.key == "figures.breathing.absent")
    assert "No value" in absent.accessibleName()
    assert not row(window, "vt_per_kg").isVisible()
    qtbot.keyClick(absent, Qt.Key.Key_Return)
    fact = row(window, "vt_per_kg")
    assert fact.isVisible()
    assert "No tidal volume measured" in fact.accessibleName()
    fact.setFocus()
    window.actions_by_key["explain"].trigger()
    until(qtbot, lambda: dialog(window) is not None)
    assert "Why there is none" in dialog(window).text.toPlainText()
    dialog(window).reject()


def test_the_mouse_explains_by_the_why_button_and_by_a_double_click(window, qtbot):
    figures(window).set_unfolded(True)
    fact = row(window, "pf")
    assert fact.why is not None
    assert fact.why.accessibleName() == "How this came about: P/F"
    with qtbot.waitSignal(fact.explain_wanted):
        fact.why.click()
    until(qtbot, lambda: dialog(window) is not None)
    dialog(window).reject()
    with qtbot.waitSignal(fact.explain_wanted):
        qtbot.mouseDClick(fact, Qt.MouseButton.LeftButton, pos=QPoint(10, 10))
    until(qtbot, lambda: dialog(window) is not None)
    dialog(window).reject()


def test_flags_verdicts_due_items_levers_scores_and_support_all_explain_themselves(window):
    silent = [f.accessibleName() for f in window.pages.episode.side.facts()
              if f.explanation is None and not isinstance(f, FoldHead)]  # fmt: skip
    assert [s for s in silent if s not in ("No open flag", "Nothing due", "No gas yet")] == []


def test_news_keep_what_was_unfolded(window, qtbot):
    side = window.pages.episode.side
    next(f for f in figures(window).folds if f.head.key == "figures.breathing").head.unfold()
    next(h for h in figures(window).findChildren(FoldHead) if h.key == "figures.breathing.absent").unfold()
    on = window.pages.episode.on_screen
    side.show_figures(on.figures, on.policy, window.reader)
    heads = {h.key: h.is_unfolded for h in side.figures.findChildren(FoldHead)}
    assert heads["figures.breathing"]
    assert heads["figures.breathing.absent"]
    assert not heads["figures.gas"]


def test_a_gas_under_the_crosshair_is_explained(window, qtbot):
    view = window.pages.episode
    gas = view.on_screen.figures.gases[0]
    view.stack.setFocus()
    view.stack.point_at(gas.at)
    window.actions_by_key["explain"].trigger()
    until(qtbot, lambda: dialog(window) is not None)
    assert "pH 7.26" in dialog(window).explanation.title
    dialog(window).reject()


def test_a_line_that_has_nothing_behind_it_explains_nothing_else(window, qtbot):
    plain = Fact(window.theme, "Nothing due", quiet=True)
    plain.setParent(window.pages.episode)
    plain.show()
    plain.setFocus()
    window.actions_by_key["explain"].trigger()
    assert dialog(window) is None
