"""The table of points: from each recorded number to the velocity there."""

from __future__ import annotations

import math

import numpy as np

from traverse.physics import pitot
from traverse.report.sheets._ledger import Ledger
from traverse.report.sheets._run_view import RunView
from traverse.report.sheets._view import View, heads
from traverse.report.spec import Live, SheetSpec, Text
from traverse.treatment import FROM_FIELD
from traverse.units import UNITS

SI_UNIT = {"differential_pressure": "Pa", "velocity": "m/s", "temperature": "K", "static": "Pa", "yaw": "rad",
           "pitch": "rad", "pitch_pressure": "Pa"}
HEADS = (
    "point", "status", "weight of the layout", "counts", "weight used", "dp [Pa]", "dp used [Pa]",
    "root of dp [Pa^0.5]", "temperature [K]", "static [Pa]", "absolute [Pa]", "density [kg/m3]", "impact/static",
    "ln(1+x)", "isentropic k", "axial and other factors", "velocity [m/s]", "w v [m/s]", "w v density [kg/(m2 s)]",
    "w v standard/actual [m/s]",
)


def point_table(ledger: Ledger, view: View, run: RunView) -> None:
    """Put the table, with the conversions of the recorded columns above it."""
    ledger.title("Units of the recorded columns")
    for name, column in run.result.run.readings.columns.items():
        if name not in SI_UNIT or column.unit not in UNITS:
            continue
        unit = UNITS[column.unit]
        ledger.number(f"col.{name}.factor", f"{name.replace('_', ' ').capitalize()}: {unit.symbol} in {SI_UNIT[name]}",
                      unit.factor, f"{SI_UNIT[name]}/{unit.symbol}", unit.source)
        if unit.offset:
            ledger.number(f"col.{name}.offset", "  zero of the scale", unit.offset, SI_UNIT[name])
    below = {"half": 0.5, "zero": 0.0, "limit": 1.0}[view.result.job.policies.below]
    ledger.number("below", "Share of the limit for a reading below range", below, "1", "[readings] below")
    meter = run.result.run.readings.meter_density
    if meter is not None:
        ledger.stated("meter_density", "Density the meter computed with", meter, "kg/m3")
    ledger.title("Points")
    heads(ledger.sheet, ledger.row, HEADS)
    for i in range(view.layout.size):
        _Point(ledger, view, run, i).put(ledger.row + 1 + i)
    ledger.row += view.layout.size + 1


