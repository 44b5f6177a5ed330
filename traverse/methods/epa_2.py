"""EPA Method 2, with the arithmetic of Methods 1, 3 and 4."""

from traverse.methods._epa import EPA_2

METHOD = EPA_2
