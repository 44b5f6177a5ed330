"""The workbook: formulas recalculated by a real spreadsheet program, inert text, the same content each time."""

import io
import math
import os
import subprocess
import sys
import zipfile
from pathlib import Path

import openpyxl
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

import traverse
from tests.support import jobs, office
from traverse.report import sheets, spec, workbook
from traverse.report.spec import Addresses, Live, SheetSpec, Text

ROOT = Path(__file__).parents[2]
EXAMPLES = sorted(path.stem for path in (ROOT / "example_data").glob("*.toml"))
FLUE = {"kind": "flue-gas", "oxygen": "7.2 %", "carbon_dioxide": "11.8 %", "moisture": "9.4 %", "density": None}
HOT = {"temperature": "150 degC"}
REFERENCE = {"temperature": "20 degC", "pressure": "101325 Pa"}
UNCERTAIN = {"coefficient": "±1 %", "differential_pressure": {"repeatability": "2 % (df=5)", "calibration": "1 % + 0.5 Pa"}, "layout": "1 %"}
MISSING = jobs.READINGS.replace("A,2,60", "A,2,obstructed").replace("B,3,63", "B,3,-4").replace("B,4,52", "B,4,<10")
YAWED = "line,point,differential_pressure [Pa],yaw [deg],static [mmH2O],temperature [degF]\n" + "".join(
    f"{n},{k},{50 + k},{3 * k},{-10 - k},{270 + 20 * k}\n" for n in "AB" for k in (1, 2, 3, 4))
OVAL = "line,point,differential_pressure [Pa]\n" + "".join(f"{n},{k},{40 + 3 * k}\n" for n in "ABCDE" for k in (1, 2))
TWENTY_SIX = "line,point,differential_pressure [Pa]\n" + "".join(
    f"{n},{k},{40 + 2 * k}\n" for n, count in zip("ABCD", (7, 6, 6, 7), strict=True) for k in range(1, count + 1))
TRAIN = {"condensed": "85.3 ml", "silica_gel": "6.2 g", "meter_volume": "1.102 m3", "meter_temperature": "24 degC", "meter_factor": 0.998,
         "orifice_pressure": "45 mmH2O"}
BY_TRAIN = FLUE | {"moisture": None, "moisture_train": TRAIN}
BURNT = {"kind": "flue-gas", "density": None, "air_humidity_ratio": "8 g/kg"}
ULTIMATE = {"carbon": "64 %", "hydrogen": "4.5 %", "oxygen": "7.5 %", "nitrogen": "1.3 %", "sulfur": "1.7 %", "water": "9 %", "ash": "12 %"}
BULBS = FLUE | {"moisture": None, "wet_bulb": "58 degC"}
MIXED = {"kind": "mixture", "density": None, "components": {"methane": "12 %", "hydrogen": "3 %", "ammonia": "2 %", "nitric_oxide": "1 %",
                                                           "water": "9 %", "rest": "air"}}
CURVE = "velocity [ft/min],coefficient\n1000,0.83\n1500,0.838\n2200,0.845\n4000,0.848\n"
PITCH, FALLING = ("pitch [deg],F1,F2\n" + "".join(f"{p},{sign * (0.03 * p + 0.01)},{0.95 - 0.0001 * p * p}\n" for p in range(-30, 31, 5))
                  for sign in (1, -1))
PAIRS = "side,standard_pressure [inH2O],s_type_pressure [inH2O]\n" + "".join(f"{n},0.5,{p}\n" for n in "AB" for p in (0.68, 0.682, 0.684))
THREE = "line,point,P1-P2 [Pa],P4-P5 [mmH2O],yaw [deg],temperature [degF]\n" + "".join(
    f"{n},{k},{150 + 10 * k},{(-1) ** k * 1.2 * k},{4 * k - 6},{270 + 10 * k}\n" for n in "AB" for k in (1, 2, 3, 4))
BY_ANGLE = THREE.replace("P4-P5 [mmH2O]", "pitch [deg]")


AT_20 = "line,point,differential_pressure [Pa],temperature [degC]\n" + "".join(
    f"{n},{k},{50 + k},{19 + k / 3:.2f}\n" for n in "AB" for k in (1, 2, 3, 4))


