"""The grammar of the job file: what is refused, with what words, and what is a finding."""

from __future__ import annotations

import datetime as dt

import pytest

from traverse.errors import DomainError, JobError, LayoutError, ReadingError, TraverseError, UnitError
from traverse.importers import find_jobs, load, load_setup
from traverse.importers._schema import LATER, SCHEMA
from traverse.importers._uncertainty import INPUTS
from traverse.units import UNITS


def findings(job, topic):
    return [finding for finding in job.findings if finding.topic == topic]


def refuse(path, kind, *words):
    with pytest.raises(kind) as problem:
        load(path)
    for word in words:
        assert word in str(problem.value), str(problem.value)
    return problem.value


def test_a_plain_job(write):
    job = load(write())
    assert (job.title, job.date, job.method, job.units) == ("Test", dt.date(2026, 10, 14), "exact", "si")
    assert job.plane.section.width == pytest.approx(0.3)
    assert job.layout.size == 12
    assert job.layout.rule == "equal-area"
    assert job.runs[0].conditions.barometric.value == 100200.0
    assert job.runs[0].readings.static == pytest.approx([-150.0] * 12)
    assert job.source.name == "job.toml"
    assert len(job.source.sha256) == 64
    assert "[plane]" in job.source.text
    assert job.sources[1].name == "readings.csv"


@pytest.mark.parametrize(
    ("part", "body", "words"),
    [
        ("plane", 'shape = "round"\ndiametre = "300 mm"', ("[plane]", "'diametre'", "perhaps diameter")),
        ("gas", 'kind = "air"\nrelativ_humidity = "45 %"', ("[gas]", "perhaps relative_humidity")),
        ("readings", 'file = "readings.csv"\nmethod = "exact"', ("[readings]", "'method'", "belongs into [job]")),
        ("conditions", 'barometric = "1002 hPa"\nstatik = "0 Pa"', ("perhaps static",)),
    ],
)
def test_an_unknown_key_names_the_nearest_known_one(write, part, body, words):
    refuse(write(**{part: body}), JobError, *words)


def test_an_unknown_table_names_the_nearest_known_one(write):
    refuse(write(more='[readingz]\nfile = "a.csv"\n'), JobError, "[readingz]", "perhaps [readings]")


DIMENSIONED = [(table, key) for table, keys in SCHEMA.items() for key, spec in keys.items() if spec.kind == "quantity"]


@pytest.mark.parametrize(("table", "key"), DIMENSIONED, ids=str)
@pytest.mark.parametrize("value", ["5", "0.5", "true", '"5"', '"5 parsec"', "[1]"])
def test_a_value_without_its_unit_is_refused_wherever_one_is_needed(write, table, key, value):
    refuse(write(**{table: f"{key} = {value}"}), UnitError, f"[{table}] {key}")


def test_there_are_dimensioned_keys_in_every_physical_table():
    assert {table for table, _ in DIMENSIONED} >= {"plane", "gas", "conditions", "reference", "pitot", "design", "readings"}


@pytest.mark.parametrize(
    ("table", "body", "words"),
    [
        ("pitot", 'coefficient = "0.84"', ("bare number", "without quotes")),
        ("layout", 'rule = "equal-area"\nlines = "2"\npoints = 6', ("whole number",)),
        ("layout", 'rule = "equal-area"\nlines = 2.0\npoints = 6', ("whole number",)),
        ("layout", 'rule = "equal-area"\nlines = true\npoints = 6', ("whole number",)),
        ("layout", 'rule = "equal-area"\nlines = 2\npoints = "6"', ("[layout] points",)),
        ("gas", 'kind = "air"\ndry = "true"', ("true or false",)),
        ("job", "title = 5", ("text in quotes",)),
        ("job", 'title = "x"\ndate = "2026-10-14"', ("date without quotes",)),
        ("job", 'method = "epa2"', ("epa-2",)),
        ("plane", 'shape = "rund"\ndiameter = "1 m"', ('perhaps "round"',)),
        ("corrections", 'wall_factor = "0.99"', ("bare number",)),
        ("gas", 'kind = "air"\nrelative_humidity = "45 %"\nratio_of_specific_heats = 14', ("between 1 and 1.667",)),
    ],
)
def test_a_value_of_another_kind_is_refused(write, table, body, words):
    refuse(write(**{table: body}), JobError, *words)


@pytest.mark.parametrize(("bare", "told"), [("9.4", '"9.4 %"'), ("0.094", '"9.4 %" or "0.094 %"')])
def test_a_bare_number_for_a_percentage_is_told_how_to_write_it(write, bare, told):
    refuse(write(gas=f'kind = "air"\nmoisture = {bare}'), UnitError, "[gas] moisture", told)


