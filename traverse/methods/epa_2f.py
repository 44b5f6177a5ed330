"""EPA Method 2F: velocity with a three-dimensional probe (yaw and pitch), point by point."""

from dataclasses import replace

from traverse.methods._epa import EPA_2

METHOD = replace(
    EPA_2,
    id="epa-2f",
    title="EPA Method 2F, velocity and flow with three-dimensional probes (with Methods 1, 3, 4)",
    source="40 CFR 60 Appendix A-1 Method 2F, eqs. 2F-1, 2F-9 to 2F-11; running text read in part, equations and constants from memory",
    arithmetic="pointwise",
    uses_yaw=True,
    uses_pitch=True,
    probes=("three-dimensional",),
    default_coefficients={},
    checks=("negative-readings", "gauge-sensitivity", "point-count", "straight-lengths", "saturation", "leak-check", "zero-drift",
            "calibration-dates", "calibrated-angles", "directional-velocity"),
    site_rule="epa-2",
    count_rule="epa-2",
    notes=(
        *EPA_2.notes,
        "The pitch of each point follows from F1 = (P4-P5)/(P1-P2) by the calibration, F2 from the pitch; each velocity is the axial "
        "component, with its own temperature inside the root.",
        "Curves from 60 and 90 ft/s hold at all velocities; curves from another pair hold where one of the two is at least the mean "
        "velocity found. At which velocities the curves were taken is not known to the program.",
    ),
)
