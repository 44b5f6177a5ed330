"""The exact physics: point by point, modern constants, isentropic compressibility."""

from traverse.methods._base import Method

METHOD = Method(
    id="exact",
    title="Exact physics, point by point",
    source="Bernoulli in its isentropic form, ideal-gas law with CODATA R; no test method's own rounding",
    uses_yaw=True,
    uses_pitch=True,
    checks=("negative-readings", "share-above-tenth", "saturation"),
    notes=("No standard conditions of its own: standard flows need [reference].",),
)