@pytest.mark.parametrize(
    ("table", "body"),
    [
        ("readings", 'file = "r.csv"\nform = "matrix"'),
        ("readings", 'file = "r.csv"\nform = "log"'),
        ("readings", 'file = "r.csv"\nsheet = "x"'),
        ("readings", 'file = "r.csv"\nmatrix = "points down"'),
        ("corrections", "layout = true"),
    ],
)
def test_a_later_capability_is_refused_by_name(write, table, body):
    problem = refuse(write(**{table: body}), JobError, "not available in this version")
    assert problem.expected


def test_every_later_key_is_unknown_to_the_grammar():
    assert not [name for name in LATER if name.split(".")[1] in SCHEMA[name.split(".")[0]]]


def test_a_spreadsheet_of_readings_is_refused_by_name(write, tmp_path):
    (tmp_path / "r.xlsx").write_bytes(b"PK")
    refuse(write(readings='file = "r.xlsx"'), JobError, "not available in this version", "CSV")


def test_submitted_figures_are_accepted_and_noted(write):
    job = load(write(more='[submitted]\nmean_velocity = "48.5 ft/s"\n[submitted.run."1"]\nactual_flow = "1 m3/s"\n'))
    assert findings(job, "submitted figures")[0].setting == "[submitted]"


def test_a_toml_error_names_the_line(write):
    path = write()
    path.write_text('[job]\ntitle = "a"\nmethod = exact\n')
    refuse(path, JobError, "job.toml:3", "TOML")


def test_a_toml_error_at_the_end_names_the_last_line(write):
    path = write()
    path.write_text('[job]\ntitle = "a')
    refuse(path, JobError, "job.toml:2")


def test_a_file_without_job_table_is_no_job(write):
    refuse(write(job=None), JobError, "no [job] table")


def test_the_encoding_mark_of_an_editor_does_no_harm(write):
    path = write()
    path.write_bytes(b"\xef\xbb\xbf" + path.read_bytes())
    assert load(path).title == "Test"


@pytest.mark.parametrize(("diameter", "system"), [("300 mm", "si"), ("12 in", "us"), ("1 ft", "us"), ("0.3 m", "si")])
def test_the_units_of_the_report_follow_the_section(write, diameter, system):
    job = load(write(job='title = "x"\nmethod = "exact"', plane=f'shape = "round"\ndiameter = "{diameter}"'))
    assert job.units == system
    assert findings(job, "units")[0].setting == "[job] units"


def test_the_method_defaults_to_exact_with_a_finding(write):
    job = load(write(job='title = "x"\nunits = "si"'))
    assert job.method == "exact"
    assert findings(job, "method")[0].setting == "[job] method"


@pytest.mark.parametrize(
    ("body", "words"),
    [
        ('shape = "round"', ("no diameter", "circumference")),
        ('shape = "annulus"\ndiameter = "1 m"', ("no core",)),
        ('shape = "annulus"\ndiameter = "1 m"\ncore = "1 m"', ("nothing is left open",)),
        ('shape = "annulus"\ngap = "0.1 m"\ncore = "1 m"\nlining = "1 cm"', ("open gap",)),
        ('shape = "ellipse"\nwidth = "1 m"', ("no height",)),
        ('shape = "flat-oval"\nwidth = "1 m"\nheight = "1 m"\ndiameter = "1 m"', ("no diameter",)),
        ('shape = "rectangle"\nwidth = "1 m"\nheight = "0.2 m"\nlining = "0.1 m"', ("nothing is left open",)),
        ('shape = "round"\ndiameter = ["1 m", "-1 m"]', ("greater than zero",)),
        ('shape = "round"\ncore = "1 m"', ("no core",)),
        ('shape = "polygon"', ("no vertices", "corners in order")),
        ('shape = "polygon"\nvertices = [["0 m", "0 m"], ["1 m", "0 m"]]', ("at least three",)),
        ('shape = "polygon"\nvertices = [["0 m", "0 m"], ["1 m", "0 m"], ["1 m"]]', ("vertices[3]", "x and y")),
        ('shape = "polygon"\nvertices = [["0 m", "0 m"], ["1 m", "1 m"], ["1 m", "0 m"], ["0 m", "1 m"]]', ("sides 1 and 3", "meet")),
        ('shape = "polygon"\nvertices = [["0 m", "0 m"], ["1 m", "0 m"], ["1 m", "0 m"], ["0 m", "1 m"]]', ("2 and 3 are one place",)),
        ('shape = "polygon"\nwidth = "1 m"\nvertices = [["0 m", "0 m"], ["1 m", "0 m"], ["0 m", "1 m"]]', ("a polygon has no width",)),
        ('shape = "rectangle"\nwidth = "1 m"\nheight = "1 m"\nvertices = []', ("has no vertices",)),
        ('shape = "round"\ndiameter = "1 m"\ncircumference = "3 m"', ("both",)),
        ('shape = "rectangle"\nwidth = "1 m"', ("no height",)),
        ('shape = "round"\ndiameter = "1 m"\nwidth = "1 m"', ("no width",)),
        ('shape = "rectangle"\nwidth = "1 m"\nheight = "1 m"\ndiameter = "1 m"', ("no diameter",)),
        ('shape = "round"\ndiameter = "1 m"\nwall_thickness = "5 mm"', ("wall_thickness",)),
        ('shape = "round"\ncircumference = "1 m"\nwall_thickness = "200 mm"', ("nothing is left open",)),
        ('shape = "round"\ndiameter = "-1 m"', ("greater than zero",)),
        ('shape = "round"\ndiameter = "1 m"\nupstream = "-1 m"', ("zero or more",)),
        ('diameter = "1 m"', ("no shape",)),
    ],
)
def test_a_section_needs_exactly_its_own_dimensions(write, body, words):
    refuse(write(plane=body), JobError, *words)


