"""The plan as a crew reads it: what matters on one screen, then the marks, then what to take and to look at."""

from __future__ import annotations

import math
import textwrap
from collections.abc import Iterator, Sequence

from traverse.planning import PRACTICE, Checklist, Clearance, Plan, method_title, site
from traverse.planning.recognised import recognised, words
from traverse.report import cautions, site_text
from traverse.report.numbers import plain, shown, significant, unit_text
from traverse.report.text import findings, table
from traverse.units import UNITS

WIDTH, INDENT = 110, 13


def plan(planned: Plan) -> str:
    """Return the plan of a traverse as text."""
    lines = [planned.setup.title, method_title(planned.setup), ""]
    for label, text in (*_place(planned), *_recognised(planned), *_probe(planned), *_pressures(planned)):
        lines += fact(label, text)
    notes = findings(planned.findings, everything=False)
    lines += ["", *(line for note in notes.splitlines() for line in wrapped(note, "  "))] if notes else []
    lines += ["", *_marks(planned), "", *site_text.site(planned.setup), ""]
    for entry in planned.checklists:
        lines += [*checklist(entry), ""]
    lines += [f"Lines without a source: {PRACTICE}.", ""]
    lines += ["Cautions", *(line for text in cautions.TEXTS for line in wrapped(f"- {text}", "  ")), *wrapped(cautions.DEFER, "")]
    return "\n".join(lines)


def fact(label: str, text: str) -> list[str]:
    """Return a label and its text as lines of equal indent."""
    return wrapped(f"{label:<{INDENT}}{text}", " " * INDENT)


def wrapped(text: str, indent: str) -> list[str]:
    """Return a text as lines, all but the first indented."""
    # A number stays with its percent sign: such a space is no place to break a line.
    lines = textwrap.wrap(text.replace(" %", "\u00a0%"), WIDTH, subsequent_indent=indent, break_long_words=False, break_on_hyphens=False)
    return [line.replace("\u00a0", " ") for line in lines]


def checklist(entry: Checklist) -> list[str]:
    """Return a list with boxes to tick."""
    lines = [entry.title]
    for item in entry.items:
        source = f" ({item.source})" if item.source not in {"", PRACTICE} else ""
        lines += wrapped(f"[ ] {item.text}{source}", "    ")
    return lines


# --- lengths and pressures

def length_unit(system: str) -> str:
    """Return the unit of the lengths of a plan."""
    return "in" if system == "us" else "mm"


def length(value: float, system: str) -> str:
    """Return a length as a crew would read it off a rule: millimetres, or inches to three decimals."""
    number, digits = (UNITS["in"].from_si(value), 3) if system == "us" else (value * 1000, 1)
    # A rounded zero has no sign.
    return f"{round(number, digits) + 0.0:.{digits}f}"


def sixteenths(value: float) -> str:
    """Return a length in inches to the nearest sixteenth, such as '5 3/16'."""
    steps = round(UNITS["in"].from_si(value) * 16)
    sign, steps = ("-" if steps < 0 else ""), abs(steps)
    whole, rest = divmod(steps, 16)
    if not rest:
        return f"{sign}{whole}"
    bottom = 16
    while rest % 2 == 0:
        rest, bottom = rest // 2, bottom // 2
    return f"{sign}{whole} {rest}/{bottom}" if whole else f"{sign}{rest}/{bottom}"


def _length(value: float, system: str) -> str:
    return f"{length(value, system)} {length_unit(system)}"


def _long(value: float, system: str) -> str:
    """Return a length that is needed of a probe or a room, rounded up."""
    unit, digits = (UNITS["ft"], 1) if system == "us" else (UNITS["m"], 2)
    return f"{math.ceil(unit.from_si(value) * 10**digits - 1e-9) / 10**digits:.{digits}f} {unit.symbol}"


def _area(value: float, system: str) -> str:
    unit = UNITS["ft2" if system == "us" else "m2"]
    return f"{unit.from_si(value):.3g} {unit.symbol}"


def pressure_unit(system: str) -> str:
    """Return the unit of the pressures of a plan."""
    return "inH2O" if system == "us" else "Pa"


def pressure(value: float, system: str, digits: int = 3) -> str:
    """Return a pressure with its unit."""
    unit = pressure_unit(system)
    return f"{significant(UNITS[unit].from_si(value), digits)} {unit}"


def _root(value: float, system: str) -> str:
    unit = UNITS["inH2O^0.5" if system == "us" else "Pa^0.5"]
    return f"{significant(unit.from_si(value), 3)} {unit.symbol}"


def _diameters(value: float | None) -> str:
    return "not stated" if value is None else f"{value:.2f} diameters"


# --- the screen of headlines

