"""The workbook's engine: addresses, cached values, foreign text, charts, the same bytes each time."""

import dataclasses
import datetime as dt
import io
import math
import os
import re
import subprocess
import sys
import zipfile
from pathlib import Path
from xml.etree import ElementTree

import openpyxl
import pytest
from hypothesis import example, given, settings
from hypothesis import strategies as st

from tests.support import office
from traverse.report import workbook
from traverse.report.spec import (
    Addresses,
    BarChart,
    Live,
    ScatterChart,
    Series,
    SheetSpec,
    Text,
    clean,
    column_letters,
    live_cells,
)

ROOT = Path(__file__).parents[2]
CHART = "{http://schemas.openxmlformats.org/drawingml/2006/chart}"
DRAWING = "{http://schemas.openxmlformats.org/drawingml/2006/main}"
DATE = dt.date(2026, 10, 14)
NASTY = (
    "=1+1", "=HYPERLINK(\"http://a.example\",\"b\")", "+1", "-2", "@SUM(1)", "\t=1", "#N/A", "#REF!", "TRUE", "1e5", "2026-01-01",
    " lead", "trail ", "   ", "a\r\nb\rc", "bell\x07", "\x00", "\ud800", "\uffff", "_x0041_", "_x005F_x0041_", "<&>'\"", "«a»",
    "]]>", "\u202eabc", "&[Page]", "&A", "x" * 40_000, "", "🙂", "{=1}",
)


def _sample(foreign: str = "boiler 3", last: float = 4.0) -> list[SheetSpec]:
    """Two pages that use all the engine offers; ``foreign`` stands wherever a user's text can."""
    first, second = SheetSpec("Bob's page", repeat_rows=(1, 3)), SheetSpec("Numbers", orientation="landscape")
    first.put(1, 1, Text(foreign), style="title", span=3)
    first.put(3, 1, Text("head"), style="heading", note=foreign)
    total = (1 + 0.1 + last) * 0.3
    first.put(4, 1, Live("=SUM(«x.0:x.2»)*«factor»", total), style="result", format="0.00", key="sum", name="flow")
    first.put(5, 1, Live("=«sum»>1", total > 1), key="more")
    first.put(6, 1, Live('=IF(«more»,"=more","less")', "=more" if total > 1 else "less"))
    first.put(7, 1, Live("=SQRT(flow)", math.sqrt(total)))
    for i, value in enumerate((1, 0.1, last)):
        second.put(2 + i, 1, Text(f"{i} {foreign}"), style="label", key=f"label.{i}")
        second.put(2 + i, 2, value, style="input", format="0.0", key=f"x.{i}")
        second.put(2 + i, 3, Live(f"=«x.{i}»^2", value**2), key=f"y.{i}")
    second.put(6, 2, 0.1 + 0.2 - 0.0, key="factor.long")
    second.put(7, 2, 0.3, key="factor")
    second.put(8, 2, Live("=SUM(«x.0:y.2»)+'Bob''s page'!$A$4-«sum»", 1 + 0.1 + last + 1 + 0.1**2 + last**2))
    second.chart(ScatterChart(
        title=foreign, x_title=foreign, y_title="y", anchor="E2", width_cm=10, height_cm=8,
        series=(Series(foreign, "x.0:x.2", "y.0:y.2", "line+points"), Series("b", "x.0:x.2", "x.0:x.2", "outline")),
    ))
    second.chart(ScatterChart(
        title="square", x_title="x", y_title="y", anchor="E20", width_cm=10, height_cm=10, square=True,
        series=(Series("a", "x.0:x.2", "y.0:y.2", "points"),), x_min=-1, x_max=19, y_min=0, y_max=20,
    ))
    second.chart(BarChart(title="bars", x_title="", y_title="share", labels="label.0:label.2", values="x.0:x.2", anchor="E40",
                          width_cm=10, height_cm=6))
    return [first, second]


def _build(specs: list[SheetSpec], title: str = "A title") -> bytes:
    return workbook.build(specs, title=title, date=DATE, subject=title)


def sample_digest() -> str:
    """Return the content digest of the sample; a second process asks for it."""
    return workbook.content_digest(_build(_sample("  ")))


