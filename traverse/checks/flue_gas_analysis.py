"""Measured carbon dioxide and oxygen fit the fuel that was burnt."""

import math

from traverse import tables
from traverse.checks._base import Check, Verdict, View
from traverse.physics import combustion
from traverse.physics.gas import MOLAR_MASS, REST

_CRITERION = "carbon dioxide within {limit} points of what the fuel gives at the measured oxygen"


def decide(view: View) -> Verdict:
    """Compare the measured carbon dioxide with the element balance of the stated fuel, and the fuel factor with its range."""
    table = tables.load("fuels")
    limit, source = float(table["analysis_check"]["limit"]), str(table["analysis_check"]["source"])
    criterion = _CRITERION.format(limit=table["analysis_check"]["limit"])
    gas = view.result.run.gas
    if gas.kind != "flue-gas":
        return Verdict(status="not applicable", observed="", message="Not a flue gas.", criterion=criterion, source=source)
    oxygen, found, monoxide = (gas.fraction(name) for name in ("oxygen", "carbon_dioxide", "carbon_monoxide"))
    both = "oxygen" in gas.composition and "carbon_dioxide" in gas.composition
    factor = combustion.fuel_factor(oxygen, found, monoxide) if both else math.nan
    observed = f"Fo = {factor:.3f}" if math.isfinite(factor) else ""
    if gas.fuel is None or not gas.fuel.measured:
        lacking = "No fuel is stated: [gas] fuel." if gas.fuel is None else "Only one of carbon dioxide and oxygen was measured."
        return Verdict(status="not evaluated", observed=observed, message=lacking, criterion=criterion, source=source)
    burnt = combustion.from_oxygen(gas.fuel.atoms, oxygen, monoxide)
    apart = 100.0 * (found - float(burnt["carbon_dioxide"]))
    observed = (f"{100 * found:.2f} % against {100 * float(burnt['carbon_dioxide']):.2f} % at {100 * oxygen:.2f} % oxygen "
                f"({apart:+.2f} points); greatest {100 * combustion.greatest_carbon_dioxide(gas.fuel.atoms):.2f} %; {observed}")
    span = table["fuel_factor"].get(gas.fuel.name)
    inside = span is None or float(span[0]) <= factor <= float(span[1])
    if span is not None:
        criterion += f", and Fo from {span[0]} to {span[1]}"
        source += f"; Fo: {table['fuel_factor']['source']}"
    met = abs(apart) <= limit + 1e-9 and inside
    # The molar mass of the dry gas that a deviation stands for; the velocity goes with the inverse root of the wet one.
    mass = 0.01 * apart * (MOLAR_MASS["CO2"] - REST) * (1.0 - view.result.value("moisture"))
    effect = f"about {-50.0 * mass / view.result.value('molar_mass'):+.2g} % of the velocity, were the oxygen right"
    return Verdict(
        status="pass" if met else "fail", observed=observed, criterion=criterion, source=source, effect="none" if met else effect,
        message="" if met else "Another fuel, air drawn into the sampling line, carbon dioxide from the process, or an analyser off its "
        "calibration.",
    )


CHECK = Check(id="flue-gas-analysis", title="Flue-gas analysis against the fuel", scope="run", decide=decide)
