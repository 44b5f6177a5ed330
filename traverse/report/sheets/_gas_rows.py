"""Moisture, molar masses and the ratio of specific heats of a run, as formulas."""

from __future__ import annotations

import numpy as np

from traverse.physics import gas, humid_air, moist_air, water
from traverse.report.sheets import _air_rows, _stack_rows
from traverse.report.sheets._ledger import Ledger
from traverse.report.sheets._run_view import RunView
from traverse.report.sheets._view import View

_SATURATION = "{s0}/T+{s1}+{s2}*T+{s3}*T^2+{s4}*T^3+{s5}*T^4+{s6}*LN(T)"


def species_rows(ledger: Ledger, view: View, run: RunView) -> None:
    """Put the constants that the gas needs, each with its source."""
    ledger.title("Constants")
    constant, source = _air_rows.gas_constant(run)
    ledger.number("R", "Gas constant", constant, "J/(mol K)", source)
    _air_rows.constants(ledger, run)
    own = run.setting.constants
    if own is not None:
        for name, label, value, unit in (
            ("Kp", "Velocity constant of the method", own.velocity_constant, f"{own.velocity} ..."),
            ("offset", f"Offset to absolute temperature from {own.temperature}", own.temperature_offset, own.temperature),
            ("ratio", "Static pressure: water over mercury", own.water_over_mercury, "1"),
            ("Mw", "Molar mass of water", own.molar_mass_water, "g/mol"),
            ("Mair", "Molar mass of dry air without analysis", own.molar_mass_air, "g/mol"),
        ):
            ledger.number(name, label, value, unit, view.method.source)
    else:
        ledger.number("Mw", "Molar mass of water", gas.MOLAR_MASS["H2O"], "g/mol")
        ledger.number("Mair", "Molar mass of dry air", gas.MOLAR_MASS["air"], "g/mol", "CIPM-2007")
    ledger.number("eps", "Molar mass of water over dry air", moist_air.RATIO, "1", "for humidity ratio and wet bulb")


def gas_rows(ledger: Ledger, view: View, run: RunView) -> None:
    """Put the mean state, the moisture, the molar masses and the ratio of specific heats."""
    last, prefix = view.layout.size - 1, ledger.prefix

    def mean(name: str) -> str:
        return f"SUMPRODUCT(«{prefix}.w.0:{prefix}.w.{last}»,«{prefix}.{name}.0:{prefix}.{name}.{last}»)"

    ledger.title("State and composition")
    ledger.live("Tm", "Mean temperature", mean("T"), run.mean["temperature"], "K", "area-weighted", fmt="0.00")
    ledger.live("psm", "Mean static pressure", mean("ps"), run.mean["static"], "Pa", "gauge, area-weighted", fmt="0.0")
    ledger.live("pm", "Mean absolute pressure", mean("p"), run.mean["pressure"], "Pa", "area-weighted", fmt="0.0")
    _stack_rows.fuel_rows(ledger, run)
    _moisture(ledger, run)
    _molar_mass(ledger, run)
    if run.setting.compressible:
        _ratio(ledger, run)
    if run.setting.constants is not None:
        ledger.live("rho", "Density", "{pm}*{M}/(1000*{R}*{Tm})", float(run.result.density[0]), "kg/m3",
                    "gas law with the method's molar mass and the physical temperature")


def _saturation(ledger: Ledger, name: str, label: str, at: str, temperature: float) -> float:
    """Put the saturation pressure at a temperature named ``at`` and return it."""
    branch = water.ICE if temperature < water.TRIPLE_POINT else water.WATER
    kind = "ice" if temperature < water.TRIPLE_POINT else "water"
    for i, value in enumerate(branch):
        ledger.number(f"{name}.s{i}", f"  coefficient {i + 1} over {kind}", value, "1",
                      "ASHRAE Fundamentals 2017 ch. 1, eq. 5 (ice) or 6 (water)")
    formula = _SATURATION.replace("{s", "{" + f"{name}.s").replace("T", "{" + at + "}")
    value = float(water.saturation_pressure(np.float64(temperature)))
    ledger.live(name, label, f"EXP({formula})", value, "Pa", fmt="0.00")
    return value


