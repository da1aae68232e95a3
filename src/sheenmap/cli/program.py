"""``sheenmap``: the group of all commands."""

from typing import Any

import click

from sheenmap import __version__
from sheenmap.cli.chart import chart_command, table_command
from sheenmap.cli.demo import demo_command
from sheenmap.cli.judge import judge_command
from sheenmap.cli.map import map_command
from sheenmap.cli.materials import materials_command
from sheenmap.cli.render import render_command
from sheenmap.cli.statuses import EPILOG


@click.group(epilog=EPILOG, context_settings={"help_option_names": ["-h", "--help"], "max_content_width": 110})
@click.version_option(__version__, prog_name="sheenmap", message="%(prog)s %(version)s")
def program() -> None:
    """Thickness maps of thin films from the interference colours of a photograph."""


for _command in (
    map_command,
    judge_command,
    chart_command,
    table_command,
    render_command,
    materials_command,
    demo_command,
):
    program.add_command(_command)


def main() -> Any:
    """Run the command line. Never returns: it exits with the statuses of the contract."""
    return program(prog_name="sheenmap")
