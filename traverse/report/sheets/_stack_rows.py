"""Stack gas as formulas: what a train collected, what a fuel gives, wet and dry bulb by the relations in use, mixtures."""

from __future__ import annotations

from collections.abc import Mapping

import numpy as np

from traverse.model import Fuel, Gas
from traverse.physics import combustion, gas, mixture, stack_moisture
from traverse.physics.gas import DRY_AIR
from traverse.physics.moist_air import WET_BULB
from traverse.physics.stack_moisture import CARRIER, FERREL, OWN, PRINTED, RESIDUAL, WATER_DENSITY, fahrenheit
from traverse.report.sheets._ledger import Ledger
from traverse.report.sheets._run_view import RunView
from traverse.units import UNITS

_METHOD_4 = "EPA Method 4, constants as printed, from memory"
_BALANCE = "balance of the elements"


def stack_stated(ledger: Ledger, matter: Gas) -> None:
    """Put what the job states of a sampling train and of a fuel."""
    train, fuel = matter.train, matter.fuel
    if train is not None:
        ledger.stated("condensed", "Condensed water", train.condensed, "m3" if train.by_volume else "kg")
        for name, stated, unit in (
            ("silica_gel", train.silica_gel, "kg"), ("meter_volume", train.meter_volume, "m3"),
            ("meter_temperature", train.meter_temperature, "K"), ("meter_pressure", train.meter_pressure, "Pa"),
            ("orifice_pressure", train.orifice_pressure, "Pa"), ("meter_barometric", train.barometric, "Pa"),
        ):
            if stated is not None:
                ledger.stated(name, name.replace("_", " ").capitalize(), stated, unit)
        ledger.number("meter_factor", "Meter factor", train.meter_factor, "1")
    if fuel is not None:
        for name, part in fuel.parts.items():
            label = f"Fuel: {name.replace('_', ' ')} by {fuel.basis}"
            ledger.number(f"fuel.{name}", label, part, "1", f"{fuel.texts[name]}; {fuel.source}")
        for name, stated, unit in (
            ("excess_air", fuel.excess_air, "1"), ("air_humidity_ratio", fuel.air_humidity_ratio, "kg/kg")
        ):
            if stated is not None:
                ledger.stated(name, name.replace("_", " ").capitalize(), stated, unit)


def train_rows(ledger: Ledger, run: RunView) -> str:
    """Put the water and the dry gas of a sampling train and return the formula of its moisture, before saturation."""
    train, own = run.result.run.gas.train, run.setting.constants
    assert train is not None, "there is a train"
    metered = {name: value for name, value in run.inputs.items() if name not in {"water"}}
    metered.setdefault("meter_barometric", run.inputs["barometric"])
    system: stack_moisture.System = "modern" if own is None else "us" if own.temperature == "degF" else "si"
    found = {name: float(value[0]) for name, value in stack_moisture.train(
        metered, system, by_volume=train.by_volume, approximation=train.approximation
    ).items()}
    barometer = "{meter_pressure}" if train.meter_pressure else "{meter_barometric}" if train.barometric else "{barometric}"
    gel, orifice = "{silica_gel}" if train.silica_gel else "0", "{orifice_pressure}" if train.orifice_pressure else "0"
    if own is None:
        mass = "{condensed}"
        if train.by_volume:
            ledger.number("mt.density", "  density of the condensate", WATER_DENSITY, "kg/m3", "water at 20 degC, from memory")
            mass = "{condensed}*{mt.density}"
        ledger.live("mt.water", "Water collected", f"({mass}+{gel})/({{Mw}}/1000)", found["water"], "mol", fmt="0.0000")
        ledger.live("mt.gas", "Dry gas metered", f"{{meter_factor}}*{{meter_volume}}*({barometer}+{orifice})/({{R}}*{{meter_temperature}})",
                    found["gas"], "mol", "gas law", fmt="0.0000")
    else:
        _printed_train(ledger, system, train.by_volume, found, (barometer, orifice, gel))
    residual = f"+{RESIDUAL!r}" if train.approximation else ""
    ledger.live("xt", "Moisture by the train", f"{{mt.water}}/({{mt.water}}+{{mt.gas}}){residual}", found["moisture"], "1",
                "approximation method, with its residual" if train.approximation else "before saturation", fmt="0.000000")
    return "{xt}"