def test_a_circumference_outside_the_wall(write):
    job = load(write(plane='shape = "round"\ncircumference = "1 m"\nwall_thickness = "5 mm"'))
    assert job.plane.section.width == pytest.approx(1 / 3.141592653589793 - 0.01, rel=1e-12)


# --- gas -----------------------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("body", "humidity", "value"),
    [
        ('kind = "air"\nrelative_humidity = "45 %"', "relative_humidity", 0.45),
        ('kind = "air"\nwet_bulb = "20 degC"', "wet_bulb", 293.15),
        ('kind = "air"\ndew_point = "50 degF"', "dew_point", 283.15),
        ('kind = "air"\nhumidity_ratio = "8 g/kg"', "humidity_ratio", 0.008),
        ('kind = "air"\nmoisture = "2 %"', "moisture", 0.02),
        ('kind = "air"\ndry = true', "dry", None),
        ('kind = "flue-gas"\noxygen = "7.2 %"\ncarbon_dioxide = "11.8 %"\nsaturated = true', "saturated", None),
        ('kind = "given"\ndensity = "1.2 kg/m3"', "none", None),
        ('kind = "given"\nmolar_mass = "29 g/mol"\nmoisture = "1 %"', "moisture", 0.01),
    ],
)
def test_the_forms_of_humidity(write, body, humidity, value):
    gas = load(write(gas=body)).runs[0].gas
    assert gas.humidity == humidity
    assert (gas.water.value if gas.water else None) == (pytest.approx(value) if value else None)


@pytest.mark.parametrize(
    ("body", "words"),
    [
        ('kind = "air"', ("humidity", "exactly one of")),
        ('kind = "air"\nrelative_humidity = "45 %"\ndew_point = "5 degC"', ("exactly one of",)),
        ('kind = "air"\nrelative_humidity = "105 %"', ("0 to 100 %",)),
        ('kind = "air"\nrelative_humidity = "-5 %"', ("0 to 100 %",)),
        ('kind = "air"\nmoisture = "100 %"', ("below 100 %",)),
        ('kind = "air"\nmoisture = "120 %"', ("below 100 %",)),
        ('kind = "air"\ndry = false', ("dry = true",)),
        ('kind = "air"\noxygen = "21 %"', ('no meaning for kind = "air"',)),
        ('kind = "air"\nsaturated = true', ("no meaning",)),
        ('relative_humidity = "45 %"', ("no kind",)),
        ('kind = "flue-gas"\nmoisture = "9 %"', ("no analysis",)),
        ('kind = "flue-gas"\noxygen = "7 %"', ("humidity",)),
        ('kind = "flue-gas"\noxygen = "70 %"\ncarbon_dioxide = "31 %"\ndry = true', ("= 101 %", "at most 100 %")),
        ('kind = "flue-gas"\noxygen = "-1 %"\ndry = true', ("0 to 100 %",)),
        ('kind = "given"', ("neither",)),
        ('kind = "given"\ndensity = "1.2 kg/m3"\nmolar_mass = "29 g/mol"', ("both",)),
        ('kind = "given"\ndensity = "1.2 kg/m3"\ntemperature = "20 degC"', ("lack the pressure",)),
        ('kind = "given"\nmolar_mass = "29 g/mol"\ntemperature = "20 degC"\npressure = "1 atm"', ("molar mass",)),
        ('kind = "given"\ndensity = "-1 kg/m3"', ("above zero",)),
        ('kind = "air"\nhumidity_ratio = "-1 g/kg"', ("zero or more",)),
    ],
)
def test_a_gas_that_cannot_be_is_refused(write, body, words):
    refuse(write(gas=body), JobError, "[gas]", *words)


def test_a_gas_must_be_stated(write):
    refuse(write(gas=None), JobError, "[gas]", "no kind")


def test_an_unstated_main_component_is_an_attention_finding(write):
    job = load(write(gas='kind = "flue-gas"\noxygen = "7.2 %"\nmoisture = "9 %"'))
    assert findings(job, "gas")[0].level == "attention"
    assert "carbon_dioxide" in findings(job, "gas")[0].message


# --- conditions, pitot, reference, design, corrections -----------------------------------------------------------------


