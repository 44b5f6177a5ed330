"""The workbook: specifications in, bytes out. With the theme and the charts the only room that knows openpyxl.

Formulas carry their values, foreign text can never become a formula, and the same specifications give the same content.
"""

from __future__ import annotations

import datetime as dt
import hashlib
import io
import math
import re
import zipfile
from collections.abc import Mapping, Sequence
from xml.etree import ElementTree

from openpyxl import Workbook
from openpyxl.comments import Comment
from openpyxl.utils import get_column_letter
from openpyxl.workbook.defined_name import DefinedName
from openpyxl.worksheet.worksheet import Worksheet

from traverse.report import _charts, _theme
from traverse.report.spec import Addresses, Live, SheetSpec, Text, column_letters, live_cells

_MAIN = "http://schemas.openxmlformats.org/spreadsheetml/2006/main"
_CONTROL = re.compile("[\x00-\x08\x0b\x0c\x0e-\x1f]")
# Lone surrogates and the two non-characters: no XML file can hold them.
_UNWRITABLE = re.compile("[\ud800-\udfff\ufffe\uffff]")
LONGEST = 32_767
_EPOCH = dt.datetime(1980, 1, 1)  # noqa: DTZ001 - a fixed date in the file's properties, without a zone
DEFAULT_WIDTH = 12.0


def build(specs: Sequence[SheetSpec], *, title: str, date: dt.date | None, subject: str) -> bytes:
    """Return the workbook of these pages as bytes.

    Parameters
    ----------
    specs : sequence of SheetSpec
        The pages in order.
    title, subject : str
        For the file's properties and the printed footer.
    date : date, optional
        The report's own date, an input; never the clock.
    """
    book = Workbook()
    book.remove(book.worksheets[0])
    addresses = Addresses(specs)
    for style in (named := _theme.styles()).values():
        book.add_named_style(style)
    for spec in specs:
        sheet = book.create_sheet(spec.title)
        _fill(sheet, spec, addresses, {name: style.name for name, style in named.items()})
        _print_setup(sheet, spec, clean(title))
        for name, (row, column) in spec.names.items():
            book.defined_names[name] = DefinedName(name, attr_text=f"'{spec.title}'!${column_letters(column)}${row}")
    for spec in specs:
        for chart in spec.charts:
            _charts.add(book, spec.title, chart, addresses)
    stamp = dt.datetime(date.year, date.month, date.day) if date and date.year >= 1980 else _EPOCH  # noqa: DTZ001
    book.properties.created = book.properties.modified = stamp
    book.properties.title, book.properties.subject = clean(title)[:255], clean(subject)[:255]
    book.properties.creator = "traverse"
    stream = io.BytesIO()
    book.save(stream)
    return _finish(stream.getvalue(), specs, stamp)


def clean(text: str) -> str:
    """Return text that an XML file can hold; what it cannot is replaced visibly, and more than a cell holds is cut visibly."""
    text = _CONTROL.sub("\ufffd", _UNWRITABLE.sub("\ufffd", text))
    return text if len(text) <= LONGEST else text[: LONGEST - 12] + " [cut here]"