def _printed_train(ledger: Ledger, system: str, by_volume: bool, found: Mapping[str, float], parts: tuple[str, str, str]) -> None:
    """Put the train by the printed constants of Method 4, in the method's own units."""
    barometer, orifice, gel = parts
    scale, offset, mercury, head, size = OWN[system]
    k = PRINTED[system]
    for name, label, value, unit in (
        ("mt.k", "  dry gas at standard conditions", k["dry_gas"], f"{'degR' if system == 'us' else 'K'}/{mercury}"),
        ("mt.kv", "  vapour of a millilitre of water", k["water_by_volume"], f"{size}/ml"),
        ("mt.km", "  vapour of a gram of water", k["water_by_mass"], f"{size}/g"),
        ("mt.mercury", f"  {mercury} in Pa", UNITS[mercury].factor, "Pa"), ("mt.head", f"  {head} in Pa", UNITS[head].factor, "Pa"),
        ("mt.size", f"  {size} in m3", UNITS[size].factor, "m3"),
    ):
        ledger.number(name, label, value, unit, _METHOD_4 if name in {"mt.k", "mt.kv", "mt.km"} else "")
    water = "{condensed}*1000000*{mt.kv}" if by_volume else "{condensed}*1000*{mt.km}"
    absolute = f"{{meter_temperature}}*1.8-459.67+{offset:g}" if scale == "degF" else f"{{meter_temperature}}-273.15+{offset:g}"
    ledger.live("mt.water", "Water vapour at standard conditions", f"{water}+{gel}*1000*{{mt.km}}", found["water"], size, _METHOD_4)
    pressure = f"({barometer}/{{mt.mercury}}+{orifice}/{{mt.head}}/{{ratio}})"
    ledger.live("mt.gas", "Dry gas at standard conditions",
                f"{{mt.k}}*({{meter_factor}}*{{meter_volume}}/{{mt.size}})*{pressure}/({absolute})", found["gas"], size, _METHOD_4)


def fuel_rows(ledger: Ledger, run: RunView) -> None:
    """Put the flue gas of a fuel; the fractions that count get the names of an analysis, the moisture is ``xb``."""
    fuel, stack = run.result.run.gas.fuel, run.setting.stack
    if fuel is None or stack is None:
        return
    ledger.title("Combustion")
    _atoms(ledger, fuel)
    excess = fuel.excess_air is not None
    z = "{carbon_monoxide}" if "carbon_monoxide" in run.result.run.gas.composition else "0"
    monoxide, humid = run.input("carbon_monoxide"), run.input("air_humidity_ratio")
    balance = combustion.from_excess_air if excess else combustion.from_oxygen
    burnt = {name: float(value) for name, value in balance(
        fuel.atoms, run.input("excess_air" if excess else "oxygen"), monoxide, humid
    ).items()}
    for name, label, value in (
        ("air.O2", "  oxygen in dry air", DRY_AIR["O2"]), ("air.CO2", "  carbon dioxide in dry air", DRY_AIR["CO2"]),
        ("air.rest", "  all but oxygen in dry air", DRY_AIR["N2"] + DRY_AIR["Ar"] + DRY_AIR["CO2"]),
    ):
        ledger.number(name, label, value, "1", "CIPM-2007")
    if excess:
        ledger.live("b.air", "Dry air per unit of fuel", "{b.need}*(1+{excess_air})/{air.O2}", burnt["dry_air"], "mol", _BALANCE)
        ledger.live("b.gas", "Dry gas per unit of fuel", f"({{b.own}}+{{air.rest}}*{{b.air}}+{{air.O2}}*{{b.air}}-{{b.need}})/(1-{z}/2)",
                    burnt["dry_gas"], "mol", _BALANCE)
        ledger.live("oxygen", "Oxygen (dry)", f"({{air.O2}}*{{b.air}}-{{b.need}})/{{b.gas}}+{z}/2", burnt["oxygen"], "1", _BALANCE)
    else:
        ledger.live("b.gas", "Dry gas per unit of fuel",
                    f"({{b.own}}+{{air.rest}}/{{air.O2}}*{{b.need}})/(1-{{oxygen}}-{{air.rest}}/{{air.O2}}*({{oxygen}}-{z}/2))",
                    burnt["dry_gas"], "mol", _BALANCE)
        ledger.live("b.air", "Dry air per unit of fuel", f"(({{oxygen}}-{z}/2)*{{b.gas}}+{{b.need}})/{{air.O2}}", burnt["dry_air"], "mol",
                    _BALANCE)
    prefix = "" if stack.fuel_composition else "b."
    ledger.live(f"{prefix}carbon_dioxide", "Carbon dioxide (dry) of the fuel", f"({{b.C}}+{{air.CO2}}*{{b.air}})/{{b.gas}}-{z}",
                burnt["carbon_dioxide"], "1", _BALANCE, fmt="0.000000")
    ledger.live(f"{prefix}sulfur_dioxide", "Sulfur dioxide (dry) of the fuel", "{b.S}/{b.gas}", burnt["sulfur_dioxide"], "1", _BALANCE,
                fmt="0.000000")
    water = "{b.H}/2+{b.W}" + ("+{b.air}*{air_humidity_ratio}/{eps}" if fuel.air_humidity_ratio else "")
    ledger.live("xb", "Moisture of the fuel", f"({water})/({water}+{{b.gas}})", burnt["moisture"], "1", _BALANCE, fmt="0.000000")