PLAIN_FORMULAS = office.formulas(_build(_sample()))


def _parts(content: bytes) -> dict[str, bytes]:
    with zipfile.ZipFile(io.BytesIO(content)) as book:
        return {name: book.read(name) for name in book.namelist()}


# Placeholders and names


def test_placeholders_become_addresses():
    found = office.formulas(_build(_sample()))
    assert found["Bob's page"] == {
        "A4": "=SUM('Numbers'!$B$2:$B$4)*'Numbers'!$B$7", "A5": "=$A$4>1", "A6": '=IF($A$5,"=more","less")', "A7": "=SQRT(flow)",
    }
    assert found["Numbers"]["C3"] == "=$B$3^2"
    assert found["Numbers"]["B8"] == "=SUM($B$2:$C$4)+'Bob''s page'!$A$4-'Bob''s page'!$A$4"


def test_formula_cells_are_the_live_cells():
    specs = _sample()
    found = {(page, address) for page, cells in office.formulas(_build(specs)).items() for address in cells}
    assert found == set(live_cells(specs))
    assert len(found) == 8


@pytest.mark.parametrize(("number", "letters"), [(1, "A"), (26, "Z"), (27, "AA"), (702, "ZZ"), (703, "AAA"), (16384, "XFD")])
def test_column_letters(number, letters):
    assert column_letters(number) == letters


def test_a_key_that_is_nowhere_is_a_mistake():
    sheet = SheetSpec("A")
    sheet.put(1, 1, Live("=«nowhere»", 1.0))
    with pytest.raises(KeyError, match="nowhere"):
        _build([sheet])


def test_what_stands_twice_is_a_mistake():
    first, second = SheetSpec("A"), SheetSpec("B")
    first.put(1, 1, 1.0, key="a", name="alpha")
    with pytest.raises(AssertionError, match="put twice"):
        first.put(1, 1, 2.0)
    with pytest.raises(AssertionError, match="key 'a' is put twice"):
        first.put(2, 1, 2.0, key="a")
    second.put(1, 1, 1.0, key="a")
    with pytest.raises(AssertionError, match="two pages"):
        Addresses([first, second])
    third = SheetSpec("C")
    third.put(1, 1, 1.0, name="ALPHA")
    with pytest.raises(AssertionError, match="defined name stands on two"):
        Addresses([first, third])
    with pytest.raises(AssertionError, match="two pages of one title"):
        Addresses([SheetSpec("Page"), SheetSpec("PAGE")])


def test_ranges_stay_on_a_page_and_run_forward():
    first, second = SheetSpec("A"), SheetSpec("B")
    first.put(1, 1, 1.0, key="a")
    first.put(2, 1, 1.0, key="b")
    second.put(1, 1, 1.0, key="c")
    addresses = Addresses([first, second])
    assert addresses.span("a:b", "A") == "$A$1:$A$2"
    assert addresses.span("a:b", "B") == "'A'!$A$1:$A$2"
    with pytest.raises(AssertionError, match="over two pages"):
        addresses.span("a:c")
    with pytest.raises(AssertionError, match="upwards"):
        addresses.span("b:a")


@pytest.mark.parametrize("title", ["", "a" * 32, "a/b", "a:b", "a?", "a*", "[a]", "'a", "a'", "a\nb"])
def test_titles_no_program_takes(title):
    with pytest.raises(AssertionError, match="title of a page"):
        Addresses([SheetSpec(title)])


@pytest.mark.parametrize("name", ["R", "c", "Q1", "RC", "r1c1", "AB12", "true", "2a", "a b", "", "a-b", "é"])
def test_names_no_program_takes(name):
    with pytest.raises(AssertionError, match="defined name"):
        SheetSpec("A").put(1, 1, 1.0, name=name)


def test_defined_names_point_at_their_cells():
    book = openpyxl.load_workbook(io.BytesIO(_build(_sample())))
    assert book.defined_names["flow"].attr_text == "'Bob''s page'!$A$4"


@pytest.mark.parametrize(
    "formula", ["1+1", "=T.INV.2T(0.05,3)", "=NOW()", "=RAND()", '=TEXT(1,"0")', '=HYPERLINK("a")', "=sum(1)"],
)
def test_formulas_every_program_computes_alike(formula):
    with pytest.raises(AssertionError):
        Live(formula, 1.0)