@pytest.mark.parametrize(
    ("body", "words"),
    [
        ('static = "0 Pa"', ("no barometric",)),
        ('barometric = "12 inH2O"', ("barometric", "gauge")),
        ('barometric = "130 kPa"', ("station",)),
        ('barometric = "1002 hPa"\naltitude = "100 m"', ("both",)),
        ('altitude = "100 m"', ("model",)),
        ('altitude = "20 km"\nmodel = "standard-atmosphere"', ("altitude",)),
        ('barometric = "1002 hPa"\nstatic = "1001 hPa"', ("looks absolute",)),
        ('barometric = "1002 hPa"\nstatic = "11 psia"', ("looks absolute",)),
        ('barometric = "14.7 psig"', ("absolute",)),
        ('barometric = "1002 hPa"\nmodel = "standard-atmosphere"', ("model",)),
        ('barometric = "1002 hPa"\ntemperature = "-300 degC"', ("absolute zero",)),
        ('altitude = "100 m"\nmodel = "isa"', ('"standard-atmosphere"',)),
    ],
)
def test_a_state_that_cannot_be_is_refused(write, body, words):
    refuse(write(conditions=body), JobError, "[conditions]", *words)


def test_altitude_by_the_named_model(write):
    # 101325 (1 - 2.25577e-5 h)^5.25588, the formula the contract of the job file names; 1600 m.
    job = load(write(conditions='altitude = "1600 m"\nmodel = "standard-atmosphere"\nstatic = "0 Pa"\ntemperature = "20 degC"'))
    conditions = job.runs[0].conditions
    assert conditions.barometric.value == pytest.approx(101325 * (1 - 2.25577e-5 * 1600) ** 5.25588, rel=1e-12)
    assert conditions.barometric.text == "1600 m"
    assert "standard atmosphere" in conditions.barometric_source


def test_static_pressure_not_stated_is_zero_and_said(write):
    job = load(write(conditions='barometric = "1002 hPa"\ntemperature = "25 degC"'))
    (found,) = findings(job, "static pressure")
    assert found.level == "attention"
    assert found.message == "static pressure not stated, taken as 0"
    assert job.runs[0].readings.static == pytest.approx([0.0] * 12)


def test_no_temperature_anywhere_is_a_question(write):
    refuse(write(conditions='barometric = "1002 hPa"\nstatic = "0 Pa"'), JobError, "no temperature")


def test_the_default_coefficient_of_a_method_is_a_finding(write):
    job = load(write(job='method = "epa-2"\nunits = "us"', pitot='type = "s-type"'))
    assert job.runs[0].pitot.coefficient == 0.84  # EPA Method 2 section 10.1, baseline coefficient
    assert findings(job, "pitot")[0].setting == "[pitot] coefficient"


@pytest.mark.parametrize("pitot", [None, 'type = "s-type"'])
def test_without_a_default_the_coefficient_is_a_question(write, pitot):
    refuse(write(pitot=pitot), JobError, "no coefficient")


def test_the_type_defaults_to_pitot_static_with_a_finding(write):
    job = load(write(pitot="coefficient = 0.99"))
    assert job.runs[0].pitot.type == "pitot-static"
    assert findings(job, "pitot")[0].setting == "[pitot] type"


@pytest.mark.parametrize(
    ("body", "words"),
    [
        ('temperature = "20 degC"', ("no pressure",)),
        ('pressure = "1 atm"', ("no temperature",)),
        ('density = "1.2 kg/m3"\npressure = "1 atm"', ("density beside",)),
        ('temperature = "20 degC"\npressure = "0 Pa"', ("above zero",)),
    ],
)
def test_a_reference_is_whole_or_absent(write, body, words):
    refuse(write(reference=body), JobError, "[reference]", *words)


def test_references(write):
    reference = load(write(reference='temperature = "68 degF"\npressure = "29.92 inHg"')).reference
    assert reference.temperature.value == pytest.approx(293.15)
    assert reference.source == "[reference] 68 degF and 29.92 inHg"
    assert load(write(reference='density = "0.075 lb/ft3"')).reference.density.value == pytest.approx(1.20138, rel=1e-5)
    assert load(write()).reference is None


def test_a_design_flow_at_standard_conditions_is_refused(write):
    refuse(write(design='actual_flow = "24000 scfm"'), UnitError, "standard conditions")


@pytest.mark.parametrize("text", ["±10 %", "+-10 %", "+/-10 %", "+/- 10 %"])
def test_tolerances(write, text):
    design = load(write(design=f'actual_flow = "24000 cfm"\ntolerance = "{text}"')).design
    assert design.tolerance.value == pytest.approx(0.1)
    assert design.tolerance.text == text


@pytest.mark.parametrize("text", ["10 %", "-5/+10 %", "±10", "±0 %", "±150 %"])
def test_a_tolerance_must_be_symmetric_and_a_percentage(write, text):
    refuse(write(design=f'actual_flow = "24000 cfm"\ntolerance = "{text}"'), TraverseError, "tolerance")


