"""Signal to posterior to thickness, standard uncertainty and flags.

Pictures are (H, W), blocks (h, w); chi-square is -2 ln of the likelihood; thickness and its uncertainty are in nm.
"""

from sheenmap.inversion.candidates import Candidates
from sheenmap.inversion.candidates import find_candidates as pixel_candidates
from sheenmap.inversion.fitting import share_that_fits
from sheenmap.inversion.invert import Inversion, invert
from sheenmap.inversion.likelihood import Doubts, chi_square_limit
from sheenmap.inversion.listing import list_candidates

__all__ = [
    "Candidates",
    "Doubts",
    "Inversion",
    "chi_square_limit",
    "invert",
    "list_candidates",
    "pixel_candidates",
    "share_that_fits",
]
