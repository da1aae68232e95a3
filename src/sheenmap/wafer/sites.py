"""Where values are read on a part: layouts of rings, grids, and given points."""

import numpy as np
from numpy.typing import NDArray

from sheenmap.arrays import FloatArray
from sheenmap.wafer.coordinates import part_mm, picture_px, scale
from sheenmap.wafer.faults import SiteError
from sheenmap.wafer.region import Region, Sites
from sheenmap.wafer.spec import SiteSpec

RINGS: dict[str, tuple[int, ...]] = {
    "rings-5": (1, 4),
    "rings-9": (1, 8),
    "rings-13": (1, 4, 8),
    "rings-25": (1, 8, 16),
    "rings-49": (1, 8, 16, 24),
}
MOST_SITES = 20_000
LEAST_SPOT_PX = 0.71  # half the diagonal of a pixel: every spot holds a pixel's centre


def unit_rings(layout: str) -> FloatArray:
    """Sites of a ring layout on a disc of radius 1, (S, 2): the centre, then rings at equal steps out to radius 1.

    Each ring runs counter-clockwise from the +x axis. Raises ``SiteError`` for a layout that is not one of ``RINGS``.
    """
    if layout not in RINGS:
        raise SiteError(f"no site layout named {layout!r}; there are {', '.join(RINGS)}, grid and points")
    counts = RINGS[layout]
    radius = np.repeat(np.arange(len(counts)) / (len(counts) - 1), counts)
    angle_rad = np.concatenate([np.arange(count) * (2 * np.pi / count) for count in counts])
    return np.asarray(radius[:, None] * np.column_stack([np.cos(angle_rad), np.sin(angle_rad)]))


def site_positions(spec: SiteSpec, region: Region) -> Sites:
    """Sites on a part, in part coordinates and in pixels.

    Parameters
    ----------
    spec : SiteSpec
        What the recipe says.
    region : Region
        With a scale; with a disc for the ring layouts.

    Returns
    -------
    Sites
        In an order that depends on the layout alone: rings from the centre outwards and counter-clockwise from +x, grids by
        rows from the top and in a row from the left (both as seen with the notch down), points as given.

    Raises
    ------
    SiteError
        Rings without a disc, a grid of no sites or too many, points outside the region.
    RegionError
        No scale.
    """
    mm_per_px = scale(region)
    xy_mm = _points_mm(spec, region)
    x_px, y_px = picture_px(region, xy_mm[:, 0], xy_mm[:, 1])
    return Sites(
        layout=spec.layout if spec.pitch_mm is None else f"{spec.layout} {spec.pitch_mm:g}",
        x_mm=xy_mm[:, 0], y_mm=xy_mm[:, 1], x_px=x_px, y_px=y_px,
        radius_mm=spec.radius_mm, radius_px=max(spec.radius_mm / mm_per_px, LEAST_SPOT_PX),
    )  # fmt: skip


def _points_mm(spec: SiteSpec, region: Region) -> FloatArray:
    if spec.layout == "grid":
        return _grid_mm(spec.pitch_mm, region)
    if spec.layout == "points":
        return _given_mm(spec.points_mm, region)
    unit = unit_rings(spec.layout)
    if region.disc is None:
        raise SiteError(f'sites.layout {spec.layout!r} needs region.shape = "disc"; take "grid N" or a CSV of points here')
    reach_mm = region.disc.radius_px * scale(region) - region.edge_exclusion_mm
    return unit * reach_mm


def _grid_mm(pitch_mm: float | None, region: Region) -> FloatArray:
    """Grid through the part's centre; kept where the pixel at the site is inside the region."""
    if pitch_mm is None or not pitch_mm > 0:
        raise SiteError(f"a grid of sites needs a pitch above 0 mm, found {pitch_mm}")
    height, width = region.inside.shape
    corner_x, corner_y = part_mm(region, np.array([0, width - 1, 0, width - 1.0]), np.array([0, 0, height - 1, height - 1.0]))
    first_x, last_x = np.ceil(corner_x.min() / pitch_mm - 1e-9), np.floor(corner_x.max() / pitch_mm + 1e-9)
    first_y, last_y = np.ceil(corner_y.min() / pitch_mm - 1e-9), np.floor(corner_y.max() / pitch_mm + 1e-9)
    if (last_x - first_x + 1) * (last_y - first_y + 1) > 4 * MOST_SITES:
        raise SiteError(f"a grid of {pitch_mm:g} mm makes more than {MOST_SITES} sites; take a wider pitch")
    x, y = np.meshgrid(np.arange(first_x, last_x + 1), np.arange(last_y, first_y - 1, -1))
    points = np.column_stack([x.ravel(), y.ravel()]) * pitch_mm
    points = points[_is_inside(region, points)]
    if not 1 <= len(points) <= MOST_SITES:
        raise SiteError(f"a grid of {pitch_mm:g} mm makes {len(points)} sites inside the region; 1 to {MOST_SITES} are allowed")
    return points


def _given_mm(points_mm: NDArray[np.float64] | None, region: Region) -> FloatArray:
    if points_mm is None or len(points_mm) == 0:
        raise SiteError("the list of sites is empty")
    points = np.asarray(points_mm, float)
    outside = np.flatnonzero(~_is_inside(region, points))
    if outside.size:
        named = "; ".join(f"site {i + 1} at x {points[i, 0]:g} mm, y {points[i, 1]:g} mm" for i in outside[:5])
        more = f" and {outside.size - 5} more" if outside.size > 5 else ""
        raise SiteError(f"{outside.size} of {len(points)} sites lie outside the region: {named}{more}")
    return points


def _is_inside(region: Region, points_mm: FloatArray) -> NDArray[np.bool_]:
    """True where the pixel that holds a point, or a neighbour of it, is inside: points on the rim itself count."""
    x_px, y_px = picture_px(region, points_mm[:, 0], points_mm[:, 1])
    height, width = region.inside.shape
    found = np.zeros(len(points_mm), bool)
    for right in (-0.5, 0.5):
        for down in (-0.5, 0.5):
            column, row = np.rint(x_px + right), np.rint(y_px + down)
            framed = (column >= 0) & (column < width) & (row >= 0) & (row < height)
            cell = np.where(framed, row * width + column, 0).astype(np.intp)
            found |= framed & region.inside.ravel()[cell]
    return found