def test_functions_inside_text_are_no_functions():
    assert Live('=IF(«a.NOW(»=1,"NOW()","x")', "x").value == "x"


# Values


@pytest.mark.parametrize("value", [math.nan, math.inf, -math.inf])
def test_no_cell_holds_what_is_no_number(value):
    with pytest.raises(AssertionError):
        Live("=1/3", value)
    with pytest.raises(AssertionError):
        SheetSpec("A").put(1, 1, value)


def test_values_stand_beside_formulas():
    shown = office.values(_build(_sample()))
    total = (1 + 0.1 + 4.0) * 0.3
    assert [shown["Bob's page"][f"A{row}"] for row in (4, 5, 6, 7)] == [total, True, "=more", math.sqrt(total)]
    assert shown["Numbers"]["C3"] == 0.1**2


@given(st.floats(allow_nan=False, allow_infinity=False))
@example(0.1 + 0.2)
@example(5e-324)
@example(1.7976931348623157e308)
@settings(max_examples=40)
def test_numbers_keep_every_digit(value):
    sheet = SheetSpec("A")
    sheet.put(1, 1, value, key="a")
    sheet.put(1, 2, Live("=«a»", value))
    shown = office.values(_build([sheet]))["A"]
    assert (shown["A1"], shown["B1"]) == (value, value)


# Foreign text


@given(st.one_of(st.text(max_size=30), st.sampled_from(NASTY)))
@settings(max_examples=30)
def test_foreign_text_stays_text(foreign):
    specs = _sample(foreign)
    content = _build(specs, foreign)
    for name, part in _parts(content).items():
        if name.endswith((".xml", ".rels", ".vml")):
            ElementTree.fromstring(part)
    assert office.formulas(content) == PLAIN_FORMULAS
    book = openpyxl.load_workbook(io.BytesIO(content))
    assert {cell.data_type for sheet in book for row in sheet.iter_rows() for cell in row} <= {"n", "s", "f", "b"}
    cell = book["Bob's page"]["A1"]
    assert (cell.value or "").replace("_x005F_", "_") == clean(foreign)
    assert not cell.value or cell.data_type == "s"


@pytest.mark.parametrize("foreign", NASTY)
def test_each_nasty_text(foreign):
    test_foreign_text_stays_text.hypothesis.inner_test(foreign)


def test_what_is_lost_is_seen():
    assert clean("a\x00b\ud800c\uffff") == "a\ufffdb\ufffdc\ufffd"
    assert clean("a\r\nb\rc") == "a\nb\nc"
    assert len(clean("x" * 40_000)) == 32_767
    assert clean("x" * 40_000).endswith("[cut here]")
    assert clean("x" * 32_767) == "x" * 32_767


def test_codes_for_characters_are_not_taken_for_characters():
    sheet = _parts(_build(_sample("_x0041_")))["xl/worksheets/sheet1.xml"].decode()
    assert "_x005F_x0041_" in sheet
    assert ">_x0041_" not in sheet


def test_spaces_are_kept_by_every_program():
    # Also where a text is nothing but spaces, which the XML libraries of different machines mark differently.
    part = ElementTree.fromstring(_parts(_build(_sample("   ")))["xl/worksheets/sheet1.xml"])
    found = next(part.iter(f"{office.NAMESPACE}t"))
    assert found.text == "   "
    assert found.get("{http://www.w3.org/XML/1998/namespace}space") == "preserve"


@pytest.mark.parametrize("title", ["&" * 300, "A & B", "line\nbreak", "&P&N", "14"])
def test_the_printed_head_stays_within_bounds(title):
    part = ElementTree.fromstring(_parts(_build(_sample(), title))["xl/worksheets/sheet1.xml"])
    head = part.findtext(f".//{office.NAMESPACE}oddHeader")
    assert head is not None
    assert len(head) <= 255
    left = re.match(r"&L&8 (.*)&R&8 &A\Z", head)
    assert left
    # Every '&' of the title stands twice, so none begins a code.
    assert re.fullmatch(r"(?:[^&\n]|&&)+", left[1])


