"""The one registry of flag bits: the file, ``summary.json``, the docs and the report's legend are made from it."""

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

FlagArray = NDArray[np.uint16]


@dataclass(frozen=True, kw_only=True)
class Flag:
    """One bit of ``flags.tif``: its name, whether it blocks the claim, what it means, and what a user can do."""

    bit: int
    name: str
    blocks: bool
    meaning: str
    advice: str

    @property
    def mask(self) -> int:
        """The flag as a number to be OR-ed into an array of flags."""
        return 1 << self.bit


OUTSIDE = Flag(
    bit=0,
    name="outside",
    blocks=True,
    meaning="outside the region that the recipe asks for",
    advice="Nothing to do; change [region] if the part is cut off.",
)
SATURATED = Flag(
    bit=1,
    name="saturated",
    blocks=True,
    meaning="a channel stands at full scale, in the photograph or in the blank",
    advice="Expose less, so that the brightest part of interest stands at 70 to 85 % of full scale.",
)
DARK = Flag(
    bit=2,
    name="dark",
    blocks=True,
    meaning="too little light above the dark frame to tell a colour",
    advice="Expose longer, or put an even light where the part mirrors it into the lens.",
)
OFF_CURVE = Flag(
    bit=3,
    name="off-curve",
    blocks=True,
    meaning="no thickness makes this colour: dirt, metal, damage or a wrong set-up",
    advice="Look at the part there; where much is off the curve, check material, lamp, encoding and blank.",
)
AMBIGUOUS = Flag(
    bit=4,
    name="ambiguous",
    blocks=True,
    meaning="two thicknesses or more fit and nothing decides between them",
    advice="Narrow search_nm if you may, or add a second shot with another lamp, a filter or a tilt.",
)
AT_LIMIT = Flag(
    bit=5,
    name="at-limit",
    blocks=True,
    meaning="the best fit stands on an end of the search range that is not zero",
    advice="Widen search_nm.",
)
BY_CONTINUITY = Flag(
    bit=6,
    name="by-continuity",
    blocks=False,
    meaning="the order was settled by the neighbours, not by this pixel alone",
    advice="Nothing to do; a second shot would settle it without the neighbours.",
)
WEAK = Flag(
    bit=7,
    name="weak",
    blocks=False,
    meaning="colour hardly changes with thickness here, so that the uncertainty is large",
    advice="Average over a site, or add a shot under another lamp or angle.",
)

FLAGS: tuple[Flag, ...] = (OUTSIDE, SATURATED, DARK, OFF_CURVE, AMBIGUOUS, AT_LIMIT, BY_CONTINUITY, WEAK)
BLOCKING_MASK: int = sum(flag.mask for flag in FLAGS if flag.blocks)


def is_blocked(flags: FlagArray) -> NDArray[np.bool_]:
    """True where a flag forbids the claim. Shape of ``flags``."""
    return np.asarray((flags & np.uint16(BLOCKING_MASK)) != 0)


def has(flags: FlagArray, flag: Flag) -> NDArray[np.bool_]:
    """True where ``flag`` is raised. Shape of ``flags``."""
    return np.asarray((flags & np.uint16(flag.mask)) != 0)
