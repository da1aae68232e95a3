"""From the signal to thickness, standard uncertainty and flags: the inverse's own story."""

from dataclasses import dataclass, replace

import cv2
import numpy as np
from numpy.typing import NDArray

from sheenmap.arrays import BoolArray, FloatArray
from sheenmap.camera import Signal
from sheenmap.flags import AMBIGUOUS, AT_LIMIT, BY_CONTINUITY, DARK, OFF_CURVE, OUTSIDE, WEAK, FlagArray, is_blocked
from sheenmap.inversion.blocks import Blocks, gather_blocks
from sheenmap.inversion.candidates import find_candidates
from sheenmap.inversion.contradiction import is_contradicted, misfit
from sheenmap.inversion.likelihood import Doubts, chi_square_limit
from sheenmap.inversion.local import Local, around, fit_locally, pixels_at
from sheenmap.inversion.posterior import posterior_near
from sheenmap.inversion.reference import Planes, fit_planes
from sheenmap.inversion.regions import DECIDED_GAP
from sheenmap.inversion.residuals import with_residual_noise
from sheenmap.inversion.settle import Settled, settle
from sheenmap.inversion.shading import estimate_shading
from sheenmap.inversion.strays import OFF_CURVE_FALSE_ALARMS, SURELY_OFF_FALSE_ALARMS, split_strays
from sheenmap.lookup import Table

WEAK_SIGMA_NM = 5.0
MUCH_MORE_SHADING = 1.3
STEP_REACH = 4  # pixels
DARKEST_SHARE = 0.3  # of the darkest colour that the table holds; a mirror that shows no light is this dark
FEWEST_RESIDUALS, MOST_RESIDUALS = 500, 30_000


@dataclass(frozen=True, kw_only=True, eq=False)
class Inversion:
    """What a photograph's pixels say (H, W).

    ``thickness_nm`` and ``sigma_nm`` are NaN where no value was formed; whether it is claimed is for ``flags`` to say.
    ``chi_square`` is that of the best fit; ``block`` the block that led a pixel; ``settled`` what the blocks hold.
    ``misfit`` is about 1 where noise and shading explain the residuals.
    ``is_contradicted`` tells that the picture as a whole does not go with the table; then nothing is claimed.
    ``signal`` and ``doubts`` are the ones that were used in the end: with the noise and the shading that the picture showed.
    """

    thickness_nm: FloatArray
    sigma_nm: FloatArray
    chi_square: FloatArray
    flags: FlagArray
    block: NDArray[np.intp]
    settled: Settled
    signal: Signal
    doubts: Doubts
    blocks: Blocks
    is_contradicted: bool
    misfit: float


def invert(
    signal: Signal, table: Table, inside: BoolArray, *,
    angle_deg: NDArray[np.floating] | None = None, doubts: Doubts, shading_is_known: bool = False,
) -> Inversion:  # fmt: skip
    """Thickness of every pixel ``inside`` (H, W), as far as its light and its surroundings tell.

    The shading of ``doubts`` is a first guess that the picture's own replaces, unless ``shading_is_known``.
    """
    flags = signal.flags.copy()
    flags[~inside] = np.uint16(OUTSIDE.mask)
    flags[inside & _is_black(signal, table)] |= np.uint16(DARK.mask)
    usable = ~is_blocked(flags)
    blocks, settled, planes = _settled_planes(signal, usable, angle_deg, table, doubts)
    if signal.spread > 1:
        signal = _with_shared_noise(signal, usable, angle_deg, table, planes, doubts)
        blocks, settled, planes = _settled_planes(signal, usable, angle_deg, table, doubts)
    if not shading_is_known:
        shading_u = estimate_shading(settled.thickness_nm, settled.sure, settled.evidence, table) or doubts.shading_u
        is_worse = shading_u > MUCH_MORE_SHADING * doubts.shading_u
        doubts = replace(doubts, shading_u=shading_u)
        if is_worse:
            blocks, settled, planes = _settled_planes(signal, usable, angle_deg, table, doubts)
    local = fit_locally(signal, usable, angle_deg, table, planes, doubts)
    thickness_nm, sigma_nm, chi_square = local.thickness_nm, local.sigma_nm, local.chi_square
    channels = table.signal.shape[-1]
    stray = usable & ~(chi_square <= chi_square_limit(OFF_CURVE_FALSE_ALARMS, channels))
    elsewhere = _fit_elsewhere(signal, np.flatnonzero(stray), angle_deg, table, doubts)
    _flag_strays(flags, stray, elsewhere, _steps(local.block, settled), channels, thickness_nm, sigma_nm, chi_square)
    _flag_order(flags, local, settled, stray)
    _flag_values(flags, thickness_nm, sigma_nm, table)
    contradicted = is_contradicted(blocks, settled.region)
    if contradicted:
        flags[usable] |= np.uint16(OFF_CURVE.mask)
    return Inversion(
        thickness_nm=thickness_nm, sigma_nm=sigma_nm, chi_square=chi_square, flags=flags, block=local.block,
        settled=settled, signal=signal, doubts=doubts, blocks=blocks, is_contradicted=contradicted, misfit=misfit(settled, table),
    )  # fmt: skip


def _settled_planes(
    signal: Signal, usable: BoolArray, angle_deg: NDArray[np.floating] | None, table: Table, doubts: Doubts
) -> tuple[Blocks, Settled, Planes]:
    blocks = gather_blocks(signal, usable, angle_deg)
    pixel_variance = blocks.variance * blocks.pixels_worth
    settled = settle(blocks, pixel_variance, signal.correlation, table, doubts)
    return blocks, settled, fit_planes(settled.thickness_nm, settled.sigma_nm, settled.region, blocks.size)


