"""What other layouts would have given in this duct: equal area or log-Tchebycheff, fewer points, other diameters."""

from traverse.study._candidates import FAMILIES
from traverse.study._records import TOLD_APART, Comparison, Row, Study
from traverse.study._work import of_formula, parse_profile, study

__all__ = ["FAMILIES", "TOLD_APART", "Comparison", "Row", "Study", "of_formula", "parse_profile", "study"]
