"""What the sections of a recipe share while it is read."""

from dataclasses import dataclass, field

from sheenmap.optics import Stack
from sheenmap.recipe.curves import NamedCurve
from sheenmap.recipe.files import Folder


@dataclass(frozen=True, kw_only=True)
class Around:
    """The folder, the part's stack with its medium and substrate as written, and the curves that must cover each band."""

    folder: Folder
    stack: Stack | None
    medium_as_written: object = "air"
    substrate_as_written: object = None
    curves: list[NamedCurve] = field(default_factory=list)
