"""The field workbook: written, filled in, saved by another program, read back to the same result as a file of readings."""

import datetime as dt
import json
import shutil

import openpyxl
import pytest
from click.testing import CliRunner

import traverse
from tests.support import jobs, office
from traverse.cli import main
from traverse.errors import JobError, ReadingError, TraverseError, UnitError
from traverse.importers import find_jobs
from traverse.planning.field import COLUMNS, HEADER, JOB_MARK, RUN_MARK

DP, TEMPERATURE, STATIC, YAW, STATUS, REMARK = range(4, 10)
PRESSURES = {"A": (50.0, 60.5, 62.25, 48.125), "B": (49.0, 61.0, 63.0, 52.0)}


@pytest.fixture
def written(tmp_path):
    """A field workbook of the usual small job; the job file and readings lie beside it."""
    def write(change=None, *options):
        job = jobs.write(tmp_path, change)
        target = tmp_path / "field.xlsx"
        result = CliRunner().invoke(main, ["plan", str(job), "--sheet", str(target), "-q", "--force", *options])
        assert result.exit_code == 0, result.output
        return target
    return write


def head_row(sheet):
    return next(row for row in range(1, 60) if sheet.cell(row, 1).value == "line" and str(sheet.cell(row, 4).value).startswith("differential"))


def label(sheet, text):
    return next(cell for row in sheet.iter_rows() for cell in row if isinstance(cell.value, str) and cell.value.startswith(text))


def fill(path, page="Run 1", pressures=PRESSURES, change=None):
    """Put readings onto a page as a technician would, and let a test change more."""
    book = openpyxl.load_workbook(path)
    sheet = book[page]
    row = head_row(sheet) + 1
    while sheet.cell(row, 1).value is not None:
        sheet.cell(row, DP).value = pressures[sheet.cell(row, 1).value][sheet.cell(row, 2).value - 1]
        row += 1
    if change:
        change(sheet)
    book.save(path)
    return path


def entry(sheet, text):
    """The cell to fill in beside a label."""
    found = label(sheet, text)
    return sheet.cell(found.row, 5 if found.column == 1 else 10)


def reduced(path):
    return traverse.reduce(traverse.load(path)).to_dict()


def refused(path, kind, *words):
    with pytest.raises(kind) as problem:
        traverse.load(path)
    for word in words:
        assert word in str(problem.value), str(problem.value)


def test_the_same_result_as_a_file_of_readings(written, tmp_path):
    path = fill(written())
    readings = "line,point,differential_pressure [Pa]\n" + "".join(
        f"{line},{k},{value!r}\n" for line, values in PRESSURES.items() for k, value in enumerate(values, 1))
    expected, found = jobs.reduced(tmp_path, None, readings), reduced(path)
    assert found["runs"][0]["quantities"] == expected["runs"][0]["quantities"]
    assert [point["velocity"] for point in found["runs"][0]["points"]] == [point["velocity"] for point in expected["runs"][0]["points"]]
    assert found["runs"][0]["points"][2]["text"] == "62.25"
    assert found["job"]["source"] == "field.xlsx"


@pytest.mark.office
def test_saved_by_another_program_with_a_note_and_empty_cells(written, tmp_path):
    path = written({"uncertainty": {"coefficient": "1 %", "layout": "none"}})

    def change(sheet):
        head = head_row(sheet)
        sheet.cell(head + 1, DP).comment = openpyxl.comments.Comment("gauge swung", "crew")
        sheet.cell(head + 2, STATUS).value = "read"
        sheet.cell(head + 3, TEMPERATURE).value = 21.5
        sheet.cell(head + 4, REMARK).value = "port stiff"

    fill(path, change=change)
    before = reduced(path)
    saved = tmp_path / "saved" / "field.xlsx"
    saved.parent.mkdir()
    shutil.move(office.convert(path, tmp_path / "out", "xlsx"), saved)
    after = reduced(saved)
    assert after["runs"][0]["quantities"] == before["runs"][0]["quantities"]
    assert [p["text"] for p in after["runs"][0]["points"]] == [p["text"] for p in before["runs"][0]["points"]]
    assert after["job"]["sha256"] != before["job"]["sha256"]