def real(equation, **water):
    return {"kind": "air", "density": None, "equation": equation, **water}


def by(kind, **more):
    return {"type": kind, "coefficient": None, "calibration": "probe.csv", **more}


# Every branch of the working: gas, humidity, method, rules for readings, corrections, reference, uncertainty.
VARIANTS = {
    "given_density": ({}, jobs.READINGS),
    "given_at_conditions": ({"gas": {"temperature": "0 degC", "pressure": "100 kPa"}, "reference": REFERENCE}, jobs.READINGS),
    "given_molar_mass": ({"gas": {"density": None, "molar_mass": "29 g/mol", "moisture": "2 %"}, "reference": REFERENCE}, jobs.READINGS),
    "flue_exact": ({"gas": FLUE | {"carbon_monoxide": "50 ppm"}, "conditions": HOT, "reference": REFERENCE, "uncertainty": UNCERTAIN}, jobs.READINGS),
    "flue_si": ({"job": {"method": "epa-2"}, "gas": FLUE, "conditions": HOT, "uncertainty": UNCERTAIN}, MISSING.replace("obstructed", "61")),
    "flue_us": ({"job": {"method": "epa-2", "units": "us"}, "gas": FLUE, "conditions": HOT, "corrections": {"wall_factor": 0.99},
                 "plane": {"diameter": None, "circumference": "3.2 m", "wall_thickness": "4 mm"}}, jobs.READINGS),
    "saturated": ({"gas": {"kind": "flue-gas", "oxygen": "7 %", "carbon_dioxide": "12 %", "saturated": True, "density": None},
                   "conditions": {"temperature": "55 degC"}}, jobs.READINGS),
    "humid": ({"gas": {"kind": "air", "relative_humidity": "60 %", "density": None}, "reference": {"density": "1.2 kg/m3"}}, jobs.READINGS),
    "frost": ({"gas": {"kind": "air", "relative_humidity": "60 %", "density": None}, "conditions": {"temperature": "-5 degC"}}, jobs.READINGS),
    "wet_bulb": ({"job": {"method": "ashrae-111", "units": "us"}, "gas": {"kind": "air", "wet_bulb": "15 degC", "density": None}}, jobs.READINGS),
    "wet_bulb_ice": ({"gas": {"kind": "air", "wet_bulb": "-4 degC", "density": None}, "conditions": {"temperature": "-2 degC"}}, jobs.READINGS),
    "dew_point": ({"gas": {"kind": "air", "dew_point": "8 degC", "density": None}}, jobs.READINGS),
    "humidity_ratio": ({"gas": {"kind": "air", "humidity_ratio": "8 g/kg", "density": None}}, jobs.READINGS),
    "cipm": ({"gas": real("cipm-2007", relative_humidity="55 %"), "reference": REFERENCE, "uncertainty": UNCERTAIN}, AT_20),
    "cipm_dew_point": ({"gas": real("real", dew_point="8 degC")}, AT_20),
    "cipm_frost_point": ({"gas": real("real", dew_point="-6 degC")}, AT_20),
    "cipm_wet_bulb": ({"gas": real("real", wet_bulb="14 degC"), "reference": {"density": "1.2 kg/m3"}}, AT_20),
    "virial": ({"gas": real("virial", relative_humidity="80 %"), "conditions": {"temperature": "55 degC"}, "reference": REFERENCE}, jobs.READINGS),
    "virial_hot": ({"gas": real("real", humidity_ratio="60 g/kg"), "conditions": {"temperature": "240 degC"}}, jobs.READINGS),
    "virial_boiling": ({"gas": real("real", relative_humidity="20 %"), "conditions": {"temperature": "140 degC"}}, jobs.READINGS),
    "virial_frost": ({"gas": real("real", relative_humidity="70 %"), "conditions": {"temperature": "-12 degC"}}, jobs.READINGS),
    "virial_saturated": ({"gas": real("real", relative_humidity="100 %"), "conditions": {"temperature": "62 degC"}}, jobs.READINGS),
    "virial_wet_bulb": ({"gas": real("real", wet_bulb="31 degC"), "conditions": {"temperature": "70 degC"}}, jobs.READINGS),
    "real_of_a_method": ({"job": {"method": "epa-2"}, "gas": real("real", relative_humidity="40 %")}, jobs.READINGS),
    "neighbour": ({"readings": {"missing": "neighbour"}, "uncertainty": UNCERTAIN}, MISSING),
    "omit": ({"readings": {"missing": "omit", "negative": "omit", "below": "limit"}}, MISSING),
    "signed": ({"readings": {"missing": "neighbour", "negative": "signed", "below": "zero"}}, MISSING),
    "no_flow": ({}, jobs.READINGS.replace(",50", ",0").replace(",6", ",0,").replace(",48", ",0").replace(",49", ",0").replace(",52", ",0").replace(",0,0", ",0").replace(",0,1", ",0").replace(",0,2", ",0").replace(",0,3", ",0")),
    "corrections": ({"corrections": {"turbulence": "8 %", "blockage": True}, "pitot": {"stem": "10 mm"}}, jobs.READINGS),
    "velocity": ({"readings": {"meter_density": "1.2 kg/m3"}}, jobs.READINGS.replace("differential_pressure [Pa]", "velocity [ft/min]").replace(",50", ",1900")),
    "yaw": ({}, "line,point,differential_pressure [Pa],yaw [deg],static [mmH2O],temperature [degF]\n" + "".join(
        f"{n},{k},{50 + k},{3 * k},{-10 - k},{70 + k}\n" for n in "AB" for k in (1, 2, 3, 4))),
    "epa_2g": ({"job": {"method": "epa-2g", "units": "us"}, "gas": FLUE, "conditions": HOT, "uncertainty": UNCERTAIN}, YAWED),
    "epa_2g_si": ({"job": {"method": "epa-2g"}, "gas": FLUE, "readings": {"missing": "omit"}}, YAWED.replace(",53,", ",obstructed,")),
    "curve": ({"pitot": by("pitot-static"), "uncertainty": UNCERTAIN}, jobs.READINGS, CURVE),
    "curve_plain": ({"job": {"method": "ashrae-111"}, "pitot": by("pitot-static"), "readings": {"negative": "signed"}},
                    jobs.READINGS.replace("A,2,60", "A,2,0").replace("B,3,63", "B,3,-63"), CURVE),
    "curve_2": ({"job": {"method": "epa-2"}, "gas": FLUE, "pitot": by("s-type")}, YAWED, CURVE),
    "curve_2g": ({"job": {"method": "epa-2g", "units": "us"}, "gas": FLUE, "pitot": by("s-type", yaw_offset=["1 deg", "-0.3 deg"])}, YAWED, CURVE),
    "epa_2f": ({"job": {"method": "epa-2f", "units": "us"}, "gas": FLUE, "pitot": by("three-dimensional"), "corrections": {"turbulence": "6 %"},
                "uncertainty": UNCERTAIN | {"pitch": "±2 deg", "yaw": "±2 deg", "pitch_pressure": {"resolution": "1 Pa"}}}, THREE, PITCH),
    "epa_2f_falling": ({"job": {"method": "epa-2f"}, "gas": FLUE, "pitot": by("three-dimensional"), "readings": {"missing": "omit"}},
                       THREE.replace("A,1,160", "A,1,obstructed"), FALLING),
    "pitch_read": ({"gas": FLUE, "pitot": by("three-dimensional"), "reference": REFERENCE}, BY_ANGLE, PITCH),
    "pairs": ({"pitot": by("s-type", leg="mean", standard_coefficient=0.985)}, jobs.READINGS, PAIRS),
    "legs": ({"pitot": {"type": "s-type", "coefficient": None, "leg": "B", "legs": {"A": 0.838, "B": 0.842}}}, jobs.READINGS),
    "displacement": ({"pitot": {"head": "6 mm", "stem": "8 mm"}, "corrections": {"displacement": True, "blockage": True, "turbulence": "5 %"}}, jobs.READINGS),
    "displacement_mckeon": ({"pitot": {"head": "0.25 in"}, "corrections": {"displacement": "mckeon"}, "readings": {"missing": "omit"}}, MISSING),
    "rectangle": ({"plane": {"shape": "rectangle", "diameter": None, "width": "24 in", "height": "16 in", "port_depth": "2 in"},
                   "layout": {"lines": 2, "points": 4, "along": "width"}, "job": {"units": "us"}}, jobs.READINGS),
    "ellipse": ({"plane": {"shape": "ellipse", "diameter": None, "width": "1.4 m", "height": "32 in", "lining": "20 mm", "deposit": "2 mm"},
                 "uncertainty": UNCERTAIN | {"dimensions": "±3 mm"}}, jobs.READINGS),
    "round_lined": ({"plane": {"diameter": ["1 m", "1.002 m", "1.001 m", "39.4 in"], "deposit": "3 mm"}}, jobs.READINGS),
    "circumference_lined": ({"plane": {"diameter": None, "circumference": "3.2 m", "wall_thickness": "4 mm", "lining": "1 in"}}, jobs.READINGS),
    "flat_oval": ({"plane": {"shape": "flat-oval", "diameter": None, "width": "1 m", "height": "0.7 m"}}, jobs.READINGS),
    "flat_oval_up": ({"plane": {"shape": "flat-oval", "diameter": None, "width": "0.4 m", "height": "1.3 m", "lining": "1 cm"},
                      "layout": {"lines": 2, "points": 2}}, OVAL),
    "annulus": ({"plane": {"shape": "annulus", "core": "0.4 m", "deposit": "1 mm"}, "layout": {"angles": ["10 deg", "200 deg"]}}, jobs.READINGS),
    "annulus_gap": ({"plane": {"shape": "annulus", "diameter": None, "gap": ["0.3 m", "0.301 m"], "core_circumference": "50 in"}}, jobs.READINGS),
    "lined_rectangle": ({"plane": {"shape": "rectangle", "diameter": None, "width": "22 in", "height": "15 in", "lining": "1 in"}}, jobs.READINGS),
    "twenty_six": ({"plane": {"shape": "rectangle", "diameter": None, "width": "1.2 m", "height": "0.8 m"},
                    "layout": {"rule": "log-linear-26", "lines": None, "points": None}}, TWENTY_SIX),
    "ports_differ": ({"plane": {"port_depth": ["50 mm", "65 mm"]}, "pitot": {"head_offset": "12 mm"}}, jobs.READINGS),
    "head_offset": ({"plane": {"port_depth": "50 mm"}, "pitot": {"head_offset": "12 mm"}, "job": {"units": "us"}}, jobs.READINGS),
    "velocity_area": ({"layout": {"weights": "velocity-area"}, "uncertainty": UNCERTAIN, "corrections": {"wall_factor": 0.995}}, jobs.READINGS),
    "velocity_area_epa": ({"job": {"method": "epa-2"}, "gas": FLUE, "conditions": HOT, "readings": {"missing": "omit"},
                           "layout": {"weights": "velocity-area", "wall_exponent": 7}}, MISSING),
    "area_weights": ({"layout": {"weights": "area", "rule": "custom", "points": None, "depths": ["60 mm", "300 mm", "650 mm", "920 mm"]}}, jobs.READINGS),
    "polygon": ({"plane": {"shape": "polygon", "diameter": None, "vertices": [["0 m", "0 m"], ["2 m", "0 m"], ["2 m", "30 in"], ["1 m", "1.4 m"], ["0 m", "1.2 m"]]},
                 "layout": {"rule": "custom", "points": None, "depths": ["0.1 m", "0.4 m", "0.7 m", "0.9 m"]}}, jobs.READINGS),
    "field": ({"readings": {"missing": "field"}, "uncertainty": UNCERTAIN}, MISSING),
    "general": ({"layout": {"rule": "general", "points": 3}}, jobs.READINGS.replace("A,4,48\n", "").replace("B,4,52\n", "")),
    "train_modern": ({"gas": BY_TRAIN, "conditions": HOT, "uncertainty": UNCERTAIN | {"condensed": "±1 ml", "meter_volume": "1 %", "moisture": "0.2 %"}}, jobs.READINGS),
    "train_us": ({"job": {"method": "epa-2", "units": "us"}, "gas": BY_TRAIN, "conditions": HOT}, jobs.READINGS),
    "train_si": ({"job": {"method": "epa-2"}, "conditions": HOT, "gas": BY_TRAIN | {"moisture_train": {
        "condensed": "85.3 g", "meter_volume": "38.9 ft3", "meter_temperature": "75 degF", "meter_factor": 1.01, "meter_pressure": "750 mmHg",
        "approximation": True}}}, jobs.READINGS),
    "train_capped": ({"gas": BY_TRAIN, "conditions": {"temperature": "38 degC"}}, jobs.READINGS),
    "train_hot": ({"gas": BY_TRAIN | {"moisture_train": TRAIN | {"barometric": "99 kPa"}}, "conditions": {"temperature": "250 degC"}}, jobs.READINGS),
    "fuel_gas": ({"gas": BURNT | {"fuel": "natural-gas", "oxygen": "4 %", "carbon_monoxide": "300 ppm"}, "conditions": HOT, "reference": REFERENCE,
                  "uncertainty": UNCERTAIN | {"oxygen": "0.2 %", "air_humidity_ratio": "1 g/kg", "moisture": "0.5 %"}}, jobs.READINGS),
    "fuel_coal": ({"job": {"method": "epa-2", "units": "us"}, "gas": BURNT | {"fuel": ULTIMATE, "excess_air": "30 %"}, "conditions": HOT}, jobs.READINGS),
    "fuel_measured": ({"gas": BURNT | {"fuel": {"type": "wood", "water": "20 %"}, "oxygen": "9 %", "carbon_dioxide": "11.4 %"}, "conditions": HOT}, jobs.READINGS),
    "fuel_and_moisture": ({"gas": FLUE | {"fuel": "propane", "carbon_dioxide": None, "moisture": "9 %"}, "conditions": HOT}, jobs.READINGS),
    "bulb_balance": ({"gas": BULBS | {"psychrometer": "energy-balance"}, "conditions": HOT, "uncertainty": UNCERTAIN | {"wet_bulb": "0.5 K"}}, jobs.READINGS),
    "bulb_frost": ({"gas": BULBS | {"psychrometer": "energy-balance", "wet_bulb": "-4 degC"}, "conditions": {"temperature": "-2 degC"}}, jobs.READINGS),
    "bulb_carrier": ({"job": {"method": "epa-2"}, "gas": BULBS | {"psychrometer": "carrier"}, "conditions": HOT}, jobs.READINGS),
    "bulb_ferrel": ({"gas": BULBS | {"psychrometer": "ferrel", "fuel": "oil", "carbon_dioxide": None}, "conditions": HOT}, jobs.READINGS),
    "mixture": ({"gas": MIXED, "conditions": HOT, "reference": REFERENCE, "uncertainty": UNCERTAIN | {"methane": "0.5 %", "moisture": "1 %"}}, jobs.READINGS),
    "mixture_epa": ({"job": {"method": "epa-2"}, "conditions": HOT, "gas": MIXED | {"components": {"nitrogen": "70 %", "helium": "10 %", "water": "5 %", "argon": "15 %"}}}, jobs.READINGS),
    "mixture_dry": ({"gas": MIXED | {"components": {"carbon_dioxide": "40 %"}, "rest": "nitrogen"}, "conditions": HOT}, jobs.READINGS),
    "total_and_static": ({}, "line,point,total_pressure [Pa],static [Pa]\n" + "".join(f"{n},{k},{250 + k},{200}\n" for n in "AB" for k in (1, 2, 3, 4))),
}


