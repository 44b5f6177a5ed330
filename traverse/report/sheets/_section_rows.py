"""The open area and the hydraulic diameter of each shape as live formulas."""

from __future__ import annotations

from collections.abc import Callable

import numpy as np

from traverse.model import Section
from traverse.physics import sections
from traverse.report.sheets._ledger import Ledger

# Steps of the arithmetic-geometric mean: each doubles the digits, so that six reach the last one for any ellipse.
_STEPS = 6
NOTE = "four times the area over the perimeter"


def area(ledger: Ledger, section: Section) -> None:
    """Put the area, with what it is made of."""
    parts = _PARTS[section.shape](section) if section.shape in _PARTS else ()
    for name, label, formula, value in parts:
        ledger.live(name, label, formula, value, "m")
    if section.shape == "polygon":
        _sides(ledger, section)
    formula = f"ABS({_total(ledger, 'cross', section)})/2" if section.shape == "polygon" else _AREA[section.shape](section)
    ledger.live("A", "Area", formula, section.area, "m2", "open, without what lies on the wall" if _off(section) else "")


def hydraulic_diameter(ledger: Ledger, section: Section) -> None:
    """Put the hydraulic diameter."""
    if section.shape == "ellipse":
        _ellipse_perimeter(ledger, section)
    formula = _HYDRAULIC.get(section.shape) or "2*{0}*{1}/({0}+{1})".format(*_sides_of_box(section))
    ledger.live("D", "Hydraulic diameter", formula, section.hydraulic_diameter, "m", NOTE)


def _total(ledger: Ledger, name: str, section: Section) -> str:
    """Return the sum of one value over the sides of a polygon."""
    return f"SUM({{{name}1:{ledger.prefix}.{name}{len(section.dimensions) // 2}}})"


def _off(section: Section, names: tuple[str, ...] = sections.DEDUCTIONS) -> str:
    found = [f"{{{name}}}" for name in names if name in section.dimensions]
    return f"-2*({'+'.join(found)})" if found else ""


Part = tuple[str, str, str, float]


def _box_parts(section: Section) -> tuple[Part, ...]:
    """Return open width and height where something lies on the walls."""
    off = _off(section)
    if not off:
        return ()
    return (
        ("width.open", "Open width", f"{{width}}{off}", section.width), ("height.open", "Open height", f"{{height}}{off}", section.height)
    )


def _ring_parts(section: Section) -> tuple[Part, ...]:
    """Return the diameters of the wall and of the core."""
    outer, inner = (float(d) for d in sections.ring_diameters(section.size))
    core = "{core}" if "core" in section.dimensions else "{core_circumference}/PI()"
    deposit = "+2*{deposit}" if "deposit" in section.dimensions else ""
    wall = "{inner}+2*{gap}" if "gap" in section.dimensions else f"{{diameter}}{_off(section)}"
    return ("inner", "Diameter of the core", f"{core}{deposit}", inner), ("outer", "Diameter of the wall", wall, outer)


def _sides(ledger: Ledger, section: Section) -> None:
    """Put twice the area under each side of a polygon, then each side's length."""
    x, y = sections.corners(section.size)
    count = len(x)
    after = {k: k % count + 1 for k in range(1, count + 1)}
    for k, n in after.items():
        value = float(x[k - 1] * y[n - 1] - x[n - 1] * y[k - 1])
        ledger.live(f"cross{k}", f"  side {k}: twice its area about the origin", f"{{x{k}}}*{{y{n}}}-{{x{n}}}*{{y{k}}}", value, "m2")
    for k, n in after.items():
        value = float(np.hypot(x[n - 1] - x[k - 1], y[n - 1] - y[k - 1]))
        ledger.live(f"side{k}", f"  side {k}: length", f"SQRT(({{x{n}}}-{{x{k}}})^2+({{y{n}}}-{{y{k}}})^2)", value, "m")
    ledger.live("perimeter", "Perimeter", _total(ledger, "side", section), float(sections.perimeter("polygon", section.size)), "m")


