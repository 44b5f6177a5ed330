"""The pressure of the atmosphere at the plane: a barometer's, or one that follows from a stated choice."""

from __future__ import annotations

import re

from traverse.errors import JobError
from traverse.importers._schema import Table
from traverse.model import Finding
from traverse.physics import atmosphere
from traverse.units import UNITS, Stated, parse

# Plausible pressures of the atmosphere at a station [Pa]: below 30 kPa is higher than any peak, above 120 kPa deeper
# than any mine. Common practice, no source.
STATION = (30e3, 120e3)
# The ways of stating it; each needs what stands in brackets beside it.
WAYS = ("barometric", "altitude", "sea_level_pressure", "altimeter_setting", "air_temperature")
EXPECTED = "barometric | altitude (model) | sea_level_pressure (altitude, air_temperature) | altimeter_setting (altitude)"
# EPA Method 2, note to 6.5, from memory: 0.1 inHg less for every 100 ft, 2.5 mmHg for every 30 m.
EPA_RULE = {"us": ("0.1 inHg", "100 ft"), "si": ("2.5 mmHg", "30 m")}
MILD = 288.15


def pressure(table: Table, *, epa: str = "") -> tuple[Stated, str, list[Finding]]:
    """Return the absolute pressure outside at the height of the plane, where it is from, and what to know about it.

    ``epa`` names the unit system whose printed rule holds for the height of the plane above the barometer, '' for none.

    Raises
    ------
    JobError
        If it is missing, stated in two ways, incomplete, or none an atmosphere can have.
    """
    stated, source, findings = _at_barometer(table)
    height = table.stated("height_above_barometer")
    if height is None:
        return stated, source, findings
    if abs(height.value) > 500.0:
        raise JobError(f"{height.text!r}", where=table.where("height_above_barometer"), expected="a height below 500 m")
    if epa:
        drop, rise = (parse(text, kind).value for text, kind in zip(EPA_RULE[epa], ("pressure", "length"), strict=True))
        value = stated.value - drop * height.value / rise
        rule = f"{EPA_RULE[epa][0]} for every {EPA_RULE[epa][1]} (EPA Method 2, from memory)"
    else:
        warm = table.stated("air_temperature")
        value = float(atmosphere.raised_pressure(stated.value, height.value, warm.value if warm else MILD))
        rule = f"the weight of outside air at {warm.text if warm else '15 degC'}"
    change = 100 * (value / stated.value - 1)
    findings.append(Finding(
        level="note", topic="barometric pressure", setting="[conditions] height_above_barometer",
        message=f"{value:.0f} Pa at the plane, {height.text} above the barometer, by {rule}: {change:+.2f} % of {stated.value:.0f} Pa.",
    ))
    return Stated(value, value, UNITS["Pa"], f"{stated.text}, {height.text} higher"), f"{source}, {height.text} higher", findings


def _at_barometer(table: Table) -> tuple[Stated, str, list[Finding]]:
    primary = [key for key in ("barometric", "sea_level_pressure", "altimeter_setting") if key in table]
    if len(primary) > 1 or ("barometric" in table and "altitude" in table):
        both = [*primary, *(["altitude"] if "altitude" in table else [])]
        raise JobError(
            f"both {' and '.join(both)}", where=table.name, expected=f"exactly one of {EXPECTED}",
            how="a weather report's pressure is reduced to sea level: give it as sea_level_pressure" if "altitude" in both else "",
        )
    if "barometric" in table:
        return _read(table)
    if "altitude" not in table:
        raise JobError(
            "no barometric pressure" if not primary else f"{primary[0]} without an altitude", where=table.name,
            expected="the absolute pressure at the station" if not primary else EXPECTED,
            how='barometric = "29.65 inHg", or altitude = "\u2026" with model = "standard-atmosphere"',
        )
    if "sea_level_pressure" in table:
        return _sea_level(table)
    return _altimeter(table) if "altimeter_setting" in table else _standard(table)


