"""What to take up the ladder and what to look at before the first reading. Where a document demands it, it is named."""

from __future__ import annotations

from dataclasses import dataclass

from traverse import tables
from traverse.model import Setup

PRACTICE = "common practice, no source"


@dataclass(frozen=True, slots=True, kw_only=True)
class Item:
    """One thing to take or to do, and who says so; ``source`` is empty where it needs none."""

    text: str
    source: str = ""


@dataclass(frozen=True, slots=True, kw_only=True)
class Checklist:
    """A list with a title, such as 'Leak check'."""

    id: str
    title: str
    items: tuple[Item, ...]


def checklists(setup: Setup) -> tuple[Checklist, ...]:
    """Return the lists for a job: take along, leak check, zero, before the first reading, at the end."""
    return (
        Checklist(id="take", title="Take along", items=_take(setup)),
        Checklist(id="leak-check", title="Leak check", items=_leak_check(setup)),
        Checklist(id="zero", title="Zero of the gauge", items=_zero(setup)),
        Checklist(id="before", title="Before the first reading", items=_before(setup)),
        Checklist(id="end", title="At the end", items=_end(setup)),
    )


def _epa(setup: Setup) -> bool:
    return setup.method.startswith("epa")


def _take(setup: Setup) -> tuple[Item, ...]:
    table = tables.load("planning")
    kind = setup.pitot.type if setup.pitot is not None else "pitot-static"
    turned = " with its angle-measuring device" if kind.endswith("dimensional") else ""
    probe = {"s-type": "S-type probe", "pitot-static": "pitot-static tube"}.get(kind, f"{kind} probe{turned}")
    thermometer = Item(text="thermometer or thermocouple that reaches the middle of the duct")
    barometer = Item(text="barometer, or the station pressure and the difference in height from its station")
    if _epa(setup):
        share = table["thermometer"]["epa"]
        thermometer = Item(text=f"{thermometer.text}, good to {share['share']} of the absolute temperature", source=share["source"])
        good = table["barometer"]["epa"]
        barometer = Item(text=f"barometer good to {good[setup.units]}, or the station pressure and the difference in height",
                         source=good["source"])
    moisture = {
        "air": "psychrometer or humidity probe", "flue-gas": "analyser or sampling train for oxygen, carbon dioxide and moisture",
        "given": "the statement of density or molar mass for this gas", "mixture": "the analysis of this gas, with its moisture",
    }
    return (
        Item(text=f"{probe} of the length above, straight, with its coefficient and date"),
        Item(text="gauge of the range and division above, with its number and date of calibration"),
        Item(text="two hoses of equal length without kinks, marked + and -, with spare ends and clamps"),
        thermometer, barometer,
        Item(text=moisture[setup.gas.kind] if setup.gas else "what the gas analysis and moisture need"),
        Item(text="rule or tape, and heat-proof tape or paint for the marks; square or level for the angle of the probe"),
        Item(text="plugs, caps and packing for every port, and tools to open and close them"),
        Item(text="this plan, the field sheet with units printed, pens, watch, lamp, camera if the site allows it"),
        Item(text="protection and permits that the site prescribes"),
    )


def _leak_check(setup: Setup) -> tuple[Item, ...]:
    table = tables.load("planning")["leak-check"]["epa"]
    pressure, drift = table[f"pressure_{setup.units}"], table[f"drift_{setup.units}"]
    rule = Item(
        text=f"impact side at {pressure} or more of pressure, then the static side at as much suction; "
        f"each holds within {drift} for {table['hold']} or longer",
        source=table["source"] if _epa(setup) else f"as in {table['source']}; good practice for any method",
    )
    when = "advised before, mandatory after the traverse" if _epa(setup) else "before and after the traverse, and after any change of hose"
    return (rule, Item(text=when, source=table["source"] if _epa(setup) else PRACTICE))


def _zero(setup: Setup) -> tuple[Item, ...]:
    table = tables.load("planning")["zero"]["epa"]
    level = Item(text="gauge level and at the temperature of the place; both sides open to the same air: zero, and write it down",
                 source=PRACTICE)
    again = Item(text=f"zero and level again at least every {table['interval']} and at the end; write down the drift",
                 source=table["source"] if _epa(setup) else f"as in {table['source']}; good practice for any method")
    return level, again


def _before(setup: Setup) -> tuple[Item, ...]:
    table = tables.load("planning")["swirl"]["epa"]
    swirl = Item(text="null angles over the points: no swirl", source=table["source"] if _epa(setup) else PRACTICE)
    first = (
        "identity of duct and run, names, date and time",
        "inside dimensions measured two ways, not taken from a drawing; lining and deposits",
        "each nipple measured from the face the marks are read against to the inner wall; the marks above count them",
        "ports clear, no nipple or weld standing into the duct, nothing in the way up to the far wall",
        "probe straight, openings clean and undamaged, head square to the stem and facing the flow",
        "hoses on the right sides: + to the opening that faces the flow",
    )
    then = (
        "barometer read at the height of the plane, or the difference in height noted",
        "sign of the static pressure against the barometer",
        "thermometer against a second one",
        "fan, dampers and process steady, and noted; one reference point chosen and read again during the traverse",
        "agreed what is done at a point that cannot be reached: it is written down, never left out in silence",
        "weather, and the conditions under which the work stops",
    )
    return (*(Item(text=text, source=PRACTICE) for text in first), swirl, *(Item(text=text, source=PRACTICE) for text in then))


def _end(setup: Setup) -> tuple[Item, ...]:
    table = tables.load("planning")["repeat"]
    after = Item(text="leak check and zero once more, before anything is taken apart",
                 source=tables.load("planning")["leak-check"]["epa"]["source"] if _epa(setup) else PRACTICE)
    return (
        Item(text=f"one reading of each port repeated: within {table['share']}, else the traverse again", source=table["source"]),
        after,
        Item(text="every port closed again, tools counted, the operator told", source=PRACTICE),
    )
