"""python -m traverse."""

from traverse.cli import main

main()
