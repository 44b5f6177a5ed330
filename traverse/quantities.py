"""The nomenclature: one record per reported quantity. Headers, JSON units and the documentation come from here."""

from __future__ import annotations

from dataclasses import dataclass


@dataclass(frozen=True, slots=True)
class Quantity:
    """A reported quantity.

    Parameters
    ----------
    name : str
        The name in the JSON form and in the library.
    label : str
        The words a report uses.
    symbol : str
        The symbol in formulas.
    unit : str
        The SI unit in which the program computes and the JSON form reports.
    si, us : str
        The units a report shows, by the job's ``units``.
    digits : int
        Significant digits on a report page; the workbook's cells carry all of them.
    meaning : str
        What it is, with its basis.
    """

    name: str
    label: str
    symbol: str
    unit: str
    si: str
    us: str
    digits: int
    meaning: str


def _q(name: str, symbol: str, unit: str, si: str, us: str, digits: int, meaning: str, label: str = "") -> Quantity:
    return Quantity(name, label or name.replace("_", " ").capitalize(), symbol, unit, si, us, digits, meaning)


QUANTITIES: tuple[Quantity, ...] = (
    _q("area", "A", "m2", "m2", "ft2", 4, "open area of the section"),
    _q("barometric_pressure", "p_bar", "Pa", "hPa", "inHg", 5, "absolute pressure of the atmosphere at the station"),
    _q("static_pressure", "p_stat", "Pa", "Pa", "inH2O", 4, "gauge static pressure at the plane, mean over the area"),
    _q("absolute_pressure", "p", "Pa", "hPa", "inHg", 5, "barometric plus static pressure, mean over the area"),
    _q("temperature", "T", "K", "degC", "degF", 4, "static temperature of the gas, mean over the area"),
    _q("moisture", "x_w", "1", "%", "%", 3, "mole fraction of water vapour in the wet gas"),
    _q("molar_mass_dry", "M_d", "g/mol", "g/mol", "lb/lbmol", 5, "molar mass of the gas without its water vapour",
       "Molar mass, dry"),
    _q("molar_mass", "M", "g/mol", "g/mol", "lb/lbmol", 5, "molar mass of the gas as it flows, wet", "Molar mass, wet"),
    _q("density", "rho", "kg/m3", "kg/m3", "lb/ft3", 4, "mass flow over actual flow"),
    _q("mean_root_differential_pressure", "sqrt(dp)", "Pa^0.5", "Pa^0.5", "inH2O^0.5", 5,
       "area-weighted mean of the roots of the differential pressures", "Mean root of differential pressure"),
    _q("mean_velocity", "v", "m/s", "m/s", "ft/s", 4, "area-weighted mean of the axial velocity"),
    _q("actual_flow", "Q", "m3/s", "m3/s", "cfm", 4, "volumetric flow at the conditions of the plane, wet",
       "Actual flow (wet)"),
    _q("standard_flow", "Q_s", "m3/s", "m3/s", "scfm", 4, "volumetric flow at standard conditions, wet",
       "Standard flow (wet)"),
    _q("dry_standard_flow", "Q_sd", "m3/s", "m3/s", "dscfm", 4, "volumetric flow at standard conditions, dry",
       "Standard flow (dry)"),
    _q("mass_flow", "m", "kg/s", "kg/s", "lb/h", 4, "mass flow of the wet gas"),
    _q("reynolds_number", "Re", "1", "1", "1", 3, "density, mean velocity and hydraulic diameter over viscosity"),
    _q("wall_factor", "WAF", "1", "1", "1", 4, "wall-effect factor applied to the mean velocity; null when none was"),
)

BY_NAME: dict[str, Quantity] = {quantity.name: quantity for quantity in QUANTITIES}
NAMES: tuple[str, ...] = tuple(BY_NAME)
