"""EPA Method 2G: velocity with a probe that is turned into the flow (yaw), point by point."""

from dataclasses import replace

from traverse.methods._epa import EPA_2

METHOD = replace(
    EPA_2,
    id="epa-2g",
    title="EPA Method 2G, velocity and flow with two-dimensional probes (with Methods 1, 3, 4)",
    source="40 CFR 60 Appendix A-2 Method 2G, eqs. 2G-6, 2G-8 to 2G-10; running text read in part, equations and constants from memory",
    arithmetic="pointwise",
    uses_yaw=True,
    checks=("negative-readings", "gauge-sensitivity", "point-count", "straight-lengths", "saturation", "leak-check", "zero-drift",
            "calibration-dates", "directional-velocity"),
    site_rule="epa-2",
    count_rule="epa-2",
    notes=(
        *EPA_2.notes,
        "Each velocity is the axial component, with its own temperature inside the root; yaw angles are counted from the axis.",
        "A calibration at 60 and 90 ft/s holds from 30 ft/s (9.1 m/s) upwards.",
    ),
)
