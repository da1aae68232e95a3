"""The tree of exceptions, and the records of what went wrong.

::

    SheenmapError                   whatever a user can mend; the command line prints it in plain lines
    ├── SettingsError               the command, recipe or a file that it names: every fault at once (exit status 2)
    │   └── RecipeError             the same, for a recipe
    ├── UnknownNameError            a name that the catalogue does not list, with the nearest right one
    ├── CurveError                  a CSV text that is no curve, with the line where it goes wrong
    ├── PictureError                a picture that cannot be read, with a ``Failure`` (exit status 2)
    └── OutputError                 a result that cannot be written; what was there before is whole (exit status 4)

A programmer's mistake (wrong shape, wrong type) is a plain ``ValueError`` and no member of this tree.
"""

from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from difflib import get_close_matches
from pathlib import Path


@dataclass(frozen=True, kw_only=True)
class Fault:
    """One thing wrong in the settings: where it stands, what was found, what is allowed.

    ``key`` is the full name of the setting (``stack.layers[0].material``) or of the option (``--out``).
    """

    key: str
    found: str
    allowed: str = ""
    hint: str = ""


@dataclass(frozen=True, kw_only=True)
class Failure:
    """A picture that could not be read: which, why in a few words, and the detail."""

    path: Path
    reason: str
    detail: str = ""


class SheenmapError(Exception):
    """Whatever a user can mend."""


class SettingsError(SheenmapError):
    """Settings that cannot work; ``faults`` holds all of them."""

    def __init__(self, faults: Iterable[Fault], *, where: str = "settings") -> None:
        self.faults: tuple[Fault, ...] = tuple(faults)
        self.where = where
        super().__init__(render_faults(self.faults, where=where))


class RecipeError(SettingsError):
    """A recipe that cannot work; ``faults`` holds all of them."""


class UnknownNameError(SheenmapError):
    """A name that the catalogue does not list."""

    def __init__(self, kind: str, name: str, known: Sequence[str]) -> None:
        self.kind, self.name, self.nearest = kind, name, nearest_name(name, known)
        super().__init__(f"no {kind} named {name!r}" + (f"; did you mean {self.nearest!r}?" if self.nearest else ""))


class CurveError(SheenmapError):
    """A CSV text that is no curve; the message says what was found, on which line, and what is allowed."""


class PictureError(SheenmapError):
    """A picture that cannot be read or used."""

    def __init__(self, failure: Failure) -> None:
        self.failure = failure
        detail = f": {failure.detail}" if failure.detail else ""
        super().__init__(f"{failure.path}: {failure.reason}{detail}")


class OutputError(SheenmapError):
    """A result that could not be written; files of an earlier run are whole."""


def nearest_name(name: str, known: Iterable[str]) -> str:
    """The known name most like ``name``, or an empty string when none is near."""
    by_folded = {candidate.casefold(): candidate for candidate in known}
    matches = get_close_matches(name.casefold(), list(by_folded), n=1, cutoff=0.6)
    return by_folded[matches[0]] if matches else ""


def render_faults(faults: Sequence[Fault], *, where: str) -> str:
    """Faults as the lines a user reads: a heading with their number, then key, found, allowed and hint in columns."""
    count = f"{len(faults)} fault" + ("" if len(faults) == 1 else "s")
    rows = [(fault.key, fault.found, _advice(fault)) for fault in faults]
    widths = [min(44, max((len(row[column]) for row in rows), default=0)) for column in (0, 1)]
    lines = [f"  {key:<{widths[0]}}   {found:<{widths[1]}}   {advice}".rstrip() for key, found, advice in rows]
    return "\n".join([f"{where}: {count}", *lines])


def _advice(fault: Fault) -> str:
    allowed = f"allowed: {fault.allowed}" if fault.allowed else ""
    return "   ".join(part for part in (allowed, fault.hint) if part)
