"""The plan as JSON: SI values only, null with a reason where the job does not say enough."""

from __future__ import annotations

import json
import math
from typing import Any

from traverse._version import __version__
from traverse.planning import Clearance, Plan, Rounding, site
from traverse.planning.recognised import recognised
from traverse.report import cautions
from traverse.report.plan_text import sixteenths
from traverse.siting import assess, points_wanted

FORMAT, VERSION = "traverse plan", 1
# The names of the two roundings in the JSON form.
_STEPS = {"si": "mm", "us": "inch"}


def text(planned: Plan) -> str:
    """Return the JSON text of a plan."""
    return json.dumps(to_dict(planned), indent=2, ensure_ascii=False, allow_nan=False)


def to_dict(planned: Plan) -> dict[str, Any]:
    """Return the JSON form of a plan: lengths in m, pressures in Pa, velocities in m/s, errors as fractions."""
    setup, source = planned.setup, planned.setup.sources[0] if planned.setup.sources else None
    return {
        "format": FORMAT, "version": VERSION, "program": f"traverse {__version__}",
        "job": {
            "title": setup.title, "date": setup.date.isoformat() if setup.date else None, "method": setup.method, "units": setup.units,
            "source": source.name if source else None, "sha256": source.sha256 if source else None,
        },
        "section": _section(planned), "site": _site(planned),
        "layout": _layout(planned), "probe": _probe(planned), "profile": _profile(planned),
        "gauge": _gauge(planned), "rounding": {_STEPS[name]: _rounding(rounding) for name, rounding in planned.rounding.items()},
        "points": [_point(planned, i) for i in range(planned.layout.size)],
        "checks": [outcome.to_dict() for outcome in planned.gauge.outcomes] if planned.gauge else [],
        "checklists": [
            {"id": entry.id, "title": entry.title, "items": [{"text": item.text, "source": item.source} for item in entry.items]}
            for entry in planned.checklists
        ],
        "cautions": [*cautions.TEXTS, cautions.DEFER],
        "findings": [
            {"level": item.level, "topic": item.topic, "where": item.where, "message": item.message, "setting": item.setting}
            for item in planned.findings
        ],
        "notes": {"expected_differential_pressure": planned.profile.reason} if planned.profile.reason else {},
    }


def _finite(value: float | None) -> float | None:
    return float(value) if value is not None and math.isfinite(value) else None


def _section(planned: Plan) -> dict[str, Any]:
    plane, (before, after) = planned.setup.plane, site(planned.setup)
    section = plane.section
    return {
        "shape": section.shape, "dimensions": section.size, "width": section.width, "height": section.height, "area": section.area,
        "hydraulic_diameter": section.hydraulic_diameter, "upstream": plane.upstream.value if plane.upstream else None,
        "downstream": plane.downstream.value if plane.downstream else None, "upstream_diameters": before, "downstream_diameters": after,
    }


def _layout(planned: Plan) -> dict[str, Any]:
    layout, plane = planned.layout, planned.setup.plane
    stated = plane.port_depth is not None or bool(plane.port_depths)
    ports = {name: float(planned.nipple[layout.line.index(name)]) if stated else None for name in layout.lines}
    return {
        "rule": layout.rule, "title": layout.title, "source": layout.source, "digits": layout.digits, "points": layout.size,
        "lines": [{"line": name, "points": layout.line.count(name), "port_depth": ports[name]} for name in layout.lines],
        "head_offset": planned.head_offset,
    }


