"""Signal to posterior to thickness, standard uncertainty and flags.

Pictures are (H, W), blocks (h, w); chi-square is -2 ln of the likelihood; thickness and its uncertainty are in nm.
"""

from sheenmap.inversion.invert import Inversion, invert
from sheenmap.inversion.likelihood import Doubts

__all__ = ["Doubts", "Inversion", "invert"]
