"""Statistics over a map, nonuniformity by formula, and the verdict."""

from sheenmap.uniformity.tolerance import Tolerance

__all__ = ["Tolerance"]
