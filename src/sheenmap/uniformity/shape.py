"""The shape of a map: tilt, bowl, saddle and higher terms, radial and azimuth profiles, and the rim's fall."""

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from sheenmap.arrays import FloatArray
from sheenmap.flags import FlagArray
from sheenmap.uniformity.statistics import claimed_pixels
from sheenmap.wafer import Region, part_mm

MOST_FITTED = 200_000  # pixels, taken evenly from the map: noise of 1 nm then leaves 0.005 nm in a term
LEAST_CONDITION = 0.03  # smallest over largest eigenvalue of the terms' products; 0.2 to 0.3 on a whole disc
INNER_SHARE = 0.85  # of the radius: what is farther out is rim

TERMS: dict[str, tuple[int, int]] = {
    "mean": (0, 0),
    "tilt x": (1, 1),
    "tilt y": (1, -1),
    "bowl": (2, 0),
    "saddle 0": (2, 2),
    "saddle 45": (2, -2),
    "coma x": (3, 1),
    "coma y": (3, -1),
    "trefoil x": (3, 3),
    "trefoil y": (3, -3),
    "ring": (4, 0),
}
ORDERS = {1: 3, 2: 6, 3: 10, 4: 11}  # how many of the terms go up to a radial order


@dataclass(frozen=True, kw_only=True)
class ShapeTerm:
    """One Zernike term: its value at the rim in nm (where the term itself is largest) and standard uncertainty."""

    name: str
    value_nm: float
    u_nm: float


@dataclass(frozen=True, kw_only=True)
class Shape:
    """Terms about the part's centre over a disc of ``radius_mm``, and what they leave.

    ``order`` is the highest radial order that the claimed pixels support; lower than asked where much of the map is blocked.
    The bowl's edge is twice its value above its centre.
    """

    terms: tuple[ShapeTerm, ...]
    radius_mm: float
    residual_sd_nm: float
    order: int
    share_claimed: float


@dataclass(frozen=True, kw_only=True, eq=False)
class Profile:
    """Means over bins (B,): where (mm or degrees), mean, standard deviation and number of pixels; NaN where a bin is empty."""

    place: FloatArray
    mean_nm: FloatArray
    sd_nm: FloatArray
    pixels: NDArray[np.int64]


@dataclass(frozen=True, kw_only=True)
class RollOff:
    """The rim's mean height against the parabola through the inner part, in nm, with its standard uncertainty."""

    value_nm: float
    u_nm: float
    from_mm: float
    to_mm: float