def _atoms(ledger: Ledger, fuel: Fuel) -> None:
    """Put the atoms in a unit of the fuel: C, H, O, N, S, its water W, the oxygen need and the dry gas of its own."""
    atoms, letters = fuel.atoms, dict(zip(combustion.ELEMENTS, "CHONS", strict=True))
    unit = "mol/g" if fuel.basis == "mass" else "mol/mol"
    if fuel.basis == "mass":
        for name in combustion.ELEMENTS:
            ledger.number(f"am.{name}", f"  atomic mass of {name}", combustion.ATOMIC_MASS[name], "g/mol", "conventional atomic weight")
    for place, (name, letter) in enumerate(letters.items()):
        if fuel.basis == "mass":
            formula = f"{{fuel.{name}}}/{{am.{name}}}" if name in fuel.parts else "0"
        else:
            terms = [f"{combustion.MOLECULES[part][place]}*{{fuel.{part}}}" for part in fuel.parts if combustion.MOLECULES[part][place]]
            formula = "+".join(terms) or "0"
        ledger.live(f"b.{letter}", f"Atoms of {name}", formula, getattr(atoms, name), unit, fmt="0.000000")
    water = "{fuel.water}/(2*{am.hydrogen}+{am.oxygen})" if "water" in fuel.parts and fuel.basis == "mass" else "0"
    ledger.live("b.W", "Water held by the fuel", water, atoms.water, unit, fmt="0.000000")
    ledger.live("b.need", "Oxygen for complete combustion", "{b.C}+{b.H}/4+{b.S}-{b.O}/2", atoms.oxygen_need, unit, _BALANCE)
    ledger.live("b.own", "Dry gas from the fuel itself", "{b.C}+{b.S}+{b.N}/2", atoms.dry_products, unit, _BALANCE)


def psychrometer_rows(ledger: Ledger, run: RunView) -> str:
    """Put the wet bulb by the relation that was named and return the formula of the moisture; ``pws`` is there already."""
    stack = run.setting.stack
    assert stack is not None and stack.psychrometer, "a relation was named"
    wet, dry, pressure = run.input("water"), run.mean["temperature"], run.mean["pressure"]
    if stack.psychrometer == "energy-balance":
        return _energy_balance(ledger, run, wet, dry)
    constants = CARRIER if stack.psychrometer == "carrier" else FERREL
    for name, value in constants.items():
        ledger.number(f"pb.{name}", f"  {stack.psychrometer.capitalize()}: {name}", value, "1", "degF; from memory")
    ledger.live("pb.tw", "Wet bulb", "({water}-273.15)*1.8+32", float(fahrenheit(wet)), "degF", fmt="0.00")
    ledger.live("pb.fall", "Dry bulb less wet bulb", "({Tm}-{water})*1.8", (dry - wet) * 1.8, "K (degF steps)", fmt="0.00")
    if stack.psychrometer == "carrier":
        formula = "({pws}-({pm}-{pws})*{pb.fall}/({pb.first}-{pb.slope}*{pb.tw}))/{pm}"
    else:
        formula = "({pws}-{pb.rate}*{pm}*{pb.fall}*(1+({pb.tw}-{pb.freezing})/{pb.span}))/{pm}"
    value = float(stack_moisture.wet_bulb_fraction(stack.psychrometer, wet, dry, pressure))
    ledger.live("xw", "Moisture by wet bulb", formula, value, "1", f"{stack.psychrometer.capitalize()}'s formula", fmt="0.000000")
    return "{xw}"


