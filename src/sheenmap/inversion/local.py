"""Every pixel's own fit, near the thickness that its surroundings have."""

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from sheenmap.arrays import BoolArray, FloatArray, chunks
from sheenmap.camera import Signal
from sheenmap.inversion.likelihood import Doubts
from sheenmap.inversion.posterior import Pixels, posterior_near
from sheenmap.inversion.reference import Planes
from sheenmap.lookup import Table

WINDOW_NM = 8.0  # film does not step by more from pixel to pixel unless its colour says so
WINDOW_IN_SCATTER = 4.0
BETTER_CHI_SQUARE = 4.0  # by which a neighbouring region must explain an edge pixel better than its own block's
PIECE = 400_000  # pixels that are fitted together, so that memory does not follow the picture
NEIGHBOURS = tuple((down, right) for down in (-1, 0, 1) for right in (-1, 0, 1) if (down, right) != (0, 0))


@dataclass(frozen=True, kw_only=True, eq=False)
class Local:
    """Per pixel (H, W): thickness, standard uncertainty, chi-square, and the flat number of the block that led to it."""

    thickness_nm: FloatArray
    sigma_nm: FloatArray
    chi_square: FloatArray
    block: NDArray[np.intp]


def pixels_at(signal: Signal, angle_deg: NDArray[np.floating] | None, rows: NDArray[np.intp]) -> Pixels:
    """The pixels with flat numbers ``rows``."""
    return Pixels(
        signal=signal.values.reshape(-1, signal.values.shape[-1])[rows].astype(float),
        variance=signal.variance.reshape(-1, signal.variance.shape[-1])[rows].astype(float),
        correlation=signal.correlation,
        angle_deg=None if angle_deg is None else angle_deg.ravel()[rows].astype(float),
    )


def fit_locally(
    signal: Signal, usable: BoolArray, angle_deg: NDArray[np.floating] | None, table: Table, planes: Planes, doubts: Doubts
) -> Local:
    """Fit the ``usable`` pixels (H, W) near their own block's plane, and at edges near their neighbours' too."""
    shape = usable.shape
    thickness_nm, sigma_nm = np.full(shape, np.nan), np.full(shape, np.nan)
    chi_square, block = np.full(shape, np.inf), np.full(shape, -1, np.intp)
    if (planes.region < 0).all():
        return Local(thickness_nm=thickness_nm, sigma_nm=sigma_nm, chi_square=chi_square, block=block)
    rows = np.flatnonzero(usable)
    own = _block_of(rows, shape, planes)
    attempts = [(rows, planes.leader.ravel()[own])]
    at_edge = _edge_blocks(planes.region).ravel()[own]
    for down, right in NEIGHBOURS:
        attempts.append(_from_neighbour(rows[at_edge], own[at_edge], planes, down, right))
    pieces = [
        (members[part], blocks[part], members is rows) for members, blocks in attempts for part in chunks(members.size, PIECE)
    ]
    for members, blocks, is_own in pieces:
        reference_nm, window_nm = around(members, shape, planes, blocks)
        fit = posterior_near(pixels_at(signal, angle_deg, members), table, reference_nm, window_nm, doubts)
        better = fit.chi_square < chi_square.flat[members] - (0.0 if is_own else BETTER_CHI_SQUARE)
        taken = members[better]
        thickness_nm.flat[taken], sigma_nm.flat[taken] = fit.thickness_nm[better], fit.sigma_nm[better]
        chi_square.flat[taken], block.flat[taken] = fit.chi_square[better], blocks[better]
    return Local(thickness_nm=thickness_nm, sigma_nm=sigma_nm, chi_square=chi_square, block=block)


def around(
    rows: NDArray[np.intp], shape: tuple[int, ...], planes: Planes, blocks: NDArray[np.intp] | None = None
) -> tuple[FloatArray, FloatArray]:
    """Thickness to look around, and how far, for pixels with flat numbers ``rows``, by the planes of ``blocks`` or their own."""
    blocks = planes.leader.ravel()[_block_of(rows, shape, planes)] if blocks is None else blocks
    row, column = np.divmod(rows, shape[1])
    reference_nm = planes.at(row, column, *np.divmod(blocks, planes.region.shape[1]))
    return reference_nm, WINDOW_NM + WINDOW_IN_SCATTER * planes.scatter_nm.ravel()[blocks]


def _block_of(rows: NDArray[np.intp], shape: tuple[int, ...], planes: Planes) -> NDArray[np.intp]:
    row, column = np.divmod(rows, shape[1])
    return np.asarray(row // planes.size * planes.region.shape[1] + column // planes.size)


def _edge_blocks(region: NDArray[np.intp]) -> BoolArray:
    """Blocks that know nothing, or have a neighbour of another region."""
    padded = np.pad(region, 1, mode="edge")
    height, width = region.shape
    shifts = [padded[1 + d : 1 + d + height, 1 + r : 1 + r + width] for d, r in NEIGHBOURS]
    return np.asarray((region < 0) | np.any([shift != region for shift in shifts], axis=0))


def _from_neighbour(
    rows: NDArray[np.intp], own: NDArray[np.intp], planes: Planes, down: int, right: int
) -> tuple[NDArray[np.intp], NDArray[np.intp]]:
    """Pixels whose neighbouring block lies in another region than their own, and that block."""
    height, width = planes.region.shape
    row, column = own // width + down, own % width + right
    inside = (row >= 0) & (row < height) & (column >= 0) & (column < width)
    row, column = np.clip(row, 0, height - 1), np.clip(column, 0, width - 1)
    other = planes.region[row, column]
    useful = inside & (other >= 0) & (other != planes.region.ravel()[own])
    return rows[useful], (row * width + column)[useful]
