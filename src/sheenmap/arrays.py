"""Shapes, chunks and interpolation; nothing here knows a unit."""

from collections.abc import Iterator
from typing import Any

import numpy as np
from numpy.typing import NDArray

FloatArray = NDArray[np.float64]
ComplexArray = NDArray[np.complex128]
BoolArray = NDArray[np.bool_]


def chunks(length: int, size: int) -> Iterator[slice]:
    """Slices of at most ``size`` that cover ``range(length)`` in order."""
    for start in range(0, length, size):
        yield slice(start, min(start + size, length))


def read_only(array: NDArray[Any]) -> NDArray[Any]:
    """A view of ``array`` that cannot be written through; the caller's own array is left as it was."""
    view = array.view()
    view.setflags(write=False)
    return view
