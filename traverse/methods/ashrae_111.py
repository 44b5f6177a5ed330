"""ASHRAE 111 practice: testing, adjusting and balancing of ventilation ducts."""

from traverse.methods._base import Method

METHOD = Method(
    id="ashrae-111",
    title="ASHRAE 111, duct traverse in testing and balancing",
    source="ANSI/ASHRAE Standard 111, duct traverse; from memory, text not read. Standard air 0.075 lb/ft3 or 1.2 kg/m3: common practice",
    compressible=False,
    default_coefficients={"pitot-static": 1.00},
    standard_air={"us": "0.075 lb/ft3", "si": "1.2 kg/m3"},
    checks=("negative-readings", "share-above-tenth", "point-count", "straight-lengths", "design-flow", "lowest-pressure"),
    notes=("Standard flow is mass flow over standard air density, not a change of temperature and pressure alone.",),
)
