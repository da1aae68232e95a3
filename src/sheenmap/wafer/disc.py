"""The round part in a picture."""

import numpy as np
from numpy.typing import NDArray

from sheenmap.wafer.circle import Circle
from sheenmap.wafer.coarse import Hint, find_edges, find_hints, reduced
from sheenmap.wafer.faults import NoDiscError
from sheenmap.wafer.marks import find_mark
from sheenmap.wafer.region import Disc
from sheenmap.wafer.rim import Rim, refine

LEAST_SIDE_PX = 24
LEAST_ARC = 0.25  # of the full turn: on less, centre and radius trade against each other by many times the rim's noise
LEAST_COVER = 0.45  # of the rim inside the frame: clips and reflections may hide the rest
LEAST_SUPPORT = 0.6  # the same in full resolution, where other outlines than a disc's part from it
OTHER_PART = 0.6  # of the largest radius: smaller circles are reflections, dust or tools, not a second part
MOST_HINTS = 8


def find_disc(picture: NDArray[np.generic], *, notch_near_deg: float | None = None) -> Disc:
    """The one round part in a picture.

    Parameters
    ----------
    picture : (H, W) or (H, W, C)
        Anything that grows with the light: luminance, or linear channels, which also find a part that differs from the bench
        in colour alone. Numbers that are not finite count as 0.
    notch_near_deg : float or None
        Where the notch or flat is expected; a mark there is taken before a larger one elsewhere.

    Returns
    -------
    Disc

    Raises
    ------
    NoDiscError
        No disc, less than a quarter of its rim in the picture, or more than one disc.

    Notes
    -----
    A disc inside another is part of its picture (a reflection, a ring of colour), so the outermost wins; a part on a round
    holder of another shade is therefore read as the holder, and wants a polygon.
    """
    discs = find_discs(picture, notch_near_deg=notch_near_deg)
    if len(discs) > 1:
        places = ", ".join(f"one of radius {d.radius_px:.0f} px at x {d.x_px:.0f}, y {d.y_px:.0f}" for d in discs)
        raise NoDiscError(
            f"{len(discs)} discs in the picture where one is wanted: {places}; crop it to one part, or use a polygon"
        )
    return discs[0]


def find_discs(picture: NDArray[np.generic], *, notch_near_deg: float | None = None) -> tuple[Disc, ...]:
    """All round parts of about the same size in a picture, numbered by rows from the top and in a row from the left.

    Parameters, Raises
        As ``find_disc``; one disc or more are returned.
    """
    if picture.ndim not in (2, 3):
        raise ValueError(f"a picture is (H, W) or (H, W, C), not {picture.shape}")
    if min(picture.shape[:2]) < LEAST_SIDE_PX:
        found = f"{picture.shape[1]} x {picture.shape[0]}"
        raise NoDiscError(f"a picture of {found} pixels is too small to find a disc: {LEAST_SIDE_PX} or more a side")
    rims, hints = _search(picture)
    if not rims:
        raise NoDiscError(_why_none(hints))
    marked = [_disc(picture, rim, notch_near_deg) for rim in rims]
    return tuple(_in_reading_order(marked))


def _search(picture: NDArray[np.generic]) -> tuple[list[Rim], list[Hint]]:
    """Rims, and the hints of the first attempt: sharp edges on circles first, then tilted discs, then blurred ones."""
    copy, factor = reduced(picture)
    sharp = find_edges(copy)
    first = find_hints(sharp)
    rims = _outermost(_refined(picture, first, factor))
    if not rims:
        rims = _outermost(_refined(picture, find_hints(sharp, slack=3.0), factor))
    if not rims:
        rims = _outermost(_refined(picture, find_hints(find_edges(copy, sharpness=0.0)), factor))
    return rims, first


def _refined(picture: NDArray[np.generic], hints: list[Hint], factor: float) -> list[Rim]:
    rims = []
    for hint in [hint for hint in hints if hint.covered >= LEAST_COVER and hint.visible >= LEAST_ARC][:MOST_HINTS]:
        scale = hint.circle
        start = Circle(
            x_px=(scale.x_px + 0.5) * factor - 0.5, y_px=(scale.y_px + 0.5) * factor - 0.5,
            radius_px=scale.radius_px * factor, oval=scale.oval,
        )  # fmt: skip
        rim = refine(picture, start, 2.0 * factor + 2.0)
        if rim is not None and rim.supported >= max(0.8 * LEAST_ARC, LEAST_SUPPORT * rim.visible):
            rims.append(rim)
    return rims


def _outermost(rims: list[Rim]) -> list[Rim]:
    """The discs that stand in no other, as large as a part: reflections, rings of colour and small round things are dropped."""
    kept: list[Rim] = []
    for rim in sorted(rims, key=lambda rim: rim.circle.radius_px, reverse=True):
        apart = all(_distance(rim, other) > 0.5 * max(rim.circle.radius_px, other.circle.radius_px) for other in kept)
        if not kept or (apart and rim.circle.radius_px > OTHER_PART * kept[0].circle.radius_px):
            kept.append(rim)
    return kept


def _distance(a: Rim, b: Rim) -> float:
    return float(np.hypot(a.circle.x_px - b.circle.x_px, a.circle.y_px - b.circle.y_px))


def _disc(picture: NDArray[np.generic], rim: Rim, notch_near_deg: float | None) -> Disc:
    mark = find_mark(picture, rim, near_deg=notch_near_deg)
    return Disc(
        x_px=rim.circle.x_px, y_px=rim.circle.y_px, radius_px=rim.circle.major_px, u_px=rim.circle.u_px, oval=rim.circle.oval,
        notch_deg=None if mark is None else mark.angle_deg,
        flat_px=0.0 if mark is None or mark.kind != "flat" else mark.depth_px,
        rim_share=rim.supported, in_frame=rim.visible,
    )  # fmt: skip


def _in_reading_order(discs: list[Disc]) -> list[Disc]:
    """Rows from the top; discs whose centres differ in height by less than a radius stand in one row."""
    ordered: list[Disc] = []
    waiting = sorted(discs, key=lambda disc: disc.y_px)
    while waiting:
        row = [disc for disc in waiting if disc.y_px < waiting[0].y_px + waiting[0].radius_px]
        ordered += sorted(row, key=lambda disc: disc.x_px)
        waiting = [disc for disc in waiting if disc not in row]
    return ordered


def _why_none(hints: list[Hint]) -> str:
    cut = [hint for hint in hints if hint.covered >= 0.7 and hint.visible < LEAST_ARC]
    if cut:
        share = 100 * max(hint.visible for hint in cut)
        return (
            f"only {share:.0f} % of a disc's rim lies in the picture, and {100 * LEAST_ARC:.0f} % or more is needed; "
            'show more of the part, or use shape = "polygon"'
        )
    return 'no disc stands out from its surroundings in the picture; use shape = "polygon", "mask" or "frame"'
