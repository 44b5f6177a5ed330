"""The example jobs against the same readings worked out in bare numpy, formula by formula, without the package."""

import csv
import math
from pathlib import Path

import numpy as np
import pytest

import traverse

FOLDER = Path(__file__).parents[2] / "example_data"
R = 8.314462618
IN_H2O, IN_HG, CFM = 249.08891, 3386.388640341, 4.719474432e-4


def rows(name):
    return list(csv.DictReader((FOLDER / name).open()))


def saturation(temperature):
    """ASHRAE Fundamentals 2017 ch. 1 eq. 6, over water."""
    t = temperature
    return math.exp(-5.8002206e3 / t + 1.3914993 - 4.8640239e-2 * t + 4.1764768e-5 * t**2 - 1.4452093e-8 * t**3 + 6.5459673 * math.log(t))


def quantities(name):
    result = traverse.reduce(traverse.load(FOLDER / name)).to_dict()
    return [{key: item and item["value"] for key, item in run["quantities"].items()} for run in result["runs"]], result


def test_supply_duct():
    """iso-3966: point by point, isentropic, relative humidity at the mean temperature."""
    table = rows("supply_duct.csv")
    dp = np.array([float(r["differential_pressure [Pa]"]) for r in table])
    t = np.array([float(r["temperature [degC]"]) for r in table]) + 273.15
    p = 100640.0 + 182.0
    x = 0.46 * saturation(t.mean()) / p
    molar = 28.96546 * (1 - x) + 18.01528 * x
    rho = p * molar * 1e-3 / (R * t)
    q = 1.002**2 * dp
    a = 0.4 / 1.4
    v = np.sqrt(2 * q / rho) * np.sqrt(((1 + q / p) ** a - 1) / (a * q / p))
    got = quantities("supply_duct.toml")[0][0]
    area = 0.8 * 0.5
    expected = {
        "area": area, "moisture": x, "molar_mass": molar, "mean_velocity": v.mean(), "actual_flow": area * v.mean(),
        "mass_flow": area * (rho * v).mean(), "density": (rho * v).mean() / v.mean(), "temperature": t.mean(),
        "standard_flow": area * (v * p / 101325 * 293.15 / t).mean(),
        "dry_standard_flow": (1 - x) * area * (v * p / 101325 * 293.15 / t).mean(),
        "mean_root_differential_pressure": np.sqrt(dp).mean(), "static_pressure": 182.0, "absolute_pressure": p,
    }
    for name, value in expected.items():
        assert got[name] == pytest.approx(value, rel=2e-11), name
    assert got["wall_factor"] is None