@pytest.mark.parametrize(("wall", "factor"), [("brick", 0.9900), ("metal", 0.9950)])
def test_default_wall_factors(write, wall, factor):
    # EPA Method 2H section 8.1.
    job = load(write(plane=f'shape = "round"\ndiameter = "3 m"\nwall = "{wall}"', corrections='wall_factor = "default"'))
    assert job.corrections.wall_factor == factor
    assert "2H" in job.corrections.wall_factor_source


def test_wall_alone_changes_nothing(write):
    assert load(write(plane='shape = "round"\ndiameter = "3 m"\nwall = "brick"')).corrections.wall_factor is None


@pytest.mark.parametrize(
    ("plane", "body", "words"),
    [
        ('shape = "round"\ndiameter = "3 m"', 'wall_factor = "default"', ("[plane] wall",)),
        ('shape = "rectangle"\nwidth = "3 m"\nheight = "3 m"\nwall = "metal"', 'wall_factor = "default"', ("round",)),
        ('shape = "round"\ndiameter = "3 m"', "wall_factor = 1.2", ("0.9 to 1",)),
        ('shape = "round"\ndiameter = "3 m"', "blockage = true", ("stem",)),
        ('shape = "round"\ndiameter = "3 m"', 'turbulence = "100 %"', ("turbulence",)),
    ],
)
def test_a_correction_needs_what_it_acts_on(write, plane, body, words):
    layout = (
        'rule = "log-tchebycheff"\nlines = 6\npoints = 6'
        if "rectangle" in plane
        else 'rule = "equal-area"\nlines = 2\npoints = 6'
    )
    refuse(write(plane=plane, corrections=body, layout=layout), JobError, *words)


def test_corrections(write):
    job = load(
        write(
            pitot='type = "pitot-static"\ncoefficient = 1.0\nstem = "10 mm"',
            corrections='wall_factor = 0.99\nturbulence = "5 %"\nblockage = true',
        )
    )
    assert (job.corrections.wall_factor, job.corrections.turbulence.value, job.corrections.blockage) == (0.99, 0.05, True)


# --- layout ------------------------------------------------------------------------------------------------------------


def test_an_unknown_rule_names_the_nearest(write):
    refuse(write(layout='rule = "log-tchebychef"\nlines = 2\npoints = 6'), LayoutError, 'perhaps rule = "log-tchebycheff"')


@pytest.mark.parametrize("body", ['rule = "equal-area"\npoints = 6', 'rule = "equal-area"\nlines = 2', "lines = 2\npoints = 6"])
def test_a_layout_needs_rule_lines_and_points(write, body):
    refuse(write(layout=body), JobError, "[layout]")


def test_points_moved_off_the_wall_are_findings(write):
    # EPA Method 1 section 11.3.3: 1.3 cm in a duct below 0.61 m; the outermost of 6 points lies at 4.4 % of 200 mm.
    job = load(write(job='method = "epa-2"\nunits = "si"', plane='shape = "round"\ndiameter = "200 mm"'))
    assert job.layout.depth[0] == pytest.approx(0.013)
    assert job.layout.moved[0]
    assert job.layout.findings[0].level == "attention"
    assert not any(load(write(plane='shape = "round"\ndiameter = "200 mm"')).layout.moved)


CUSTOM = """rule = "custom"
points = [{line = "A", point = 1, depth = "40 mm", weight = 0.25}, {line = "A", point = 2, depth = "260 mm", weight = 0.25},
          {line = "B", point = 1, depth = "40 mm", weight = 0.25}, {line = "B", point = 2, depth = "260 mm", weight = 0.25}]"""
FOUR = "line,point,dp [Pa]\nA,1,20.5\nA,2,21.5\nB,1,22.5\nB,2,23.5\n"


@pytest.mark.parametrize(
    "body",
    [
        CUSTOM,
        'rule = "custom"\nlines = 2\ndepths = ["40 mm", "260 mm"]\nweights = [0.5, 0.5]',
        'rule = "custom"\nfile = "points.csv"',
    ],
)
def test_custom_points_in_three_ways(write, tmp_path, body):
    (tmp_path / "points.csv").write_text(
        "line;point;depth [cm];weight\nA;1;4,0;0,25\nA;2;26,0;0,25\nB;1;4,0;0,25\nB;2;26,0;0,25\n"
    )
    path = write(FOUR, layout=body)
    layout = load(path).layout
    assert layout.depth == pytest.approx([0.04, 0.26] * 2)
    assert layout.weight == pytest.approx([0.25] * 4)
    assert layout.x == pytest.approx([0.11, -0.11, 0, 0])
    assert layout.y == pytest.approx([0, 0, 0.11, -0.11])
    assert layout.labels() == ("A1", "A2", "B1", "B2")
    assert load_setup(path).layout.depth == pytest.approx(layout.depth)
    assert layout.findings == ()