# Charts, print set-up


def test_charts_are_native_with_axes_and_points():
    charts = [ElementTree.fromstring(part) for name, part in sorted(_parts(_build(_sample())).items())
              if name.startswith("xl/charts/chart")]
    assert len(charts) == 3
    for chart in charts:
        axes = [axis for kind in ("valAx", "catAx") for axis in chart.iter(f"{CHART}{kind}")]
        assert len(axes) == 2
        for axis in axes:
            assert axis.find(f"{CHART}delete").get("val") == "0"
    scatter, _, bars = charts
    series = list(scatter.iter(f"{CHART}ser"))
    assert len(series) == 2
    y = series[0].find(f"{CHART}yVal/{CHART}numRef")
    assert y.findtext(f"{CHART}f") == "'Numbers'!$C$2:$C$4"
    assert [float(v.text) for v in y.iter(f"{CHART}v")] == pytest.approx([1.0, 0.1**2, 16.0], rel=1e-15)
    labels = bars.find(f".//{CHART}cat/{CHART}strRef")
    assert labels.findtext(f"{CHART}f") == "'Numbers'!$A$2:$A$4"
    assert [v.text for v in labels.iter(f"{CHART}v")] == ["0 boiler 3", "1 boiler 3", "2 boiler 3"]


def test_series_differ_without_colour():
    chart = ElementTree.fromstring(_parts(_build(_sample()))["xl/charts/chart1.xml"])
    looks = {ElementTree.tostring(series.find(f"{CHART}marker")) for series in chart.iter(f"{CHART}ser")}
    assert len(looks) == 2


def test_points_are_not_joined():
    chart = ElementTree.fromstring(_parts(_build(_sample()))["xl/charts/chart2.xml"])
    line = chart.find(f".//{CHART}ser/{CHART}spPr/{DRAWING}ln")
    assert line.find(f"{DRAWING}noFill") is not None
    assert line.find(f"{DRAWING}solidFill") is None


def test_a_square_chart_has_one_scale():
    specs = _sample()
    chart = specs[1].charts[1]
    part = ElementTree.fromstring(_parts(_build(specs))["xl/charts/chart2.xml"])
    layout = part.find(f".//{CHART}plotArea/{CHART}layout/{CHART}manualLayout")
    width, height = (float(layout.find(f"{CHART}{side}").get("val")) for side in ("w", "h"))
    assert width * chart.width_cm == pytest.approx(height * chart.height_cm, rel=1e-12)
    specs[1].charts[1] = dataclasses.replace(chart, x_max=chart.x_max + 1)
    with pytest.raises(AssertionError, match="one scale"):
        _build(specs)


def test_rows_are_high_enough_for_their_text():
    sheet = SheetSpec("A")
    sheet.put(1, 1, Text("Title"), style="title")
    sheet.put(2, 1, Text("one line"), style="text")
    sheet.put(3, 1, Text("many words that do not fit into one line " * 3), style="text")
    sheet.put(4, 1, Text("many words that do not fit into one line " * 3), style="text", span=12)
    book = openpyxl.load_workbook(io.BytesIO(_build([sheet])))
    heights = [book["A"].row_dimensions[row].height for row in (1, 2, 3, 4)]
    assert heights[0] >= 1.3 * book["A"]["A1"].font.size
    assert heights[1] is None
    # 123 characters in a column of 12: at least ten lines of 9.5 points; over twelve columns one line.
    assert heights[2] >= 10 * 9.5
    assert heights[3] is None


def test_pages_print_one_page_wide_with_their_heads():
    book = openpyxl.load_workbook(io.BytesIO(_build(_sample())))
    first, second = book.worksheets
    for sheet in book:
        assert (sheet.page_setup.paperSize, sheet.page_setup.fitToWidth, sheet.page_setup.fitToHeight) == (9, 1, 0)
        assert sheet.sheet_properties.pageSetUpPr.fitToPage
    assert (first.print_title_rows, first.freeze_panes, first.page_setup.orientation) == ("$1:$3", "A4", "portrait")
    assert second.page_setup.orientation == "landscape"
    assert first.merged_cells.ranges.pop().coord == "A1:C1"