def _place(planned: Plan) -> Iterator[tuple[str, str]]:
    setup, layout, system = planned.setup, planned.layout, planned.setup.units
    section, before_after = setup.plane.section, site(setup)
    yield "Section", (
        f"{section.words}; area {plain('area', section.area, system)}, hydraulic diameter {_length(section.hydraulic_diameter, system)}"
    )
    count = len(layout.lines)
    yield "Layout", f"{layout.title}: {count} line{'s' if count > 1 else ''}, {layout.size} points ({layout.source})"
    yield "Site", f"{_diameters(before_after[0])} before, {_diameters(before_after[1])} after the plane"
    yield "Ports", _ports(planned)


def _recognised(planned: Plan) -> Iterator[tuple[str, str]]:
    """Say which rule the job's own points follow, line by line, lines that say the same together."""
    layout = planned.layout
    said: dict[str, list[str]] = {}
    for name, match in recognised(planned.setup.plane.section, layout):
        order = sorted((i for i in range(layout.size) if layout.line[i] == name), key=lambda i: float(layout.depth[i]))
        said.setdefault(words(match, tuple(str(layout.point[i]) for i in order)), []).append(name)
    for text, names in said.items():
        yield "Looks like", f"{text}; line{'s' if len(names) > 1 else ''} {', '.join(names)}"


def _ports(planned: Plan) -> str:
    plane, system = planned.setup.plane, planned.setup.units
    if plane.port_depth is not None:
        said = f"port depth {plane.port_depth.text}"
    elif plane.port_depths:
        each = zip(planned.layout.lines, plane.port_depths, strict=True)
        said = "port depth " + ", ".join(f"{name} {stated.text}" for name, stated in each)
    else:
        said = "port depth not stated, marks count from the inner wall"
    if planned.head_offset:
        said += f"; marks count from a place {_length(planned.head_offset, system)} ahead of the sensing head"
    return said


def _probe(planned: Plan) -> Iterator[tuple[str, str]]:
    probe, system, labels = planned.probe, planned.setup.units, planned.layout.labels()
    either = f"; {_long(probe.half_length, system)} where every line has a port at both ends" if probe.half_length is not None else ""
    yield "Probe", (
        f"at least {_long(probe.length, system)}: deepest mark {_length(probe.deepest_mark, system)} ({labels[probe.deepest]}) and "
        f"{_length(probe.grip, system)} for packing and grip ({probe.grip_source}){either}"
    )
    yield "Room", (
        f"{_long(probe.platform_depth, system)} clear in front of each port, platform {_area(probe.platform_area, system)} "
        f"({probe.platform_source})"
    )
    yield "Wall", _wall(planned)
    yield "Far wall", _ahead(planned)
    yield "Rounding", "; ".join(_rounding(planned, name) for name in sorted(planned.rounding, key=lambda name: name != system))


def _wall(planned: Plan) -> str:
    probe, system, labels = planned.probe, planned.setup.units, planned.layout.labels()
    said = f"nearest point {_length(float(probe.wall.distance or 0.0), system)} from a wall ({labels[probe.wall.at]}); "
    if probe.wall.needed is None:
        said += "the method has no least distance here"
    else:
        said += f"method: at least {_length(probe.wall.needed, system)}, {verdict(probe.wall)}"
    if probe.head.needed is None:
        return f"{said}; size of the head not stated ([pitot] stem)"
    return f"{said}; one diameter of the probe: {_length(probe.head.needed, system)}, {verdict(probe.head)} ({probe.head.source})"


def _ahead(planned: Plan) -> str:
    ahead, system, labels = planned.probe.ahead, planned.setup.units, planned.layout.labels()
    if ahead.distance is None:
        return "not given: the direction of the lines is not known"
    said = f"{_length(ahead.distance, system)} behind the deepest point ({labels[ahead.at]}); "
    if ahead.needed is None:
        return f"{said}size of the probe not stated ([pitot] stem)"
    return f"{said}the probe takes {_length(ahead.needed, system)}: {'fits' if ahead.met else 'DOES NOT FIT'}"


def verdict(clearance: Clearance) -> str:
    """Return whether a clearance is kept, for a line of text."""
    return {True: "met", False: "NOT MET", None: "not evaluated"}[clearance.met]


def _rounding(planned: Plan, system: str) -> str:
    """Say what marks rounded in one system do to the velocities and to the flow."""
    rounding, labels = planned.rounding[system], planned.layout.labels()
    step = "1/16 in" if system == "us" else "1 mm"
    known = [i for i in range(planned.layout.size) if math.isfinite(rounding.velocity_error[i])]
    if not known:
        return f"marks to {step}: effect not given, the direction of the lines is not known"
    worst = max(known, key=lambda i: abs(float(rounding.velocity_error[i])))
    flow = f", flow {100 * rounding.flow_error:+.3f} %" if rounding.flow_error is not None else ""
    return f"marks to {step}: velocity up to {100 * float(rounding.velocity_error[worst]):+.2f} % ({labels[worst]}){flow}"


