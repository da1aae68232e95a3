"""Whether the picture as a whole contradicts the recipe.

Dirt and metal have edges. When film of one smooth colour runs from pixels that fit into pixels that no thickness explains,
it is not the part that is wrong there but the set-up, and what does fit, fits by chance.
"""

import numpy as np
from numpy.typing import NDArray

from sheenmap.arrays import BoolArray
from sheenmap.inversion.blocks import Blocks

LEAST_OFF = 0.05  # of the even blocks off the curve, before the set-up is suspected
MOSTLY_SMOOTH = 0.5  # of the border between what fits and what does not
SMOOTH_SIGNAL = 0.06  # neighbouring blocks of one film differ by less, relative to the blank


def is_contradicted(blocks: Blocks, region: NDArray[np.intp]) -> bool:
    """True when most of what is off the curve passes smoothly into what is on it; ``region`` (h, w) is -1 off the curve."""
    off, on = blocks.even & (region < 0), region >= 0
    if not blocks.even.any() or off.sum() < LEAST_OFF * blocks.even.sum():
        return False
    if not on.any():
        return True
    smooth, border = 0, 0
    for here, there in (((slice(None), slice(None, -1)), (slice(None), slice(1, None))), ((slice(None, -1),), (slice(1, None),))):
        alike = np.all(np.abs(blocks.signal[here] - blocks.signal[there]) < SMOOTH_SIGNAL, axis=-1)
        for first, second in ((here, there), (there, here)):
            smooth += int(np.count_nonzero(off[first] & on[second] & alike))
            border += int(np.count_nonzero(off[first] & (on[second] | _is_edge(blocks.even, second))))
    return smooth > MOSTLY_SMOOTH * max(border, 1)


def _is_edge(even: BoolArray, where: tuple[slice, ...]) -> BoolArray:
    return np.asarray(~even[where])
