"""The probe in the working: how its coefficient was found, and what its size does, as formulas."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from traverse.model import Array, Calibration, Curve, Directional
from traverse.physics import displacement, pitot, probe
from traverse.report.sheets._ledger import Ledger
from traverse.report.sheets._run_view import RunView
from traverse.report.sheets._view import View, heads
from traverse.report.spec import Live, Text
from traverse.treatment import STEM_BLOCKAGE, displaced, stem_factor


def probe_rows(ledger: Ledger, run: RunView) -> None:
    """Put the coefficient as it was stated, or the calibration it follows from."""
    stated = run.result.run.pitot
    for number, offset in enumerate(stated.yaw_offset):
        ledger.stated(f"yaw_offset.{number}", f"Yaw offset of the probe {number + 1}", offset, "rad")
    calibration = stated.calibration
    if calibration is not None and calibration.curve is not None:
        _curve_nodes(ledger, calibration.curve, stated.coefficient_source)
    elif stated.directional is not None:
        _pitch_nodes(ledger, stated.directional, stated.coefficient_source)
    elif stated.legs:
        _legs(ledger, run, calibration)
    else:
        ledger.number("coefficient", "Pitot coefficient", stated.coefficient, "1", stated.coefficient_source)


def _legs(ledger: Ledger, run: RunView, calibration: Calibration | None) -> None:
    """Put the coefficient of each side of an S-type tube, from its pairs where they are known, and the one that counts."""
    stated = run.result.run.pitot
    sides = calibration.sides if calibration else {}
    if calibration is not None:
        ledger.number("cal.std", "Coefficient of the standard tube", calibration.standard_coefficient or 0.0, "1")
    for side, value in stated.legs.items():
        if side not in sides:
            ledger.number(f"leg.{side}", f"Pitot coefficient, side {side}", value, "1", "[pitot] legs")
            continue
        pairs, names = sides[side], []
        for k, coefficient in enumerate(pairs.coefficient.tolist()):
            name = f"cal.{side}.{k}"
            ledger.number(f"{name}.std", f"  side {side}, pair {k + 1}: standard tube", float(pairs.standard[k]), "Pa")
            ledger.number(f"{name}.s", f"  side {side}, pair {k + 1}: S-type tube", float(pairs.s_type[k]), "Pa")
            formula = f"{{cal.std}}*SQRT({{{name}.std}}/{{{name}.s}})"
            ledger.live(name, f"  side {side}, pair {k + 1}: coefficient", formula, coefficient, "1", "Method 2, equation 2-3")
            names.append(f"{{{name}}}")
        ledger.live(f"leg.{side}", f"Pitot coefficient, side {side}", f"({'+'.join(names)})/{len(names)}", value, "1", "mean of the pairs")
        apart = "+".join(f"ABS({name}-{{leg.{side}}})" for name in names)
        ledger.live(f"leg.{side}.deviation", f"  mean deviation, side {side}", f"({apart})/{len(names)}", pairs.deviation, "1",
                    "Method 2, equations 2-4 and 2-5; at most 0.01")
    keys = [f"{{leg.{side}}}" for side in stated.legs]
    formula = f"({'+'.join(keys)})/{len(keys)}" if stated.leg == "mean" else f"{{leg.{stated.leg}}}"
    ledger.live("coefficient", "Pitot coefficient", formula, stated.coefficient, "1", stated.coefficient_source)


def _nodes(ledger: Ledger, title: str, names: Sequence[tuple[str, str]], columns: Sequence[Sequence[float | Live]]) -> None:
    """Put a small table: (key, head) of every column and its values, one row a node."""
    ledger.title(title)
    heads(ledger.sheet, ledger.row, tuple(head for _, head in names))
    for k in range(len(columns[0])):
        for place, ((key, _), column) in enumerate(zip(names, columns, strict=True)):
            if k < len(column):
                value = column[k]
                ledger.sheet.put(ledger.row + 1 + k, 1 + place, value, style="value" if isinstance(value, Live) else "input",
                                 format="General", key=f"{ledger.prefix}.{key}.{k}")
    ledger.row += len(columns[0]) + 1


def _live(ledger: Ledger, formula: str, value: float) -> Live:
    return Live("=" + ledger.filled(formula), float(value))


def _curve_nodes(ledger: Ledger, curve: Curve, source: str) -> None:
    """Put the curve over velocity, with the reach, slope and start of every segment."""
    unit = curve.unit
    ledger.number("cal.factor", f"Calibration of the probe: {unit.symbol} in m/s", unit.factor, f"m/s/{unit.symbol}", source)
    v, c = curve.velocity, curve.coefficient
    slope = (c[1:] - c[:-1]) / (v[1:] - v[:-1])
    span = range(len(v) - 1)
    _nodes(ledger, "Calibration of the probe", (
        ("cal.n", f"velocity [{unit.symbol}]"), ("cal.v", "velocity [m/s]"), ("cal.c", "coefficient"), ("cal.e", "reach v/C [m/s]"),
        ("cal.b", "slope to the next"), ("cal.a", "start"),
    ), (
        curve.number.tolist(), [_live(ledger, f"{{cal.n.{k}}}*{{cal.factor}}", v[k]) for k in range(len(v))], c.tolist(),
        [_live(ledger, f"{{cal.v.{k}}}/{{cal.c.{k}}}", v[k] / c[k]) for k in range(len(v))],
        [_live(ledger, f"({{cal.c.{k + 1}}}-{{cal.c.{k}}})/({{cal.v.{k + 1}}}-{{cal.v.{k}}})", slope[k]) for k in span],
        [_live(ledger, f"{{cal.c.{k}}}-{{cal.b.{k}}}*{{cal.v.{k}}}", c[k] - slope[k] * v[k]) for k in span],
    ))


def _pitch_nodes(ledger: Ledger, curves: Directional, source: str) -> None:
    """Put F1 and F2 over the pitch angle; F1 once more with the sign that makes it rise."""
    unit = curves.unit
    ledger.number("cal.factor", f"Calibration of the probe: {unit.symbol} in rad", unit.factor, f"rad/{unit.symbol}", source)
    rising = 1.0 if curves.ratio[-1] > curves.ratio[0] else -1.0
    ledger.number("cal.sign", "  sign that makes F1 rise with the pitch", rising, "1")
    span = range(len(curves.pitch))
    _nodes(ledger, "Calibration of the probe", (
        ("cal.n", f"pitch [{unit.symbol}]"), ("cal.p", "pitch [rad]"), ("cal.f1", "F1"), ("cal.c", "F2"), ("cal.r", "F1, rising"),
    ), (
        curves.number.tolist(), [_live(ledger, f"{{cal.n.{k}}}*{{cal.factor}}", curves.pitch[k]) for k in span], curves.ratio.tolist(),
        curves.coefficient.tolist(), [_live(ledger, f"{{cal.sign}}*{{cal.f1.{k}}}", rising * curves.ratio[k]) for k in span],
    ))


class _Table:
    """A table with one row a point, below the table of points."""

    def __init__(self, ledger: Ledger, view: View, run: RunView, title: str) -> None:
        self.ledger, self.run, self.size = ledger, run, view.layout.size
        ledger.title(title)
        self.columns = 1
        readings = run.result.run.readings
        self.top = ledger.row
        ledger.sheet.put(self.top, 1, Text("point"), style="heading")
        for i in range(self.size):
            ledger.sheet.put(self.top + 1 + i, 1, Text(f"{readings.line[i]}{readings.point[i]}"), style="label")
        ledger.row += self.size + 1

    def _column(self, head: str) -> int:
        self.columns += 1
        self.ledger.sheet.put(self.top, self.columns, Text(head), style="heading right")
        return self.columns

    def live(self, name: str, head: str, formula: str | Sequence[str], values: Array, fmt: str = "0.00000") -> None:
        """Put a column of formulas; ``[name]`` stands for this point's cell of that name, ``{name}`` for a value of the run."""
        column, prefix = self._column(head), self.ledger.prefix
        for i, value in enumerate(np.broadcast_to(values, (self.size,)).tolist()):
            text = formula if isinstance(formula, str) else formula[i]
            filled = self.ledger.filled(text).replace("[", f"«{prefix}.").replace("]", f".{i}»")
            key = f"{prefix}.{name}.{i}"
            self.ledger.sheet.put(self.top + 1 + i, column, Live("=" + filled, value), style="value", format=fmt, key=key)

    def number(self, name: str, head: str, values: Array, fmt: str = "General") -> None:
        """Put a column of numbers."""
        column = self._column(head)
        for i, value in enumerate(np.broadcast_to(values, (self.size,)).tolist()):
            self.ledger.sheet.put(self.top + 1 + i, column, value, style="input", format=fmt, key=f"{self.ledger.prefix}.{name}.{i}")


