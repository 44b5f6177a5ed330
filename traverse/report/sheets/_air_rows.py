"""Humid air as a real gas in the working: saturation in air and the compressibility factor at every point, as formulas."""

from __future__ import annotations

import numpy as np

from traverse.model import Array
from traverse.physics import gas, humid_air, water
from traverse.report.sheets._ledger import Ledger
from traverse.report.sheets._run_view import RunView
from traverse.report.sheets._view import View, heads
from traverse.report.spec import Live, Text

CIPM = "CIPM-2007, Metrologia 45 (2008) 149"
VIRIAL = "second virial coefficients, from memory and checked: see the method"


def gas_constant(run: RunView) -> tuple[float, str]:
    """Return the gas constant of the run's equation and its source."""
    if run.setting.equation == "cipm-2007":
        return humid_air.GAS_CONSTANT["cipm-2007"], f"{CIPM} (CODATA 2006)"
    return gas.R, "CODATA, exact"


def constants(ledger: Ledger, run: RunView) -> None:
    """Put the constants of the equation; nothing for an ideal gas."""
    if run.setting.equation == "ideal":
        return
    if run.setting.equation == "cipm-2007":
        for name, values in (("a", humid_air.A), ("b", humid_air.B), ("c", humid_air.C), ("d", (humid_air.D,)), ("e", (humid_air.E,))):
            for k, value in enumerate(values):
                ledger.number(f"Z{name}{k}", f"  compressibility, {name}{k}", value, "Pa, K, degC", CIPM)
    _virials(ledger)


def _virials(ledger: Ledger) -> None:
    """Put the correlations of the second virial coefficients: also CIPM-2007 leaves saturation over ice to them."""
    for k, value in enumerate(humid_air.AIR_AIR):
        ledger.number(f"Baa{k}", f"  air-air, times 1/T^{k}", value, "m3/mol", VIRIAL)
    for name, label, terms in (("Baw", "air-water", humid_air.AIR_WATER), ("Bww", "water-water", humid_air.WATER_WATER)):
        for k, (value, power) in enumerate(terms):
            ledger.number(f"{name}{k}", f"  {label}, times (T/100)^{power}", value, "m3/mol", VIRIAL)


def _second(temperature: str) -> dict[str, str]:
    """Return the formulas of the second virial coefficients at a temperature."""
    found = {"aa": "+".join(f"{{Baa{k}}}/{temperature}^{k}" if k else "{Baa0}" for k in range(len(humid_air.AIR_AIR)))}
    for name, terms in (("aw", humid_air.AIR_WATER), ("ww", humid_air.WATER_WATER)):
        # In brackets: a spreadsheet binds the minus of an exponent as it should, a reader may not.
        found[name] = "+".join(f"{{B{name}{k}}}*({temperature}/100)^({power!r})" for k, (_, power) in enumerate(terms))
    return found


def own_saturation(ledger: Ledger, run: RunView, label: str, at: str, temperature: float) -> bool:
    """Put the saturation pressure of CIPM-2007 where that equation has one of its own, and say whether it has."""
    if run.setting.equation != "cipm-2007" or temperature < water.TRIPLE_POINT:
        return False
    for k, value in enumerate(humid_air.SATURATION):
        ledger.number(f"pws.s{k}", f"  coefficient {'ABCD'[k]} over water", value, "1", CIPM)
    a, b, c, d = humid_air.SATURATION
    t = f"{{{at}}}"
    formula = f"EXP({{pws.s0}}*{t}^2+{{pws.s1}}*{t}+{{pws.s2}}+{{pws.s3}}/{t})"
    ledger.live("pws", label, formula, float(np.exp(a * temperature**2 + b * temperature + c + d / temperature)), "Pa", CIPM, fmt="0.00")
    return True


def enhanced(ledger: Ledger, run: RunView, at: str, temperature: float) -> str:
    """Put the enhancement factor at a temperature and return the formula of the partial pressure at saturation in air."""
    pressure = run.mean["pressure"]
    t, p = np.array(temperature), np.array(pressure)
    cipm = run.setting.equation == "cipm-2007" and temperature >= water.TRIPLE_POINT
    factor = float(humid_air.enhancement_factor("cipm-2007" if cipm else "virial", t, p))
    if cipm:
        for name, value in zip(("alpha", "beta", "gamma"), humid_air.ENHANCEMENT, strict=True):
            ledger.number(f"f.{name}", f"  enhancement, {name}", value, "1", CIPM)
        formula = f"{{f.alpha}}+{{f.beta}}*{{pm}}+{{f.gamma}}*({{{at}}}-273.15)^2"
        ledger.live("f", "Enhancement factor", formula, factor, "1", CIPM, fmt="0.000000")
    elif float(water.saturation_pressure(t)) >= pressure:
        ledger.number("f", "Enhancement factor", 1.0, "1", "at or above the boiling point: all is vapour")
    else:
        _steps(ledger, at, temperature, factor, pressure)
    return "{f}*{pws}"


