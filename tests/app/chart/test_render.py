"""Pictures: their own resolution, real vectors, and a plain error where they cannot be written."""

import re
import subprocess
import sys

import pytest
from pypdf import PdfReader

from app.chart.render import image_of, pdf_of, svg_of
from app.look.theme import DARK, LIGHT


@pytest.fixture(params=["stack_spec", "lanes_spec", "map_spec"])
def spec(request):
    return request.getfixturevalue(request.param)


def test_a_picture_has_the_size_and_the_resolution_asked_for(qapp, spec):
    single, double = image_of(spec, LIGHT, 700, 500), image_of(spec, LIGHT, 700, 500, 2.0)
    assert (single.width(), single.height()) == (700, 500)
    assert (double.width(), double.height()) == (1400, 1000)
    blown_up = single.scaled(1400, 1000)
    assert blown_up != double  # drawn anew, not enlarged
    assert image_of(spec, DARK, 700, 500) != single


def test_two_pictures_of_one_thing_are_equal(qapp, spec):
    assert image_of(spec, LIGHT, 700, 500) == image_of(spec, LIGHT, 700, 500)


def test_a_pdf_has_one_page_of_its_size_with_words_that_can_be_found(qapp, spec, tmp_path):
    path = tmp_path / "chart.pdf"
    pdf_of(spec, LIGHT, 960, 640, path, "a chart")
    (page,) = PdfReader(path).pages
    assert (float(page.mediabox.width), float(page.mediabox.height)) == pytest.approx((720, 480), abs=1)
    assert not page.images
    assert re.search(r"7\.40|PaCO2|Bed 1", re.sub(r"\s+", " ", page.extract_text()))


def test_an_svg_has_vectors_and_no_pixels(qapp, spec, tmp_path):
    path = tmp_path / "chart.svg"
    svg_of(spec, LIGHT, 960, 640, path, "a chart")
    text = path.read_text(encoding="utf-8")
    assert text.count("<path") + text.count("<polyline") > 10
    assert "<text" in text
    assert "<image" not in text
    assert "a chart" in text


@pytest.mark.parametrize("write", [pdf_of, svg_of])
def test_a_place_that_cannot_be_written_is_named(qapp, map_spec, tmp_path, write):
    with pytest.raises(OSError, match="nowhere"):
        write(map_spec, LIGHT, 300, 200, tmp_path / "nowhere" / "x")


@pytest.mark.parametrize("module", ["app.chart", "app.chart.lanes", "app.chart.acid_base_map", "app.chart.render"])
def test_what_needs_no_pyqtgraph_does_not_import_it(module):
    code = f"import sys, {module}; sys.exit('pyqtgraph' in sys.modules)"
    assert subprocess.run([sys.executable, "-c", code], check=False).returncode == 0
