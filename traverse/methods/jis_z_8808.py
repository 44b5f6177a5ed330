"""JIS Z 8808: flue gas flow in ducts, as far as its rules are known."""

from traverse.methods._base import Method

METHOD = Method(
    id="jis-z-8808",
    title="JIS Z 8808, flue gas in ducts",
    source="JIS Z 8808, exam text on the standard read; numbers of points and standard conditions from memory",
    reference={"us": ("0 degC", "101325 Pa"), "si": ("0 degC", "101325 Pa")},
    checks=("negative-readings", "point-count", "straight-lengths"),
    site_rule="jis-z-8808",
    count_rule="jis-z-8808",
    notes=("Standard conditions 0 degC and 101.325 kPa are from memory.",),
)