class _Point:
    """One row of the table."""

    def __init__(self, ledger: Ledger, view: View, run: RunView, i: int) -> None:
        self.ledger, self.view, self.run, self.i = ledger, view, run, i
        self.sheet: SheetSpec = ledger.sheet

    def cell(self, name: str) -> str:
        """Return the placeholder of another column of this row."""
        return f"«{self.ledger.prefix}.{name}.{self.i}»"

    def live(self, row: int, column: int, name: str, formula: str, value: float, fmt: str, style: str = "value") -> None:
        """Put a formula; ``[name]`` stands for this row's column, ``{name}`` for a value of the run."""
        filled = self.ledger.filled(formula).replace("[", f"«{self.ledger.prefix}.").replace("]", f".{self.i}»")
        self.sheet.put(row, column, Live("=" + filled, value), style=style, format=fmt, key=f"{self.ledger.prefix}.{name}.{self.i}")

    def number(self, row: int, column: int, name: str, value: float, fmt: str) -> None:
        """Put a plain number."""
        self.sheet.put(row, column, value, style="input", format=fmt, key=f"{self.ledger.prefix}.{name}.{self.i}")

    def put(self, row: int) -> None:
        """Put the whole row."""
        run, i = self.run, self.i
        readings, treated = run.result.run.readings, run.result.treated
        self.sheet.put(row, 1, Text(f"{readings.line[i]}{readings.point[i]}"), style="label")
        self.sheet.put(row, 2, Text(readings.status[i]), style="text" if readings.status[i] == "read" else "attention")
        if treated.wall_exponent is None:
            self.live(row, 3, "w0", f"«lay.w.{i}»", float(self.view.layout.weight[i]), "0.00000")
        else:
            self.number(row, 3, "w0", float(treated.weight[i] * treated.profile_factor), "0.00000")
        self.sheet.put(row, 4, int(treated.counted[i]), style="input", format="0", key=f"{self.ledger.prefix}.n.{i}")
        last = self.view.layout.size - 1
        weights, counts = (f"«{self.ledger.prefix}.{n}.0:{self.ledger.prefix}.{n}.{last}»" for n in ("w0", "n"))
        self.live(row, 5, "w", f"[w0]*[n]/SUMPRODUCT({weights},{counts})", float(treated.weight[i]), "0.00000")
        self._pressure(row)
        self._state(row)
        self._velocity(row)

    def _recorded(self, name: str, value: float) -> str:
        """Return the formula that turns the recorded number into SI, or nothing where it does not give the value."""
        column = self.run.result.run.readings.columns.get(name)
        if column is None or column.unit not in UNITS or not math.isfinite(float(column.number[self.i])):
            return ""
        unit = UNITS[column.unit]
        if not math.isclose(unit.to_si(float(column.number[self.i])), value, rel_tol=1e-13, abs_tol=1e-13):
            return ""
        formula = f"«read{self.run.index}.{name}.{self.i}»*{{col.{name}.factor}}"
        return formula + (f"+{{col.{name}.offset}}" if unit.offset else "")

    def _pressure(self, row: int) -> None:
        """The recorded pressure, what the rules make of it, and its root."""
        readings, rule = self.run.result.run.readings, self.run.result.treated.rule[self.i]
        pressure = float(readings.differential_pressure[self.i])
        if math.isfinite(pressure):
            formula = self._recorded("differential_pressure", pressure)
            if not formula and readings.meter_density is not None and "velocity" in readings.columns:
                number = float(readings.columns["velocity"].number[self.i])
                speed = UNITS[readings.columns["velocity"].unit].to_si(number) if math.isfinite(number) else math.nan
                if math.isclose(0.5 * readings.meter_density.value * speed * abs(speed), pressure, rel_tol=1e-13, abs_tol=1e-15):
                    base = self._recorded("velocity", speed)
                    formula = f"0.5*{{meter_density}}*({base})*ABS({base})"
            if formula:
                self.live(row, 6, "dp", formula, pressure, "0.000")
            else:
                self.number(row, 6, "dp", pressure, "0.000")
        else:
            self.sheet.put(row, 6, Text("no reading"), style="faint", key=f"{self.ledger.prefix}.dp.{self.i}")
        used = float(self.run.inputs["differential_pressure"][self.i])
        if rule == FROM_FIELD:
            self.number(row, 7, "dpu", used, "0.000")
        else:
            self.live(row, 7, "dpu", self._used(rule), used, "0.000")
        root = "SIGN([dpu])*SQRT(ABS([dpu]))" if self.run.setting.signed else "SQRT(MAX([dpu],0))"
        self.live(row, 8, "root", root, float(self.run.root[self.i]), "0.0000")

    def _used(self, rule: str) -> str:
        """Return the formula of the pressure used: as read, a share of the limit, from neighbours, or none."""
        if not self.run.result.treated.counted[self.i]:
            return "0"
        if self.run.result.run.readings.status[self.i] == "below range":
            return "[dp]*{below}"
        if rule.startswith("from "):
            readings = self.run.result.run.readings
            labels = [f"{line}{point}" for line, point in zip(readings.line, readings.point, strict=True)]
            roots = [f"«{self.ledger.prefix}.dpu.{labels.index(name)}»" for name in rule[5:].split(" and ")]
            mean = "+".join(f"SIGN({root})*SQRT(ABS({root}))" for root in roots)
            return f"(({mean})/{len(roots)})*ABS(({mean})/{len(roots)})"
        return "[dp]"

    def _state(self, row: int) -> None:
        """Temperature, pressures and density at the point."""
        i, run = self.i, self.run
        temperature, static = float(run.inputs["temperature"][i]), float(run.inputs["static"][i])
        formula = self._recorded("temperature", temperature)
        stated = run.result.run.conditions.temperature
        if formula:
            self.live(row, 9, "T", formula, temperature, "0.00")
        elif stated is not None and stated.value == temperature:
            self.live(row, 9, "T", "{temperature}", temperature, "0.00")
        else:
            self.number(row, 9, "T", temperature, "0.00")
        formula = self._recorded("static", static)
        default = run.result.run.conditions.static
        if formula:
            self.live(row, 10, "ps", formula, static, "0.0")
        elif default is not None and default.value == static and "static" not in run.result.run.readings.columns:
            self.live(row, 10, "ps", "{static}", static, "0.0")
        else:
            self.number(row, 10, "ps", static, "0.0")
        self.live(row, 11, "p", "{barometric}+[ps]", float(run.pressure[i]), "0.0")
        density = float(np.broadcast_to(run.result.density, (self.view.layout.size,))[i])
        if run.setting.constants is not None:
            formula = "{rho}"
        elif run.setting.density_given == "at plane":
            formula = "{density}"
        else:
            formula = "[p]*{M}/(1000*{R}*[T]" + (")" if run.setting.equation == "ideal" else "*[Z])")
        self.live(row, 12, "rho", formula, density, "0.00000")

    def _velocity(self, row: int) -> None:
        """The isentropic factor, the velocity, and what it adds to the sums."""
        run, i = self.run, self.i
        if not run.result.treated.counted[i]:
            # Text, so that a chart of the column leaves the point out; it adds nothing to the sums.
            self.sheet.put(row, 17, Text("not counted"), style="faint", key=f"{self.ledger.prefix}.v.{i}")
            for column, name in ((18, "wv"), (19, "wvr"), (20, "wvs")):
                self.number(row, column, name, 0.0, "0.00000")
            return
        calibrated = run.setting.probe is not None
        own, coefficient = "[C]" if calibrated else "{coefficient}", run.input("coefficient")
        if calibrated:
            coefficient = float(run.result.probe["coefficient"][i])
        root, pressure = float(run.root[i]), float(run.pressure[i])
        if run.setting.compressible:
            x = (coefficient * root) ** 2 / pressure
            gamma = run.ratio
            self.live(row, 13, "x", f"({own}*[root])^2/[p]", x, "0.00000")
            self.live(row, 14, "ln", "IF([x]=0,0,LN(1+[x])*[x]/((1+[x])-1))", math.log1p(x), "0.00000")
            k = float(pitot.compressibility_factor((coefficient * root) ** 2, pressure, gamma))
            y = "({a}*[ln])"
            self.live(row, 15, "k", f"IF([x]=0,1,SQRT(2*EXP({y}/2)*SINH({y}/2)/({{a}}*[x])))", k, "0.000000")
        self._factor(row)
        velocity = float(np.broadcast_to(run.result.velocity, (self.view.layout.size,))[i])
        if run.setting.constants is not None:
            self.live(row, 17, "v", self._own_velocity(own), velocity, "0.000")
        else:
            k_text = "*[k]" if run.setting.compressible else ""
            self.live(row, 17, "v", f"{own}*[root]*SQRT(2/[rho]){k_text}*[f]", velocity, "0.000")
        weight = float(run.inputs["weight"][i])
        density = float(np.broadcast_to(run.result.density, (self.view.layout.size,))[i])
        self.live(row, 18, "wv", "[w]*[v]", weight * velocity, "0.00000")
        self.live(row, 19, "wvr", "[wv]*[rho]", weight * velocity * density, "0.00000")
        self._standard(row, weight * velocity, density)

    def _factor(self, row: int) -> None:
        """What makes the axial component of the velocity along the probe, and the corrections that the job asked for."""
        run, i = self.run, self.i
        yaw, correction = float(run.inputs["yaw"][i]), float(run.inputs["point_factor"][i])
        pitch = float(run.result.probe["pitch"][i]) if run.setting.probe else 0.0
        offsets = run.result.run.pitot.yaw_offset
        recorded = self._recorded("yaw", yaw + sum(stated.value for stated in offsets))
        turned = recorded + "".join(f"-{{yaw_offset.{number}}}" for number in range(len(offsets)))
        live = bool(recorded) and self.view.method.uses_yaw
        parts = [f"COS({turned})"] if live else []
        parts += ["COS([pitch])"] if pitch != 0 else []
        parts += ["[corr]"] if correction != 1.0 else []
        factor = float(np.cos(yaw) * np.cos(pitch) * correction)
        if parts and (live or yaw == 0):
            self.live(row, 16, "f", "*".join(parts), factor, "0.00000")
        else:
            self.number(row, 16, "f", factor, "0.00000")

    def _own_velocity(self, coefficient: str) -> str:
        """Return the formula of a velocity in the method's own arithmetic: with the mean temperature, or with the point's."""
        own = self.run.setting.constants
        assert own is not None, "asked only for such a method"
        if self.run.setting.arithmetic == "root-mean":
            return "{speed_per_root}*[root]*[f]" + ("*[C]" if self.run.setting.probe else "")
        scale = "[T]*1.8-459.67" if own.temperature == "degF" else "[T]-273.15"
        return f"{{Kp}}*{coefficient}*SQRT(({scale}+{{offset}})/({{Ps}}*{{M}}))/SQRT({{f.head}})*{{f.speed}}*[root]*[f]"

    def _standard(self, row: int, weighted: float, density: float) -> None:
        """The point's part of the standard flow, where it is summed over the points."""
        run, reference = self.run, self.run.setting.reference
        if reference is None or run.setting.constants is not None:
            return
        kind, first, second = reference
        if kind == "density":
            self.live(row, 20, "wvs", "[wv]*[rho]/{reference_density}", weighted * density / first, "0.00000")
            return
        ratio, real = float(run.pressure[self.i]) / second * (first / float(run.inputs["temperature"][self.i])), ""
        if run.compressibility is not None:
            ratio, real = ratio / float(run.compressibility[self.i]), "/[Z]"
        formula = f"[wv]*([p]/{{reference_pressure}})*({{reference_temperature}}/[T]){real}"
        self.live(row, 20, "wvs", formula, weighted * ratio, "0.00000")

