"""The nine dispersion formulas of the open refractive-index database: coefficients -> index.

Wavelengths are in micrometres here and only here, as the database's coefficients are made for them.
"""

from collections.abc import Callable, Sequence

import numpy as np

from sheenmap.arrays import FloatArray

Coefficients = Sequence[float]


def index_of_formula(formula: int, coefficients: Coefficients, wavelength_um: FloatArray) -> FloatArray:
    """The index n (W,); NaN where the formula has none.

    Raises
    ------
    KeyError, IndexError, ValueError
        ``formula`` is not one of 1 to 9, or has not the number of coefficients that it needs.

    References
    ----------
    M. N. Polyanskiy, "Dispersion formulas", the document that goes with the database.
    """
    with np.errstate(invalid="ignore", divide="ignore"):
        return _FORMULAS[formula](coefficients, wavelength_um)


def _pairs(coefficients: Coefficients) -> list[tuple[float, float]]:
    return list(zip(coefficients[1::2], coefficients[2::2], strict=True))


def _sellmeier(c: Coefficients, x: FloatArray) -> FloatArray:
    return np.sqrt(1 + c[0] + sum((b * x**2 / (x**2 - pole**2) for b, pole in _pairs(c)), np.zeros_like(x)))


def _sellmeier_squared_poles(c: Coefficients, x: FloatArray) -> FloatArray:
    return np.sqrt(1 + c[0] + sum((b * x**2 / (x**2 - pole) for b, pole in _pairs(c)), np.zeros_like(x)))


def _polynomial(c: Coefficients, x: FloatArray) -> FloatArray:
    return np.sqrt(c[0] + _powers(c, x))


def _poles_and_powers(c: Coefficients, x: FloatArray) -> FloatArray:
    padded = [*c, *[0.0] * max(0, 9 - len(c))]
    poles = np.zeros_like(x)
    for b, power, pole, pole_power in (padded[1:5], padded[5:9]):
        if b:
            poles += b * x**power / (x**2 - pole**pole_power)
    return np.sqrt(c[0] + poles + _powers([0.0, *padded[9:]], x))


def _cauchy(c: Coefficients, x: FloatArray) -> FloatArray:
    return c[0] + _powers(c, x)


def _gas(c: Coefficients, x: FloatArray) -> FloatArray:
    """The coefficients of a gas give n - 1."""
    return 1 + c[0] + sum((b / (pole - x**-2) for b, pole in _pairs(c)), np.zeros_like(x))


def _herzberger(c: Coefficients, x: FloatArray) -> FloatArray:
    near = 1 / (x**2 - 0.028)
    tail = sum((b * x ** (2 * power) for power, b in enumerate(c[3:], start=1)), np.zeros_like(x))
    return c[0] + c[1] * near + c[2] * near**2 + tail


def _retro(c: Coefficients, x: FloatArray) -> FloatArray:
    polarisability = c[0] + c[1] * x**2 / (x**2 - c[2]) + c[3] * x**2
    return np.sqrt((1 + 2 * polarisability) / (1 - polarisability))


def _exotic(c: Coefficients, x: FloatArray) -> FloatArray:
    return np.sqrt(c[0] + c[1] / (x**2 - c[2]) + c[3] * (x - c[4]) / ((x - c[4]) ** 2 + c[5]))


def _powers(c: Coefficients, x: FloatArray) -> FloatArray:
    return sum((b * x**power for b, power in _pairs(c)), np.zeros_like(x))


_FORMULAS: dict[int, Callable[[Coefficients, FloatArray], FloatArray]] = {
    1: _sellmeier,
    2: _sellmeier_squared_poles,
    3: _polynomial,
    4: _poles_and_powers,
    5: _cauchy,
    6: _gas,
    7: _herzberger,
    8: _retro,
    9: _exotic,
}