def _pressures(planned: Plan) -> Iterator[tuple[str, str]]:
    profile, system = planned.profile, planned.setup.units
    if profile.mean_velocity is not None and planned.setup.design is not None:
        mean = planned.expected
        density = f", density {plain('density', profile.density, system)}" if profile.density is not None else ""
        yield "Design", (
            f"{planned.setup.design.actual_flow.text}: mean velocity {plain('mean_velocity', profile.mean_velocity, system)}{density}"
            + (f", {pressure(mean, system)} at the mean velocity" if mean is not None else "")
        )
    advice = planned.gauge
    if advice is None:
        yield "Expected", f"no pressures: {profile.reason or 'a point lies on the wall'}"
        return
    labels = planned.layout.labels()
    yield "Expected", (
        f"lowest {pressure(advice.lowest, system)} ({labels[advice.lowest_at]}), highest {pressure(advice.highest, system)} "
        f"({labels[advice.highest_at]}), mean of the roots {_root(advice.mean_root, system)}; "
        f"profile {profile.profile} ({profile.source})"
    )
    divisions = " / ".join(significant(UNITS[pressure_unit(system)].from_si(value), 2) for _, value in advice.divisions)
    parts = " / ".join(f"{100 * part:g}" for part, _ in advice.divisions)
    yield "Gauge", (
        f"0 to {pressure(advice.nominal, system, 2)} or more ({advice.factor:g} times the highest is {pressure(advice.range, system)}); "
        f"divisions of {divisions} {pressure_unit(system)} or less for {parts} % of velocity from half a division at the lowest point"
    )
    own = _own(planned)
    if own:
        yield "Your gauge", own


def _own(planned: Plan) -> str:
    advice, own = planned.gauge, planned.setup.gauge
    if advice is None or own is None:
        return ""
    said = [f"{name} {stated.text}" for name, stated in (("range", own.range), ("division", own.division)) if stated is not None]
    if advice.own_error is not None:
        label = planned.layout.labels()[advice.lowest_at]
        said.append(f"half a division is {100 * float(advice.own_error.max()):.2g} % of velocity at {label}")
    failed = len(advice.failed())
    said.append(f"{failed} of {len(advice.outcomes)} checks expected to fail" if failed else "no check expected to fail")
    return "; ".join(said)


# --- the table of marks

def _marks(planned: Plan) -> list[str]:
    layout = planned.layout
    heads = _heads(planned)
    rows: list[Sequence[str]] = [heads]
    for i in range(layout.size):
        if i and layout.line[i] != layout.line[i - 1]:
            rows.append([""] * len(heads))
        rows.append(_row(planned, i))
    lines = ["Marks: depth + port depth" + (" + head offset" if planned.head_offset else ""),
             *table(rows, right=range(1, len(heads))).splitlines()]
    if any(layout.moved):
        lines.append("* moved to the least distance from the wall")
    legend = (
        "x to the right, y up from the centre, looking downstream; depth from the inner wall at the port; mark: on the probe, where it "
        "meets the outer face of the port; mm and inch: the mark to 1 mm and to 1/16 in; 1 mm [%] and 1/16 [%]: what that rounding does "
        "to the velocity of the expected profile."
    )
    return [*lines, "", *wrapped(legend + (" v, dp: expected at design flow." if planned.profile.velocity is not None else ""), "")]


def _heads(planned: Plan) -> list[str]:
    system, profile = planned.setup.units, planned.profile
    unit = length_unit(system)
    heads = ["point", f"x [{unit}]", f"y [{unit}]", f"depth [{unit}]", f"mark [{unit}]", "mm", "inch", "weight"]
    if planned.setup.plane.port_depths:
        heads.insert(4, f"port [{unit}]")
    heads += [f"v [{unit_text('mean_velocity', system)}]"] if profile.velocity is not None else []
    heads += [f"dp [{pressure_unit(system)}]"] if profile.pressure is not None else []
    return [*heads, "1 mm [%]", "1/16 [%]"]


def _row(planned: Plan, i: int) -> list[str]:
    layout, system, profile = planned.layout, planned.setup.units, planned.profile
    places = [layout.x, layout.y, layout.depth, *([planned.nipple] if planned.setup.plane.port_depths else []), planned.mark]
    row = [
        layout.labels()[i] + ("*" if layout.moved[i] else ""), *(length(float(values[i]), system) for values in places),
        f"{planned.rounding['si'].mark[i] * 1000:.0f}", sixteenths(float(planned.rounding["us"].mark[i])), f"{layout.weight[i]:.5f}",
    ]
    if profile.velocity is not None:
        row.append(significant(shown("mean_velocity", float(profile.velocity[i]), system), 3))
    if profile.pressure is not None:
        row.append(significant(UNITS[pressure_unit(system)].from_si(float(profile.pressure[i])), 3))
    for name in ("si", "us"):
        error = float(planned.rounding[name].velocity_error[i])
        row.append(f"{round(100 * error, 2) + 0.0:+.2f}" if math.isfinite(error) else "")
    return row
