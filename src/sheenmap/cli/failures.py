"""What went wrong, in plain lines on stderr, and the exit status that goes with it."""

import logging
import os
import sys
import traceback
from typing import Any, NoReturn

import click

from sheenmap.cli.statuses import BROKEN, INTERRUPTED, WRONG_SETTINGS
from sheenmap.errors import OutputError, SheenmapError

NO_INTERRUPT = (click.exceptions.Exit, click.exceptions.Abort, click.ClickException)


class Command(click.Command):
    """A command that never ends in a traceback, unless ``-v`` asks for one."""

    def invoke(self, ctx: click.Context) -> Any:
        """Run the command; whatever it raises becomes lines and a status."""
        try:
            return super().invoke(ctx)
        except NO_INTERRUPT:
            raise
        except KeyboardInterrupt:
            _end(ctx, "interrupted; files of an earlier run are whole", INTERRUPTED)
        except BrokenPipeError:
            _leave_pipe(ctx)
        except OutputError as error:
            _end(ctx, str(error), BROKEN)
        except SheenmapError as error:
            _end(ctx, str(error), WRONG_SETTINGS)
        except MemoryError:
            _end(ctx, "the memory does not suffice for this picture", BROKEN)
        except Exception as error:  # the rim: the one place that catches what nobody foresaw
            _unforeseen(ctx, error)


def set_up_logging(*, verbose: bool) -> None:
    """Warnings of the rooms that log go to stderr; with ``verbose`` everything."""
    logging.basicConfig(stream=sys.stderr, format="%(name)s: %(message)s", level=logging.WARNING)
    logging.getLogger("sheenmap").setLevel(logging.DEBUG if verbose else logging.WARNING)


def _end(ctx: click.Context, text: str, status: int) -> NoReturn:
    click.echo(text, err=True)
    ctx.exit(status)


def _unforeseen(ctx: click.Context, error: Exception) -> NoReturn:
    if ctx.params.get("verbose"):
        click.echo("".join(traceback.format_exception(error)).rstrip(), err=True)
    advice = "" if ctx.params.get("verbose") else "; run it again with -v for the details that a report needs"
    text = " ".join(f"{type(error).__name__}: {error}".split())
    _end(ctx, f"a fault of sheenmap itself: {text}{advice}", BROKEN)


def _leave_pipe(ctx: click.Context) -> NoReturn:
    """The reader of our output has gone; Python would complain once more when it flushes at its end."""
    os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
    ctx.exit(0)
