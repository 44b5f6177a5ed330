"""Which cell of which page holds a quantity, for the pages that refer to one another."""

# Quantity -> the name of its cell in the working.
WORKING = {
    "mean_velocity": "V", "actual_flow": "Q", "standard_flow": "Qs", "dry_standard_flow": "Qsd", "mass_flow": "m",
    "area": "A", "temperature": "Tm", "static_pressure": "psm", "absolute_pressure": "pm", "moisture": "x",
    "molar_mass_dry": "Md", "molar_mass": "M", "density": "rhom", "mean_root_differential_pressure": "mr",
    "reynolds_number": "Re",
}
# Quantities with a budget of their own, the client's figure first.
WITH_BUDGET = ("actual_flow", "dry_standard_flow", "standard_flow", "mass_flow", "mean_velocity")
