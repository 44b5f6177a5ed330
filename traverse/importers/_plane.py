"""[plane], [gauge], [conditions], [reference], [design] and [corrections]: tables to records."""

from __future__ import annotations

import re
from typing import Literal, cast

from traverse import tables
from traverse.errors import JobError
from traverse.importers import _barometer, _section
from traverse.importers._schema import Table
from traverse.model import Conditions, Corrections, Design, Finding, Gauge, Plane, Reference, Section
from traverse.units import UNITS, Stated, parse

# Gauge pressures that look like absolute ones. Common practice, no source.
LOOKS_ABSOLUTE = (80e3, 115e3)
# Exponents of a turbulent profile: 5 to 10 are met in pipes (common practice), beyond these it is no profile of a duct.
PROFILES = (3.0, 20.0)


def plane(table: Table) -> tuple[Plane, tuple[Finding, ...]]:
    """Return the measuring plane, and what there is to say about how its section was measured."""
    section, findings = _section.build(table)
    ports = _ports(table)
    for key, lengths in (("upstream", (table.stated("upstream"),)), ("downstream", (table.stated("downstream"),)), ("port_depth", ports)):
        for length in lengths:
            if length is not None and length.value < 0:
                raise JobError(f"{length.text!r}", where=table.where(key), expected="a length of zero or more")
    alike = len({length.value for length in ports}) == 1
    return Plane(
        section=section, upstream=table.stated("upstream"), downstream=table.stated("downstream"),
        port_depth=ports[0] if alike else None, port_depths=ports if isinstance(table.get("port_depth"), tuple) else (),
        wall=cast("Literal['metal', 'brick'] | None", table.text("wall")),
    ), findings


def _ports(table: Table) -> tuple[Stated, ...]:
    """Return the stated port depths: none, one for all, or one a line."""
    found = table.get("port_depth")
    if found is None:
        return ()
    return found if isinstance(found, tuple) else (found,)


def units_system(table: Table, section: Section) -> tuple[Literal["si", "us"], tuple[Finding, ...]]:
    """Return how the report speaks: as the job says, else as the section was measured."""
    stated = table.text("units")
    if stated is not None:
        return cast("Literal['si', 'us']", stated), ()
    inches = any(value.unit.symbol in {"in", "ft", "yd"} for value in section.dimensions.values())
    system: Literal["si", "us"] = "us" if inches else "si"
    return system, (Finding(
        level="note", topic="units", setting="[job] units",
        message=f'units is not stated; "{system}" because the section is in {"inches or feet" if inches else "metric units"}.',
    ),)


def merge_conditions(base: Table, over: Table | None) -> Table:
    """Return the conditions of one run; a [[run]] barometer replaces the default's altitude, and the reverse."""
    if over is None:
        return base
    kept = dict(base.values)
    if any(key in over for key in _barometer.WAYS):
        kept = {key: value for key, value in kept.items() if key not in {*_barometer.WAYS, "model"}}
    return Table(over.name, {**kept, **over.values})


def conditions(table: Table, *, static_column: bool = False, epa: str = "") -> tuple[Conditions, tuple[Finding, ...]]:
    """Return the state at the plane.

    Raises
    ------
    JobError
        If the barometric pressure is missing, stated twice, or not one an atmosphere can have, or if the static
        pressure looks absolute.
    """
    barometric, source, findings = _barometer.pressure(table, epa=epa)
    static = table.stated("static")
    if static is not None:
        _gauge(table, static)
    elif not static_column:
        findings.append(Finding(
            level="attention", topic="static pressure", setting="[conditions] static",
            message="static pressure not stated, taken as 0",
        ))
    temperature = table.stated("temperature")
    if temperature is not None and not temperature.value > 0:
        raise JobError(
            f"{temperature.text!r}", where=table.where("temperature"), expected="a temperature above absolute zero"
        )
    return Conditions(
        barometric=barometric, barometric_source=source, static=static, temperature=temperature
    ), tuple(findings)


def _gauge(table: Table, static: Stated) -> None:
    low, high = LOOKS_ABSOLUTE
    if re.search(r"psia|abs", static.text, re.I) or low <= static.value <= high:
        raise JobError(
            f"a static pressure of {static.text!r} looks absolute", where=table.where("static"),
            expected="the gauge pressure at the plane (negative under suction)", how="subtract the barometric pressure",
        )


def reference(table: Table) -> Reference | None:
    """Return the standard conditions the job states, None where it states none."""
    if not table.values:
        return None
    temperature, pressure, density = table.stated("temperature"), table.stated("pressure"), table.stated("density")
    if density is not None and (temperature is not None or pressure is not None):
        raise JobError(
            "density beside temperature or pressure", where=table.name, expected="temperature and pressure, or density"
        )
    if density is None and (temperature is None or pressure is None):
        lacking = "temperature" if temperature is None else "pressure"
        raise JobError(f"no {lacking}", where=table.name, expected="both temperature and pressure, or density")
    stated = [value for value in (temperature, pressure, density) if value is not None]
    for value in stated:
        if not value.value > 0:
            raise JobError(f"{value.text!r}", where=table.name, expected="a value above zero")
    if pressure is not None and pressure.value < 10e3:
        raise JobError(f"{pressure.text!r}", where=table.where("pressure"), expected="an absolute pressure")
    return Reference(
        temperature=temperature, pressure=pressure, density=density,
        source=f"[reference] {' and '.join(value.text for value in stated)}",
    )