def built(result):
    return workbook.build(sheets.reduction(result), title=result.job.title, date=result.job.date, subject=result.program)


@pytest.fixture(scope="module")
def books(tmp_path_factory):
    """Every example and every variant as a workbook."""
    made = {name: built(traverse.reduce(traverse.load(ROOT / "example_data" / f"{name}.toml"))) for name in EXAMPLES}
    for name, (change, readings, *probe) in VARIANTS.items():
        folder = tmp_path_factory.mktemp(name)
        for text in probe:
            (folder / "probe.csv").write_text(text, encoding="utf-8")
        made[name] = built(traverse.reduce(traverse.load(jobs.write(folder, change, readings))))
    return made


@pytest.mark.office
def test_a_spreadsheet_program_computes_the_same(books):
    """Cached values stripped, everything recalculated: relative 1e-12."""
    computed = office.recalculate(books)
    found = {name: office.disagreements(content, computed[name]) for name, content in books.items()}
    assert not {name: lines[:5] for name, lines in found.items() if lines}


@pytest.mark.office
def test_one_wrong_value_is_noticed(books):
    """Negative control: a cached value changed in the fourth digit is reported."""
    content = books[EXAMPLES[0]]
    out = io.BytesIO()
    with zipfile.ZipFile(io.BytesIO(content)) as source, zipfile.ZipFile(out, "w") as target:
        for name in source.namelist():
            part = source.read(name)
            if name == "xl/worksheets/sheet1.xml":
                start = part.index(b"<v>", part.index(b"<f>")) + 3
                end = part.index(b"</v>", start)
                part = part[:start] + repr(float(part[start:end]) * 1.0003).encode() + part[end:]
            target.writestr(name, part)
    assert len(office.disagreements(out.getvalue(), office.recalculate({"control": content})["control"])) == 1