def _energy_balance(ledger: Ledger, run: RunView, wet: float, dry: float) -> str:
    """Put the energy balance with the heat capacity of the gas itself."""
    branch = WET_BULB["ice" if wet < 273.15 else "water"]
    for name in ("latent", "slope", "vapour"):
        ledger.number(f"pb.{name}", f"  {name}", branch[name], "kJ/kg", "ASHRAE Fundamentals 2017 ch. 1, eqs. 33 and 35")
    ledger.number("pb.Mw", "  molar mass of water", gas.MOLAR_MASS["H2O"], "g/mol")
    middle = (wet + dry) / 2.0
    ledger.live("pb.T", "Middle of wet and dry bulb", "({water}+{Tm})/2", middle, "K", fmt="0.00")
    species = {"oxygen": "O2", "carbon_dioxide": "CO2", "carbon_monoxide": "CO", "sulfur_dioxide": "SO2"}
    rest = "(1" + "".join(f"-{{{name}}}" for name in run.analysed) + ")"
    shares = {species[name]: f"{{{name}}}" for name in run.analysed}
    shares |= {"N2": f"{1.0 - gas.ARGON_SHARE!r}*{rest}", "Ar": f"{gas.ARGON_SHARE!r}*{rest}"}
    terms = []
    for name, share in shares.items():
        a = gas.HEAT_CAPACITY[name]
        t = "{pb.T}"
        polynomial = f"{a[0]!r}+{t}*({a[1]!r}+{t}*({a[2]!r}+{t}*({a[3]!r}+{t}*({a[4]!r}))))"
        value = a[0] + middle * (a[1] + middle * (a[2] + middle * (a[3] + middle * a[4])))
        ledger.live(f"pb.cp.{name}", f"  heat capacity of {name} over R", polynomial, value, "1", "polynomial of the NASA form")
        terms.append(f"{share}*{{pb.cp.{name}}}")
    fractions = {name: np.asarray(part) for name, part in gas.wet_composition(
        run.input("oxygen"), run.input("carbon_dioxide"), run.input("carbon_monoxide"), run.input("sulfur_dioxide"), 0.0
    ).items() if name != "H2O"}
    heat = float(mixture.heat_capacity(fractions, middle))
    ledger.live("pb.cp", "Heat capacity of the dry gas", f"{{R}}*({'+'.join(terms)})", heat, "J/(mol K)")
    evaporation = gas.MOLAR_MASS["H2O"] * (branch["latent"] - branch["slope"] * (wet - 273.15))
    ledger.live("pb.L", "Heat of evaporation at the wet bulb", "{pb.Mw}*({pb.latent}-{pb.slope}*({water}-273.15))", evaporation, "J/mol")
    x = float(stack_moisture.wet_bulb_fraction("energy-balance", wet, dry, run.mean["pressure"], heat))
    ledger.live("X", "Water per mole of dry gas",
                "({pws}/({pm}-{pws})*{pb.L}-{pb.cp}*({Tm}-{water}))/({pb.L}+{pb.Mw}*{pb.vapour}*({Tm}-{water}))", x / (1.0 - x), "mol/mol",
                "energy balance of the wet bulb with the heat capacity of this gas", fmt="0.000000")
    return "{X}/(1+{X})"


def mixture_rows(ledger: Ledger, run: RunView) -> str:
    """Put the dry fractions of a mixture and return the formula of its dry molar mass."""
    stack = run.setting.stack
    assert stack is not None, "a mixture names its species"
    parts = {name: run.input(name) for name in stack.species}
    fractions = mixture.dry_fractions(parts, stack.species, stack.rest, run.input("water"))
    names = {mixture.SPECIES[name]: f"{{{name}}}" for name in stack.species}
    water = "-{water}" if run.setting.humidity == "moisture" else ""
    total = "(" + "+".join(names.values()) + ")"
    if stack.rest:
        names[mixture.SPECIES[stack.rest]] = f"(1{water}" + "".join(f"-{{{name}}}" for name in stack.species) + ")"
        total = f"(1{water})"
    terms = []
    for symbol, formula in names.items():
        ledger.number(f"m.{symbol}", f"  molar mass of {symbol}", gas.MOLAR_MASS[symbol], "g/mol")
        ledger.live(f"d.{symbol}", f"  {symbol} in the dry gas", f"{formula}/{total}", float(fractions[symbol]), "1", fmt="0.000000")
        terms.append(f"{{m.{symbol}}}*{{d.{symbol}}}")
    return "+".join(terms)
