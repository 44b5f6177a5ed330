"""ISO 3966: velocity-area method with pitot-static tubes in closed conduits."""

from traverse.methods._base import Method

METHOD = Method(
    id="iso-3966",
    title="ISO 3966, velocity-area method with pitot-static tubes",
    source="ISO 3966:2008/2020 clauses 8 (velocity), 11 (arithmetical methods), 12 (corrections); contents list read, text from memory",
    default_coefficients={"pitot-static": 1.00},
    checks=("negative-readings", "mach-number", "point-count", "straight-lengths"),
    notes=(
        "No standard conditions of its own: standard flows need [reference].",
        "The exact isentropic factor is used in place of the printed series; they differ by 0.02 % at Mach 0.25.",
    ),
)