def test_custom_points_from_the_readings(write):
    rows = ("P,1,100,0,0.3,20.5", "P,2,-100,0,0.3,21.5", "Q,1,0,100,0.2,22.5", "Q,2,0,-100,0.2,23.5")
    text = "\n".join(["line,point,x [mm],y [mm],weight,dp [Pa]", *rows])
    job = load(write(text, layout='rule = "custom"'))
    assert job.layout.x == pytest.approx([0.1, -0.1, 0, 0])
    assert job.layout.weight == pytest.approx([0.3, 0.3, 0.2, 0.2])
    assert job.runs[0].readings.differential_pressure == pytest.approx([20.5, 21.5, 22.5, 23.5])


@pytest.mark.parametrize(
    ("body", "words"),
    [
        ('rule = "custom"\ndepths = ["40 mm"]\nweights = [0.5, 0.5]\nlines = 2', ("1 depths and 2 weights",)),
        ('rule = "custom"\ndepths = ["40 mm"]', ("no lines",)),
        ('rule = "custom"\ndepths = ["40 mm"]\nlines = 2\nweights = "are"', ('"area", "velocity-area"',)),
        ('rule = "custom"\npoints = [{depth = "4 mm", weight = 0.5}, {depth = "9 mm"}]', ("for every point, or for none",)),
        ('rule = "custom"\nweights = "area"\npoints = [{depth = "4 mm", weight = 0.5}]', ("one of the two",)),
        ('rule = "custom"\nweights = [1.0]\npoints = [{depth = "4 mm", weight = 0.5}]', ("only with depths",)),
        ('rule = "custom"\npoints = [{depht = "4 mm", weight = 1.0}]', ("perhaps depth",)),
        ('rule = "custom"\npoints = [{weight = 1.0}]', ("without a place",)),
        ('rule = "custom"\npoints = [4]', ("a table",)),
        ('rule = "equal-area"\nlines = 2\npoints = 6\nweights = [1.0]', ("only with depths",)),
        ('rule = "equal-area"\nlines = 2\npoints = 6\nwall_exponent = 7', ("velocity-area",)),
        ('rule = "equal-area"\nlines = 2\npoints = 6\nweights = "velocity-area"\nwall_exponent = 3', ("4 (rough) to 14",)),
        ('rule = "equal-area"\nlines = 2\npoints = 6\nwall_distance = "-1 mm"', ("zero or more",)),
        ('rule = "custom"', ("without a place",)),
        ('rule = "custom"\npoints = [{depth = 4, weight = 1.0}]', ("no unit",)),
    ],
)
def test_custom_points_that_say_too_little_are_refused(write, body, words):
    refuse(write(FOUR, layout=body), (JobError, LayoutError, UnitError), *words)


# --- runs --------------------------------------------------------------------------------------------------------------


def two_runs(extra=""):
    rows = "".join(f"{run},{line},{point},{10 * point}.5{extra}\n" for run in (1, 2) for line in "AB" for point in range(1, 7))
    return "run,line,point,dp [Pa]" + (",static [Pa]" if extra else "") + "\n" + rows


def test_a_run_overrides_conditions_gas_and_pitot(write):
    job = load(
        write(
            two_runs(),
            more='[[run]]\nname = "2"\nstatic = "-80 Pa"\ndew_point = "10 degC"\ncoefficient = 0.99\naltitude = "0 m"\n'
            'model = "standard-atmosphere"\n',
        )
    )
    first, second = job.runs
    assert first.conditions.static.value == -150
    assert second.conditions.static.value == -80
    assert second.readings.static == pytest.approx([-80] * 12)
    assert first.gas.humidity == "relative_humidity"
    assert second.gas.humidity == "dew_point"
    assert (first.pitot.coefficient, second.pitot.coefficient) == (1.0, 0.99)
    assert (first.conditions.barometric.value, second.conditions.barometric.value) == (100200.0, 101325.0)


def test_a_column_beats_the_run_and_says_so(write):
    job = load(write(two_runs(",-20"), more='[[run]]\nname = "2"\nstatic = "-80 Pa"\n'))
    assert job.runs[1].readings.static == pytest.approx([-20] * 12)
    assert any("[[run]]" in finding.message for finding in findings(job, "static"))


def test_another_tube_does_not_keep_the_coefficient(write):
    refuse(write(two_runs(), more='[[run]]\nname = "2"\ntype = "s-type"\n'), JobError, "no coefficient")


@pytest.mark.parametrize(
    ("more", "words"),
    [
        ('[[run]]\nname = "3"\nstatic = "0 Pa"\n', ("no run '3'", "'1', '2'")),
        ('[[run]]\nstatic = "0 Pa"\n', ("no name",)),
        ("[[run]]\nname = 2\n", ("text",)),
        ('[[run]]\nname = "2"\n[[run]]\nname = "2"\n', ("twice",)),
        ('[[run]]\nname = "2"\nstattic = "0 Pa"\n', ("perhaps static",)),
        ('[run]\nname = "2"\n', ("[[run]]",)),
    ],
)
def test_runs_that_do_not_fit(write, more, words):
    refuse(write(two_runs(), more=more), JobError, *words)