def design(table: Table, section: Section) -> Design | None:
    """Return the design flow, or the one that a mean velocity over the section is; None where the job states neither."""
    if not table.values:
        return None
    flow, speed = table.stated("actual_flow"), table.stated("velocity")
    if flow is not None and speed is not None:
        raise JobError("both actual_flow and velocity", where=table.name, expected="exactly one of actual_flow | velocity")
    if speed is not None:
        value = speed.value * section.area
        flow = Stated(value, value, UNITS["m3/s"], f"{speed.text} over the section")
    if flow is None:
        table.need("actual_flow", 'the design flow at the conditions of the plane, such as "24000 cfm", or velocity, such as "20 ft/s"')
    assert flow is not None
    if not flow.value > 0:
        key, shown = ("actual_flow", flow) if speed is None else ("velocity", speed)
        raise JobError(f"{shown.text!r}", where=table.where(key), expected="a flow or velocity above zero")
    text, profile = table.text("tolerance"), table.number("profile")
    if profile is not None and not PROFILES[0] <= profile <= PROFILES[1]:
        raise JobError(
            f"{profile:g}", where=table.where("profile"),
            expected=f"the exponent n of a profile (wall distance)^(1/n), a number from {PROFILES[0]:g} to {PROFILES[1]:g}",
        )
    return Design(actual_flow=flow, tolerance=None if text is None else _tolerance(table, text), velocity=speed, profile=profile)


def gauge(table: Table) -> Gauge | None:
    """Return the gauge that will be used, None where the job states none."""
    if not table.values:
        return None
    found = Gauge(range=table.stated("range"), division=table.stated("division"))
    for key, stated in (("range", found.range), ("division", found.division)):
        if stated is not None and not stated.value > 0:
            raise JobError(f"{stated.text!r}", where=table.where(key), expected="a pressure above zero")
    if found.range is not None and found.division is not None and found.division.value > found.range.value:
        raise JobError(
            f"a division of {found.division.text!r} on a range of {found.range.text!r}", where=table.name,
            expected="a division that is a part of the range",
        )
    return found


def _tolerance(table: Table, text: str) -> Stated:
    match = re.fullmatch(r"\s*(?:±|\+/?-)\s*(.+)", text)
    if match is None:
        raise JobError(f"{text!r}", where=table.where("tolerance"), expected='a symmetric tolerance such as "±10 %"')
    value = parse(match.group(1), "fraction", table.where("tolerance"))
    if not 0 < value.value < 1:
        raise JobError(f"{text!r}", where=table.where("tolerance"), expected="a percentage between 0 and 100 %")
    return Stated(value.value, value.number, value.unit, text)


def corrections(table: Table, measured: Plane) -> tuple[Corrections, tuple[Finding, ...]]:
    """Return the corrections that the job names; nothing is corrected otherwise."""
    factor, source, findings = _wall_factor(table, measured)
    turbulence = table.stated("turbulence")
    if turbulence is not None and not 0 <= turbulence.value < 1:
        raise JobError(f"{turbulence.text!r}", where=table.where("turbulence"), expected="a percentage from 0 to below 100 %")
    return Corrections(
        wall_factor=factor, wall_factor_source=source, turbulence=turbulence, blockage=table.flag("blockage"),
        displacement=_displacement(table),
    ), findings


def _displacement(table: Table) -> Literal["", "macmillan", "mckeon"]:
    value = table.get("displacement")
    if value is True:
        return "macmillan"
    if value in (None, False):
        return ""
    if value not in ("macmillan", "mckeon"):
        raise JobError(f"{value!r}", where=table.where("displacement"), expected='true, "macmillan" or "mckeon"')
    return cast("Literal['macmillan', 'mckeon']", value)


def _wall_factor(table: Table, measured: Plane) -> tuple[float | None, str, tuple[Finding, ...]]:
    value, where = table.get("wall_factor"), table.where("wall_factor")
    if value is None:
        return None, "", ()
    if isinstance(value, (int, float)) and not isinstance(value, bool):
        if not 0.9 <= value <= 1.0:
            raise JobError(f"a wall factor of {value:g}", where=where, expected="a number from 0.9 to 1")
        return float(value), "[corrections] wall_factor", ()
    if value == "measured":
        return None, "", ()  # found when the runs are known
    if value != "default":
        raise JobError(f"{value!r}", where=where, expected='a bare number, "default", or "measured" with [wall_effects]')
    if measured.section.shape != "round":
        raise JobError(
            f'"default" in a section of shape {measured.section.shape}', where=where,
            expected="a round section; the default is for round stacks only",
        )
    if measured.wall is None:
        raise JobError('"default" without [plane] wall', where=where, expected='[plane] wall = "metal" or "brick"')
    table_2h = tables.load("wall_factor")
    factor, source = float(table_2h["default"][measured.wall]), str(table_2h["source"])
    return factor, source, (Finding(
        level="note", topic="wall factor", setting="[corrections] wall_factor",
        message=f"wall factor {factor:.4f}, the default for a {measured.wall} wall ({source}).",
    ),)
