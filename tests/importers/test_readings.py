"""The long form of readings: columns, units, numbers, words, and how rows meet the plan."""

from __future__ import annotations

import math

import numpy as np
import pytest

from traverse.errors import JobError, ReadingError, TraverseError, UnitError
from traverse.importers import load
from traverse.importers._cells import read
from traverse.importers._columns import recognise
from traverse.importers._text import number
from traverse.reduction import reduce

INCH = 249.08891  # Pa, conventional inch of water


def refuse(path, *words, kind=TraverseError):
    with pytest.raises(kind) as problem:
        load(path)
    for word in words:
        assert word in str(problem.value), str(problem.value)
    return str(problem.value)


def said(job, word):
    found = [finding for finding in job.findings if word in finding.message]
    assert found, [finding.message for finding in job.findings]
    return found[0]


def table(head="line,point,dp [Pa]", row="{line},{point},{dp}", count=6, lines="AB", sep="\n"):
    """Twelve rows; dp is 10.5, 20.5, ... on A and 11.5, 21.5, ... on B."""
    rows = [
        row.format(line=line, point=point, dp=f"{10 * point + k}.5", n=point + k * count)
        for k, line in enumerate(lines)
        for point in range(1, count + 1)
    ]
    return sep.join([head, *rows]) + sep


PLAN = [10.5, 20.5, 30.5, 40.5, 50.5, 60.5, 11.5, 21.5, 31.5, 41.5, 51.5, 61.5]


# --- heads and units ---------------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("head", "name", "unit"),
    [
        ("dp", "differential_pressure", ""),
        ("VP [in. w.c.]", "differential_pressure", "in. w.c."),
        ("Δp (Pa)", "differential_pressure", "Pa"),
        ("∆P", "differential_pressure", ""),
        ("delta p, mmH2O", "differential_pressure", "mmH2O"),
        ("Pv/Pa", "differential_pressure", "Pa"),
        ("Velocity Pressure (VP) [inH2O]", "differential_pressure", "inH2O"),
        ("velocity_pressure_pa", "differential_pressure", "pa"),
        ("Differenzdruck in Pa", "differential_pressure", "Pa"),
        ("dP (mm)", "differential_pressure", "mm"),
        ("Staudruck Pa", "differential_pressure", "Pa"),
        ("pression dynamique (Pa)", "differential_pressure", "Pa"),
        ("Presión dinámica [Pa]", "differential_pressure", "Pa"),
        ("température", "temperature", ""),
        ("T [°C]", "temperature", "°C"),
        ("Ts, °F", "temperature", "°F"),
        ("Stack Temp.", "temperature", ""),
        ("Statischer Druck [hPa]", "static", "hPa"),
        ("static (gauge) [Pa]", "static", "Pa"),
        ("Pt [Pa]", "total", "Pa"),
        ("Pt", "point", ""),
        ("Port", "line", ""),
        ("Achse", "line", ""),
        ("Pt.", "point", ""),
        ("Port-Point", "point", ""),
        ("#", "point", ""),
        ("v [m/s]", "velocity", "m/s"),
        ("Geschwindigkeit (m/s)", "velocity", "m/s"),
        ("Eintauchtiefe [mm]", "depth", "mm"),
        ("differential_pressure [inH2O]", "differential_pressure", "inH2O"),
        ("mean_root_differential_pressure [Pa^0.5]", "mean_root_differential_pressure", "Pa^0.5"),
    ],
)
def test_heads_of_the_trade(head, name, unit):
    found = recognise(0, head)
    assert found is not None
    assert (found.name, found.unit) == (name, unit)


@pytest.mark.parametrize(
    "head", ["√ΔP", "sqrt(dp)", "t [s]", "time", "V [mV]", "static (abs) [kPa]", "absolute pressure [hPa]", "O2 [%]", ""]
)
def test_heads_that_are_something_else(head):
    assert recognise(0, head) is None or recognise(0, head).unit == "mV"