def _ellipse_perimeter(ledger: Ledger, section: Section) -> None:
    """Put the perimeter of an ellipse by the arithmetic-geometric mean of its half-axes.

    2 pi / a_n (a_0^2 - sum of 2^(n-1) c_n^2), with c_0^2 = a_0^2 - b_0^2 and c_n = (a_(n-1) - b_(n-1))/2. Gauss; Abramowitz
    and Stegun 17.6.
    """
    w, h = _sides_of_box(section)
    a, b = max(section.width, section.height) / 2, min(section.width, section.height) / 2
    ledger.live("a0", "  longer half-axis", f"MAX({w},{h})/2", a, "m")
    ledger.live("b0", "  shorter half-axis", f"MIN({w},{h})/2", b, "m")
    total, terms = a * a - (a * a - b * b) / 2, ["{a0}^2-({a0}^2-{b0}^2)/2"]
    for n in range(1, _STEPS + 1):
        c = (a - b) / 2
        a, b = (a + b) / 2, float(np.sqrt(a * b))
        ledger.live(f"a{n}", f"  arithmetic mean {n}", f"({{a{n - 1}}}+{{b{n - 1}}})/2", a, "m")
        ledger.live(f"b{n}", f"  geometric mean {n}", f"SQRT({{a{n - 1}}}*{{b{n - 1}}})", b, "m")
        total -= 2 ** (n - 1) * c * c
        terms.append(f"{2 ** (n - 1)}*(({{a{n - 1}}}-{{b{n - 1}}})/2)^2")
    ledger.live("perimeter", "Perimeter", f"2*PI()/{{a{_STEPS}}}*({'-'.join(terms)})", float(2 * np.pi / a * total), "m",
                "by the arithmetic-geometric mean of the half-axes")


def _sides_of_box(section: Section) -> tuple[str, str]:
    return ("{width.open}", "{height.open}") if _off(section) else ("{width}", "{height}")


def _round_area(section: Section) -> str:
    off = _off(section)
    if "diameter" in section.dimensions:
        return f"PI()/4*({{diameter}}{off})^2" if off else "PI()/4*{diameter}^2"
    wall = "-2*{wall_thickness}" if "wall_thickness" in section.dimensions else ""
    return f"PI()/4*({{circumference}}/PI(){wall}{off})^2"


def _rectangle_area(section: Section) -> str:
    return "*".join(_sides_of_box(section))


def _oval_parts(section: Section) -> tuple[Part, ...]:
    w, h = _sides_of_box(section)
    short, long = min(section.width, section.height), max(section.width, section.height)
    return (
        *_box_parts(section), ("radius", "Radius of the ends", f"MIN({w},{h})/2", short / 2),
        ("straight", "Straight part", f"MAX({w},{h})-MIN({w},{h})", long - short),
    )


_PARTS: dict[str, Callable[[Section], tuple[Part, ...]]] = {
    "rectangle": _box_parts, "ellipse": _box_parts, "flat-oval": _oval_parts, "annulus": _ring_parts,
}
_AREA: dict[str, Callable[[Section], str]] = {
    "round": _round_area,
    "rectangle": _rectangle_area,
    "ellipse": lambda section: f"PI()/4*{_rectangle_area(section)}",
    "flat-oval": lambda _: "PI()*{radius}^2+2*{radius}*{straight}",
    "annulus": lambda _: "PI()/4*({outer}-{inner})*({outer}+{inner})",
}
_HYDRAULIC = {
    "round": "2*SQRT({A}/PI())", "ellipse": "4*{A}/{perimeter}", "polygon": "4*{A}/{perimeter}",
    "flat-oval": "4*{A}/(2*PI()*{radius}+2*{straight})", "annulus": "{outer}-{inner}",
}