def _fill(sheet: Worksheet, spec: SheetSpec, addresses: Addresses, named: Mapping[str, str]) -> None:
    """Write the cells of one page."""
    sheet.sheet_view.showGridLines = False
    for (row, column), put in sorted(spec.cells.items()):
        cell = sheet.cell(row=row, column=column)
        cell.style = named[put.style]
        content = put.content
        if isinstance(content, Text):
            cell.value = clean(content.text)
            # Set by hand: text that starts with '=' or looks like an error must stay text.
            cell.data_type = "s"
            if content.text[:1] in {"=", "+", "-", "@"}:
                cell.quotePrefix = True  # type: ignore[attr-defined]
        elif isinstance(content, Live):
            cell.value = addresses.formula(content.formula, spec.title)
            cell.number_format = put.format
        else:
            assert math.isfinite(content), f"{spec.title} {row}, {column}: a number that is none"
            cell.value = content
            cell.number_format = put.format
        if put.note:
            cell.comment = Comment(clean(put.note), "traverse", height=60 + 18 * (len(put.note) // 40), width=260)
        if (row, column) in spec.spans:
            sheet.merge_cells(start_row=row, start_column=column, end_row=row, end_column=column + spec.spans[row, column] - 1)
    last = max((column for _, column in spec.cells), default=1)
    for column in range(1, last + 1):
        sheet.column_dimensions[get_column_letter(column)].width = spec.widths.get(column, DEFAULT_WIDTH)


def _print_setup(sheet: Worksheet, spec: SheetSpec, title: str) -> None:
    """Make the page print on A4 and on Letter: one page wide, numbered, with its heads repeated."""
    sheet.page_setup.orientation = spec.orientation
    sheet.page_setup.paperSize = 9
    sheet.page_setup.fitToWidth, sheet.page_setup.fitToHeight = 1, 0
    sheet.sheet_properties.pageSetUpPr.fitToPage = True
    margins = sheet.page_margins
    margins.left = margins.right = 0.6
    margins.top, margins.bottom, margins.header, margins.footer = 0.75, 0.75, 0.35, 0.35
    shown = title.replace("&", "&&")[:120]
    sheet.oddHeader.left.text, sheet.oddHeader.right.text = shown, "&A"
    sheet.oddFooter.right.text = "page &P of &N"
    sheet.oddFooter.left.text = "values are live formulas; see Record for inputs and digests"
    for part in (sheet.oddHeader.left, sheet.oddHeader.right, sheet.oddFooter.left, sheet.oddFooter.right):
        part.size = 8
    if spec.repeat_rows is not None:
        first, last = spec.repeat_rows
        sheet.print_title_rows = f"{first}:{last}"
        sheet.freeze_panes = f"A{last + 1}"


def _finish(content: bytes, specs: Sequence[SheetSpec], stamp: dt.datetime) -> bytes:
    """Put the values beside the formulas and make the bytes the same each time."""
    live = live_cells(specs)
    pages = {f"xl/worksheets/sheet{number}.xml": spec.title for number, spec in enumerate(specs, start=1)}
    out = io.BytesIO()
    with zipfile.ZipFile(io.BytesIO(content)) as source, zipfile.ZipFile(out, "w", zipfile.ZIP_DEFLATED) as target:
        for name in sorted(source.namelist()):
            part = source.read(name)
            if name in pages:
                part = _with_values(part, pages[name], live)
            if name == "docProps/core.xml":
                part = re.sub(rb"(<dcterms:modified[^>]*>)[^<]*", rb"\g<1>" + stamp.strftime("%Y-%m-%dT%H:%M:%SZ").encode(), part)
            if name.endswith((".xml", ".rels", ".vml")):
                part = ElementTree.canonicalize(part.decode("utf-8")).encode("utf-8")
            info = zipfile.ZipInfo(name, (1980, 1, 1, 0, 0, 0))
            info.compress_type = zipfile.ZIP_DEFLATED
            info.external_attr = 0o644 << 16
            target.writestr(info, part)
    return out.getvalue()


def _with_values(part: bytes, page: str, live: Mapping[tuple[str, str], Live]) -> bytes:
    """Put each formula's value into the page's XML."""
    ElementTree.register_namespace("", _MAIN)
    ElementTree.register_namespace("r", "http://schemas.openxmlformats.org/officeDocument/2006/relationships")
    root = ElementTree.fromstring(part)  # noqa: S314 - written a moment ago by this program
    for cell in root.iter(f"{{{_MAIN}}}c"):
        if cell.find(f"{{{_MAIN}}}f") is None:
            continue
        value = live[page, cell.get("r", "")].value
        shown = cell.find(f"{{{_MAIN}}}v")
        if shown is None:
            shown = ElementTree.SubElement(cell, f"{{{_MAIN}}}v")
        if isinstance(value, bool):
            cell.set("t", "b")
            shown.text = str(int(value))
        elif isinstance(value, str):
            cell.set("t", "str")
            shown.text = value
        else:
            assert math.isfinite(value), f"{page} {cell.get('r')}: a formula without a value"
            cell.attrib.pop("t", None)
            shown.text = repr(float(value))
    return ElementTree.tostring(root)


def content_digest(content: bytes) -> str:
    """Return the SHA-256 over the sorted names and uncompressed parts: the same for the same report on any machine."""
    digest = hashlib.sha256()
    with zipfile.ZipFile(io.BytesIO(content)) as book:
        for name in sorted(book.namelist()):
            part = book.read(name)
            digest.update(name.encode() + b"\0" + str(len(part)).encode() + b"\0" + part)
    return digest.hexdigest()