@pytest.mark.parametrize(
    ("head", "words"),
    [
        ("line,point,dp", ("no unit for the differential_pressure", "[readings.units]")),
        ("line,point,dp [mm]", ("water or of mercury",)),
        ("line,point,dp [in]", ("water or of mercury",)),
        ("line,point,dp [degC]", ("temperature",)),
        ("line,point,dp [foo]", ("unknown unit",)),
    ],
)
def test_a_unit_that_is_missing_or_wrong_is_a_question(write, head, words):
    refuse(write(table(head)), 'readings.csv:1 column "dp', *words)


@pytest.mark.parametrize("name", ["temp", "static"])
def test_temperature_and_static_need_units_too(write, name):
    refuse(write(table(f"line,point,dp [Pa],{name}", "{line},{point},{dp},20")), "no unit for the", f'column "{name}"')


def test_a_unit_from_the_job(write):
    job = load(write(table("line,point,dp"), more='[readings.units]\ndifferential_pressure = "inH2O"\n'))
    assert job.runs[0].readings.differential_pressure == pytest.approx([v * INCH for v in PLAN])


@pytest.mark.parametrize(
    ("text", "more"),
    [
        (table(), '[readings.units]\ndifferential_pressure = "inH2O"\n'),
        (table(head="line,point,dp [Pa]\n,,inH2O"), ""),
    ],
)
def test_two_places_that_disagree_on_a_unit_are_a_question(write, text, more):
    refuse(write(text, more=more), "told in two ways", "Pa", "inH2O")


def test_places_that_agree_on_a_unit_are_none(write):
    job = load(write(table(head="line,point,dp [Pa]\n,,[Pa]"), more='[readings.units]\ndifferential_pressure = "pa"\n'))
    assert job.runs[0].readings.differential_pressure == pytest.approx(PLAN)


def test_a_unit_for_a_column_that_is_not_there(write):
    refuse(write(table(), more='[readings.units]\ntemperature = "degC"\n'), "no column temperature", kind=JobError)
    refuse(write(table(), more='[readings.units]\ntemprature = "degC"\n'), "perhaps temperature", kind=JobError)


def test_two_candidates_are_a_question(write):
    refuse(
        write(table("line,point,dp [Pa],VP [Pa]", "{line},{point},{dp},{dp}")), '"dp [Pa]" and "VP [Pa]"', "[readings.columns]"
    )


@pytest.mark.parametrize("text", ["VP [Pa]", "VP"])
def test_the_job_says_which_column(write, text):
    content = table("line,point,dp [Pa],VP [Pa]", "{line},{point},1.5,{dp}")
    job = load(write(content, more=f'[readings.columns]\ndifferential_pressure = "{text}"\n'))
    assert job.runs[0].readings.differential_pressure == pytest.approx(PLAN)
    assert '"dp [Pa]"' in said(job, "not used").message


def test_a_strange_head_named_by_the_job(write):
    content = "Log 7\n" + table("w,q,Kanal 3 [Pa]")
    more = '[readings.columns]\nline = "w"\npoint = "q"\ndifferential_pressure = "Kanal 3"\n'
    assert load(write(content, more=more)).runs[0].readings.differential_pressure == pytest.approx(PLAN)
    refuse(write(content, more=more.replace("Kanal 3", "Kanal 4")), '"Kanal 4"', '"Kanal 3 [Pa]"')


def test_unknown_columns_are_named(write):
    job = load(write(table("line,point,dp [Pa],operator", "{line},{point},{dp},hw")))
    assert '"operator"' in said(job, "not used").message


def test_a_file_without_a_head_is_a_question(write):
    refuse(write("A,1,10.5\nA,2,11.5\n"), "no row names a column", "[readings.columns]")


def test_every_reading_keeps_its_place_and_text(write):
    job = load(write("job 7\n\n" + table() + "\n"))
    column = job.runs[0].readings.columns["differential_pressure"]
    assert column.where[0] == "readings.csv:4"
    assert column.where[11] == "readings.csv:15"
    assert column.text[11] == "61.5"
    assert column.header == "dp [Pa]"
    assert column.unit == "Pa"
    assert column.number[11] == 61.5


