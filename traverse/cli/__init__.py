"""The commands. Nothing heavy is imported before a command runs."""

from __future__ import annotations

from typing import Any

import click

from traverse._version import __version__
from traverse.cli.plan_command import plan
from traverse.cli.reduce_command import reduce
from traverse.cli.study_command import study
from traverse.errors import TraverseError


class House(click.Group):
    """A group that turns the program's own errors into one clear line; anything else is a bug and shows itself."""

    def invoke(self, ctx: click.Context) -> Any:
        """Run the command; exit code 1 for what could not be done."""
        try:
            return super().invoke(ctx)
        except TraverseError as problem:
            raise click.ClickException(str(problem)) from problem


@click.group(cls=House, context_settings={"help_option_names": ["-h", "--help"]})
@click.version_option(__version__, message="traverse %(version)s")
def main() -> None:
    """Turn pitot-tube traverse readings into a flow that holds up.

    Velocities by Bernoulli with the density of the real gas, integrated over a standard layout of points, with an
    uncertainty and a workbook whose every number can be traced. Exit codes: 0 done; 1 could not do it; 2 wrong use;
    3 done, but with --strict a check failed.
    """


main.add_command(plan)
main.add_command(reduce)
main.add_command(study)