@pytest.mark.office
def test_the_live_cells_agree_with_the_reduction(written, tmp_path):
    """Recalculated by a spreadsheet program: the running mean is the mean velocity but for compressibility, below 0.01 % here."""
    path = fill(written({"gas": {"kind": "air", "density": None, "relative_humidity": "45 %"}, "design": {"actual_flow": "7 m3/s"}}),
                change=lambda sheet: setattr(entry(sheet, "Gauge reads up to"), "value", 62.0))
    found = openpyxl.load_workbook(office.convert(path, tmp_path / "out", "xlsx"), data_only=True)["Run 1"]
    quantities = reduced(path)["runs"][0]["quantities"]
    assert entry(found, "mean velocity so far").value == pytest.approx(quantities["mean_velocity"]["value"], rel=2e-4)
    assert entry(found, "flow so far [").value == pytest.approx(quantities["actual_flow"]["value"], rel=2e-4)
    assert entry(found, "flow so far, of design").value == pytest.approx(quantities["actual_flow"]["value"] / 0.07, rel=2e-4)
    assert entry(found, "points left").value == 0 and entry(found, "readings above a tenth").value == 100
    head = head_row(found)
    warnings = {f"{found.cell(r, 1).value}{found.cell(r, 2).value}": found.cell(r, 11).value for r in range(head + 1, head + 9)}
    assert warnings["A3"] == warnings["B3"] == "above the range of the gauge" and not warnings["A1"]


@pytest.mark.office
def test_warnings_beside_odd_readings(written, tmp_path):
    odd = {"A": (2.0, 60.0, 62.0, -3.0), "B": (49.0, 190.0, 63.0, 52.0)}
    path = fill(written({"gas": {"kind": "air", "density": None, "dry": True}}), pressures=odd)
    found = openpyxl.load_workbook(office.convert(path, tmp_path / "out", "xlsx"), data_only=True)["Run 1"]
    head = head_row(found)
    warnings = {f"{found.cell(r, 1).value}{found.cell(r, 2).value}": found.cell(r, 11).value or "" for r in range(head + 1, head + 9)}
    assert "5 Pa" in warnings["A1"] and "negative" in warnings["A4"] and "neighbours" in warnings["B2"]


def test_three_runs_and_an_empty_one(written):
    path = fill(written())
    fill(path, "Run 3", {line: tuple(1.1 * v for v in values) for line, values in PRESSURES.items()})
    found = reduced(path)
    assert [run["run"] for run in found["runs"]] == ["1", "3"]
    assert any("run 2 is left out" in finding["message"] for finding in found["findings"])


def test_what_the_page_says_counts_over_the_job(written):
    def change(sheet):
        entry(sheet, "Barometric").value = 950
        entry(sheet, "Gas temperature").value = 35.5
        entry(sheet, "Static").value = -120
        entry(sheet, "Pitot coefficient").value = 0.98
        entry(sheet, "Date").value = dt.datetime(2026, 11, 3)
        entry(sheet, "Crew").value = "two of us"

    found = reduced(fill(written({"gas": {"kind": "air", "density": None, "dry": True}}), change=change))
    quantities = found["runs"][0]["quantities"]
    assert quantities["barometric_pressure"]["value"] == 95000.0 and quantities["static_pressure"]["value"] == -120.0
    assert quantities["temperature"]["value"] == pytest.approx(308.65) and found["job"]["date"] == "2026-11-03"
    said = " ".join(finding["message"] for finding in found["findings"])
    assert "barometric of run 1 as entered on the page: 950 hPa" in said and "crew two of us" in said


def test_statuses_limits_and_remarks(written):
    def change(sheet):
        head = head_row(sheet)
        sheet.cell(head + 1, DP).value = "<4"
        sheet.cell(head + 2, DP).value, sheet.cell(head + 2, STATUS).value = None, "obstructed"
        sheet.cell(head + 2, REMARK).value = "damper blade"
        sheet.cell(head + 5, DP).value = -2

    found = reduced(fill(written({"readings": {"missing": "neighbour"}}), change=change))
    points = found["runs"][0]["points"]
    assert [p["status"] for p in points[:2]] == ["below range", "obstructed"] and points[4]["status"] == "negative"
    assert points[0]["text"] == "<4" and points[1]["differential_pressure"] is None


