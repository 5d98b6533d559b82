"""A made-up language on every page, dialog and handover line: what stays as it was never went through translation.

The translator puts every text in marks. What stands outside the marks may only be data: a value with its unit, a
clinical abbreviation, what people typed, a policy's source.
"""

import re

import pytest
from PySide6.QtCore import QTranslator
from PySide6.QtWidgets import QTableWidget, QWidget

from app.forms.readiness import ITEMS, MEASURED
from app.window.screen_dialogs import LOG_FILE, TABLE_FILE, dialogs
from core.judgement.policy import shipped_text
from tests.support.open_window import BEDS, make_store, open_window, settled

MARKED = re.compile(r"«[^«»]*»")
WORD = re.compile(r"[A-Za-z]{3,}")
PROPERTIES = ("text", "title", "placeholderText", "toolTip", "accessibleName", "accessibleDescription")
TRADE = frozenset(
    """
    IPAP EPAP CPAP BPAP FiO SpO PaCO PaO HCO GCS ACVPU HACOR NEWS HFN ROX PCO ARDS COPD NIV min mmHg kPa cmH mmol nmol
    Jan Feb Mar Apr May Jun Jul Aug Sep Oct Nov Dec csv toml luffmark Luffmark Ctrl Shift Alt Home End Left Right Del
    Esc SHA Europe London UTC LOINC UCUM TOML PDF SVG PNG CSV FHIR PIN Enter art cap ven
    """.split()  # noqa: SIM905
)
"""Abbreviations, units, months as they are written, keys and file formats: in no language."""
LEGAL = "contains content from LOINC"
"""The notice that LOINC's licence prescribes word for word."""
LEFT_OUT = {
    "print-preview": "Qt's own dialog",
    "policy": "a policy's own texts",
    "policy-file": "a policy's own texts",
}


class Marker(QTranslator):
    def translate(self, context, source, disambiguation=None, n=-1):  # noqa: ARG002
        keys = context in ("QShortcut", "QKeySequence")  # names of keys: what they mean hangs on them
        return source if keys else f"«{source}»"

    def isEmpty(self):
        return False


@pytest.fixture
def marked(qapp):
    translator = Marker()
    qapp.installTranslator(translator)
    yield
    qapp.removeTranslator(translator)


def texts(root):
    for widget in [root, *root.findChildren(QWidget)]:
        if not widget.isVisible():
            continue
        for name in PROPERTIES:
            value = getattr(widget, name, None)
            if callable(value) and type(widget).__name__ not in ("QLineEdit",):
                found = value()
                if isinstance(found, str) and found:
                    yield found
        if isinstance(widget, QTableWidget):
            cells = (widget.item(r, c) for r in range(widget.rowCount()) for c in range(widget.columnCount()))
            yield from (cell.text() for cell in cells if cell is not None)


def data():
    """What stands in the record, in the files of the walk, and in the policy's sources: the longest first."""
    typed = [str(value) for facts, _ in BEDS.values() for value in facts.values()]
    sources = [*re.findall(r'"([^"]*)"', shipped_text()), *(item.source for item in (*ITEMS, *MEASURED))]
    columns = [*TABLE_FILE.splitlines()[0].split(";"), ", value", LOG_FILE.splitlines()[1].partition(",")[0]]
    return sorted({text for text in (*typed, *sources, *columns) if len(text) > 2}, key=len, reverse=True)


def outside(text, known):
    plain = re.sub(r"<[^>]*>|&\w+;|\N{NO-BREAK SPACE}", " ", text).replace("\N{WORD JOINER}", "")
    while (inner := MARKED.sub(" ", plain)) != plain:
        plain = inner
    for phrase in known:
        plain = plain.replace(phrase, " ")
    return [w for w in WORD.findall(plain) if w not in TRADE]


def bare(root, known):
    return sorted({(t[:80], *outside(t, known)) for t in texts(root) if outside(t, known) and LEGAL not in t})


@pytest.mark.parametrize("page", ["ward", "episode", "map", "compare", "statistics"])
def test_every_text_of_a_page_went_through_translation(qtbot, tmp_path, marked, page):
    with open_window(qtbot, make_store(tmp_path / "ward.luffmark")) as window:
        window.select("bed-7")
        window.show_page(page)
        settled(qtbot, window)
        assert bare(window, data()) == []


def test_every_text_of_every_dialog_went_through_translation(qtbot, tmp_path, marked):
    found = {}
    with open_window(qtbot, make_store(tmp_path / "ward.luffmark")) as window:
        window.open_episode("bed-7")
        settled(qtbot, window)
        for name, dialog in dialogs(window, tmp_path, lambda: settled(qtbot, window)):
            if name not in LEFT_OUT and (wrong := bare(dialog, data())):
                found[name] = wrong
            dialog.reject()
    assert found == {}


def test_the_walk_sees_a_bare_text(qtbot, marked):
    from PySide6.QtWidgets import QLabel

    label = QLabel("Two words")
    qtbot.addWidget(label)
    label.show()
    assert bare(label, []) == [("Two words", "Two", "words")]
    label.setText(label.tr("Two words"))
    assert bare(label, []) == []


def test_every_line_of_the_handover_went_through_translation(qtbot, tmp_path, marked):
    with open_window(qtbot, make_store(tmp_path / "ward.luffmark")) as window:
        window.show_page("handover")
        settled(qtbot, window)
        qtbot.waitUntil(lambda: len(window.pages.handover.text.toPlainText()) > 200)
        lines = window.pages.handover.text.toPlainText().splitlines()
        known = data()
        found = {line[:90]: wrong for line in lines if (wrong := outside(line, known))}
        assert found == {}