# --- numbers -----------------------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("text", "decimal", "value"),
    [
        ("0.42", ".", 0.42),
        (".42", ".", 0.42),
        ("42.", ".", 42.0),
        ("0,42", ",", 0.42),
        ("\u22120,5", ",", -0.5),
        ("+1.5", ".", 1.5),
        ("1,234", ".", 1234.0),
        ("1.234", ",", 1234.0),
        ("1 013,25", ",", 1013.25),
        ("1\u202f013.25", ".", 1013.25),
        ("1'013.25", ".", 1013.25),
        ("1.2e-3", ".", 0.0012),
        ("- 5", ".", -5.0),
        ("1,234,567.8", ".", 1234567.8),
        ("0,123", ".", None),
        ("12,5", ".", None),
        ("12.5", ",", None),
        ("1,23", ".", None),
        ("1,2345", ".", None),
        ("1.2.3", ".", None),
        ("", ".", None),
        ("1e999", ".", None),
        ("0x10", ".", None),
        ("1_000", ".", None),
        ("١٢", ".", None),
        ("1 2", ".", None),
        ("inf", ".", None),
        ("1,234.567,8", ".", None),
    ],
)
def test_the_grammar_of_numbers(text, decimal, value):
    assert number(text, decimal) == value


def test_a_number_with_the_other_sign_is_told_the_setting(write):
    path = write(
        table(row="{line};{point};{dp}", head="line;point;dp [Pa]").replace("20.5", "20,5"),
        readings='file = "readings.csv"\ndecimal = "."',
    )
    message = refuse(path)
    assert message == (
        "readings.csv:3 column \"dp [Pa]\": '20,5' is no number with a decimal point; "
        'if the file uses decimal commas set decimal = ","'
    )


def test_mixed_decimal_signs_are_a_question(write):
    refuse(
        write(table(row="{line};{point};{dp}", head="line;point;dp [Pa]").replace("20.5", "20,5")),
        "decimal comma",
        "[readings] decimal",
    )


@pytest.mark.parametrize("sign", [",", "."])
def test_numbers_that_read_two_ways_everywhere_are_a_question(write, sign):
    text = "line;point;dp [Pa]\n" + "".join(f"{line};{p};{p}{sign}234\n" for line in "AB" for p in range(1, 7))
    refuse(write(text), "two ways", 'decimal = ","')
    for decimal in ",.":
        job = load(write(text, readings=f'file = "readings.csv"\ndecimal = "{decimal}"'))
        first = job.runs[0].readings.differential_pressure[0]
        assert first == pytest.approx(1.234 if decimal == sign else 1234.0)


def test_another_number_settles_it(write):
    text = "line;point;dp [Pa]\n" + "".join(f"{line};{p};{p}.234\n" for line in "AB" for p in range(1, 7)).replace(
        "1.234", "1.2345", 1
    )
    assert load(write(text)).runs[0].readings.differential_pressure[1] == pytest.approx(2.234)


def test_a_cell_too_many_is_no_silent_shift(write):
    refuse(write(table().replace("20.5", "20,5")), "readings.csv:3", "4 cells under a head of 3")


# --- words and states --------------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("text", "status", "value"),
    [
        ("", "missing", None),
        ("NA", "missing", None),
        ("n/a", "missing", None),
        ("-", "missing", None),
        ("—", "missing", None),
        ("missing", "missing", None),
        ("OBS", "obstructed", None),
        ("obstructed", "obstructed", None),
        ("plugged", "plugged", None),
        ("excluded", "excluded", None),
        ("<0.01", "below range", 0.01),
        ("≤ 0.01", "below range", 0.01),
        (">2", "over range", 2.0),
        ("OL", "over range", None),
        ("-0.03", "negative", -0.03),
        ("0", "read", 0.0),
        ("0.42", "read", 0.42),
    ],
)
def test_what_a_cell_says(text, status, value):
    cell = read(text, ".", "here")
    assert cell.status == status
    assert math.isnan(cell.number) if value is None else cell.number == value


