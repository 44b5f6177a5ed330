"""From the sums over the points to every reported quantity, as formulas."""

from __future__ import annotations

import math

import numpy as np

from traverse.physics import gas
from traverse.quantities import BY_NAME
from traverse.report.sheets import _section_rows
from traverse.report.sheets._ledger import Ledger
from traverse.report.sheets._run_view import RunView
from traverse.report.sheets._view import View
from traverse.units import UNITS


def total_rows(ledger: Ledger, view: View, run: RunView) -> None:
    """Put area, mean velocity, flows, density and Reynolds number."""
    ledger.title("Flow")
    last, prefix = view.layout.size - 1, ledger.prefix

    def column(name: str) -> str:
        return f"«{prefix}.{name}.0:{prefix}.{name}.{last}»"

    value = run.result.value
    _section_rows.area(ledger, view.result.job.plane.section)
    ledger.live("mr", "Mean root of differential pressure", f"SUMPRODUCT({column('w')},{column('root')})",
                value("mean_root_differential_pressure"), "Pa^0.5", "area-weighted mean of the roots")
    if run.setting.constants is not None:
        _root_mean(ledger, run)
    factor = "*{wall_factor}" if view.result.job.corrections.wall_factor is not None else ""
    if view.layout.wall_exponent is not None:
        exponent = run.result.treated.wall_exponent
        ledger.live("profile_factor", "Integration factor", f"SUMPRODUCT({column('w0')},{column('n')})", run.result.treated.profile_factor,
                    "1", f"what cubic arcs and a power law to the wall (exponent {exponent:.2f}) carry of a uniform velocity")
        factor += "*{profile_factor}"
    ledger.live("V", "Mean velocity", f"SUM({column('wv')}){factor}", value("mean_velocity"), "m/s", "sum of weight x velocity",
                style="result")
    ledger.live("Q", "Actual flow (wet)", "{A}*{V}", value("actual_flow"), "m3/s", "area x mean velocity", style="result")
    if run.setting.constants is not None:
        ledger.live("m", "Mass flow", "{rho}*{Q}", value("mass_flow"), "kg/s", "density x actual flow", style="result")
    else:
        ledger.live("m", "Mass flow", f"{{A}}*SUM({column('wvr')}){factor}", value("mass_flow"), "kg/s",
                    "summed over the points", style="result")
    if value("actual_flow") != 0.0:
        ledger.live("rhom", "Density", "{m}/{Q}", value("density"), "kg/m3", "mass flow over actual flow")
    else:
        ledger.number("rhom", "Density", value("density"), "kg/m3", "no flow: area-weighted mean")
    _standard(ledger, run, column("wvs") if run.setting.reference else "", factor)
    _reynolds(ledger, view, run)


def _root_mean(ledger: Ledger, run: RunView) -> None:
    """Put the method's own arithmetic: its units, its offsets, its constant."""
    own = run.setting.constants
    assert own is not None, "root-mean arithmetic has constants"
    mercury, head, speed = UNITS[own.pressure], UNITS[own.head], UNITS[own.velocity]
    ledger.number("f.mercury", f"  {own.pressure} in Pa", mercury.factor, "Pa", mercury.source)
    ledger.number("f.head", f"  {own.head} in Pa", head.factor, "Pa", head.source)
    ledger.number("f.speed", f"  {own.velocity} in m/s", speed.factor, "m/s", speed.source)
    scale = "{Tm}*1.8-459.67" if own.temperature == "degF" else "{Tm}-273.15"
    shown = UNITS[own.temperature].from_si(run.mean["temperature"])
    ledger.live("Ts", "Absolute temperature by the method", f"{scale}+{{offset}}", shown + own.temperature_offset,
                "degR" if own.temperature == "degF" else "K", f"{own.temperature} + offset as printed", fmt="0.00")
    absolute = run.input("barometric") / mercury.factor + run.mean["static"] / head.factor / own.water_over_mercury
    ledger.live("Ps", "Absolute pressure by the method", "{barometric}/{f.mercury}+{psm}/{f.head}/{ratio}", absolute, own.pressure,
                "barometric + static/13.6")
    own_root = run.result.value("mean_root_differential_pressure") / math.sqrt(head.factor)
    ledger.live("mro", "Mean root in the method's unit", "{mr}/SQRT({f.head})", own_root, f"{own.head}^0.5")
    # A calibrated probe has a coefficient of its own at every point: it stands in the rows of the points.
    single, times = (1.0, "") if run.setting.probe else (run.input("coefficient"), "*{coefficient}")
    per_root = (
        own.velocity_constant * single
        * math.sqrt((shown + own.temperature_offset) / (absolute * run.matter["molar_mass"])) / math.sqrt(head.factor) * speed.factor
    )
    ledger.live("speed_per_root", "Velocity per root", f"{{Kp}}{times}*SQRT({{Ts}}/({{Ps}}*{{M}}))/SQRT({{f.head}})*{{f.speed}}", per_root,
                "m/s per Pa^0.5", "Method 2, equation 2-7")


