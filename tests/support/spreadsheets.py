"""Small spreadsheets written by hand, good and hostile: XLSX and ODS are zipped XML, so no library is needed."""

from __future__ import annotations

import zipfile
from collections.abc import Sequence
from pathlib import Path

_TYPES = (
    '<Types xmlns="http://schemas.openxmlformats.org/package/2006/content-types">'
    '<Default Extension="rels" ContentType="application/vnd.openxmlformats-package.relationships+xml"/>'
    '<Default Extension="xml" ContentType="application/xml"/>'
    '<Override PartName="/xl/workbook.xml" ContentType="application/vnd.openxmlformats-officedocument.'
    'spreadsheetml.sheet.main+xml"/><Override PartName="/xl/worksheets/sheet1.xml" ContentType="application/'
    'vnd.openxmlformats-officedocument.spreadsheetml.worksheet+xml"/></Types>'
)
_RELS = (
    '<Relationships xmlns="http://schemas.openxmlformats.org/package/2006/relationships"><Relationship Id="r1" '
    'Type="http://schemas.openxmlformats.org/officeDocument/2006/relationships/{kind}" Target="{target}"/>'
    "</Relationships>"
)
_MAIN = "http://schemas.openxmlformats.org/spreadsheetml/2006/main"
_R = "http://schemas.openxmlformats.org/officeDocument/2006/relationships"
_STYLES = (
    f'<styleSheet xmlns="{_MAIN}"><numFmts count="2"><numFmt numFmtId="170" '
    'formatCode="yyyy\\-mm\\-dd hh:mm"/><numFmt numFmtId="171" formatCode="0.0&quot; kPa&quot;"/></numFmts>'
    '<fonts count="1"><font/></fonts><fills count="1"><fill/></fills><borders count="1"><border/></borders>'
    '<cellStyleXfs count="1"><xf/></cellStyleXfs><cellXfs count="5"><xf numFmtId="0"/>'
    '<xf numFmtId="170" applyNumberFormat="1"/><xf numFmtId="2"/><xf numFmtId="171"/><xf numFmtId="9"/></cellXfs>'
    "</styleSheet>"
)
_STYLE_OF = {"date": 1, "0.00": 2, "0.0": 3, "0%": 4}


def date(serial: float) -> tuple[str, float]:
    """A cell that shows a date and time; `serial` counts days since 1899-12-30."""
    return "date", serial


def shown(value: float, form: str) -> tuple[str, float]:
    """A number in a cell whose format is `0.00`, `0.0` (with a unit as text behind it) or `0%`."""
    return form, value


Cell = str | float | None | tuple[str, float]


def sheet_xml(rows: Sequence[Sequence[Cell]], merged: str = "", extra: str = "") -> str:
    """The XML of one sheet."""
    body = "".join(
        f'<row r="{r}">' + "".join(_cell(c, r, value) for c, value in enumerate(row)) + "</row>"
        for r, row in enumerate(rows, 1)
    )
    tail = f'<mergeCells count="1"><mergeCell ref="{merged}"/></mergeCells>' if merged else ""
    return f'<worksheet xmlns="{_MAIN}"><sheetData>{body}{extra}</sheetData>{tail}</worksheet>'


def _cell(column: int, row: int, value: Cell) -> str:
    where = f"{chr(65 + column)}{row}"
    if value is None:
        return ""
    if isinstance(value, tuple):
        return f'<c r="{where}" s="{_STYLE_OF[value[0]]}"><v>{value[1]}</v></c>'
    if isinstance(value, str):
        text = value.replace("&", "&amp;").replace("<", "&lt;")
        return f'<c r="{where}" t="inlineStr"><is><t>{text}</t></is></c>'
    return f'<c r="{where}"><v>{value!r}</v></c>'


def write_xlsx(path: Path, sheet: str, *, name: str = "Gases", parts: dict[str, bytes] | None = None) -> Path:
    """An XLSX of one sheet; `parts` are added or replaced as they are."""
    book = (
        f'<workbook xmlns="{_MAIN}" xmlns:r="{_R}"><sheets><sheet name="{name}" sheetId="1" r:id="r1"/>'
        "</sheets></workbook>"
    )
    rels = _RELS.format(kind="worksheet", target="worksheets/sheet1.xml").replace(
        "</Relationships>",
        '<Relationship Id="r2" Type="http://schemas.openxmlformats.org/officeDocument/2006/relationships/styles" '
        'Target="styles.xml"/></Relationships>',
    )
    made: dict[str, bytes | str] = {
        "[Content_Types].xml": _TYPES,
        "_rels/.rels": _RELS.format(kind="officeDocument", target="xl/workbook.xml"),
        "xl/workbook.xml": book,
        "xl/_rels/workbook.xml.rels": rels,
        "xl/styles.xml": _STYLES,
        "xl/worksheets/sheet1.xml": sheet,
    }
    made.update(parts or {})
    with zipfile.ZipFile(path, "w", zipfile.ZIP_DEFLATED) as out:
        for key, data in made.items():
            out.writestr(key, data)
    return path


def write_ods(path: Path, rows_xml: str) -> Path:
    """An ODS of one sheet, its rows as XML."""
    content = (
        '<office:document-content xmlns:office="urn:oasis:names:tc:opendocument:xmlns:office:1.0" '
        'xmlns:table="urn:oasis:names:tc:opendocument:xmlns:table:1.0" '
        'xmlns:text="urn:oasis:names:tc:opendocument:xmlns:text:1.0" office:version="1.2"><office:body>'
        f'<office:spreadsheet><table:table table:name="Gases">{rows_xml}</table:table></office:spreadsheet>'
        "</office:body></office:document-content>"
    )
    with zipfile.ZipFile(path, "w", zipfile.ZIP_DEFLATED) as out:
        out.writestr("mimetype", "application/vnd.oasis.opendocument.spreadsheet", zipfile.ZIP_STORED)
        out.writestr("content.xml", content)
        out.writestr(
            "META-INF/manifest.xml",
            '<manifest:manifest xmlns:manifest="urn:oasis:names:tc:opendocument:xmlns:manifest:1.0">'
            '<manifest:file-entry manifest:full-path="/" manifest:media-type="application/'
            'vnd.oasis.opendocument.spreadsheet"/></manifest:manifest>',
        )
    return path


def ods_rows(rows: Sequence[Sequence[str | float]]) -> str:
    """Rows of texts and numbers as ODS writes them."""
    return "".join("<table:table-row>" + "".join(map(_ods_cell, row)) + "</table:table-row>" for row in rows)


def _ods_cell(value: str | float) -> str:
    if isinstance(value, str):
        return f'<table:table-cell office:value-type="string"><text:p>{value}</text:p></table:table-cell>'
    shown = f"<text:p>{value}</text:p></table:table-cell>"
    return f'<table:table-cell office:value-type="float" office:value="{value}">{shown}'