def _read(table: Table) -> tuple[Stated, str, list[Finding]]:
    stated = table.stated("barometric")
    assert stated is not None, "asked for"
    if re.search(r"psig|gauge", stated.text, re.I) or not STATION[0] <= stated.value <= STATION[1]:
        raise JobError(
            f"a barometric pressure of {stated.text!r} ({stated.value / 1000:.4g} kPa)", where=table.where("barometric"),
            expected="the absolute pressure at the station, 30 to 120 kPa (8.9 to 35.4 inHg)",
            how="is this a gauge pressure, or a pressure reduced to sea level? give the station pressure",
        )
    if "model" in table:
        raise JobError("model beside barometric", where=table.where("model"), expected="model only with altitude")
    return stated, "[conditions] barometric", []


def _standard(table: Table) -> tuple[Stated, str, list[Finding]]:
    altitude = table.stated("altitude")
    assert altitude is not None, "asked for"
    if "model" not in table:
        raise JobError(
            "altitude without a model", where=table.where("altitude"), expected="the model that turns it into a pressure",
            how='model = "standard-atmosphere"; a reading of a barometer is better',
        )
    found = float(atmosphere.pressure_at_altitude(altitude.value))
    _refuse(found, altitude, table)
    source = f"standard atmosphere at an altitude of {altitude.text}"
    return Stated(found, found, UNITS["Pa"], altitude.text), source, [Finding(
        level="attention", topic="barometric pressure", setting="[conditions] barometric",
        message=f"{found:.0f} Pa by the {source}; a barometer may differ by some percent.",
    )]


def _sea_level(table: Table) -> tuple[Stated, str, list[Finding]]:
    reduced, altitude, warm = table.stated("sea_level_pressure"), table.stated("altitude"), table.stated("air_temperature")
    assert reduced is not None and altitude is not None, "asked for"
    if warm is None or "model" in table:
        raise JobError(
            "no air_temperature" if warm is None else "model", where=table.name,
            expected="the outside air temperature beside sea_level_pressure and altitude, and no model",
            how='for example air_temperature = "12 degC"; at 1600 m ten degrees are 0.7 % of the pressure',
        )
    found = float(atmosphere.station_pressure(reduced.value, altitude.value, warm.value))
    return _reduced(table, reduced, altitude, found, f"sea-level pressure {reduced.text} at {altitude.text} and {warm.text} (Hess)")


def _altimeter(table: Table) -> tuple[Stated, str, list[Finding]]:
    setting, altitude = table.stated("altimeter_setting"), table.stated("altitude")
    assert setting is not None and altitude is not None, "asked for"
    if "model" in table:
        raise JobError("model", where=table.where("model"), expected="no model beside altimeter_setting")
    found = float(atmosphere.altimeter_pressure(setting.value, altitude.value))
    return _reduced(table, setting, altitude, found, f"altimeter setting {setting.text} at {altitude.text} (formula from memory)")


def _reduced(table: Table, stated: Stated, altitude: Stated, found: float, words: str) -> tuple[Stated, str, list[Finding]]:
    if not 87e3 <= stated.value <= 109e3:
        raise JobError(f"{stated.text!r}", where=table.name, expected="a pressure reduced to sea level, 870 to 1090 hPa")
    _refuse(found, altitude, table)
    return Stated(found, found, UNITS["Pa"], words), words, [Finding(
        level="attention", topic="barometric pressure", setting="[conditions] barometric",
        message=f"{found:.0f} Pa at the station from the {words}; taken as it stands the density would be "
        f"{100 * (stated.value / found - 1):+.1f} % off.",
    )]


def _refuse(found: float, altitude: Stated, table: Table) -> None:
    if not STATION[0] <= found <= STATION[1]:
        wanted = "an altitude from -500 m to 9000 m (5000 m for a reduced pressure)"
        raise JobError(f"{altitude.text!r}", where=table.where("altitude"), expected=wanted)