@pytest.mark.parametrize("text", ["abc", "0.4 Pa", "12:30", "0.4?", "<", "<x", "<-1", "0..4", "=1+1"])
def test_what_no_cell_says(text):
    with pytest.raises(ReadingError, match="here"):
        read(text, ".", "here")


@pytest.mark.parametrize(
    ("cell", "status", "expected"),
    [
        ("20.5", "excluded", "excluded"),
        ("", "obstructed", "obstructed"),
        ("0.5", "below range", "below range"),
        ("20.5", "ok", "read"),
        ("20.5", "read", "read"),
        ("-2", "", "negative"),
        ("90", "over range", "over range"),
        ("", "", "missing"),
        ("20.5", "below_range", "below range"),
    ],
)
def test_a_status_column(write, cell, status, expected):
    rows = [f"{line},{p},30.5,,\n" for line in "AB" for p in range(1, 7)]
    rows[3] = f"A,4,{cell},{status},because\n"
    readings = load(write("line,point,dp [Pa],status,reason\n" + "".join(rows))).runs[0].readings
    assert readings.status[3] == expected
    assert expected == "read" or readings.reason[3] == "because"
    assert math.isnan(readings.differential_pressure[3]) == (expected in {"missing", "obstructed", "excluded"})


@pytest.mark.parametrize(
    ("cell", "status"), [("", "read"), ("", "below range"), ("5", "negative"), ("5", "missing"), ("5", "plgged")]
)
def test_a_status_that_contradicts_the_reading_is_refused(write, cell, status):
    rows = [f"{line},{p},30.5,\n" for line in "AB" for p in range(1, 7)]
    rows[3] = f"A,4,{cell},{status}\n"
    refuse(write("line,point,dp [Pa],status\n" + "".join(rows)), "readings.csv:5", "status", kind=ReadingError)


def test_a_blank_is_never_zero(write):
    job = load(write(table().replace("20.5", "")))
    assert job.runs[0].readings.status[1] == "missing"
    assert math.isnan(job.runs[0].readings.differential_pressure[1])
    with pytest.raises(ReadingError, match="A2"):
        reduce(job)


# --- rows and the plan -------------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    "row", ["{line}-{point},{dp}", "{line}{point},{dp}", "{line} {point},{dp}", "{line}/{point},{dp}", "Port {line}-{point},{dp}"]
)
def test_labels_of_line_and_point_in_one(write, row):
    readings = load(write(table("point,dp [Pa]", row))).runs[0].readings
    assert readings.differential_pressure == pytest.approx(PLAN)
    assert readings.line == ("A",) * 6 + ("B",) * 6
    assert readings.point == (1, 2, 3, 4, 5, 6) * 2


def test_numbered_lines_in_one_label(write):
    readings = load(write(table("point,dp [Pa]", "{line}-{point},{dp}", lines="12"))).runs[0].readings
    assert readings.line == ("1",) * 6 + ("2",) * 6
    assert readings.differential_pressure == pytest.approx(PLAN)


def test_labels_match_whatever_the_order_of_the_rows(write):
    head, *rows = table("line,point,dp [Pa]", "Port {line},P{point},{dp}").splitlines()
    readings = load(write("\n".join([head, *rows[::-1]]))).runs[0].readings
    assert readings.differential_pressure == pytest.approx(PLAN)
    assert readings.line[0] == "Port A"
    assert readings.point[0] == 1


def test_other_names_map_in_order_of_appearance(write):
    job = load(write(table(lines=["North", "East"])))
    assert job.runs[0].readings.line[0] == "North"
    assert job.runs[0].readings.differential_pressure == pytest.approx(PLAN)
    assert "North is A" in said(job, "order of appearance").message


def test_points_numbered_through_are_counted_anew(write):
    job = load(write(table(row="{line},{n},{dp}")))
    assert job.runs[0].readings.point == (1, 2, 3, 4, 5, 6) * 2
    assert said(job, "counted anew")
    assert load(write(table("point,dp [Pa]", "{n},{dp}"))).runs[0].readings.differential_pressure == pytest.approx(PLAN)