def _site(planned: Plan) -> dict[str, Any]:
    """Every rule's straight lengths and numbers of points, and the rule that a job's own points follow."""
    setup = planned.setup
    return {
        "straight_lengths": [
            {"rule": one.rule, "title": one.title, "verdict": one.verdict, "wanted": one.wanted, "before": one.before, "after": one.after,
             "diameter": one.diameter, "diameter_name": one.diameter_name, "then": one.allowed, "source": one.source,
             "from_memory": one.from_memory} for one in assess(setup)
        ],
        "point_counts": [
            {"rule": one.rule, "title": one.title, "least": one.least, "points": one.ours, "met": one.met, "note": one.note,
             "source": one.source, "from_memory": one.from_memory} for one in points_wanted(setup)
        ],
        "recognised": [
            {"line": name, "rule": match.rule, "also": list(match.also), "points": match.points, "fits": match.fits,
             "largest_deviation": match.largest, "one_sided": match.one_sided, "note": match.note}
            for name, match in recognised(setup.plane.section, setup.layout)
        ],
    }


def _clearance(planned: Plan, clearance: Clearance) -> dict[str, Any]:
    return {
        "distance": _finite(clearance.distance), "point": planned.layout.labels()[clearance.at], "needed": _finite(clearance.needed),
        "met": clearance.met, "source": clearance.source,
    }


def _probe(planned: Plan) -> dict[str, Any]:
    probe = planned.probe
    return {
        "length": probe.length, "length_from_both_ends": probe.half_length, "deepest_mark": probe.deepest_mark,
        "deepest_point": planned.layout.labels()[probe.deepest], "grip": probe.grip, "grip_source": probe.grip_source,
        "platform_depth": probe.platform_depth, "platform_area": probe.platform_area, "platform_source": probe.platform_source,
        "wall_distance": _clearance(planned, probe.wall), "head_distance": _clearance(planned, probe.head),
        "far_wall": _clearance(planned, probe.ahead),
    }


def _profile(planned: Plan) -> dict[str, Any]:
    profile = planned.profile
    return {
        "law": profile.profile, "exponent": profile.exponent, "source": profile.source, "mean_velocity": profile.mean_velocity,
        "density": profile.density, "coefficient": profile.coefficient, "differential_pressure_at_mean_velocity": planned.expected,
    }


def _gauge(planned: Plan) -> dict[str, Any] | None:
    advice, labels = planned.gauge, planned.layout.labels()
    if advice is None:
        return None
    own = advice.own
    return {
        "lowest": advice.lowest, "lowest_point": labels[advice.lowest_at], "highest": advice.highest,
        "highest_point": labels[advice.highest_at], "mean_root_differential_pressure": advice.mean_root, "factor": advice.factor,
        "range": advice.range, "nominal_range": advice.nominal,
        "divisions": [{"velocity_error": part, "division": value} for part, value in advice.divisions],
        "own": None if own is None else {
            "range": own.range.value if own.range else None, "division": own.division.value if own.division else None,
            "largest_velocity_error": None if advice.own_error is None else float(advice.own_error.max()),
        },
    }


def _rounding(rounding: Rounding) -> dict[str, Any]:
    known = [abs(float(error)) for error in rounding.velocity_error if math.isfinite(error)]
    return {"step": rounding.step, "largest_velocity_error": max(known) if known else None, "flow_error": rounding.flow_error}


def _point(planned: Plan, i: int) -> dict[str, Any]:
    layout, profile, millimetre, inch = planned.layout, planned.profile, planned.rounding["si"], planned.rounding["us"]
    return {
        "line": layout.line[i], "point": layout.point[i], "depth": float(layout.depth[i]), "x": float(layout.x[i]), "y": float(layout.y[i]),
        "weight": float(layout.weight[i]), "moved": layout.moved[i], "port_depth": float(planned.nipple[i]), "mark": float(planned.mark[i]),
        "mark_mm": round(float(millimetre.mark[i]) * 1000), "mark_inch": sixteenths(float(inch.mark[i])),
        "rounding": {
            _STEPS[name]: {"residual": float(rounding.residual[i]), "velocity_error": _finite(float(rounding.velocity_error[i]))}
            for name, rounding in planned.rounding.items()
        },
        "expected_velocity": None if profile.velocity is None else _finite(float(profile.velocity[i])),
        "expected_differential_pressure": None if profile.pressure is None else _finite(float(profile.pressure[i])),
    }
