"""The tables of several shots as one: their channels one after the other."""

from collections.abc import Sequence

import numpy as np

from sheenmap.lookup.table import Table


def fused_table(tables: Sequence[Table]) -> Table:
    """One table (A, T, 3 S) of S tables over the same thicknesses.

    At most one angle axis among them; a table at one angle is the same all along it.

    Raises
    ------
    ValueError
        Different thicknesses, or two different angle axes.
    """
    first = tables[0]
    axis = max(tables, key=lambda table: table.angle_deg.size).angle_deg
    for table in tables:
        if not np.array_equal(table.thickness_nm, first.thickness_nm):
            raise ValueError("tables over different thicknesses")
        if table.angle_deg.size > 1 and not np.array_equal(table.angle_deg, axis):
            raise ValueError("tables with different angle axes")
    shape = (axis.size, first.thickness_nm.size, 3)
    return Table(
        thickness_nm=first.thickness_nm,
        angle_deg=axis,
        signal=np.concatenate([np.broadcast_to(table.signal, shape) for table in tables], axis=-1),
        slope=np.concatenate([np.broadcast_to(table.slope, shape) for table in tables], axis=-1),
        search_nm=first.search_nm,
        wavelength_step_nm=min(table.wavelength_step_nm for table in tables),
    )