def probe_table(ledger: Ledger, view: View, run: RunView) -> None:
    """Put the coefficient of every point where it differs, and the pitch it follows from."""
    chosen = run.setting.probe
    if chosen is None:
        return
    if chosen.kind == "curve":
        _curve_table(_Table(ledger, view, run, "Coefficient by the calibration, at each point's own velocity"), run, chosen)
        return
    table = _Table(ledger, view, run, "Pitch and F2 by the calibration")
    _pitch_columns(table, run, chosen)
    last = len(chosen.at) - 1
    _interpolated(table, "C", "F2", "pitch", "cal.p", "cal.c", last, run.result.probe["coefficient"])


def _segment(prefix: str, place: str, nodes: str, last: int) -> str:
    """Return the formula of the number of the segment a value lies in, the first or last one beyond them."""
    return f"MAX(1,MIN({last},IFERROR(MATCH({place},«{prefix}.{nodes}.0:{prefix}.{nodes}.{last}»,1),1)))"


def _interpolated(table: _Table, name: str, head: str, place: str, nodes: str, values: str, last: int, found: Array) -> None:
    """Put the column of a piecewise-linear curve at another column of the table."""
    prefix, run = table.ledger.prefix, table.run
    at = run.result.probe["pitch"] if place == "pitch" else _measured_ratio(run)
    chosen = run.setting.probe
    assert chosen is not None, "there is a calibration"
    rising = 1.0 if not chosen.ratio or chosen.ratio[-1] > chosen.ratio[0] else -1.0
    edges = np.asarray(chosen.at) if place == "pitch" else rising * np.asarray(chosen.ratio)
    index = np.clip(np.searchsorted(edges, at if place == "pitch" else rising * at, side="right"), 1, last)
    table.live(f"{name}.j", f"segment for {head}", _segment(prefix, f"[{place}]", nodes, last), index.astype(np.float64), "0")

    def of(column: str, step: int) -> str:
        return f"INDEX(«{prefix}.{column}.0:{prefix}.{column}.{last}»,[{name}.j]{'+1' if step else ''})"

    slope = f"({of(values, 1)}-{of(values, 0)})/({of(nodes, 1)}-{of(nodes, 0)})"
    formula = f"{of(values, 0)}+{slope}*([{place}]-{of(nodes, 0)})"
    if name == "pitch":
        formula = f"IF([dpu]>0,{formula},0)"
    table.live(name, head, formula, found, "0.000000")