def test_formula_cells_are_the_live_cells(books):
    for name in EXAMPLES:
        result = traverse.reduce(traverse.load(ROOT / "example_data" / f"{name}.toml"))
        live = set(spec.live_cells(sheets.reduction(result)))
        book = openpyxl.load_workbook(io.BytesIO(books[name]))
        formulas = {(s.title, c.coordinate) for s in book.worksheets for row in s.iter_rows() for c in row if c.data_type == "f"}
        assert formulas == live and len(live) > 200


def test_values_stand_beside_the_formulas(books):
    book = openpyxl.load_workbook(io.BytesIO(books["supply_duct"]), data_only=True)
    result = traverse.reduce(traverse.load(ROOT / "example_data" / "supply_duct.toml"))
    flow = result.summary["actual_flow"].measured.value
    values = [c.value for row in book["Result"].iter_rows() for c in row if isinstance(c.value, float)]
    assert any(math.isclose(v, flow, rel_tol=1e-14) for v in values)
    assert not [c.coordinate for s in book.worksheets for row in s.iter_rows() for c in row if c.data_type == "e"]


def test_every_flow_can_be_traced_to_the_readings(books):
    """From the client's figure back through the formulas: the readings, the layout and the stated inputs are reached."""
    book = openpyxl.load_workbook(io.BytesIO(books["boiler_stack"]))
    import re

    todo, seen = [("Result", c.coordinate) for row in book["Result"].iter_rows() for c in row if isinstance(c.value, str) and c.value.startswith("=AVERAGE")], set()
    assert todo
    while todo:
        page, cell = todo.pop()
        if (page, cell) in seen:
            continue
        seen.add((page, cell))
        value = book[page][cell].value
        if not (isinstance(value, str) and value.startswith("=")):
            continue
        for sheet, first, last in re.findall(r"(?:'([^']+)'!)?\$?([A-Z]+\$?\d+)(?::\$?([A-Z]+\$?\d+))?", value):
            where = sheet or page
            first, last = first.replace("$", ""), last.replace("$", "")
            cells = [c.coordinate for row in book[where][f"{first}:{last}"] for c in row] if last else [first]
            todo += [(where, c) for c in cells]
    pages = {page for page, _ in seen}
    assert {"Result", "Working 1", "Working 2", "Working 3", "Readings", "Layout", "Record"} <= pages
    assert sum(1 for page, _ in seen if page == "Readings") == 3 * 12 * 2, "every pressure and every temperature"


