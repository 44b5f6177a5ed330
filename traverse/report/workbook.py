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
from typing import Any
from xml.etree import ElementTree

from openpyxl import Workbook
from openpyxl.comments import Comment
from openpyxl.formatting.rule import Rule
from openpyxl.styles.differential import DifferentialStyle
from openpyxl.utils import get_column_letter
from openpyxl.workbook.defined_name import DefinedName
from openpyxl.worksheet.datavalidation import DataValidation
from openpyxl.worksheet.worksheet import Worksheet

from traverse.report import _charts, _theme
from traverse.report.spec import Addresses, Content, Live, SheetSpec, Text, clean, column_letters, place, quoted

_MAIN = "http://schemas.openxmlformats.org/spreadsheetml/2006/main"
_CELL, _FORMULA, _VALUE, _INLINE = (f"{{{_MAIN}}}{tag}" for tag in ("c", "f", "v", "t"))
_SPACE = "{http://www.w3.org/XML/1998/namespace}space"
# Spreadsheet programs read _x0041_ in a cell's text as the character of that number.
_CODE = re.compile("_(?=x[0-9A-Fa-f]{4}_)")
_DECLARATION = b'<?xml version="1.0" encoding="UTF-8" standalone="yes"?>\n'
_HEADER_LONGEST = 90
_EPOCH = dt.datetime(1980, 1, 1)  # noqa: DTZ001 - a fixed date in the file's properties, without a zone
DEFAULT_WIDTH = 12.0
LINE_HEIGHT = 12.6  # points, for the theme's text size


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
        _guard(sheet, spec, addresses)
        for name, (row, column) in spec.names.items():
            book.defined_names[name] = DefinedName(name, attr_text=f"{quoted(spec.title)}!{place(row, column)}")
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


