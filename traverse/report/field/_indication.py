"""The live side of a run's page: velocity, mean, flow and warnings while readings go in. An indication; the reduction counts."""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from traverse.model import Conditions, Setup
from traverse.planning import Plan
from traverse.planning.expected import density_of
from traverse.planning.field import Entry
from traverse.report.spec import Live, SheetSpec, Text
from traverse.units import UNITS, Stated

# The state the gas of the job is taken at where the job does not state one; the page corrects it for what is entered.
USUAL = {"air": 293.15, "given": 293.15}
HOT, SEA_LEVEL = 423.15, 101325.0
# A reading this many times its neighbours, each against the profile that is expected, is worth a second look: judgement.
FAR = 1.5
LOW = 5.0  # Pa, EN 15259 as printed in a trade guide


class Indication:
    """Writes the live cells of one run."""

    def __init__(self, sheet: SheetSpec, planned: Plan, prefix: str, units: dict[str, str]) -> None:
        self.sheet, self.planned, self.prefix = sheet, planned, prefix
        self.units = {key: UNITS[symbol] for key, symbol in units.items()}
        self.symbol = units
        self.base = _base(planned.setup)
        system = planned.setup.units
        self.speed, self.flow = (UNITS["ft/min"], UNITS["cfm"]) if system == "us" else (UNITS["m/s"], UNITS["m3/s"])
        self.digits = "#,##0" if system == "us" else "0.00"
        self.flow_digits = "#,##0" if system == "us" else "#,##0.000"
        self.shape = np.square(planned.profile.relative)

    def ref(self, name: str) -> str:
        """Return the placeholder of a cell of this page."""
        return f"«{self.prefix}.{name}»"

    def planned_value(self, row: int, column: int, entry: Entry) -> None:
        """Put what holds where nothing is entered, for the entries that have a number."""
        setup = self.planned.setup
        stated: Stated | None = None
        if setup.conditions is not None and entry.key in ("barometric", "static", "temperature"):
            stated = getattr(setup.conditions, entry.key)
        if entry.key == "coefficient" and setup.pitot is not None:
            self._plan(row, column, entry, setup.pitot.coefficient, f"planned {setup.pitot.coefficient:g}")
        elif stated is not None:
            shown = self.units[entry.key].from_si(stated.value)
            self._plan(row, column, entry, shown, f"planned {shown:.6g}")
        elif entry.key in ("barometric", "static", "temperature", "coefficient"):
            self._plan(row, column, entry, None, "to be entered" if entry.key != "static" else "0 if not entered")

    def _plan(self, row: int, column: int, entry: Entry, value: float | None, words: str) -> None:
        self.sheet.put(row, column, Text(words), style="note")
        if value is not None:
            self.sheet.put(row, column + 1, value, style="faint", format="General", key=f"{self.prefix}.planned.{entry.key}")

    def _used(self, key: str) -> str:
        """Return the formula of what holds: what is entered, else what was planned, else nothing."""
        known = f"{self.prefix}.planned.{key}" in self.sheet.keys
        other = self.ref(f"planned.{key}") if known else ('0' if key == "static" else '""')
        return f"IF(ISNUMBER({self.ref(key)}),{self.ref(key)},{other})"

    def _used_value(self, key: str) -> float | str:
        place = self.sheet.keys.get(f"{self.prefix}.planned.{key}")
        if place is None:
            return 0.0 if key == "static" else ""
        content = self.sheet.cells[place].content
        assert isinstance(content, (int, float)), "planned values are numbers"
        return float(content)

    def summary(self, row: int) -> int:
        """Put the running mean, the flow and what is left; return the next free row."""
        last = self.planned.layout.size - 1
        columns = ("v", "n", "w", "dps", "differential_pressure", "status")
        v, n, w, q, dp, status = (f"«{self.prefix}.{name}.0:{self.prefix}.{name}.{last}»" for name in columns)
        for k, key in enumerate(("barometric", "static", "temperature", "coefficient")):
            used = Live("=" + self._used(key), self._used_value(key))
            self.sheet.put(row + k, 13, used, style="faint", format="General", key=f"{self.prefix}.used.{key}")
            self.sheet.put(row + k, 12, Text(key), style="faint text")
        area = self.planned.setup.plane.section.area / self.flow.factor
        self.sheet.put(row, 15, area * self.speed.factor, style="faint", format="General", key=f"{self.prefix}.area")
        self.sheet.put(row, 14, Text("area"), style="faint text")
        self.sheet.put(row + 1, 15, self.base[0] if self.base else 0.0, style="faint", format="General", key=f"{self.prefix}.density")
        self.sheet.put(row + 1, 14, Text("kg/m3"), style="faint text")
        size, flow = self.planned.layout.size, self.ref("mean")
        mean = f"=IF(SUM({n})>0,SUMPRODUCT({w},{n},{v})/SUMPRODUCT({w},{n}),\"\")"
        share = f'=IF(COUNT({q})>0,100*SUMPRODUCT(ISNUMBER({q})*({q}>MAX({q})/10))/COUNT({q}),"")'
        rows: tuple[tuple[str, str, float | str, str, str], ...] = (
            ("points left", f"={size}-SUMPRODUCT((LEN({dp})+LEN({status})>0)*1)", size, "0", "left"),
            (f"mean velocity so far [{self.speed.symbol}]", mean, "", self.digits, "mean"),
            (f"flow so far [{self.flow.symbol}]", f'=IF(ISNUMBER({flow}),{flow}*{self.ref("area")},"")', "", self.flow_digits, "flow"),
            ("readings above a tenth of the highest [%]", share, "", "0", "share"),
        )
        for k, (label, formula, value, fmt, key) in enumerate(rows):
            self.sheet.put(row + k, 1, Text(label), style="label", span=4)
            self.sheet.put(row + k, 5, Live(formula, value), style="result", format=fmt, key=f"{self.prefix}.{key}")
        self._design(row)
        words = "An indication for the field, without compressibility and corrections: the reduction of this workbook counts."
        if self.base is None:
            words = "No velocities here: the job does not state its gas well enough. The readings can be taken all the same."
        self.sheet.put(row + 4, 1, Text(words), style="note", span=9)
        return row + 4

    def _design(self, row: int) -> None:
        design = self.planned.setup.design
        if design is None:
            return
        value = design.actual_flow.value / self.flow.factor
        self.sheet.put(row, 9, Text(f"design flow [{self.flow.symbol}]"), style="label")
        self.sheet.put(row, 10, value, style="value", format=self.flow_digits, key=f"{self.prefix}.design")
        self.sheet.put(row + 1, 9, Text("flow so far, of design [%]"), style="label")
        formula = f'=IF(ISNUMBER({self.ref("flow")}),100*{self.ref("flow")}/{self.ref("design")},"")'
        self.sheet.put(row + 1, 10, Live(formula, ""), style="result", format="0.0", key=f"{self.prefix}.percent")

    def heads(self) -> tuple[str, ...]:
        """Return the heads of the live columns."""
        return (f"velocity [{self.speed.symbol}]", "look again", "weight", "counted", "pressure [Pa]", "against profile")

    def point(self, row: int, i: int) -> None:
        """Put the live cells of one point: velocity, warning, weight, and what they are made of."""
        weight, profile = float(self.planned.layout.weight[i]), float(self.shape[i])
        dp = self.ref(f"differential_pressure.{i}")
        factor = self.units["differential_pressure"].factor
        self._live(row, 14, f"dps.{i}", f'=IF(ISNUMBER({dp}),{dp}*{factor!r},"")', "0.000", "faint")
        pressure = self.ref(f"dps.{i}")
        self._live(row, 10, f"v.{i}", f"={self._velocity(i, pressure)}", self.digits, "value")
        self.sheet.put(row, 12, weight, style="faint", format="0.00000", key=f"{self.prefix}.w.{i}")
        self.sheet.put(row, 13, Live(f"=IF(ISNUMBER({self.ref(f'v.{i}')}),1,0)", 0), style="faint", format="0", key=f"{self.prefix}.n.{i}")
        self._live(row, 15, f"rel.{i}", f'=IF(ISNUMBER({pressure}),{pressure}/{profile!r},"")', "0.0", "faint")
        self._live(row, 11, f"warning.{i}", f"={self._warning(i, pressure)}", "General", "text")

    def _live(self, row: int, column: int, name: str, formula: str, fmt: str, style: str) -> None:
        self.sheet.put(row, column, Live(formula, ""), style=style, format=fmt, key=f"{self.prefix}.{name}")

    def _velocity(self, i: int, pressure: str) -> str:
        """Return the formula of the velocity: C sqrt(2 dp/rho), rho of the planned gas at the pressure and temperature here."""
        if self.base is None:
            return '""'
        _, temperature, absolute, fixed = self.base
        warm, still, baro = self.units["temperature"], self.units["static"], self.units["barometric"]
        t, s = self.ref(f"temperature.{i}"), self.ref(f"static.{i}")
        kelvin = f"(IF(ISNUMBER({t}),{t},{self.ref('used.temperature')})*{warm.factor!r}+{warm.offset!r})"
        here = (f"({self.ref('used.barometric')}*{baro.factor!r}"
                f"+IF(ISNUMBER({s}),{s},{self.ref('used.static')})*{still.factor!r})")
        density = self.ref("density") if fixed else f"({self.ref('density')}*{here}/{absolute!r}*{temperature!r}/{kelvin})"
        speed = f"{self.ref('used.coefficient')}*SQRT(2*MAX({pressure},0)/{density})/{self.speed.factor!r}"
        ready = f"ISNUMBER({pressure}),ISNUMBER({self.ref('used.coefficient')})"
        if not fixed:
            ready += f",ISNUMBER({self.ref('used.barometric')}),OR(ISNUMBER({t}),ISNUMBER({self.ref('used.temperature')}))"
        return f'IF(AND({ready}),IFERROR({speed},""),"")'

    def _warning(self, i: int, pressure: str) -> str:
        layout = self.planned.layout
        limit = f"{self.ref('gauge_range')}*{self.units['gauge_range'].factor!r}"
        steps = [
            (f"AND(ISNUMBER({self.ref('gauge_range')}),{pressure}>{limit})", '"above the range of the gauge"'),
            (f"{pressure}<0", '"negative: hoses, or reverse flow?"'),
            (f"{pressure}<{LOW!r}", '"below 5 Pa"'),
        ]
        near = [j for j in (i - 1, i + 1) if 0 <= j < layout.size and layout.line[j] == layout.line[i]]
        if near:
            mean = f"AVERAGE({','.join(self.ref(f'rel.{j}') for j in near)})"
            ratio = f"IFERROR({self.ref(f'rel.{i}')}/{mean},1)"
            steps.append((f"OR({ratio}>{FAR!r},{ratio}<{1 / FAR!r})", '"far from its neighbours"'))
        text = '""'
        for condition, words in reversed(steps):
            text = f"IF({condition},{words},{text})"
        return f'IF(ISNUMBER({pressure}),{text},"")'


Base = tuple[float, float, float, bool]


def _base(setup: Setup) -> Base | None:
    """Return density [kg/m3], temperature [K] and absolute pressure [Pa] of the job's gas, and whether its density is fixed."""
    if setup.gas is None:
        return None
    fixed = setup.gas.density is not None and setup.gas.density_temperature is None
    state = setup.conditions
    temperature = state.temperature.value if state and state.temperature else USUAL.get(setup.gas.kind, HOT)
    barometric = state.barometric.value if state else SEA_LEVEL
    static = state.static.value if state and state.static else 0.0
    kelvin, pascal = UNITS["K"], UNITS["Pa"]
    whole = replace(setup, conditions=Conditions(
        barometric=Stated(barometric, barometric, pascal, ""), barometric_source="", static=Stated(static, static, pascal, ""),
        temperature=Stated(temperature, temperature, kelvin, ""),
    ))
    density, _ = density_of(whole)
    return None if density is None else (density, temperature, barometric + static, fixed)