def test_the_only_run_is_one(write):
    refuse(write(more='[[run]]\nname = "2"\nstatic = "0 Pa"\n'), JobError, "'1'")


# --- uncertainty -------------------------------------------------------------------------------------------------------


def components(write, line, **parts):
    job = load(write(uncertainty=line, **parts))
    return [(c.standard, c.relative, c.shared, c.distribution, c.degrees_of_freedom) for c in job.uncertainties.components]


INF = float("inf")
ROOT3 = 3**0.5


@pytest.mark.parametrize(
    ("line", "expected"),
    [
        ('coefficient = "0.5 %"', [(0.005, True, True, "standard", INF)]),
        ('coefficient = "±1 %"', [(0.01 / ROOT3, True, True, "limits", INF)]),
        ('coefficient = "+-1 %"', [(0.01 / ROOT3, True, True, "limits", INF)]),
        ('coefficient = "+/-1 %"', [(0.01 / ROOT3, True, True, "limits", INF)]),
        ('coefficient = "1 % (k=2)"', [(0.005, True, True, "expanded", INF)]),
        ('coefficient = "1 % (k=2, df=9)"', [(0.005, True, True, "expanded", 9)]),
        ('coefficient = "1 % (df=9)"', [(0.01, True, True, "standard", 9)]),
        ('coefficient = "0.01"', [(0.01, False, True, "standard", INF)]),
        ('barometric = "±1 % + ±0.5 Pa"', [(0.01 / ROOT3, True, True, "limits", INF), (0.5 / ROOT3, False, True, "limits", INF)]),
        (
            'barometric = "+-1 % + +-0.5 Pa"',
            [(0.01 / ROOT3, True, True, "limits", INF), (0.5 / ROOT3, False, True, "limits", INF)],
        ),
        ('differential_pressure = {resolution = "0.1 Pa"}', [(0.1 / 2 / ROOT3, False, False, "limits", INF)]),
        (
            'differential_pressure = {calibration = "1 %", zero = "±1 Pa", repeatability = "2 %"}',
            [(0.01, True, True, "standard", INF), (1 / ROOT3, False, True, "limits", INF), (0.02, True, False, "standard", INF)],
        ),
        ('differential_pressure = "1e+1 Pa"', [(10, False, True, "standard", INF)]),
        # A step of temperature has no offset; a percentage of temperature is of the absolute temperature.
        ('temperature = "±2 degC"', [(2 / ROOT3, False, True, "limits", INF)]),
        ('temperature = "1.8 degF"', [(1.0, False, True, "standard", INF)]),
        ('temperature = "1 %"', [(0.01, True, True, "standard", INF)]),
        ('relative_humidity = "2 %"', [(0.02, False, True, "standard", INF)]),
        ('dimensions = "±3 mm"', [(0.003 / ROOT3, False, True, "limits", INF)]),
        ('position = "±3 mm"', [(0.003 / ROOT3, False, False, "limits", INF)]),
        ('yaw = "180 deg"', [(3.141592653589793, False, True, "standard", INF)]),
        ('layout = "1.5 %"', [(0.015, True, True, "standard", INF)]),
        ('layout = "none"', []),
        # One value from [conditions] serves all points: even its resolution is one deviation for all of them.
        ('temperature = {resolution = "1 K"}', [(0.5 / ROOT3, False, True, "limits", INF)]),
    ],
)
def test_the_grammar_of_uncertainties(write, line, expected):
    found = components(write, line)
    assert len(found) == len(expected)
    for have, want in zip(found, expected, strict=True):
        assert have[0] == pytest.approx(want[0], rel=1e-12)
        assert have[1:] == want[1:]


def test_the_resolution_of_a_column_is_per_point(write):
    text = "line,point,dp [Pa],temp [degC]\n" + "".join(f"{line},{p},{p}.5,25\n" for line in "AB" for p in range(1, 7))
    job = load(write(text, uncertainty='temperature = {resolution = "1 K", calibration = "1 K"}'))
    assert [component.shared for component in job.uncertainties.components] == [False, True]


@pytest.mark.parametrize(
    ("line", "mode"),
    [('layout = "estimate"', "estimate"), ('layout = "none"', "none"), ('layout = "1 %"', "stated"), ("coverage = 0.9", "none")],
)
def test_the_layout_term(write, line, mode):
    uncertainties = load(write(uncertainty=line)).uncertainties
    assert uncertainties.layout == mode
    assert uncertainties.coverage == (0.9 if "coverage" in line else 0.95)


