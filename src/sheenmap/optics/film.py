"""Powers of a folded stack against the thickness of its searched layer, with their slopes.

With z = exp(-2 i phi d), phi the layer's phase per nm, and a = r_t r_b, all depends on z / (1 - a z) and 1 / (1 - a z).
"""

from collections.abc import Iterator
from dataclasses import dataclass

import numpy as np

from sheenmap.arrays import ComplexArray, FloatArray, chunks
from sheenmap.optics.fold import Folded

BLOCK = 8192  # complex numbers in a block of rows: 128 kB, so that a handful of temporaries stays in a core's own cache


@dataclass(frozen=True, kw_only=True, eq=False)
class BothSides:
    """Powers (T, W) of a coherent film, and their slopes per nm, for what lies behind it.

    ``r`` is from above, ``r_up`` from inside the substrate; ``passed`` times |t_upper t_lower|^2 is |t|^2, either way.
    """

    r: FloatArray
    r_slope: FloatArray
    passed: FloatArray
    passed_slope: FloatArray
    r_up: FloatArray
    r_up_slope: FloatArray


def round_trips(thickness_nm: FloatArray, phase_per_nm: ComplexArray) -> Iterator[tuple[slice, ComplexArray]]:
    """Blocks of rows of exp(-2 i phase thickness) (T, W), with where they stand.

    On equal steps a block is the first one turned further, which is a product instead of an exponential.
    """
    rows = max(1, BLOCK // max(1, phase_per_nm.size))
    turn = -2j * phase_per_nm
    if not _is_even(thickness_nm):
        for block in chunks(thickness_nm.size, rows):
            yield block, np.exp(thickness_nm[block, None] * turn)
        return
    first = np.exp((thickness_nm[:rows, None] - thickness_nm[0]) * turn)
    for block in chunks(thickness_nm.size, rows):
        start = thickness_nm[block.start]
        yield block, first[: block.stop - block.start] * np.exp(start * turn)


def reflected(folded: Folded, round_trip: ComplexArray) -> FloatArray:
    """Reflectance of a coherent stack where the searched layer has the factors ``round_trip`` (T, W)."""
    upper, lower = folded.upper, folded.lower
    r = round_trip / (1 - upper.r_up * lower.r_down * round_trip)
    r *= upper.t_down * upper.t_up * lower.r_down
    r += upper.r_down
    return _power(r)


def reflected_and_slope(folded: Folded, round_trip: ComplexArray) -> tuple[FloatArray, FloatArray]:
    """The same with its slope per nm (T, W)."""
    upper, lower = folded.upper, folded.lower
    summed = 1 / (1 - upper.r_up * lower.r_down * round_trip)
    amplitude = upper.t_down * upper.t_up * lower.r_down * round_trip
    amplitude *= summed
    slope = amplitude * (-2j * folded.phase_per_nm)
    slope *= summed
    amplitude += upper.r_down
    return _power(amplitude), _power_slope(amplitude, slope)


def both_sides(folded: Folded, round_trip: ComplexArray) -> BothSides:
    """Powers of a coherent stack from both sides where the searched layer has the factors ``round_trip`` (T, W)."""
    upper, lower, turn = folded.upper, folded.lower, -2j * folded.phase_per_nm
    summed = 1 / (1 - upper.r_up * lower.r_down * round_trip)
    echo = round_trip * summed
    echo_slope = turn * echo * summed
    gain, gain_up = upper.t_down * upper.t_up * lower.r_down, lower.t_down * lower.t_up * upper.r_up
    down, up = upper.r_down + gain * echo, lower.r_up + gain_up * echo
    passed = np.abs(round_trip) * _power(summed)
    growth = turn.real + 2 * (upper.r_up * lower.r_down * turn * echo).real
    return BothSides(
        r=_power(down), r_slope=_power_slope(down, gain * echo_slope),
        passed=passed, passed_slope=passed * growth,
        r_up=_power(up), r_up_slope=_power_slope(up, gain_up * echo_slope),
    )  # fmt: skip


def entered(folded: Folded, film: BothSides) -> FloatArray:
    """Share (T, W) of the light that enters the substrate."""
    through = _power(folded.upper.t_down * folded.lower.t_down) * folded.eta_substrate.real / folded.eta_medium.real
    return through * film.passed


def _is_even(thickness_nm: FloatArray) -> bool:
    """Whether thicknesses stand at equal steps, to within their own rounding."""
    if thickness_nm.size < 3 or thickness_nm[0] >= thickness_nm[-1]:
        return False
    even = np.linspace(thickness_nm[0], thickness_nm[-1], thickness_nm.size)
    return bool(np.all(np.abs(even - thickness_nm) <= 4 * np.spacing(thickness_nm[-1])))


def _power(amplitude: ComplexArray) -> FloatArray:
    return np.asarray(amplitude.real**2 + amplitude.imag**2)


def _power_slope(amplitude: ComplexArray, slope: ComplexArray) -> FloatArray:
    return np.asarray(2 * (amplitude.real * slope.real + amplitude.imag * slope.imag))