def test_an_absent_labelled_row_is_missing(write):
    job = load(write(table().replace("A,3,30.5\n", "")))
    readings = job.runs[0].readings
    assert readings.status[2] == "missing"
    assert readings.text[2] == ""
    assert readings.differential_pressure[3] == 40.5
    assert said(job, "A3").level == "attention"


@pytest.mark.parametrize(
    ("text", "found"),
    [
        (table("dp [Pa]", "{dp}", count=5), "10 readings for 12 points"),
        (table(count=8), "16 readings for 12 points"),
        (table(count=5), "10 readings for 12 points"),
        (table(lines="ABC"), "18 readings for 12 points"),
        (table(lines="A"), None),
        (table(lines="X"), "6 readings for 12 points"),
        (table("line,dp [Pa]", "{line},{dp}", count=5), "10 readings for 12 points"),
        (table("point,dp [Pa]", "{n},{dp}", count=7), "14 readings for 12 points"),
        (table("point,dp [Pa]", "{point},{dp}", lines="ABC"), "18 readings for 12"),
    ],
)
def test_a_count_that_does_not_match_names_both(write, text, found):
    path = write(text)
    if found is None:
        assert load(path).runs[0].readings.status[6:] == ("missing",) * 6
    else:
        refuse(path, found, 'run "1"', kind=ReadingError)


def test_a_point_that_stands_twice(write):
    text = table() + "A,3,90.5\n"
    refuse(write(text), "readings.csv:14", "A3", 'repeats = "mean"')
    job = load(write(text, readings='file = "readings.csv"\nrepeats = "mean"'))
    root = (30.5**0.5 + 90.5**0.5) / 2
    readings = job.runs[0].readings
    assert readings.differential_pressure[2] == pytest.approx(root**2)
    assert readings.text[2] == "30.5 | 90.5"
    assert readings.columns["differential_pressure"].where[2] == "readings.csv:4, readings.csv:14"
    assert said(job, "more than once")


def test_repeats_of_opposite_sign_keep_it(write):
    text = table() + "A,3,-30.5\n"
    readings = load(write(text, readings='file = "readings.csv"\nrepeats = "mean"')).runs[0].readings
    assert readings.differential_pressure[2] == pytest.approx(0.0)
    assert readings.status[2] == "read"
    refuse(write(table() + "A,3,OBS\n", readings='file = "readings.csv"\nrepeats = "mean"'), "obstructed")


@pytest.mark.parametrize(
    ("order", "expected"),
    [
        ("inward", PLAN),
        ("outward", PLAN[:6][::-1] + PLAN[6:][::-1]),
        ("alternate", PLAN[:6] + PLAN[6:][::-1]),
    ],
)
@pytest.mark.parametrize(("head", "row"), [("dp [Pa]", "{dp}"), ("line,dp [Pa]", "{line},{dp}")])
def test_the_order_of_readings_without_numbers(write, order, expected, head, row):
    job = load(write(table(head, row), layout=f'rule = "equal-area"\nlines = 2\npoints = 6\norder = "{order}"'))
    assert job.runs[0].readings.differential_pressure == pytest.approx(expected)


def test_the_default_order_is_said(write):
    finding = said(load(write(table("dp [Pa]", "{dp}"))), "inward")
    assert finding.setting == "[layout] order"
    assert finding.level == "attention"


def depth_rows(shift=0.0, flip=False, label=False):
    # Equal areas on a diameter of 300 mm, six points: depths (1 - sqrt(1 - (2 i - 1)/6)) / 2 of it and their mirror images.
    half = [(1 - math.sqrt(1 - (2 * i - 1) / 6)) / 2 * 300 for i in (1, 2, 3)]
    depth = [*half, *(300 - d for d in half[::-1])]
    rows = [(line, d, 10 * (i + 1) + k) for k, line in enumerate("AB") for i, d in enumerate(depth)]
    rows = rows[::-1] if flip else rows
    head = "line,point,depth [mm],dp [Pa]\n" if label else "line,depth [mm],dp [Pa]\n"
    count = {"A": 0, "B": 0}
    text = head
    for line, d, dp in rows:
        count[line] += 1
        text += f"{line},{f'{count[line]},' if label else ''}{d + shift:.1f},{dp}.5\n"
    return text


