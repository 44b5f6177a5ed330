"""What the velocity methods of EPA share: Method 2 as a record, from which the others are made."""

from traverse import tables
from traverse.methods._base import Method, epa_constants
from traverse.physics import wall_limits

_COMMON = tables.load("epa_method_2")["common"]

EPA_2 = Method(
    id="epa-2",
    title="EPA Method 2, stack gas velocity and volumetric flow rate (with Methods 1, 3, 4)",
    source="40 CFR 60 Appendix A-1 Method 2, eqs. 2-6, 2-7, 2-8; running text read, equations and constants from memory",
    arithmetic="root-mean",
    compressible=False,
    constants={"us": epa_constants("us"), "si": epa_constants("si")},
    default_coefficients={
        "s-type": float(_COMMON["default_s_type"]),
        "pitot-static": float(_COMMON["default_pitot_static"]),
    },
    reference={"us": ("68 degF", "29.92 inHg"), "si": ("20 degC", "760 mmHg")},
    wall_distance=wall_limits.method_1,
    checks=(
        "negative-readings", "gauge-sensitivity", "point-count", "straight-lengths", "saturation", "swirl", "leak-check",
    ),
    notes=(
        "The printed constants (velocity constant, 460 or 273, 13.6, 18.0, 0.440/0.320/0.280) are used as they stand; "
        "against exact physics they read velocity about 0.2 % high in combustion gas.",
    ),
)
