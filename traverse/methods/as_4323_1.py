"""AS 4323.1: selection of sampling planes for stationary sources."""

from traverse.methods._base import Method

METHOD = Method(
    id="as-4323-1",
    title="AS 4323.1, sampling planes of stationary sources",
    source="AS 4323.1:1995, distances from memory; its table of points and factors for a non-ideal plane is not known to this program",
    reference={"us": ("0 degC", "101325 Pa"), "si": ("0 degC", "101325 Pa")},
    checks=("negative-readings", "velocity-ratio", "swirl", "straight-lengths"),
    site_rule="as-4323",
    notes=(
        "Standard conditions 0 degC and 101.325 kPa are from memory.",
        "The limit 3 : 1 of velocities is that of EN 15259; AS 4323.1 has a similar one (from memory).",
    ),
)