def test_boiler_stack():
    """epa-2 in US units, constants as printed; three runs with their own static pressure, moisture and gas."""
    table = rows("boiler_stack.csv")
    own, result = quantities("boiler_stack.toml")
    area_ft2 = math.pi / 4 * 5.5**2
    dry_flows = []
    for k, (static, moisture, oxygen, carbon_dioxide) in enumerate([(-0.62, 0.139, 6.4, 8.3), (-0.60, 0.142, 6.4, 8.3), (-0.63, 0.136, 6.6, 8.2)]):
        mine = [r for r in table if r["run"] == str(k + 1)]
        root = np.mean([math.sqrt(float(r["delta p [in. H2O]"])) for r in mine])
        ts = np.mean([float(r["stack temp [degF]"]) for r in mine]) + 460
        md = 0.440 * carbon_dioxide + 0.320 * oxygen + 0.280 * (100 - carbon_dioxide - oxygen)
        ms = md * (1 - moisture) + 18.0 * moisture
        ps = 29.74 + static / 13.6
        vs = 85.49 * 0.84 * root * math.sqrt(ts / (ps * ms))
        qsd = 60 * (1 - moisture) * vs * area_ft2 * (528 / ts) * (ps / 29.92)
        got = own[k]
        dry_flows.append(qsd)
        assert got["molar_mass_dry"] == pytest.approx(md, rel=1e-12)
        assert got["molar_mass"] == pytest.approx(ms, rel=1e-12)
        assert got["mean_velocity"] / 0.3048 == pytest.approx(vs, rel=1e-11)
        assert got["actual_flow"] / CFM == pytest.approx(60 * vs * area_ft2, rel=1e-11)
        assert got["dry_standard_flow"] / CFM == pytest.approx(qsd, rel=1e-11)
        assert got["standard_flow"] / CFM == pytest.approx(qsd / (1 - moisture), rel=1e-11)
        density = (29.74 * IN_HG + static * IN_H2O) * ms * 1e-3 / (R * ((ts - 460 + 459.67) / 1.8))
        assert got["density"] == pytest.approx(density, rel=1e-10)
        assert got["mass_flow"] == pytest.approx(density * got["actual_flow"], rel=1e-12)
    mean = result["summary"]["quantities"]["dry_standard_flow"]
    assert mean["value"] / CFM == pytest.approx(np.mean(dry_flows), rel=1e-11)
    assert mean["standard_deviation"] / CFM == pytest.approx(np.std(dry_flows, ddof=1), rel=1e-9)
    assert mean["range"] / CFM == pytest.approx(max(dry_flows) - min(dry_flows), rel=1e-9)


def test_extract_duct():
    """ashrae-111: point by point, incompressible, wet bulb at altitude; negative reading zero and counted, one below range."""
    table = rows("extract_duct.csv")
    texts = [r["VP (in. w.c.)"] for r in table]
    dp = np.array([0.0025 if text == "<0.005" else float(text) for text in texts]) * IN_H2O
    t = (np.array([float(r["T (F)"]) for r in table]) + 459.67) / 1.8
    p = 101325 * (1 - 2.25577e-5 * 5410 * 0.3048) ** 5.25588 - 0.85 * IN_H2O
    wet, dry, ratio = (61 + 459.67) / 1.8 - 273.15, t.mean() - 273.15, 18.01528 / 28.96546
    ws = ratio * saturation(wet + 273.15) / (p - saturation(wet + 273.15))
    w = ((2501 - 2.326 * wet) * ws - 1.006 * (dry - wet)) / (2501 + 1.86 * dry - 4.186 * wet)
    x = w / (w + ratio)
    molar = 28.96546 * (1 - x) + 18.01528 * x
    rho = p * molar * 1e-3 / (R * t)
    v = np.sqrt(2 * np.maximum(dp, 0) / rho)
    got, result = quantities("extract_duct.toml")
    area = math.pi / 4 * (24 * 0.0254) ** 2
    mass = area * (rho * v).mean()
    standard = 0.075 * 0.45359237 / 0.3048**3
    expected = {
        "moisture": x, "mean_velocity": v.mean(), "actual_flow": area * v.mean(), "mass_flow": mass, "standard_flow": mass / standard,
        "dry_standard_flow": mass * (1 - x) * 28.96546 / molar / standard, "absolute_pressure": p,
    }
    for name, value in expected.items():
        assert got[0][name] == pytest.approx(value, rel=2e-11), name
    assert result["design"]["percent_of_design"] == pytest.approx(100 * area * v.mean() / (4300 * CFM), rel=1e-10)
    points = {f"{point['line']}{point['point']}": point for point in result["runs"][0]["points"]}
    assert points["A6"]["status"] == "negative" and points["A6"]["velocity"] == 0.0
    assert points["A6"]["differential_pressure"] == pytest.approx(-0.002 * IN_H2O)
    assert points["B6"]["status"] == "below range" and points["B6"]["text"] == "<0.005"
    treatments = result["runs"][0]["negative_treatments"]
    assert treatments["signed"]["actual_flow"] < treatments["zero"]["actual_flow"] < treatments["omit"]["actual_flow"]