def _in_air(ledger: Ledger, run: RunView, where: str, at: str, temperature: float) -> tuple[str, float]:
    """Put the saturation pressure and what air makes of it; return formula and value of the vapour's partial pressure."""
    label = f"Saturation pressure {where}"
    if not _air_rows.own_saturation(ledger, run, label, at, temperature):
        pure = _saturation(ledger, "pws", label, at, temperature)
        if run.setting.equation == "ideal":
            return "{pws}", pure
    value = humid_air.saturation(run.setting.equation, np.array(temperature), np.array(run.mean["pressure"]))
    return _air_rows.enhanced(ledger, run, at, temperature), float(value)


def _moisture(ledger: Ledger, run: RunView) -> None:
    """Put the mole fraction of water from whichever humidity was stated."""
    form, moisture = run.setting.humidity, run.matter["moisture"]
    if form == "none":
        return
    formula = {"dry": "0", "moisture": "{water}", "humidity_ratio": "{water}/({water}+{eps})"}.get(form, "")
    if form in {"relative_humidity", "saturated"}:
        vapour, _ = _in_air(ledger, run, "at the mean temperature", "Tm", run.mean["temperature"])
        formula = f"{{water}}*{vapour}/{{pm}}" if form == "relative_humidity" else f"{vapour}/{{pm}}"
    elif form == "dew_point":
        vapour, _ = _in_air(ledger, run, "at the dew point", "water", run.input("water"))
        formula = f"{vapour}/{{pm}}"
    elif form == "moisture_train":
        formula = _stack_rows.train_rows(ledger, run)
        if run.mean["temperature"] <= 473.15:
            _saturation(ledger, "pws", "Saturation pressure at the mean temperature", "Tm", run.mean["temperature"])
            formula = f"MIN({formula},{{pws}}/{{pm}})"
    elif form == "combustion":
        formula = "{xb}"
    elif form == "wet_bulb" and run.setting.stack is not None and run.setting.stack.psychrometer:
        _saturation(ledger, "pws", "Saturation pressure at the wet bulb", "water", run.input("water"))
        formula = _stack_rows.psychrometer_rows(ledger, run)
    elif form == "wet_bulb":
        _wet_bulb(ledger, run)
        formula = "{W}/({W}+{eps})"
    ledger.live("x", "Moisture, mole fraction", formula, moisture, "1", f"from {form.replace('_', ' ')}", fmt="0.000000")


def _wet_bulb(ledger: Ledger, run: RunView) -> None:
    """Put the humidity ratio by the energy balance of the wet bulb."""
    wet = run.input("water")
    vapour, pws = _in_air(ledger, run, "at the wet bulb", "water", wet)
    ws = moist_air.RATIO * pws / (run.mean["pressure"] - pws)
    ledger.live("Ws", "Humidity ratio at saturation", f"{{eps}}*{vapour}/({{pm}}-{vapour})", ws, "kg/kg", fmt="0.000000")
    branch = moist_air.WET_BULB["ice" if wet < 273.15 else "water"]
    for name, value in branch.items():
        ledger.number(f"wb.{name}", f"  {name}", value, "kJ/kg", "ASHRAE Fundamentals 2017 ch. 1, eqs. 33 and 35")
    td, tw = "({Tm}-273.15)", "({water}-273.15)"
    top = f"(({{wb.latent}}-{{wb.slope}}*{tw})*{{Ws}}-{{wb.heat}}*({td}-{tw}))"
    bottom = f"({{wb.latent}}+{{wb.vapour}}*{td}-{{wb.liquid}}*{tw})"
    moist = run.matter["moisture"]
    ratio = moist_air.RATIO * moist / (1.0 - moist)
    ledger.live("W", "Humidity ratio", f"{top}/{bottom}", ratio, "kg/kg", fmt="0.000000")


def _molar_mass(ledger: Ledger, run: RunView) -> None:
    """Put dry and wet molar mass."""
    dry, wet = run.matter["molar_mass_dry"], run.matter["molar_mass"]
    if run.setting.gas_kind == "given":
        formula = {
            "": "{molar_mass_given}", "at plane": "{density}*{R}*{Tm}/{pm}*1000",
            "at conditions": "{density}*{R}*{density_temperature}/{density_pressure}*1000",
        }[run.setting.density_given]
        ledger.live("M", "Molar mass, wet", formula, wet, "g/mol", "as given, or implied by the given density")
        if run.setting.humidity != "none":
            ledger.live("Md", "Molar mass, dry", "({M}-{Mw}*{x})/(1-{x})", dry, "g/mol")
        return
    if run.setting.gas_kind == "air":
        ledger.live("Md", "Molar mass, dry", "{Mair}", dry, "g/mol")
    elif run.setting.gas_kind == "mixture":
        ledger.live("Md", "Molar mass, dry", _stack_rows.mixture_rows(ledger, run), dry, "g/mol")
    else:
        ledger.live("Md", "Molar mass, dry", _flue_mass(ledger, run, own=run.setting.constants is not None), dry, "g/mol")
    ledger.live("M", "Molar mass, wet", "{Md}*(1-{x})+{Mw}*{x}", wet, "g/mol")