def _standard(ledger: Ledger, run: RunView, column: str, factor: str) -> None:
    """Put the standard flows, wet and dry."""
    value = run.result.value("standard_flow")
    if not math.isfinite(value):
        return
    reference = run.setting.reference
    assert reference is not None, "there is a standard flow"
    own = run.setting.constants
    if own is None:
        formula, note = f"{{A}}*SUM({column}){factor}", "summed over the points"
    elif reference[0] == "density":
        formula, note = "{m}/{reference_density}", "mass flow over standard density"
    else:
        scale = "{reference_temperature}*1.8-459.67" if own.temperature == "degF" else "{reference_temperature}-273.15"
        formula = f"{{Q}}*(({scale}+{{offset}})/{{Ts}})*({{Ps}}/({{reference_pressure}}/{{f.mercury}}))"
        note = "Method 2, equation 2-8 without the dry fraction"
    ledger.live("Qs", "Standard flow (wet)", formula, value, "m3/s", note, style="result")
    dry = run.result.value("dry_standard_flow")
    if math.isfinite(dry):
        formula = "{Qs}*(1-{x})" + ("*{Md}/{M}" if reference[0] == "density" else "")
        ledger.live("Qsd", "Standard flow (dry)", formula, dry, "m3/s", "without the water vapour", style="result")


def _reynolds(ledger: Ledger, view: View, run: RunView) -> None:
    """Put hydraulic diameter, viscosity and Reynolds number."""
    temperature = run.mean["temperature"]
    _section_rows.hydraulic_diameter(ledger, view.result.job.plane.section)
    if run.setting.gas_kind not in {"flue-gas", "mixture"}:
        formula = f"{gas.AIR_BETA!r}*{{Tm}}^1.5/({{Tm}}+{gas.AIR_SUTHERLAND!r})"
        ledger.live("mu", "Viscosity of air", formula, float(gas.air_viscosity(temperature)), "Pa s",
                    "Sutherland's law, US Standard Atmosphere 1976", fmt="0.000E+00")
    else:
        _viscosity(ledger, run, {name: float(fraction) for name, fraction in run.composition().items()})
    ledger.live("Re", BY_NAME["reynolds_number"].label, "ABS({rhom}*{V})*{D}/{mu}", run.result.value("reynolds_number"), "1", fmt="#,##0")


def _viscosity(ledger: Ledger, run: RunView, wet: dict[str, float]) -> None:
    """Put the viscosity of a flue gas by Herning and Zipperer."""
    temperature, top, bottom = run.mean["temperature"], [], []
    for name, fraction in wet.items():
        if fraction == 0.0:
            continue
        mu0, s = gas.VISCOSITY[name]
        root, t0 = math.sqrt(gas.MOLAR_MASS[name]), gas.VISCOSITY_T0
        formula = f"{mu0!r}*({{Tm}}/{t0!r})^1.5*({t0!r}+{s!r})/({{Tm}}+{s!r})"
        ledger.live(f"mu.{name}", f"  viscosity of {name}", formula,
                    mu0 * (temperature / t0) ** 1.5 * (t0 + s) / (temperature + s), "Pa s", "Sutherland's law", fmt="0.000E+00")
        ledger.number(f"y.{name}", f"  mole fraction of {name} times the root of its molar mass", fraction * root, "1")
        top.append(f"{{y.{name}}}*{{mu.{name}}}")
        bottom.append(f"{{y.{name}}}")
    wet_arrays = {name: np.array(fraction) for name, fraction in wet.items()}
    ledger.live("mu", "Viscosity", f"({'+'.join(top)})/({'+'.join(bottom)})", float(gas.viscosity(wet_arrays, temperature)), "Pa s",
                "Herning and Zipperer", fmt="0.000E+00")
