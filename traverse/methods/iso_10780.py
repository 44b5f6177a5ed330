"""ISO 10780: velocity and volume flow of gas in ducts of stationary sources."""

from traverse.methods._base import Method
from traverse.physics import wall_limits

METHOD = Method(
    id="iso-10780",
    title="ISO 10780, velocity and volume flow rate of gas streams in ducts",
    source="ISO 10780:1994, opening read; text, numbers of points and standard conditions from memory",
    default_coefficients={"pitot-static": 1.00},
    reference={"us": ("0 degC", "101325 Pa"), "si": ("0 degC", "101325 Pa")},
    wall_distance=wall_limits.en_15259,
    checks=("negative-readings", "lowest-pressure", "velocity-ratio", "swirl", "point-count"),
    count_rule="iso-10780",
    notes=("Standard conditions 0 degC and 101.325 kPa are from memory.", "The document's straight lengths are not known to this program."),
)