def _measured_ratio(run: RunView) -> Array:
    across, pitch = run.inputs["differential_pressure"], run.inputs["pitch_pressure"]
    return np.where(across > 0.0, pitch / np.where(across > 0.0, across, 1.0), 0.0)


def _pitch_columns(table: _Table, run: RunView, chosen: probe.Calibrated) -> None:
    """Put the pitch of every point: as read, or by F1."""
    name = "pitch" if chosen.kind == "pitch" else "pitch_pressure"
    column = run.result.run.readings.columns[name]
    recorded = np.isfinite(column.number)
    formula = [
        f"«read{run.index}.{name}.{i}»*{{col.{name}.factor}}" if recorded[i] else "0" for i in range(table.size)
    ]
    if chosen.kind == "pitch":
        table.live("pitch", "pitch [rad]", formula, run.result.probe["pitch"], "0.000000")
        return
    rising = 1.0 if chosen.ratio[-1] > chosen.ratio[0] else -1.0
    table.live("pp", "P4-P5 [Pa]", formula, run.inputs["pitch_pressure"], "0.000")
    table.live("F1", "F1, rising", "IF([dpu]>0,{cal.sign}*[pp]/[dpu],0)", rising * _measured_ratio(run), "0.000000")
    _interpolated(table, "pitch", "pitch [rad]", "F1", "cal.r", "cal.p", len(chosen.at) - 1, run.result.probe["pitch"])