def test_depths_set_the_order(write):
    assert load(write(depth_rows(flip=True))).runs[0].readings.differential_pressure == pytest.approx(PLAN)


def test_depths_beat_point_numbers_and_say_so(write):
    job = load(write(depth_rows(flip=True, label=True)))
    assert job.runs[0].readings.differential_pressure == pytest.approx(PLAN)
    assert job.runs[0].readings.point[:6] == (6, 5, 4, 3, 2, 1)
    assert said(job, "the depths set the order").level == "attention"


def test_depths_that_depart_are_an_attention_finding(write):
    assert "5.0 mm" in said(load(write(depth_rows(shift=5.0))), "depart").message
    assert not [f for f in load(write(depth_rows(shift=2.0))).findings if f.topic == "depths"]


def test_depths_of_another_plan_are_refused(write):
    refuse(write(depth_rows(shift=25.0)), "half a spacing", "readings.csv:2", kind=ReadingError)


# --- temperature, static, angles, velocity -----------------------------------------------------------------------------


def with_column(name, cells):
    rows = [f"{line},{p},{10 * p}.5,{cells.get(f'{line}{p}', '')}" for line in "AB" for p in range(1, 7)]
    return f"line,point,dp [Pa],{name}\n" + "\n".join(rows) + "\n"


def test_one_temperature_a_line_is_carried(write):
    job = load(write(with_column("temp [degC]", {"A1": "100", "B1": "120"})))
    assert job.runs[0].readings.temperature == pytest.approx([373.15] * 6 + [393.15] * 6)
    assert said(job, "head of each line")
    assert np.isnan(job.runs[0].readings.columns["temperature"].number[1])


def test_other_blanks_take_the_default_and_say_so(write):
    cells = {f"{line}{p}": "100" for line in "AB" for p in range(1, 7)} | {"A3": "", "B4": "-"}
    job = load(write(with_column("temp [degC]", cells)))
    assert job.runs[0].readings.temperature[[2, 9]] == pytest.approx([298.15] * 2)
    finding = said(job, "A3, B4")
    assert finding.level == "attention"
    assert finding.setting == "[conditions] temperature"
    refuse(write(with_column("temp [degC]", cells), conditions='barometric = "1002 hPa"'), "A3, B4", "blank", kind=ReadingError)


def test_a_blank_temperature_of_a_point_that_was_not_read(write):
    cells = {f"{line}{p}": "100" for line in "AB" for p in range(1, 7)} | {"A3": ""}
    text = with_column("temp [degC]", cells).replace("A,3,30.5", "A,3,OBS")
    job = load(write(text, conditions='barometric = "1002 hPa"\nstatic = "0 Pa"'))
    assert job.runs[0].readings.temperature == pytest.approx([373.15] * 12)


def test_blanks_as_above_when_the_job_says_so(write):
    cells = {"A1": "-100", "A4": "-200", "B2": "-300"}
    job = load(write(with_column("static [Pa]", cells), readings='file = "readings.csv"\nblank = "as above"'))
    assert job.runs[0].readings.static == pytest.approx([-100] * 3 + [-200] * 4 + [-300] * 5)
    assert said(job, "taken from the row above").level == "attention"


def test_a_wholly_blank_column_is_none(write):
    job = load(write(with_column("temp [degC]", {})))
    assert job.runs[0].readings.temperature == pytest.approx([298.15] * 12)
    assert "temperature" not in job.runs[0].readings.columns