def test_charts_and_names_are_there(books):
    book = openpyxl.load_workbook(io.BytesIO(books["boiler_stack"]))
    assert "actual_flow" in book.defined_names
    with zipfile.ZipFile(io.BytesIO(books["boiler_stack"])) as content:
        charts = [name for name in content.namelist() if name.startswith("xl/charts/chart")]
        assert len(charts) == 5, "three profiles, the section, the budget"
        assert all(b'<c:delete val="1"' not in content.read(name) and b'delete val="1"' not in content.read(name) for name in charts)


NASTY = ["=1+1", "=HYPERLINK(\"http://x\")", "+1", "-2", "@SUM(1)", "#N/A", "\t=1", "\x07bell", "=cmd|' /C calc'!A0", "x" * 40000, "\ud800", "1e5", "TRUE"]


@settings(max_examples=40)
@given(st.lists(st.one_of(st.sampled_from(NASTY), st.text()), min_size=1, max_size=6))
def test_foreign_text_never_becomes_a_formula(texts):
    sheet = SheetSpec("Page")
    for row, text in enumerate(texts, start=1):
        sheet.put(row, 1, Text(text), style="text", note=text[:50])
    book = openpyxl.load_workbook(io.BytesIO(workbook.build([sheet], title=texts[0], date=None, subject=texts[-1])))
    for row, text in enumerate(texts, start=1):
        cell = book["Page"].cell(row, 1)
        assert cell.data_type in {"s", "n", "inlineStr"} and (cell.data_type != "n" or cell.value is None)
        if text and text.isprintable() and len(text) < 1000:
            assert cell.value == text


