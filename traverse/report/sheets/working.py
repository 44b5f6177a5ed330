"""The working of each run: live formulas from the readings as recorded to the flow."""

from __future__ import annotations

from traverse.report.sheets._air_rows import compressibility_table
from traverse.report.sheets._gas_rows import gas_rows, species_rows
from traverse.report.sheets._ledger import Ledger
from traverse.report.sheets._point_rows import point_table
from traverse.report.sheets._probe_rows import correction_table, probe_rows, probe_table
from traverse.report.sheets._run_view import RunView
from traverse.report.sheets._stack_rows import stack_stated
from traverse.report.sheets._total_rows import total_rows
from traverse.report.sheets._view import View
from traverse.report.spec import ScatterChart, Series, SheetSpec, Text

ORDER, TITLE = 20, "Working"


def sheets(view: View) -> list[SheetSpec]:
    """Return one page of working per run."""
    return [_working(view, index) for index, _ in view.runs]


def _working(view: View, index: int) -> SheetSpec:
    run = RunView.of(view, index)
    name = TITLE if len(view.runs) == 1 else f"{TITLE} {index + 1}"
    sheet = SheetSpec(name, orientation="landscape")
    sheet.put(1, 1, Text(f"Working, run {run.result.run.name}"), style="title")
    sheet.put(2, 1, Text(
        "Every value below is a formula on the readings, the layout and the stated inputs; change one and the flow follows."
    ), style="note")
    ledger = Ledger(sheet, f"w{index}", 3)
    _stated(ledger, view, run)
    species_rows(ledger, view, run)
    ledger.row += 1
    point_table(ledger, view, run)
    compressibility_table(ledger, view, run)
    probe_table(ledger, view, run)
    correction_table(ledger, view, run)
    gas_rows(ledger, view, run)
    total_rows(ledger, view, run)
    for column, width in enumerate((34, 15, 13, *(10.5,) * 17), start=1):
        sheet.width(column, width)
    _chart(sheet, view, run, index)
    return sheet


def _stated(ledger: Ledger, view: View, run: RunView) -> None:
    """The inputs the job states for this run, converted once."""
    job, conditions, gas = view.result.job, run.result.run.conditions, run.result.run.gas
    ledger.title("Stated inputs")
    ledger.stated("barometric", "Barometric pressure", conditions.barometric, "Pa", conditions.barometric_source)
    if conditions.static is not None and "static" not in run.result.run.readings.columns:
        ledger.stated("static", "Static pressure (gauge)", conditions.static, "Pa")
    if conditions.temperature is not None:
        ledger.stated("temperature", "Temperature", conditions.temperature, "K")
    probe_rows(ledger, run)
    if gas.water is not None:
        unit = {"wet_bulb": "K", "dew_point": "K", "humidity_ratio": "kg/kg"}.get(gas.humidity, "1")
        ledger.stated("water", gas.humidity.replace("_", " ").capitalize(), gas.water, unit)
    basis = "wet" if gas.kind == "mixture" else "dry"
    for component, stated in gas.composition.items():
        ledger.stated(component, f"{component.replace('_', ' ').capitalize()} ({basis})", stated, "1")
    stack_stated(ledger, gas)
    for label, given, unit in (
        ("density", gas.density, "kg/m3"), ("density_temperature", gas.density_temperature, "K"),
        ("density_pressure", gas.density_pressure, "Pa"), ("molar_mass_given", gas.molar_mass, "g/mol"),
    ):
        if given is not None:
            ledger.stated(label, label.replace("_", " ").capitalize(), given, unit)
    for dimension, stated in job.plane.section.dimensions.items():
        ledger.stated(dimension, dimension.replace("_", " ").capitalize(), stated, "m")
    reference = job.reference
    if reference is not None:
        if reference.density is not None:
            ledger.stated("reference_density", "Standard air density", reference.density, "kg/m3", reference.source)
        else:
            assert reference.temperature is not None and reference.pressure is not None, "checked when read"
            ledger.stated("reference_temperature", "Standard temperature", reference.temperature, "K", reference.source)
            ledger.stated("reference_pressure", "Standard pressure", reference.pressure, "Pa", reference.source)
    if job.corrections.wall_factor is not None:
        ledger.number("wall_factor", "Wall-effect factor", job.corrections.wall_factor, "1", job.corrections.wall_factor_source)


def _chart(sheet: SheetSpec, view: View, run: RunView, index: int) -> None:
    """Draw the velocity along each line."""
    series = []
    for name in view.layout.lines:
        at = [i for i, line in enumerate(view.layout.line) if line == name]
        if at == list(range(at[0], at[-1] + 1)):
            series.append(Series(
                f"line {run.result.run.readings.line[at[0]]}", f"lay.depth.{at[0]}:lay.depth.{at[-1]}",
                f"w{index}.v.{at[0]}:w{index}.v.{at[-1]}", "line+points",
            ))
    sheet.chart(ScatterChart(
        title=f"Velocity along each line, run {run.result.run.name}", x_title=f"depth from the inner wall [{view.length_unit}]",
        y_title="velocity [m/s]", series=tuple(series), anchor="L3", width_cm=17, height_cm=10,
    ))
