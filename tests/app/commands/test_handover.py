"""The handover by the command line: as a sheet, as text, and what is refused."""

from pathlib import Path

from app.cli import DONE, REFUSED, WRONG_USAGE
from tests.support.command_line import Run

SHIFT = ("--from", "2026-03-27T19:30Z", "--to", "2026-03-27T23:00Z")


def test_handover_is_written_as_pdf_and_as_text(filled: Run, tmp_path: Path) -> None:
    from pypdf import PdfReader

    pdf, txt = tmp_path / "h.pdf", tmp_path / "h.txt"
    code, out, err = filled("handover", *SHIFT, "--out", pdf, "--given-by", "A. Giver", "--paper", "Letter")
    assert code == DONE, err
    assert "2 pages, 1 episodes" in out
    reader = PdfReader(pdf)
    assert len(reader.pages) == 2
    assert round(reader.pages[0].mediabox.width) == 612
    assert filled("handover", *SHIFT, "--out", txt)[0] == DONE
    said = txt.read_text("utf-8")
    assert "BED 4: Acidotic: pH 7.33, PaCO2 57 mmHg at 21:25" in said
    assert "better: pH +0.07, PaCO2 -11 mmHg after 1 h 05 min" in said.replace("Better", "better")
    assert filled("handover", *SHIFT)[1].strip().splitlines()[0].startswith("HANDOVER. Shift 27-Mar-2026 19:30")


def test_handover_as_text(filled: Run, tmp_path: Path) -> None:
    code, out, _ = filled("handover", *SHIFT, "--text")
    assert (code, "Bed 4" in out) == (DONE, True)
    assert filled("handover", *SHIFT, "--text", "--out", tmp_path / "h.pdf")[0] == WRONG_USAGE


def test_handover_refuses_what_it_cannot_write_and_leaves_nothing(filled: Run, tmp_path: Path) -> None:
    code, _, err = filled("handover", *SHIFT, "--out", tmp_path / "gone" / "h.pdf")
    assert code == REFUSED
    assert "folder" in err
    assert filled("handover", *SHIFT, "--out", tmp_path / "h.docx")[0] == WRONG_USAGE
    backwards = ("--from", "2026-03-27T23:00Z", "--to", "2026-03-27T19:30Z")
    assert "before it starts" in filled("handover", *backwards, "--out", tmp_path / "h.pdf")[2]
    assert not [p for p in tmp_path.iterdir() if p.name.startswith("h.")]
