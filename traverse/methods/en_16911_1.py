"""EN ISO 16911-1 with EN 15259: manual velocity and volume flow in stacks."""

from traverse.methods._base import Method
from traverse.physics import wall_limits

METHOD = Method(
    id="en-16911-1",
    title="EN ISO 16911-1, manual velocity and volume flow, with the plane and points of EN 15259",
    source="EN ISO 16911-1:2013 (scope and contents read), EN 15259:2007 (criteria in a trade guide, read); the rest from memory",
    default_coefficients={"pitot-static": 1.00},
    uses_yaw=False,
    reference={"us": ("0 degC", "101325 Pa"), "si": ("0 degC", "101325 Pa")},
    wall_distance=wall_limits.en_15259,
    checks=("negative-readings", "lowest-pressure", "velocity-ratio", "swirl", "point-count", "straight-lengths"),
    site_rule="en-15259",
    count_rule="en-15259",
    notes=(
        "Standard conditions 0 degC and 101.325 kPa are from memory.",
        "The standard's performance table and the numbers of its worked budget are not known to this program.",
        'The default wall factor 0.995 of the standard (from memory) is applied only on request: [corrections] wall_factor.',
    ),
)
