"""How much of a picture a table explains, without mapping it."""

import numpy as np

from sheenmap.arrays import BoolArray
from sheenmap.camera import Signal
from sheenmap.flags import is_blocked
from sheenmap.inversion.blocks import gather_blocks
from sheenmap.inversion.candidates import find_candidates
from sheenmap.inversion.likelihood import Doubts, chi_square_limit
from sheenmap.inversion.strays import OFF_CURVE_FALSE_ALARMS
from sheenmap.lookup import Table


def share_that_fits(signal: Signal, inside: BoolArray, table: Table, doubts: Doubts) -> float:
    """Share of the even blocks inside (H, W) whose signal some thickness of a table at one angle makes; 0 when there are none."""
    blocks = gather_blocks(signal, inside & ~is_blocked(signal.flags), None)
    channels = blocks.signal.shape[-1]
    rows = np.flatnonzero(blocks.even)
    if not rows.size:
        return 0.0
    mean, variance = (array.reshape(-1, channels)[rows] for array in (blocks.signal, blocks.variance))
    found = find_candidates(mean, variance, signal.correlation, table, doubts)
    return float(np.mean(found.chi_square[:, 0] < chi_square_limit(OFF_CURVE_FALSE_ALARMS, channels)))