def _with_shared_noise(
    signal: Signal, usable: BoolArray, angle_deg: NDArray[np.floating] | None, table: Table, planes: Planes, doubts: Doubts
) -> Signal:
    """The signal with its noise as the residuals of evenly spread pixels of one region show it."""
    known = np.repeat(np.repeat(planes.region >= 0, planes.size, 0), planes.size, 1)[: usable.shape[0], : usable.shape[1]]
    rows = np.flatnonzero(usable & known)
    if rows.size < FEWEST_RESIDUALS:
        return signal
    rows = rows[:: max(1, rows.size // MOST_RESIDUALS)]
    pixels = pixels_at(signal, angle_deg, rows)
    reference_nm, window_nm = around(rows, usable.shape, planes)
    return with_residual_noise(signal, pixels, posterior_near(pixels, table, reference_nm, window_nm, doubts).thickness_nm, table)


def _is_black(signal: Signal, table: Table) -> BoolArray:
    """Where every channel is far darker than any film of the search range: the mirror shows no light."""
    darkest = table.signal.min(axis=(0, 1)) * DARKEST_SHARE
    return np.asarray(np.all(signal.values < darkest - 4 * np.sqrt(signal.variance), axis=-1))


@dataclass(frozen=True, kw_only=True, eq=False)
class _Elsewhere:
    """The best thickness of stray pixels (N,) over the whole table, its chi-square and that of the second over it."""

    rows: NDArray[np.intp]
    thickness_nm: FloatArray
    sigma_nm: FloatArray
    chi_square: FloatArray
    gap: FloatArray


def _fit_elsewhere(
    signal: Signal, rows: NDArray[np.intp], angle_deg: NDArray[np.floating] | None, table: Table, doubts: Doubts
) -> _Elsewhere:
    pixels = pixels_at(signal, angle_deg, rows)
    found = find_candidates(pixels.signal, pixels.variance, signal.correlation, table, doubts, pixels.angle_deg)
    best = np.nan_to_num(found.thickness_nm[:, 0], nan=table.thickness_nm[0])
    fit = posterior_near(pixels, table, best, np.full(rows.size, 8.0), doubts)
    return _Elsewhere(
        rows=rows, thickness_nm=fit.thickness_nm, sigma_nm=fit.sigma_nm, chi_square=found.chi_square[:, 0], gap=found.gap
    )


def _steps(block: NDArray[np.intp], settled: Settled) -> BoolArray:
    """Where pixels (H, W) led by blocks of different regions lie within ``STEP_REACH`` of each other."""
    regions = np.unique(settled.region)
    number = np.searchsorted(regions, settled.region.ravel()).astype(np.float32)
    led = block >= 0
    kernel = np.ones((2 * STEP_REACH + 1, 2 * STEP_REACH + 1), np.uint8)
    own = number[np.maximum(block, 0)]
    highest = cv2.dilate(np.where(led, own, -1).astype(np.float32), kernel)
    lowest = cv2.erode(np.where(led, own, np.float32(1e9)).astype(np.float32), kernel)
    return np.asarray(highest > lowest)


def _flag_strays(
    flags: FlagArray, stray: BoolArray, elsewhere: _Elsewhere, at_step: BoolArray,
    channels: int,
    thickness_nm: FloatArray, sigma_nm: FloatArray, chi_square: FloatArray,
) -> None:  # fmt: skip
    on_curve = np.zeros(stray.shape, bool)
    on_curve.flat[elsewhere.rows] = elsewhere.chi_square <= chi_square_limit(OFF_CURVE_FALSE_ALARMS, channels)
    severity = np.where(stray, np.where(np.isfinite(chi_square), chi_square, 1e9), 0.0)
    defect, film = split_strays(stray, on_curve, severity, at_step, chi_square_limit(SURELY_OFF_FALSE_ALARMS, channels))
    flags[(defect | (stray & ~film)) & ((flags & np.uint16(OUTSIDE.mask)) == 0)] |= np.uint16(OFF_CURVE.mask)
    moved = film.flat[elsewhere.rows]
    rows = elsewhere.rows[moved]
    thickness_nm.flat[rows], sigma_nm.flat[rows] = elsewhere.thickness_nm[moved], elsewhere.sigma_nm[moved]
    chi_square.flat[rows] = elsewhere.chi_square[moved]
    undecided = rows[elsewhere.gap[moved] < DECIDED_GAP]
    flags.flat[undecided] |= np.uint16(AMBIGUOUS.mask)


def _flag_order(flags: FlagArray, local: Local, settled: Settled, stray: BoolArray) -> None:
    led = (local.block >= 0) & ~stray
    block = local.block[led]
    undecided = (settled.gap.ravel()[block] < DECIDED_GAP) | settled.faded.ravel()[block]
    flags[led] |= np.where(undecided, np.uint16(AMBIGUOUS.mask), np.uint16(0))
    flags[led] |= np.where(settled.alone.ravel()[block], np.uint16(0), np.uint16(BY_CONTINUITY.mask))


def _flag_values(flags: FlagArray, thickness_nm: FloatArray, sigma_nm: FloatArray, table: Table) -> None:
    low, high = table.search_nm
    beyond = (thickness_nm > high) | ((thickness_nm < low) if low > 0 else np.zeros(flags.shape, bool))
    flags[beyond] |= np.uint16(AT_LIMIT.mask)
    flags[sigma_nm > WEAK_SIGMA_NM] |= np.uint16(WEAK.mask)