def zernike(order: int, frequency: int, radius: FloatArray, angle_rad: FloatArray) -> FloatArray:
    """A Zernike polynomial that is at most 1 on the unit disc: R(r) cos(m a), or sin for negative ``frequency``.

    References
    ----------
    Born and Wolf, Principles of Optics, section 9.2.1, equation 5 (from memory).
    """
    m = abs(frequency)
    radial = np.zeros_like(radius)
    for k in range((order - m) // 2 + 1):
        ways = _factorial(order - k) / (_factorial(k) * _factorial((order + m) // 2 - k) * _factorial((order - m) // 2 - k))
        radial = radial + (-1) ** k * ways * radius ** (order - 2 * k)
    return np.asarray(radial * (np.cos(m * angle_rad) if frequency >= 0 else np.sin(m * angle_rad)))


def _factorial(n: int) -> float:
    return float(np.prod(np.arange(1, n + 1)))


def shape_of(
    thickness_nm: NDArray[np.floating],
    sigma_nm: NDArray[np.floating],
    flags: FlagArray,
    region: Region,
    *,
    order: int = 2,
    noise_correlation: float = 1.0,
) -> Shape | None:
    """Tilt, bowl and saddle of a map, and higher terms up to a radial order.

    Parameters
    ----------
    thickness_nm, sigma_nm : (H, W) float
        Map and the standard uncertainty of each pixel that its neighbours do not share.
    flags : (H, W) uint16
        Those that block take a pixel out.
    region : Region
        With a scale. The unit disc reaches to the farthest pixel inside it.
    order : int
        1 (tilt), 2 (bowl and saddle), 3 (coma, trefoil) or 4 (ring).
    noise_correlation : float
        How many pixels share one draw of the noise.

    Returns
    -------
    Shape or None
        None where fewer than 12 pixels are claimed. x is to the right and y up with the notch down.

    Notes
    -----
    Least squares over the claimed pixels, each of the same weight. Where these do not tell terms apart, the order is lowered.
    """
    reach_mm = _reach_mm(region)
    x_mm, y_mm, values, sigma = _sampled(thickness_nm, sigma_nm, flags, region)
    if values.size < 12:
        return None
    radius, angle_rad = np.hypot(x_mm, y_mm) / reach_mm, np.arctan2(y_mm, x_mm)
    columns = [zernike(n, m, radius, angle_rad) for n, m in TERMS.values()]
    supported = _supported_order(columns, order)
    design = np.column_stack(columns[: ORDERS[supported]] if supported else columns[:1])
    inverse = np.linalg.pinv(design.T @ design)
    found = inverse @ (design.T @ values)
    claimed = int(np.count_nonzero(claimed_pixels(thickness_nm, flags, region.inside)))
    spread = (design * np.square(sigma)[:, None]).T @ design
    thinned = values.size / claimed  # the terms rest on a sample, so their noise is the sample's
    u = np.sqrt(np.diag(inverse @ spread @ inverse) * max(1.0, noise_correlation * thinned))
    names = list(TERMS)[: design.shape[1]]
    return Shape(
        terms=tuple(ShapeTerm(name=name, value_nm=float(a), u_nm=float(b)) for name, a, b in zip(names, found, u)),
        radius_mm=reach_mm, residual_sd_nm=float(np.std(values - design @ found)), order=supported,
        share_claimed=claimed / int(np.count_nonzero(region.inside)),
    )  # fmt: skip


def _supported_order(columns: list[FloatArray], order: int) -> int:
    """The highest order up to ``order`` whose terms the pixels tell apart; 0 when not even tilt."""
    for trial in range(order, 0, -1):
        design = np.column_stack(columns[: ORDERS[trial]])
        size = np.sqrt(np.mean(design**2, axis=0))
        eigenvalues = np.linalg.eigvalsh((design / np.maximum(size, 1e-12)).T @ (design / np.maximum(size, 1e-12)) / len(design))
        if size.min() > 1e-6 and eigenvalues[0] > LEAST_CONDITION * eigenvalues[-1]:
            return trial
    return 0


def _reach_mm(region: Region) -> float:
    """Distance of the farthest corner of the region's box of rows and columns, cut to the disc where there is one."""
    rows, columns = np.flatnonzero(region.inside.any(axis=1)), np.flatnonzero(region.inside.any(axis=0))
    x, y = part_mm(region, columns[[0, -1, 0, -1]].astype(float), rows[[0, 0, -1, -1]].astype(float))
    corner = float(np.hypot(x, y).max())
    if region.disc is None or region.mm_per_px is None:
        return corner
    return min(corner, region.disc.radius_px * region.mm_per_px - region.edge_exclusion_mm)


def _sampled(
    thickness_nm: NDArray[np.floating], sigma_nm: NDArray[np.floating], flags: FlagArray, region: Region
) -> tuple[FloatArray, FloatArray, FloatArray, FloatArray]:
    """Part coordinates, values and sigma of up to ``MOST_FITTED`` claimed pixels, evenly taken."""
    rows, columns = np.nonzero(claimed_pixels(thickness_nm, flags, region.inside))
    step = max(1, -(-rows.size // MOST_FITTED))
    rows, columns = rows[::step], columns[::step]
    x_mm, y_mm = part_mm(region, columns.astype(float), rows.astype(float))
    sigma = np.nan_to_num(sigma_nm[rows, columns].astype(float))
    return x_mm, y_mm, thickness_nm[rows, columns].astype(float), sigma


def radial_profile(thickness_nm: NDArray[np.floating], flags: FlagArray, region: Region, *, bins: int = 50) -> Profile:
    """Mean over rings about the part's centre, against their middle radius in mm. Raises ``RegionError`` without a scale."""
    x_mm, y_mm, values, _ = _sampled(thickness_nm, np.zeros_like(thickness_nm), flags, region)
    edges = np.linspace(0, _reach_mm(region), bins + 1)
    return _binned(np.hypot(x_mm, y_mm), values, edges)


def azimuth_profile(thickness_nm: NDArray[np.floating], flags: FlagArray, region: Region, *, bins: int = 36) -> Profile:
    """Mean over sectors, against their middle angle in degrees counter-clockwise from +x with the notch down."""
    x_mm, y_mm, values, _ = _sampled(thickness_nm, np.zeros_like(thickness_nm), flags, region)
    return _binned(np.rad2deg(np.arctan2(y_mm, x_mm)) % 360, values, np.linspace(0, 360, bins + 1))


def _binned(place: FloatArray, values: FloatArray, edges: FloatArray) -> Profile:
    index = np.clip(np.searchsorted(edges, place, side="right") - 1, 0, edges.size - 2)
    count = np.bincount(index, minlength=edges.size - 1)
    known = np.where(count > 0, count, 1)
    blank = np.where(count > 0, 0.0, np.nan)
    offset = float(values.mean()) if values.size else 0.0
    mean = np.bincount(index, weights=values - offset, minlength=edges.size - 1) / known
    square = np.bincount(index, weights=(values - offset) ** 2, minlength=edges.size - 1) / known
    sd = np.sqrt(np.maximum(square - mean**2, 0))
    return Profile(
        place=(edges[:-1] + edges[1:]) / 2, mean_nm=mean + offset + blank, sd_nm=sd + blank, pixels=count.astype(np.int64)
    )


def edge_roll_off(
    thickness_nm: NDArray[np.floating], sigma_nm: NDArray[np.floating], flags: FlagArray, region: Region, *, width_mm: float = 3.0
) -> RollOff | None:
    """How the outermost ``width_mm`` stands against the parabola a + b r^2 through the inner 85 % of the radius.

    Negative where the film falls towards the rim. None where ring or inner part has fewer than 12 claimed pixels.
    """
    reach_mm = _reach_mm(region)
    x_mm, y_mm, values, sigma = _sampled(thickness_nm, sigma_nm, flags, region)
    radius = np.hypot(x_mm, y_mm)
    inner, ring = radius <= INNER_SHARE * reach_mm, (radius > reach_mm - width_mm) & (radius <= reach_mm)
    if inner.sum() < 12 or ring.sum() < 12:
        return None
    design = np.column_stack([np.ones(inner.sum()), radius[inner] ** 2])
    inverse = np.linalg.pinv(design.T @ design)
    found = inverse @ (design.T @ values[inner])
    at_ring = np.array([1.0, float(np.mean(radius[ring] ** 2))])
    spread = (design * np.square(sigma[inner])[:, None]).T @ design
    variance = float(at_ring @ inverse @ spread @ inverse @ at_ring) + float(np.mean(sigma[ring] ** 2)) / int(ring.sum())
    value = float(values[ring].mean() - at_ring @ found)
    return RollOff(value_nm=value, u_nm=float(np.sqrt(variance)), from_mm=reach_mm - width_mm, to_mm=reach_mm)