@pytest.mark.parametrize(
    ("line", "words"),
    [
        ("coefficient = 0.01", ("text such as",)),
        ('coefficient = "1 Pa"', ("percentage",)),
        ('coefficient = "-1 %"', ("zero or more",)),
        ('coefficient = "±1 % (k=2)"', ("both limits",)),
        ('coefficient = "1 % (n=2)"', ("(k=2)",)),
        ('coefficient = "1 % (k=0)"', ("(k=2)",)),
        ('coefficient = "one"', ("terms such as",)),
        ('coefficient = "1 % ± 0.5 %"', ("±",)),
        ('temperature = "2"', ("no unit",)),
        ('temperature = "2 Pa"', ("unit of pressure",)),
        ('position = "1 %"', ("not a percentage",)),
        ('yaw = "1 %"', ("not a percentage",)),
        ('differential_pressure = {resolution = "±0.1 Pa"}', ("full step",)),
        ('differential_pressure = {resolution = "1 %"}', ("full step",)),
        ('differential_pressure = {calibratoin = "1 %"}', ("perhaps calibration",)),
        ("coverage = 95", ("between 0.5 and 1",)),
        ("coverage = 0.5", ("between 0.5 and 1",)),
        ('coverage = "95 %"', ("bare number",)),
        ("covrage = 0.9", ("perhaps coverage",)),
        ('moisture = "0.5 %"', ("relative humidity, not moisture",)),
        ('oxygen = "0.5 %"', ("no oxygen",)),
        ('density = "1 %"', ("no density",)),
        ('layout = "1 Pa"', ("percentage",)),
        ('layout = "0.01"', ("percentage",)),
    ],
)
def test_uncertainties_that_say_nothing_clear_are_refused(write, line, words):
    refuse(write(uncertainty=line), TraverseError, "[uncertainty]", *words)


def test_terms_of_one_input_have_rows_of_their_own(write):
    job = load(write(uncertainty='static = "1 Pa + 2 Pa"\ndifferential_pressure = {calibration = "1 % + 1 Pa"}'))
    keys = [(component.input, component.kind) for component in job.uncertainties.components]
    assert len(set(keys)) == 4
    assert ("differential_pressure", "calibration") in keys


def test_every_input_has_a_dimension_that_units_know():
    assert {spec.dimension for spec in INPUTS.values()} <= {unit.dimension for unit in UNITS.values()}


# --- setup and folders -------------------------------------------------------------------------------------------------


def test_a_plan_needs_no_readings_gas_conditions_or_pitot(write):
    setup = load_setup(write(None, gas=None, conditions=None, pitot=None, readings=None))
    assert setup.layout.size == 12
    assert (setup.gas, setup.conditions, setup.pitot, setup.design) == (None, None, None, None)


def test_a_plan_takes_what_is_there(write):
    setup = load_setup(write(None, design='actual_flow = "1 m3/s"', readings='file = "later.csv"'))
    assert setup.pitot.coefficient == 1.0
    assert setup.gas.humidity == "relative_humidity"
    assert setup.design.actual_flow.value == 1.0
    assert load_setup(write(None, pitot='type = "s-type"')).pitot is None


def test_jobs_of_a_folder(write, tmp_path):
    path = write()
    (tmp_path / "b.toml").write_text(path.read_text())
    (tmp_path / "other.toml").write_text("[tool]\nx = 1\n")
    (tmp_path / "broken.toml").write_text("[job]\ntitle = \n")
    assert [found.name for found in find_jobs(tmp_path)] == ["b.toml", "broken.toml", "job.toml"]
    assert find_jobs(path) == [path]


def test_no_job_to_be_found(tmp_path):
    for place in (tmp_path, tmp_path / "none.toml"):
        with pytest.raises(JobError):
            find_jobs(place)
    with pytest.raises(JobError, match="folder"):
        load(tmp_path)


def test_missing_readings(write):
    refuse(write(None), ReadingError, "readings.csv", "no such file")
    refuse(write(readings=None), JobError, "[readings]", "no file")


def test_impossible_pressures_together(write):
    text = "line,point,dp [Pa],static [kPa]\n" + "".join(f"{line},{p},{p}.5,-150\n" for line in "AB" for p in range(1, 7))
    refuse(write(text), DomainError, "absolute pressure")


def test_a_barometer_of_a_run_replaces_the_altitude(write):
    state = 'altitude = "1600 m"\nmodel = "standard-atmosphere"\nstatic = "0 Pa"\ntemperature = "20 degC"'
    job = load(write(two_runs(), conditions=state, more='[[run]]\nname = "2"\nbarometric = "840 hPa"\n'))
    assert [run.conditions.barometric_source.split()[0] for run in job.runs] == ["standard", "[conditions]"]
    assert job.runs[1].conditions.barometric.value == 84000.0


def test_the_wall_rule_moves_equal_area_points_only(write):
    # The wall distances of EPA Method 1 belong to its own equal-area points, not to another standard's.
    layout = 'rule = "log-linear"\nlines = 2\npoints = 6'
    job = load(write(job='method = "epa-2"\nunits = "si"', plane='shape = "round"\ndiameter = "200 mm"', layout=layout))
    assert not any(job.layout.moved)
