"""EPA Method 2C: a standard pitot tube in a small stack or duct."""

from dataclasses import replace

from traverse.methods._epa import EPA_2

METHOD = replace(
    EPA_2,
    id="epa-2c",
    title="EPA Method 2C, velocity and flow in small stacks and ducts, standard pitot tube (with Methods 1A, 3, 4)",
    source="40 CFR 60 Appendix A-1 Method 2C (read in part): as Method 2 with a standard tube; equations and constants from memory",
    default_coefficients={"pitot-static": EPA_2.default_coefficients["pitot-static"]},
    checks=(*EPA_2.checks, "plugging"),
    site_rule="epa-2",
    count_rule="epa-2",
    notes=(*EPA_2.notes, "For ducts of 4 to 12 in; points by Method 1A. The tube is blown out and a reading repeated: within 5 %."),
)
