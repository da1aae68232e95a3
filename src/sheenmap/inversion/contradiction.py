"""Whether the picture as a whole contradicts the recipe.

Dirt and metal have edges. When film of one smooth colour runs from pixels that fit into pixels that no thickness explains,
it is not the part that is wrong there but the set-up, and what does fit, fits by chance.
"""

import numpy as np
from numpy.typing import NDArray

from sheenmap.arrays import BoolArray
from sheenmap.inversion.blocks import Blocks
from sheenmap.inversion.likelihood import chi_square_limit
from sheenmap.inversion.settle import Settled
from sheenmap.lookup import Table, evaluate

LEAST_OFF = 0.05  # of the even blocks off the curve, before the set-up is suspected
MOSTLY_OFF = 0.6  # of the even blocks: what is not the recipe's film should not be in the region
MOSTLY_SMOOTH = 0.5  # of the border between what fits and what does not
SMOOTH_SIGNAL = 0.06  # neighbouring blocks of one film differ by less, relative to the blank


def is_contradicted(blocks: Blocks, region: NDArray[np.intp]) -> bool:
    """True when most is off the curve, or what is off it passes smoothly into what is on it.

    ``region`` (h, w) is -1 off the curve.
    """
    off, on = blocks.even & (region < 0), region >= 0
    if not blocks.even.any() or off.sum() < LEAST_OFF * blocks.even.sum():
        return False
    if off.sum() > MOSTLY_OFF * blocks.even.sum():
        return True
    smooth, border = 0, 0
    for here, there in (((slice(None), slice(None, -1)), (slice(None), slice(1, None))), ((slice(None, -1),), (slice(1, None),))):
        alike = np.all(np.abs(blocks.signal[here] - blocks.signal[there]) < SMOOTH_SIGNAL, axis=-1)
        for first, second in ((here, there), (there, here)):
            smooth += int(np.count_nonzero(off[first] & on[second] & alike))
            border += int(np.count_nonzero(off[first] & (on[second] | _is_edge(blocks.even, second))))
    return smooth > MOSTLY_SMOOTH * max(border, 1)


def misfit(settled: Settled, table: Table) -> float:
    """Middle chi-square of the sure blocks over what noise and shading explain: about 1 when lamp, camera and index are right."""
    rows = np.flatnonzero(settled.sure)
    if not rows.size:
        return 1.0
    evidence = settled.shaded
    angle = None if evidence.angle_deg is None else evidence.angle_deg[rows]
    expected, slope = evaluate(table, settled.thickness_nm.ravel()[rows], angle)
    residual, precision = evidence.signal[rows] - expected, evidence.precision[rows]
    along = np.einsum("nij,nj->ni", precision, slope)
    pull = np.einsum("ni,ni->n", along, residual)
    information = np.maximum(np.einsum("ni,ni->n", along, slope), 1e-12)
    chi_square = np.einsum("ni,nij,nj->n", residual, precision, residual) - pull**2 / information
    return float(np.median(chi_square)) / chi_square_limit(0.5, residual.shape[-1])


def _is_edge(even: BoolArray, where: tuple[slice, ...]) -> BoolArray:
    return np.asarray(~even[where])