def test_zeros_repeats_and_leaks_are_findings_and_change_nothing(written):
    plain = reduced(fill(written()))

    def change(sheet):
        head = label(sheet, "zero before").row
        for column, value in ((4, 0.1), (5, 6.0), (6, 2), (8, 70.0)):
            sheet.cell(head + 1, column).value = value
        for column, value in ((6, 3), (8, 64.0)):
            sheet.cell(head + 2, column).value = value
        entry(sheet, "Leak check after").value = "failed"
        entry(sheet, "Gauge division").value = 1

    found = reduced(fill(written(), change=change))
    assert found["runs"][0]["quantities"] == plain["runs"][0]["quantities"]
    said = {finding["message"]: finding["level"] for finding in found["findings"]}
    assert next(level for text, level in said.items() if "zero of the gauge 0.1 and 6 Pa" in text) == "attention"
    assert next(level for text, level in said.items() if "A2 read 60.5, again 70: +15.7 %, more than 10 %" in text) == "attention"
    assert next(level for text, level in said.items() if "B3 read 63, again 64: +1.6 %, within 10 %" in text) == "note"
    assert next(level for text, level in said.items() if "leak check after the run: failed" in text) == "attention"


def test_another_unit_of_the_gauge(written):
    path = fill(written(None, "--pressure-unit", "mmH2O"), pressures={k: tuple(v / 9.80665 for v in values) for k, values in PRESSURES.items()})
    assert reduced(path)["runs"][0]["points"][1]["differential_pressure"] == pytest.approx(60.5, rel=1e-14)


def test_a_page_that_was_moved_renamed_or_shifted_is_still_found(written):
    path = fill(written())
    expected = reduced(path)
    book = openpyxl.load_workbook(path)
    book["Run 1"].title = "Tuesday"
    book.move_sheet("Job", -4)
    for merged in list(book["Tuesday"].merged_cells.ranges):  # the library does not move them with the rows
        book["Tuesday"].unmerge_cells(str(merged))
    book["Tuesday"].insert_rows(3)
    book["Tuesday"].insert_cols(1)
    book.save(path)
    assert reduced(path)["runs"][0]["quantities"] == expected["runs"][0]["quantities"]


@pytest.mark.parametrize(("spoil", "kind", "words"), [
    (lambda book: book.remove(book["Job"]), JobError, ("no page with the job", JOB_MARK)),
    (lambda book: [book.remove(book[f"Run {n}"]) for n in "123"], ReadingError, ("no page of a run", RUN_MARK)),
    (lambda book: setattr(book["Job"].cell(9, 1), "value", "# changed"), JobError, ("was changed", "'Job'")),
    (lambda book: setattr(label(book["Run 1"], "differential"), "value", "differential pressure [kPa]"), UnitError, ("'Run 1'!D", "[Pa]")),
    (lambda book: setattr(label(book["Run 1"], "differential"), "value", "reading"), ReadingError, ("no column 'differential pressure'",)),
    (lambda book: setattr(label(book["Run 1"], "Barometric"), "value", "Barometer"), ReadingError, ("no 'Barometric pressure",)),
    (lambda book: setattr(label(book["Run 2"], RUN_MARK), "value", f"{RUN_MARK} 1"), ReadingError, ("two pages of run 1",)),
    (lambda book: setattr(label(book["Job"], "version"), "value", "version 9"), JobError, ("version 9",)),
    (lambda book: setattr(book["Run 1"].cell(head_row(book["Run 1"]) + 1, DP), "value", "sixty"), ReadingError, ("'Run 1'!D", "'sixty'")),
    (lambda book: setattr(book["Run 1"].cell(head_row(book["Run 1"]) + 1, DP), "value", "62,5"), ReadingError, ("'Run 1'!D", 'decimal = ","')),
    (lambda book: setattr(book["Run 1"].cell(head_row(book["Run 1"]) + 1, DP), "value", dt.datetime(2026, 2, 1)), ReadingError, ("where a number belongs",)),
    (lambda book: setattr(book["Run 1"].cell(head_row(book["Run 1"]) + 1, DP), "value", "=D20*2"), ReadingError, ("formula", "let it calculate")),
    (lambda book: setattr(book["Run 1"].cell(head_row(book["Run 1"]) + 1, STATUS), "value", "obstruct"), ReadingError, ("unknown status", "obstructed")),
    (lambda book: setattr(book["Run 1"].cell(head_row(book["Run 1"]) + 1, TEMPERATURE), "value", -400), ReadingError, ("absolute zero",)),
    (lambda book: setattr(entry(book["Run 1"], "Leak check before"), "value", "good"), ReadingError, ("leak check before",)),
    (lambda book: setattr(book["Run 1"].cell(head_row(book["Run 1"]) + 1, 2), "value", 9), ReadingError, ("point 9 on a line of 4",)),
    (lambda book: setattr(entry(book["Run 1"], "Barometric"), "value", 29.9), JobError, ("barometric pressure",)),
])
def test_a_spoilt_workbook_says_where(written, spoil, kind, words):
    path = fill(written())
    book = openpyxl.load_workbook(path)
    spoil(book)
    book.save(path)
    before = path.read_bytes()
    refused(path, kind, *words)
    assert path.read_bytes() == before


