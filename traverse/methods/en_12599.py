"""EN 12599: air flow measurement when ventilation systems are handed over."""

from traverse.methods._base import Method

METHOD = Method(
    id="en-12599",
    title="EN 12599, air flow in ventilation ducts at handing over",
    source="EN 12599:2012, contents of a guide to it read; text from memory",
    default_coefficients={"pitot-static": 1.00},
    checks=("negative-readings", "design-flow"),
    notes=(
        "No standard conditions of its own: standard flows need [reference].",
        "The standard's table of uncertainty by irregularity of the profile and number of points is not known to this program.",
    ),
)
