"""Options that several commands share, said once."""

from collections.abc import Callable
from pathlib import Path
from typing import Any

import click

Decorator = Callable[[Callable[..., Any]], Callable[..., Any]]
PATH = click.Path(path_type=Path)


def recipe_option(*, required: bool = True) -> Decorator:
    """``--recipe``: the set-up."""
    return click.option(
        "--recipe",
        "-r",
        "recipe_path",
        type=PATH,
        required=required,
        metavar="RECIPE.toml",
        help="The set-up that the photograph was taken with.",
    )


def folder_option(*, required: bool = True, text: str = "Folder for the results; made when it is missing.") -> Decorator:
    """``--out`` as a folder."""
    return click.option("--out", "-o", "folder", type=PATH, required=required, metavar="DIR", help=text)


def file_option(metavar: str, text: str, *, required: bool = True) -> Decorator:
    """``--out`` as a file."""
    return click.option("--out", "-o", "path", type=PATH, required=required, metavar=metavar, help=text)


json_option: Decorator = click.option("--json", "as_json", is_flag=True, help="Print the result as one JSON document.")
verbose_option: Decorator = click.option("--verbose", "-v", is_flag=True, help="Say more: steps, and the details of a fault.")


class Place(click.ParamType[tuple[int, int]]):
    """A pixel as ``X,Y``."""

    name = "X,Y"

    def convert(self, value: Any, param: click.Parameter | None, ctx: click.Context | None) -> tuple[int, int]:
        """Two whole numbers, 0 or above."""
        if isinstance(value, tuple):
            return value
        try:
            x, y = (int(part) for part in str(value).split(","))
        except ValueError:
            self.fail(f"{value!r} found; two whole numbers with a comma between them are allowed, such as 320,200", param, ctx)
        if x < 0 or y < 0:
            self.fail(f"{value!r} found; the first pixel is 0,0", param, ctx)
        return x, y
