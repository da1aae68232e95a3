"""Orders of interference over thickness."""

import numpy as np

from sheenmap.charts.chart import Order
from sheenmap.optics import Stack, View, layer_index
from sheenmap.spectra import sample

ORDER_WAVELENGTH_NM = 550.0  # where the eye is most sensitive, and the wave by which Newton's colours are counted


def order_step_nm(stack: Stack, view: View) -> float:
    """Thickness of the searched film that makes one whole wave, there and back: wavelength / (2 n cos theta)."""
    if stack.searched is None:
        raise ValueError("no layer of the stack is searched")
    at_nm = np.array([ORDER_WAVELENGTH_NM])
    n = float(layer_index(stack.layers[stack.searched], at_nm).real[0])
    sideways = float(sample(stack.medium, at_nm, interpolation="monotone cubic").real[0]) * np.sin(np.radians(view.angle_deg))
    upright_squared = n**2 - sideways**2
    if upright_squared <= 0:
        return float("inf")  # total reflection: no wave travels in the film
    return float(ORDER_WAVELENGTH_NM / (2 * np.sqrt(upright_squared)))


def orders_between(step_nm: float, low_nm: float, high_nm: float) -> tuple[Order, ...]:
    """The orders that reach into ``low_nm`` to ``high_nm``, cut to it; each is ``step_nm`` wide."""
    if not np.isfinite(step_nm):
        return (Order(number=1, low_nm=low_nm, high_nm=high_nm),)
    first, last = int(np.floor(low_nm / step_nm)), int(np.ceil(high_nm / step_nm))
    return tuple(
        Order(number=m + 1, low_nm=max(low_nm, m * step_nm), high_nm=min(high_nm, (m + 1) * step_nm))
        for m in range(first, max(last, first + 1))
    )
