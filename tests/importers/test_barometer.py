"""The pressure at the plane: each way of stating it, against the values of its source, and what is refused."""

import psychrolib
import pytest

from tests.support import jobs
from traverse.errors import TraverseError
from traverse.importers import load
from traverse.physics import atmosphere


def conditions(folder, method="exact", units="si", **values):
    change = {"job": {"method": method, "units": units}, "conditions": {"barometric": None, **values}}
    if method == "epa-2":
        change["gas"] = {"kind": "air", "dry": True, "density": None}
    job = load(jobs.write(folder, change))
    return job.runs[0].conditions.barometric.value, [f.message for f in job.findings if f.topic == "barometric pressure"]


def test_a_weather_report(tmp_path):
    """102484.0 Pa at sea level, 105 m, 17.19 degC: 101226.5 Pa at the station, as a psychrometric library's tests print it."""
    found, said = conditions(tmp_path, sea_level_pressure="1024.84 hPa", altitude="105 m", air_temperature="17.19 degC")
    assert found == pytest.approx(101226.5, abs=1.0) and "+1.2 % off" in said[0]


@pytest.mark.parametrize(("celsius", "expected"), [(20, 84362), (-10, 82652), (35, 85105)])
def test_the_reduction_depends_on_the_temperature(celsius, expected):
    """101325 Pa at sea level, 1600 m."""
    found = float(atmosphere.station_pressure(101325.0, 1600.0, celsius + 273.15))
    assert found == pytest.approx(expected, abs=0.6)
    psychrolib.SetUnitSystem(psychrolib.SI)
    assert found == pytest.approx(psychrolib.GetStationPressure(101325.0, 1600.0, celsius), rel=1e-5)


def test_an_altimeter_setting(tmp_path):
    """At 1013.25 hPa it is the standard atmosphere: 95461 Pa at 500 m, 79495 Pa at 2000 m."""
    assert conditions(tmp_path, altimeter_setting="1013.25 hPa", altitude="500 m")[0] == pytest.approx(95460.8, abs=1.0)
    assert conditions(tmp_path, altimeter_setting="29.92126 inHg", altitude="2000 m")[0] == pytest.approx(79495.2, abs=1.5)
    assert conditions(tmp_path, altimeter_setting="1000 hPa", altitude="0 m")[0] == pytest.approx(100000.0, rel=1e-9)


def test_the_plane_above_the_barometer(tmp_path):
    """Method 2, note to 6.5, from memory: 0.1 inHg for every 100 ft, 2.5 mmHg for every 30 m; else the weight of the air, 30 m 0.36 %."""
    us, said = conditions(tmp_path, "epa-2", "us", barometric="29.92 inHg", height_above_barometer="200 ft")
    assert us == pytest.approx((29.92 - 0.2) * 3386.389, rel=1e-6) and "0.1 inHg for every 100 ft" in said[-1]
    si, _ = conditions(tmp_path, "epa-2", "si", barometric="760 mmHg", height_above_barometer="30 m")
    assert si == pytest.approx(757.5 * 133.322387, rel=1e-6)
    exact, said = conditions(tmp_path, barometric="1013.25 hPa", height_above_barometer="30 m")
    assert 100 * (exact / 101325 - 1) == pytest.approx(-0.36, abs=0.006) and "outside air" in said[-1]
    lower, _ = conditions(tmp_path, barometric="1013.25 hPa", height_above_barometer="-30 m", air_temperature="0 degC")
    assert lower > 101325


def test_a_run_of_its_own_way(tmp_path):
    readings = jobs.READINGS.replace("line,", "run,line,").replace("\nA", "\n1,A").replace("\nB", "\n1,B")
    second = "".join(f"2,{row}\n" for row in jobs.READINGS.splitlines()[1:])
    change = {"conditions": {"barometric": None, "altitude": "500 m", "model": "standard-atmosphere"}, "run": [{"name": "2", "barometric": "950 hPa"}]}
    job = load(jobs.write(tmp_path, change, readings + second))
    assert [run.conditions.barometric.value for run in job.runs] == pytest.approx([95460.8, 95000.0], abs=1.0)


@pytest.mark.parametrize(("values", "message"), [
    ({}, "no barometric pressure"), ({"sea_level_pressure": "1013 hPa"}, "without an altitude"), ({"altimeter_setting": "1013 hPa"}, "without an altitude"),
    ({"sea_level_pressure": "1013 hPa", "altitude": "500 m"}, "no air_temperature"),
    ({"barometric": "1013 hPa", "altitude": "1600 m"}, "give it as sea_level_pressure"),
    ({"barometric": "1013 hPa", "altimeter_setting": "1013 hPa"}, "barometric and altimeter_setting"),
    ({"sea_level_pressure": "850 hPa", "altitude": "500 m", "air_temperature": "10 degC"}, "870 to 1090"),
    ({"altimeter_setting": "1013 hPa", "altitude": "6000 m"}, "5000 m"), ({"altimeter_setting": "1013 hPa", "altitude": "1 m", "model": "standard-atmosphere"}, "model"),
    ({"barometric": "1013 hPa", "height_above_barometer": "800 m"}, "below 500 m"), ({"altitude": "500 m"}, "without a model"),
])
def test_what_gives_no_pressure(tmp_path, values, message):
    with pytest.raises(TraverseError, match=message):
        conditions(tmp_path, **values)