def _curve_table(table: _Table, run: RunView, chosen: probe.Calibrated) -> None:
    """Put the sweeps from a coefficient to the velocity it gives and back, until they no longer move."""
    density = np.broadcast_to(run.result.density, (table.size,))
    if run.setting.constants is not None:
        table.live("reach", "velocity for C = 1 [m/s]", _own_reach(run), _own_reach_values(run), "0.000")
    else:
        table.live("reach", "velocity for C = 1 [m/s]", "ABS([root])*SQRT(2/[rho])", np.abs(run.root) * np.sqrt(2.0 / density), "0.000")
    reach = _own_reach_values(run) if run.setting.constants is not None else np.abs(run.root) * np.sqrt(2.0 / density)
    if not run.setting.compressible:
        table.live("C", "coefficient", _on_curve(table, "[reach]", len(chosen.at) - 1), run.result.probe["coefficient"], "0.000000")
        return
    before, count = np.ones(table.size), _count(run, chosen, reach)
    for number in range(count):
        x = np.square(before * run.root) / run.pressure
        k = pitot.compressibility_factor(np.square(before * run.root), run.pressure, run.ratio)
        first = "1" if number == 0 else f"[C.{number - 1}]"
        table.live(f"x.{number}", f"impact/static {number + 1}", f"({first}*[root])^2/[p]", x)
        y = f"({{a}}*LN(1+[x.{number}])*[x.{number}]/((1+[x.{number}])-1))"
        formula = f"IF([x.{number}]=0,1,SQRT(2*EXP({y}/2)*SINH({y}/2)/({{a}}*[x.{number}])))"
        table.live(f"k.{number}", f"isentropic k {number + 1}", formula, k, "0.000000")
        before = probe.coefficient_at(reach * k, chosen.at, chosen.coefficient)
        final = number == count - 1
        name, head = ("C", "coefficient") if final else (f"C.{number}", f"coefficient {number + 1}")
        edge = _on_curve(table, f"([reach]*[k.{number}])", len(chosen.at) - 1)
        table.live(name, head, edge, run.result.probe["coefficient"] if final else before, "0.000000")


def _count(run: RunView, chosen: probe.Calibrated, reach: Array) -> int:
    """Return how many sweeps the run needs."""
    def change(coefficient: Array) -> Array:
        return pitot.compressibility_factor(np.square(coefficient * run.root), run.pressure, run.ratio)

    first = change(np.ones(1))
    return len(probe.sweeps(reach * first, chosen.at, chosen.coefficient, 0.0, lambda coefficient: change(coefficient) / first))


def _on_curve(table: _Table, reach: str, last: int) -> str:
    """Return the formula of the coefficient at the velocity which it gives itself; its end beyond the curve."""
    prefix = table.ledger.prefix

    def of(column: str, end: int) -> str:
        return f"INDEX(«{prefix}.{column}.0:{prefix}.{column}.{end}»,{segment})"

    segment = _segment(prefix, reach, "cal.e", last)
    inside = f"{of('cal.a', last - 1)}/(1-{of('cal.b', last - 1)}*{reach})"
    return f"IF({reach}<{{cal.e.0}},{{cal.c.0}},IF({reach}>{{cal.e.{last}}},{{cal.c.{last}}},{inside}))"


def _own_reach(run: RunView) -> str:
    own = run.setting.constants
    assert own is not None, "asked only for such a method"
    local = "{Ts}"
    if run.setting.arithmetic == "pointwise":
        local = "([T]*1.8-459.67+{offset})" if own.temperature == "degF" else "([T]-273.15+{offset})"
    return f"ABS({{Kp}}*SQRT({local}/({{Ps}}*{{M}}))/SQRT({{f.head}})*{{f.speed}}*[root])"


def _own_reach_values(run: RunView) -> Array:
    """Return the velocities that a coefficient of 1 would give in the method's own arithmetic."""
    return np.asarray(np.abs(run.result.probe["speed"] / run.result.probe["coefficient"]))