_SPECIES = {"oxygen": "O2", "carbon_dioxide": "CO2", "carbon_monoxide": "CO", "sulfur_dioxide": "SO2"}


def _flue_mass(ledger: Ledger, run: RunView, *, own: bool) -> str:
    """Put the molar masses of the analysed gases and return the formula of the dry molar mass."""
    names = list(run.analysed)
    rest = "(1" + "".join(f"-{{{name}}}" for name in names) + ")"
    if own:
        for key, label, value in (
            ("m.carbon_dioxide", "carbon dioxide", 100 * gas.EPA["carbon_dioxide"]), ("m.oxygen", "oxygen", 100 * gas.EPA["oxygen"]),
            ("m.rest", "the rest", 100 * gas.EPA["remainder"]),
        ):
            ledger.number(key, f"  molar mass of {label}", value, "g/mol", "EPA Method 3, equation 3-1, from memory")
        counted = [name for name in names if name in {"carbon_dioxide", "oxygen"}]
        others = "(1" + "".join(f"-{{{name}}}" for name in counted) + ")"
        return "+".join([*(f"{{m.{name}}}*{{{name}}}" for name in counted), f"{{m.rest}}*{others}"])
    for name in names:
        ledger.number(f"m.{name}", f"  molar mass of {_SPECIES[name]}", gas.MOLAR_MASS[_SPECIES[name]], "g/mol")
    ledger.number("m.rest", "  molar mass of the rest", gas.REST, "g/mol", "nitrogen with argon in the proportion of air")
    return "+".join([*(f"{{m.{name}}}*{{{name}}}" for name in names), f"{{m.rest}}*{rest}"])


def _ratio(ledger: Ledger, run: RunView) -> None:
    """Put the ratio of specific heats and the exponent of the isentropic factor."""
    ratio = run.ratio
    if run.setting.ratio_of_specific_heats is not None or run.setting.gas_kind not in {"flue-gas", "mixture"}:
        source = "as stated" if run.setting.ratio_of_specific_heats is not None else "air and given gas"
        ledger.number("gamma", "Ratio of specific heats", ratio, "1", source)
    else:
        wet = run.composition()
        total, t = [], run.mean["temperature"]
        for name, fraction in wet.items():
            a = gas.HEAT_CAPACITY[name]
            ledger.live(f"f.{name}", f"  mole fraction of {name}", _fraction(name, run), float(fraction), "1")
            polynomial = f"{a[0]!r}+{{Tm}}*({a[1]!r}+{{Tm}}*({a[2]!r}+{{Tm}}*({a[3]!r}+{{Tm}}*({a[4]!r}))))"
            value = a[0] + t * (a[1] + t * (a[2] + t * (a[3] + t * a[4])))
            ledger.live(f"cp.{name}", f"  heat capacity of {name} over R", polynomial, value, "1", "polynomial of the NASA form")
            total.append(f"{{f.{name}}}*{{cp.{name}}}")
        heat = ratio / (ratio - 1.0)
        ledger.live("cp", "Heat capacity over R", "+".join(total), heat, "1")
        ledger.live("gamma", "Ratio of specific heats", "{cp}/({cp}-1)", ratio, "1", "from the composition")
    ledger.live("a", "Exponent (gamma - 1)/gamma", "({gamma}-1)/{gamma}", (ratio - 1.0) / ratio, "1")


def _fraction(name: str, run: RunView) -> str:
    """Return the formula of a species' wet mole fraction."""
    stated = {species: key for key, species in _SPECIES.items() if key in run.analysed}
    if name == "H2O":
        return "{x}"
    if run.setting.gas_kind == "mixture":
        return f"{{d.{name}}}*(1-{{x}})"
    if name in stated:
        return f"{{{stated[name]}}}*(1-{{x}})"
    if name in {"N2", "Ar"}:
        rest = "(1" + "".join(f"-{{{key}}}" for key in stated.values()) + ")"
        share = gas.ARGON_SHARE if name == "Ar" else 1.0 - gas.ARGON_SHARE
        return f"{share!r}*{rest}*(1-{{x}})"
    return "0"