@pytest.mark.parametrize("nasty", ["=1+1", "#N/A", "@x"])
def test_foreign_text_in_a_job_stays_text(tmp_path, nasty):
    """In the title, a line's name, a status reason and the file itself."""
    # A row that starts with '#' is a comment, so that one can only come in through the title.
    text = jobs.READINGS if nasty.startswith("#") else jobs.READINGS.replace("\nA,", f'\n"{nasty}",')
    path = jobs.write(tmp_path, {"job": {"title": nasty}}, text)
    result = traverse.reduce(traverse.load(path))
    live = set(spec.live_cells(sheets.reduction(result)))
    book = openpyxl.load_workbook(io.BytesIO(built(result)))
    odd = {(s.title, c.coordinate) for s in book.worksheets for row in s.iter_rows() for c in row if c.data_type in {"f", "e"}}
    assert odd == live


def test_the_same_content_in_other_surroundings(tmp_path):
    """Two processes with other hash seeds, zones and languages write the same content."""
    digests = []
    for number, surroundings in enumerate(({"PYTHONHASHSEED": "1", "TZ": "UTC", "LANG": "C"}, {"PYTHONHASHSEED": "77", "TZ": "Asia/Tokyo", "LANG": "de_DE.UTF-8"})):
        target = tmp_path / f"{number}.xlsx"
        subprocess.run([sys.executable, "-m", "traverse", "reduce", str(ROOT / "example_data" / "extract_duct.toml"), "--out", str(target), "-q"],
                       check=True, capture_output=True, env=os.environ | surroundings, cwd=ROOT)
        digests.append((workbook.content_digest(target.read_bytes()), target.read_bytes()))
    assert digests[0] == digests[1]


