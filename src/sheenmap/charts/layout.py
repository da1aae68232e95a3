"""Room for labels: who may stand where without covering another."""

from collections.abc import Sequence


def rows_without_overlap(extents: Sequence[tuple[float, float]], rows: int, gap: float) -> list[int | None]:
    """For each (left, right) the first row where it clears those placed before it, or None when all ``rows`` are taken."""
    taken: list[list[tuple[float, float]]] = [[] for _ in range(rows)]
    placed: list[int | None] = []
    for left, right in extents:
        row = next(
            (r for r, others in enumerate(taken) if all(right + gap <= a or left - gap >= b for a, b in others)),
            None,
        )
        if row is not None:
            taken[row].append((left, right))
        placed.append(row)
    return placed


def centred_extent(centre: float, width: float, low: float, high: float) -> tuple[float, float]:
    """(left, right) of something ``width`` wide, centred as nearly as the limits ``low`` and ``high`` allow."""
    left = min(max(centre - width / 2, low), max(high - width, low))
    return left, left + width