def correction_table(ledger: Ledger, view: View, run: RunView) -> None:
    """Put the factors of the corrections that the job asked for at every point."""
    job = view.result.job
    asked = job.corrections
    if not any((asked.turbulence, asked.blockage, asked.displacement)):
        return
    table = _Table(ledger, view, run, "Corrections of the velocities")
    parts: list[str] = []
    if asked.blockage or asked.displacement:
        table.number("depth", "depth [m]", view.layout.depth)
    if asked.turbulence is not None:
        ledger.stated("turbulence", "Turbulence", asked.turbulence, "1")
        parts.append("1/SQRT(1+{turbulence}^2)")
    pitot_ = run.result.run.pitot
    if asked.blockage and pitot_.stem is not None:
        ledger.stated("stem", "Stem of the probe", pitot_.stem, "m")
        ledger.number("stem.k", "Blockage per share of the area", STEM_BLOCKAGE, "1", "ISO 3966, from memory")
        table.live("f.stem", "blockage", "1-{stem.k}*{stem}*[depth]/{A}", stem_factor(run.result.run, view.layout, job.plane.section.area),
                   "0.000000")
        parts.append("[f.stem]")
    if asked.displacement and pitot_.head is not None:
        ledger.stated("head", "Head of the probe", pitot_.head, "m")
        _displacement_columns(table, view, run)
        parts.append("[f.head]")
    table.live("corr", "all together", "*".join(parts), run.inputs["point_factor"], "0.000000")


def _displacement_columns(table: _Table, view: View, run: RunView) -> None:
    """Put the gradient along the line and what it and the wall do to the reading of the head."""
    job, form = view.result.job, view.result.job.corrections.displacement
    assert form, "asked only where it acts"
    counted = run.result.treated.counted
    head = displaced(run.result.run, view.layout, job.plane.section, run.result.treated.differential_pressure, counted)
    table.number("wall", "wall distance [m]", head.wall)
    table.live("vr", "root of dp T", ["SQRT(MAX([dpu],0)*[T])" if n else "0" for n in counted], head.speed, "0.000")
    table.live("slope", "gradient/velocity [1/m]", [_slope(table, way, i) for i, way in enumerate(head.way)], head.slope, "0.0000")
    shift = displacement.shift(head.diameter, head.slope, form)
    fade = "" if form == "macmillan" else "*TANH(4*SQRT({head}/2*[slope]))"
    table.live("shift", "shift [m]", f"{displacement.SHIFT!r}*{{head}}{fade}", shift, "0.000000")
    near = displacement.wall_factor(head.diameter, head.wall)
    table.live("f.wall", "near a wall", f"1+{displacement.WALL!r}*EXP(-{displacement.FADE!r}*([wall]/{{head}}-0.5))", near, "0.000000")
    table.live("f.head", "head", "IF([vr]>0,(1-[shift]*[slope])*[f.wall],1)", head.factor(form), "0.000000")


def _slope(table: _Table, way: displacement.Way, i: int) -> str:
    """Return the formula of the relative gradient at a point."""
    prefix = table.ledger.prefix

    def at(name: str, place: int) -> str:
        return f"«{prefix}.{name}.{place}»"

    if way.kind == "none":
        return "0"
    if way.kind == "wall":
        own, beside = way.points
        return f"ABS(LN({at('vr', beside)}/{at('vr', own)})/LN({at('wall', beside)}/{at('wall', own)}))/{at('wall', own)}"
    first = f"({at('vr', way.points[1])}-{at('vr', way.points[0])})/({at('depth', way.points[1])}-{at('depth', way.points[0])})"
    if len(way.points) < 3:
        return f"ABS({first})/{at('vr', i)}"
    a, b, c = way.points
    then = f"({at('vr', c)}-{at('vr', b)})/({at('depth', c)}-{at('depth', b)})"
    second = f"({then}-{first})/({at('depth', c)}-{at('depth', a)})"
    return f"ABS({first}+{second}*(2*{at('depth', i)}-{at('depth', a)}-{at('depth', b)}))/{at('vr', i)}"