@pytest.mark.parametrize(
    ("name", "cell", "words"),
    [
        ("temp [degC]", "-300", ("absolute zero",)),
        ("static [kPa]", "101.2", ("looks absolute",)),
        ("temp [degC]", "<20", ("no number",)),
        ("temp [degC]", "warm", ("no number",)),
    ],
)
def test_states_that_cannot_be(write, name, cell, words):
    cells = {f"{line}{p}": "1" for line in "AB" for p in range(1, 7)} | {"B2": cell}
    refuse(write(with_column(name, cells)), "readings.csv:9", *words, kind=ReadingError)


def test_angles(write):
    cells = {f"{line}{p}": str(p) for line in "AB" for p in range(1, 7)}
    job = load(write(with_column("yaw", cells)))
    assert job.runs[0].readings.yaw == pytest.approx(np.radians([1, 2, 3, 4, 5, 6] * 2))
    assert said(job, "deg was taken")
    refuse(write(with_column("yaw [deg]", cells | {"A2": ""})), "yaw angle at A2", kind=ReadingError)


def test_velocity_needs_the_density_of_the_meter(write):
    text = table("line,point,velocity [m/s]").replace("10.5", "-10.5")
    refuse(write(text), "meter_density", kind=ReadingError)
    readings = load(write(text, readings='file = "readings.csv"\nmeter_density = "1.2 kg/m3"')).runs[0].readings
    assert readings.differential_pressure[:2] == pytest.approx([-0.6 * 10.5**2, 0.6 * 20.5**2])
    assert readings.status[0] == "negative"
    assert readings.meter_density.value == 1.2
    assert readings.text[0] == "-10.5"
    assert "differential_pressure" not in readings.columns
    assert readings.columns["velocity"].unit == "m/s"


def test_pressure_counts_beside_velocity(write):
    job = load(
        write(
            table("line,point,dp [Pa],velocity [m/s]", "{line},{point},{dp},5.5"),
            readings='file = "readings.csv"\nmeter_density = "1.2 kg/m3"',
        )
    )
    assert job.runs[0].readings.differential_pressure == pytest.approx(PLAN)
    assert job.runs[0].readings.meter_density is None
    assert said(job, "meter_density is not used")
    assert "velocity" not in job.runs[0].readings.columns


def test_total_less_static(write):
    text = table("line,point,total [Pa],static [mmH2O]", "{line},{point},{dp},-10")
    job = load(write(text))
    assert job.runs[0].readings.differential_pressure == pytest.approx([v + 98.0665 for v in PLAN])
    assert job.runs[0].readings.static == pytest.approx([-98.0665] * 12)
    column = job.runs[0].readings.columns["differential_pressure"]
    assert column.unit == "Pa"
    assert column.text[0] == "10.5 − -10"
    assert said(job, "less")
    refuse(write(table("line,point,total [Pa]")), "without a static", kind=ReadingError)
    assert load(write(text.replace("B,1,11.5,-10", "B,1,OBS,-10"))).runs[0].readings.status[6] == "obstructed"


def test_columns_of_log_cuts(write):
    text = table(
        "line,point,start,dp [Pa],standard_error [Pa],mean_root_differential_pressure [Pa^0.5],samples",
        "{line},{point},10:00,{dp},0.25,3.5,60",
    )
    job = load(write(text))
    assert job.runs[0].readings.standard_error == pytest.approx([0.25] * 12)
    assert job.runs[0].readings.mean_root == pytest.approx([3.5] * 12)
    assert not [f for f in job.findings if "not used" in f.message]


# --- what is left out --------------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    "footer",
    ["Average,,30.1", "mean,,30.1", "Total:,,300", "Mittelwert,,30.1", ",avg,30.1", "Std. Dev.,,3", "A,mean,30", "moyenne,,3"],
)
def test_totals_and_averages_are_left_out(write, footer):
    job = load(write(table() + footer + "\n"))
    assert job.runs[0].readings.differential_pressure == pytest.approx(PLAN)
    assert said(job, "a total or an average").where == "readings.csv:14"