def test_an_empty_workbook_can_be_planned_but_not_reduced(written):
    path = written()
    refused(path, ReadingError, "no readings on any page")
    assert traverse.load_setup(path).layout.size == 8
    shown = CliRunner().invoke(main, ["plan", str(path), "--json", "-"])
    assert shown.exit_code == 0 and len(json.loads(shown.output)["points"]) == 8


@pytest.mark.parametrize("content", [b"", b"PK\x03\x04 not a zip", b"plain text"])
def test_a_file_that_is_no_workbook(tmp_path, content):
    path = tmp_path / "field.xlsx"
    path.write_bytes(content)
    refused(path, JobError, "no workbook that can be read")


def test_a_report_is_no_field_workbook(written, tmp_path):
    path = fill(written())
    report = tmp_path / "report.xlsx"
    assert CliRunner().invoke(main, ["reduce", str(path), "--out", str(report)]).exit_code == 0
    refused(report, JobError, "no page with the job")


def test_a_folder_of_jobs_and_field_workbooks(written, tmp_path):
    path = fill(written())
    (tmp_path / "other.xlsx").write_bytes(b"not a workbook")
    assert [found.name for found in find_jobs(tmp_path)] == ["field.xlsx", "job.toml"]
    assert path in find_jobs(tmp_path)


def test_other_kinds_of_workbook_are_named(tmp_path):
    path = tmp_path / "field.ods"
    path.write_bytes(b"x")
    refused(path, JobError, "save the field workbook as .xlsx")


def test_the_input_is_not_overwritten(written):
    path = fill(written())
    shown = CliRunner().invoke(main, ["reduce", str(path), "--out", str(path), "--force"])
    assert shown.exit_code == 1 and "input" in shown.output


def test_nasty_text_in_the_job_survives(written, tmp_path):
    title = "=1+1 _x0041_ & <b> \u00e9 'quoted' +2"
    path = fill(written({"job": {"title": title}}))
    assert traverse.load(path).title == title


def test_wrong_unit_for_the_gauge(tmp_path):
    shown = CliRunner().invoke(main, ["plan", str(jobs.write(tmp_path)), "--sheet", str(tmp_path / "f.xlsx"), "--pressure-unit", "furlong"])
    assert shown.exit_code == 1 and "furlong" in shown.output and not (tmp_path / "f.xlsx").exists()
    assert CliRunner().invoke(main, ["plan", str(jobs.write(tmp_path)), "--sheet", str(tmp_path / "f.csv")]).exit_code == 1


def test_every_entry_has_its_cell_unlocked_and_nothing_else(written):
    book = openpyxl.load_workbook(written())
    for name in ("Run 1", "Run 2", "Run 3"):
        sheet = book[name]
        assert sheet.protection.sheet and not sheet.protection.password
        open_cells = [cell for row in sheet.iter_rows() for cell in row if not cell.protection.locked]
        assert len([cell for cell in open_cells if cell.value is None]) == len(open_cells)
        assert len(open_cells) >= len(HEADER) + 8 * len(COLUMNS) + 2 * 4
    assert all(sheet.sheet_state == "visible" for sheet in book)


def test_the_same_plan_gives_the_same_bytes(written):
    assert written().read_bytes() == written().read_bytes()


def test_errors_of_the_pages_are_the_programs_own(written):
    path = fill(written())
    with pytest.raises(TraverseError):
        traverse.load(path.rename(path.with_suffix(".xlsb")))
