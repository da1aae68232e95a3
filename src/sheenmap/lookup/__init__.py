"""Signal against thickness: the recipe's forward model, tabulated once, and looked up in between.

Tables are (A, T, C): angle, thickness, channel; values are relative to the blank's.
"""

from sheenmap.lookup.fuse import fused_table
from sheenmap.lookup.quadrature import Quadrature, band_nm, converged, quadrature
from sheenmap.lookup.table import Table, blank_signal, build_table, evaluate

__all__ = [
    "Quadrature",
    "Table",
    "band_nm",
    "blank_signal",
    "build_table",
    "converged",
    "evaluate",
    "fused_table",
    "quadrature",
]