@pytest.mark.parametrize("line", ["# gauge changed", "", "line,point,dp [Pa]", "Remark: windy"])
def test_comments_blanks_and_second_heads_are_left_out(write, line):
    assert load(write(table().replace("B,1", f"{line}\nB,1", 1))).runs[0].readings.differential_pressure == pytest.approx(PLAN)


def test_runs_labelled_once_are_carried_down(write):
    rows = [
        f"{'Run 1' if (line, p) == ('A', 1) else ''},{line if p == 1 else ''},{p},{10 * p}.5"
        for line in "AB"
        for p in range(1, 7)
    ]
    job = load(write("run,line,point,dp [Pa]\n" + "\n".join(rows)))
    assert [run.name for run in job.runs] == ["Run 1"]
    assert job.runs[0].readings.line == ("A",) * 6 + ("B",) * 6
    assert said(job, "row above")


def test_a_first_row_without_label_is_refused(write):
    refuse(write(table().replace("A,1", ",1", 1)), "readings.csv:2", "no label", kind=ReadingError)


def test_a_quote_in_the_first_lines_does_no_harm(write):
    assert load(write('Gauge; 5" pipe\n' + table("line;point;dp [Pa]", "{line};{point};{dp}"))).runs[
        0
    ].readings.differential_pressure == pytest.approx(PLAN)


def test_units_that_are_none_name_the_place(write):
    refuse(write(table("line,point,dp [parsec]")), "parsec", "readings.csv:1", kind=UnitError)


def test_absolute_static_columns_are_not_taken_for_gauge(write):
    job = load(write(table("line,point,dp [Pa],static (abs) [kPa]", "{line},{point},{dp},99.5")))
    assert job.runs[0].readings.static == pytest.approx([-150.0] * 12)
    assert "static (abs)" in said(job, "not used").message


def test_a_counter_of_rows_gives_way_to_the_point_column(write):
    rows = [
        f"{n + 1},{line},{p},{10 * p + k}.5"
        for n, (k, line, p) in enumerate((k, line, p) for k, line in enumerate("AB") for p in range(1, 7))
    ]
    job = load(write("No.,Port,Point,dp [Pa]\n" + "\n".join(rows)))
    assert job.runs[0].readings.differential_pressure == pytest.approx(PLAN)
    assert '"No."' in said(job, "not used").message


def test_a_position_with_a_unit_is_a_depth_and_not_a_label():
    assert recognise(0, "Position [mm]").name == "depth"
    assert recognise(0, "Position").name == "point"
    assert recognise(0, "Line [mm]") is None


def test_a_cell_of_a_hundred_thousand_digits_is_refused_at_once(write):
    refuse(write(table().replace("20.5", "9" * 100_000 + "x")), "readings.csv:3", kind=ReadingError)


def test_repeats_that_are_negative_on_the_mean_stay_negative(write):
    text = table() + "A,3,-90.5\n"
    readings = load(write(text, readings='file = "readings.csv"\nrepeats = "mean"')).runs[0].readings
    root = (30.5**0.5 - 90.5**0.5) / 2
    assert readings.differential_pressure[2] == pytest.approx(-(root**2))
    assert readings.status[2] == "negative"


def test_the_allowed_departure_follows_the_length_of_the_line(write):
    # 1 % of a line of 2 m is 20 mm; of one of 0.3 m, 3 mm (the least that is allowed).
    for along, length, allowed in (("height", 300, 3.0), ("width", 2000, 20.0)):
        depths = [length * (2 * i + 1) / 12 for i in range(6)]
        rows = [f"{line},{d + 10:.0f},{20 + i}.5" for line in "AB" for i, d in enumerate(depths)]
        layout = f'rule = "equal-area"\nlines = 2\npoints = 6\nalong = "{along}"'
        plane = 'shape = "rectangle"\nwidth = "2000 mm"\nheight = "300 mm"'
        job = load(write("line,depth [mm],dp [Pa]\n" + "\n".join(rows), plane=plane, layout=layout))
        assert bool([f for f in job.findings if f.topic == "depths"]) == (allowed < 10)