# The same bytes


def test_the_same_content_in_any_process():
    code = "from tests.report.test_engine import sample_digest; print(sample_digest())"
    found = set()
    for seed, zone, lxml in (("1", "UTC", "True"), ("2", "Asia/Tokyo", "False")):
        environment = {**os.environ, "PYTHONHASHSEED": seed, "TZ": zone, "OPENPYXL_LXML": lxml, "PYTHONPATH": str(ROOT)}
        made = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True, env=environment, cwd=ROOT)
        found.add(made.stdout.strip())
    assert found == {sample_digest()}


def test_the_digest_sees_every_change():
    first = workbook.content_digest(_build(_sample()))
    assert workbook.content_digest(_build(_sample())) == first
    assert workbook.content_digest(_build(_sample(last=4.000000000000001))) != first
    assert workbook.content_digest(_build(_sample("boiler 4"))) != first


def test_the_file_carries_the_reports_date_only():
    content = _build(_sample())
    with zipfile.ZipFile(io.BytesIO(content)) as book:
        assert {member.date_time for member in book.infolist()} == {(1980, 1, 1, 0, 0, 0)}
        assert book.namelist() == sorted(book.namelist())
    core = _parts(content)["docProps/core.xml"].decode()
    assert set(re.findall(r"\d{4}-\d\d-\d\dT[\d:]+Z", core)) == {"2026-10-14T00:00:00Z"}
    undated = _parts(workbook.build(_sample(), title="", date=None, subject=""))["docProps/core.xml"].decode()
    assert set(re.findall(r"\d{4}-\d\d-\d\dT[\d:]+Z", undated)) == {"1980-01-01T00:00:00Z"}


def test_a_specification_needs_no_spreadsheet_library():
    code = "import sys, traverse.report.spec, traverse.report.sheets; print('openpyxl' in sys.modules)"
    made = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True, cwd=ROOT,
                          env={**os.environ, "PYTHONPATH": str(ROOT)})
    assert made.stdout.strip() == "False"


# A real spreadsheet program


def _with_wrong_value(content: bytes, address: str, value: str) -> bytes:
    """Return the workbook with one cached value of the second page replaced."""
    out = io.BytesIO()
    with zipfile.ZipFile(out, "w") as target:
        for name, part in _parts(content).items():
            if name == "xl/worksheets/sheet2.xml":
                root = ElementTree.fromstring(part)
                cell = next(cell for cell in root.iter(f"{office.NAMESPACE}c") if cell.get("r") == address)
                cell.find(f"{office.NAMESPACE}v").text = value
                part = ElementTree.tostring(root)
            target.writestr(name, part)
    return out.getvalue()


def test_stripping_leaves_formulas_and_no_values():
    content = _build(_sample())
    bare = office.stripped(content)
    assert office.formulas(bare) == office.formulas(content)
    shown = office.values(bare)
    assert not any(shown[page].get(address) for page, cells in office.formulas(content).items() for address in cells)
    assert shown["Numbers"]["B3"] == 0.1


@pytest.mark.office
def test_a_spreadsheet_program_computes_the_same():
    right = _build(_sample("=1+1"))
    wrong = _with_wrong_value(right, "C4", "16.00000000002")
    made = office.recalculate({"right": right, "wrong": wrong})
    assert office.disagreements(right, made["right"]) == []
    # Negative control: one value off by 1e-12 of itself and a bit must be found, in that cell alone.
    found = office.disagreements(wrong, made["wrong"])
    assert [line.split(" ")[0] for line in found] == ["Numbers!C4"]
    assert office.values(made["right"])["Bob's page"]["A1"] == "=1+1"
    assert "A1" not in office.formulas(made["right"])["Bob's page"]


@pytest.mark.parametrize(
    ("ours", "theirs", "same"),
    [(1.0, 1.0 + 1e-13, True), (1e-9, 1.001e-9, False), (1e-17, 0, True), (0.0, 1e-9, False), (True, 1, False), (None, 0, False),
     ("#N/A", "#N/A", False), ("", None, True), ("a", "b", False)],
)
def test_the_comparison_itself(ours, theirs, same):
    assert office._same(ours, theirs, 1e-12) is same