def _steps(ledger: Ledger, at: str, temperature: float, factor: float, pressure: float) -> None:
    """Put the enhancement factor by the virial coefficients, step by step."""
    t = np.array(temperature)
    air, cross, steam = (float(value) for value in humid_air.second_virials(t))
    for name, value in zip(("aa", "aw", "ww"), (air, cross, steam), strict=True):
        ledger.live(f"f.{name}", f"  second virial coefficient {name}", _second(f"{{{at}}}")[name], value, "m3/mol", fmt="0.0000E+00")
    volume = humid_air.ICE if temperature < water.TRIPLE_POINT else humid_air.LIQUID
    ledger.number("f.v", "  molar volume of the condensed water", volume, "m3/mol", VIRIAL)
    pure, thermal = float(water.saturation_pressure(t)), gas.R * temperature
    ledger.number("f.R", "  gas constant", gas.R, "J/(mol K)", "CODATA, exact")
    last = 1.0
    for step in range(1, humid_air.STEPS + 1):
        before = "1" if step == 1 else f"{{f{step - 1}}}"
        dry = f"(1-MIN({before}*{{pws}}/{{pm}},1))"
        formula = (f"EXP((({{f.v}}-{{f.ww}})*({{pm}}-{{pws}})-{{pm}}*(2*{{f.aw}}-{{f.ww}}-{{f.aa}})*{dry}^2)/({{f.R}}*{{{at}}}))")
        share = 1.0 - min(last * pure / pressure, 1.0)
        excess = 2.0 * cross - steam - air
        last = float(np.exp(((volume - steam) * (pressure - pure) - pressure * excess * share**2) / thermal))
        name, label = ("f", "Enhancement factor") if step == humid_air.STEPS else (f"f{step}", f"  enhancement factor, step {step}")
        ledger.live(name, label, formula, factor if step == humid_air.STEPS else last, "1",
                    "equal fugacities of vapour and water" if step == humid_air.STEPS else "", fmt="0.000000")


def compressibility_table(ledger: Ledger, view: View, run: RunView) -> None:
    """Put the compressibility factor of every point, below the points; nothing for an ideal gas."""
    factor = run.compressibility
    if factor is None:
        return
    columns: list[tuple[str, str, str, Array]] = []
    if run.setting.equation == "virial":
        parts = humid_air.second_virials(run.inputs["temperature"])
        formulas = _second("[T]")
        columns = [(f"B{name}", f"B {name} [m3/mol]", formulas[name], value) for name, value in zip(("aa", "aw", "ww"), parts, strict=True)]
        columns.append(("Bm", "B of the mixture", "(1-{x})^2*[Baa]+2*{x}*(1-{x})*[Baw]+{x}^2*[Bww]",
                        humid_air.mixed(parts, np.array(run.matter["moisture"]))))
        columns.append(("Z", "Z", "0.5+SQRT(0.25+[Bm]*[p]/({R}*[T]))", factor))
    else:
        t, ratio = "([T]-273.15)", "([p]/[T])"
        linear = f"{{Za0}}+{{Za1}}*{t}+{{Za2}}*{t}^2+({{Zb0}}+{{Zb1}}*{t})*{{x}}+({{Zc0}}+{{Zc1}}*{t})*{{x}}^2"
        columns = [("Z", "Z", f"1-{ratio}*({linear})+{ratio}^2*({{Zd0}}+{{Ze0}}*{{x}}^2)", factor)]
    ledger.title("Compressibility factor of humid air")
    heads(ledger.sheet, ledger.row, ("point", *(head for _, head, _, _ in columns)))
    readings, prefix = run.result.run.readings, ledger.prefix
    for i in range(view.layout.size):
        row = ledger.row + 1 + i
        ledger.sheet.put(row, 1, Text(f"{readings.line[i]}{readings.point[i]}"), style="label")
        for place, (name, _, formula, values) in enumerate(columns, 2):
            filled = ledger.filled(formula).replace("[", f"«{prefix}.").replace("]", f".{i}»")
            value = float(np.broadcast_to(values, (view.layout.size,))[i])
            ledger.sheet.put(row, place, Live("=" + filled, value), style="value", key=f"{prefix}.{name}.{i}",
                             format="0.00000000" if name == "Z" else "0.0000E+00")
    ledger.row += view.layout.size + 1
