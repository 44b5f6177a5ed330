"""AMCA 203: field measurement of fan systems."""

from traverse.methods._base import Method

METHOD = Method(
    id="amca-203",
    title="AMCA 203, field performance measurement of fan systems",
    source="AMCA Publication 203-90 (R2007), not read; rules second-hand or from memory",
    compressible=False,
    default_coefficients={"pitot-static": 1.00},
    standard_air={"us": "0.075 lb/ft3", "si": "1.2 kg/m3"},
    checks=("negative-readings", "share-above-tenth", "point-count"),
    count_rule="amca-203",
    notes=(
        "Standard flow is mass flow over standard air density, not a change of temperature and pressure alone.",
        "The document's straight lengths are not known to this program.",
    ),
)