def test_placeholders():
    first, second = SheetSpec("One"), SheetSpec("Two")
    first.put(2, 3, 1.5, key="a")
    first.put(3, 3, 2.5, key="b")
    second.put(1, 1, Live("=SUM(«a:b»)*«c»", 4.0), key="d")
    second.put(1, 2, 1.0, key="c")
    addresses = Addresses([first, second])
    assert addresses.formula("=SUM(«a:b»)*«c»", "Two") == "=SUM('One'!$C$2:$C$3)*$B$1"
    with pytest.raises(KeyError):
        addresses.formula("=«nowhere»", "Two")
    with pytest.raises(AssertionError, match="two pages"):
        Addresses([first, SheetSpec("Three", keys={"a": (1, 1)})])
    with pytest.raises(AssertionError, match="put twice"):
        first.put(2, 3, 1.0)
    with pytest.raises(AssertionError, match="name"):
        first.put(9, 9, 1.0, name="Q1")


@pytest.mark.parametrize("bad", [math.nan, math.inf])
def test_no_number_that_is_none(bad):
    with pytest.raises(AssertionError):  # noqa: PT012 - whichever of the two notices first
        sheet = SheetSpec("Page")
        sheet.put(1, 1, bad)
        workbook.build([sheet], title="t", date=None, subject="s")


def test_conformance_of_the_pages(books):
    """Every page found by scan has an order and a title of its own, and prints one page wide with its heads."""
    orders = [page.ORDER for page in sheets.pages()]
    assert len(set(orders)) == len(orders) and all(page.TITLE and page.__doc__ for page in sheets.pages())
    book = openpyxl.load_workbook(io.BytesIO(books["supply_duct"]))
    assert book.sheetnames[0] == "Result"
    for sheet in book.worksheets:
        assert sheet.page_setup.fitToWidth == 1 and sheet.page_setup.fitToHeight == 0 and sheet.oddFooter.right.text