def _fill(sheet: Worksheet, spec: SheetSpec, addresses: Addresses, named: Mapping[str, str]) -> None:
    """Write the cells of one page."""
    sheet.sheet_view.showGridLines = False
    for (row, column), put in sorted(spec.cells.items()):
        cell = sheet.cell(row=row, column=column)
        cell.style = named[put.style]
        content = put.content
        if isinstance(content, Text):
            cell.value = _CODE.sub("_x005F_", clean(content.text)) or None
            # Set by hand: text that starts with '=' or looks like an error must stay text.
            cell.data_type = "s" if content.text else "n"
            if content.text[:1] in {"=", "+", "-", "@"}:
                cell.quotePrefix = True
        elif isinstance(content, Live):
            cell.value = addresses.formula(content.formula, spec.title)
            cell.number_format = put.format
        else:
            cell.value = content
            cell.number_format = put.format
        if put.note:
            note = _CODE.sub("_x005F_", clean(put.note))
            cell.comment = Comment(note, "traverse", height=60 + 18 * (len(note) // 40), width=260)
        if (row, column) in spec.spans:
            sheet.merge_cells(start_row=row, start_column=column, end_row=row, end_column=column + spec.spans[row, column] - 1)
    _sizes(sheet, spec)


def _sizes(sheet: Worksheet, spec: SheetSpec) -> None:
    """Set the widths of the columns and the heights of the rows."""
    last = max((*(column for _, column in spec.cells), *spec.widths), default=1)
    for column in range(1, last + 1):
        sheet.column_dimensions[get_column_letter(column)].width = spec.widths.get(column, DEFAULT_WIDTH)
    for (row, _), put in spec.cells.items():
        if put.style in _theme.HEIGHTS:
            sheet.row_dimensions[row].height = _theme.HEIGHTS[put.style]
    for row, lines in _lines(spec).items():
        if lines > 1:
            sheet.row_dimensions[row].height = LINE_HEIGHT * lines + 2.0


def _lines(spec: SheetSpec) -> dict[int, int]:
    """Return how many lines of text each row needs: no program heightens rows of merged cells by itself."""
    found: dict[int, int] = {}
    for (row, column), put in spec.cells.items():
        if not isinstance(put.content, Text) or put.style not in _theme.WRAPPED:
            continue
        width = sum(spec.widths.get(column + i, DEFAULT_WIDTH) for i in range(spec.spans.get((row, column), 1)))
        lines = sum(max(1, math.ceil(len(part) * 0.92 / width)) for part in put.content.text.split("\n"))
        found[row] = max(found.get(row, 1), min(lines, 30))
    return found


def _print_setup(sheet: Any, spec: SheetSpec, title: str) -> None:
    """Make the page print on A4 and on Letter: one page wide, numbered, with its heads repeated."""
    sheet.page_setup.orientation = spec.orientation
    sheet.page_setup.paperSize = 9
    sheet.page_setup.fitToWidth, sheet.page_setup.fitToHeight = 1, 0
    sheet.sheet_properties.pageSetUpPr.fitToPage = True
    margins = sheet.page_margins
    margins.left = margins.right = 0.6
    margins.top, margins.bottom, margins.header, margins.footer = 0.75, 0.75, 0.35, 0.35
    # All parts together may have 255 characters, and a lone '&' would begin a code.
    shown = " ".join(title.split())[:_HEADER_LONGEST].replace("&", "&&")
    sheet.oddHeader.left.text, sheet.oddHeader.right.text = shown, "&A"
    sheet.oddFooter.right.text = "page &P of &N"
    sheet.oddFooter.left.text = spec.footer
    for part in (sheet.oddHeader.left, sheet.oddHeader.right, sheet.oddFooter.left, sheet.oddFooter.right):
        part.size = 8
    if spec.repeat_rows is not None:
        first, last = spec.repeat_rows
        sheet.print_title_rows = f"{first}:{last}"
        sheet.freeze_panes = f"A{last + 1}"


def _guard(sheet: Worksheet, spec: SheetSpec, addresses: Addresses) -> None:
    """Say what may be entered where, what stands out while something is wrong, and what cannot be changed by accident."""
    for wanted in spec.validations:
        if wanted.choices:
            found = DataValidation(type="list", formula1='"' + ",".join(wanted.choices) + '"', allow_blank=True)
        else:
            formula = addresses.relative(wanted.formula, spec.title, wanted.cells)
            found = DataValidation(type="custom", formula1=formula, allow_blank=True)
        found.errorTitle, found.error = wanted.title, wanted.message
        found.promptTitle, found.prompt = wanted.title, wanted.message
        # A warning, not a wall: what was read is written down even when it should not be.
        found.errorStyle, found.showErrorMessage, found.showInputMessage = "warning", True, False
        found.add(addresses.area(wanted.cells))
        sheet.add_data_validation(found)
    for look in spec.highlights:
        font, fill = _theme.difference(look.style)
        formula = addresses.relative(look.formula, spec.title, look.cells)
        rule = Rule(type="expression", formula=[formula], dxf=DifferentialStyle(font=font, fill=fill))
        sheet.conditional_formatting.add(addresses.area(look.cells), rule)
    if spec.protected:
        sheet.protection.sheet = True
        sheet.protection.formatColumns = sheet.protection.formatRows = False


def _finish(content: bytes, specs: Sequence[SheetSpec], stamp: dt.datetime) -> bytes:
    """Put the values beside the formulas and make the bytes the same each time."""
    pages = {f"xl/worksheets/sheet{number}.xml": spec for number, spec in enumerate(specs, start=1)}
    out = io.BytesIO()
    with zipfile.ZipFile(io.BytesIO(content)) as source, zipfile.ZipFile(out, "w", zipfile.ZIP_DEFLATED) as target:
        for name in sorted(source.namelist()):
            part = source.read(name)
            if name in pages:
                part = _DECLARATION + _with_values(part, pages[name])
            if name == "docProps/core.xml":
                part = re.sub(rb"(<dcterms:modified[^>]*>)[^<]*", rb"\g<1>" + stamp.strftime("%Y-%m-%dT%H:%M:%SZ").encode(), part)
            if name not in pages and name.endswith((".xml", ".rels", ".vml")):
                part = _DECLARATION + ElementTree.canonicalize(part.decode("utf-8")).encode("utf-8")
            info = zipfile.ZipInfo(name, (1980, 1, 1, 0, 0, 0))
            info.compress_type = zipfile.ZIP_DEFLATED
            info.create_system = 3
            info.external_attr = 0o644 << 16
            target.writestr(info, part)
    return out.getvalue()


def _with_values(part: bytes, spec: SheetSpec) -> bytes:
    """Put each formula's value into the page's XML, and every number with all its digits."""
    ElementTree.register_namespace("", _MAIN)
    ElementTree.register_namespace("r", "http://schemas.openxmlformats.org/officeDocument/2006/relationships")
    contents = {f"{column_letters(column)}{row}": put.content for (row, column), put in spec.cells.items()}
    root = ElementTree.fromstring(part)  # noqa: S314 - written a moment ago by this program
    found = 0
    for cell in root.iter(_CELL):
        content = contents.get(cell.get("r", ""))
        if cell.find(_FORMULA) is not None:
            # Anything else would be a formula that no page asked for.
            assert isinstance(content, Live), f"{spec.title} {cell.get('r')}: a formula out of nowhere"
            found += 1
        if content is not None and not isinstance(content, Text):
            _show(cell, content)
    assert found == sum(isinstance(content, Live) for content in contents.values()), f"{spec.title}: a formula is lost"
    for text in root.iter(_INLINE):
        text.set(_SPACE, "preserve")
    # Written anew by one serialiser with sorted attributes: the same bytes whichever library wrote the page first.
    for element in root.iter():
        if len(element.attrib) > 1:
            ordered = sorted(element.attrib.items())
            element.attrib.clear()
            element.attrib.update(ordered)
    return ElementTree.tostring(root)


def _show(cell: ElementTree.Element, content: Content) -> None:
    """Put what a cell shows into its element."""
    value = content.value if isinstance(content, Live) else content
    assert not isinstance(value, Text), "text is no number"
    shown = cell.find(_VALUE)
    if shown is None:
        shown = ElementTree.SubElement(cell, _VALUE)
    cell.attrib.pop("t", None)
    if isinstance(value, bool):
        cell.set("t", "b")
        shown.text = str(int(value))
    elif isinstance(value, str):
        cell.set("t", "str")
        shown.text = clean(value)
    else:
        shown.text = repr(value) if type(value) is int else repr(float(value))


def content_digest(content: bytes) -> str:
    """Return the SHA-256 over the sorted names and uncompressed parts: the same for the same report on any machine."""
    digest = hashlib.sha256()
    with zipfile.ZipFile(io.BytesIO(content)) as book:
        for name in sorted(book.namelist()):
            part = book.read(name)
            digest.update(name.encode() + b"\0" + str(len(part)).encode() + b"\0" + part)
    return digest.hexdigest()
