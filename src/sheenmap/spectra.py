"""Sampled curves over wavelength, and the CSV text that holds them.

Wavelength is the last axis, in nanometres, strictly rising. An index is n - ik with k >= 0 (fields go as exp(+iwt)).
"""

import csv
import math
from dataclasses import dataclass
from typing import Any, Literal

import numpy as np
from numpy.typing import NDArray
from scipy.interpolate import PchipInterpolator

from sheenmap.errors import CurveError

Interpolation = Literal["linear", "monotone cubic"]

COLUMNS = {
    "material": ("wavelength_nm", "n", "k"),
    "surface": ("wavelength_nm", "reflectance"),
    "lamp": ("wavelength_nm", "power"),
    "camera": ("wavelength_nm", "red", "green", "blue"),
    "observer": ("wavelength_nm", "x", "y", "z"),
    "encoding": ("code", "linear"),
}


@dataclass(frozen=True, kw_only=True, eq=False)
class Spectrum:
    """A curve, or several on one grid, sampled over wavelength.

    Parameters
    ----------
    wavelength_nm : (W,) float
        Strictly rising, finite.
    values : (..., W) float or complex
        Finite. Complex for a refractive index n - ik.
    name, source : str
        What it is called and where it comes from.
    """

    wavelength_nm: NDArray[np.float64]
    values: NDArray[Any]
    name: str = ""
    source: str = ""

    def __post_init__(self) -> None:
        wavelength_nm = np.array(self.wavelength_nm, dtype=float)
        values = np.array(self.values)
        if wavelength_nm.ndim != 1 or wavelength_nm.size < 1 or values.shape[-1:] != wavelength_nm.shape:
            raise ValueError(f"wavelength_nm is {wavelength_nm.shape}, values are {values.shape}")
        if not (np.all(np.isfinite(wavelength_nm)) and np.all(np.isfinite(values)) and np.all(np.diff(wavelength_nm) > 0)):
            raise ValueError("wavelength_nm must rise strictly and all numbers must be finite")
        for array in (wavelength_nm, values):
            array.setflags(write=False)
        object.__setattr__(self, "wavelength_nm", wavelength_nm)
        object.__setattr__(self, "values", values)

    def covers(self, low_nm: float, high_nm: float) -> bool:
        """Whether the samples reach from ``low_nm`` to ``high_nm`` (a constant, one sample, covers all)."""
        return self.wavelength_nm.size == 1 or (self.wavelength_nm[0] <= low_nm and self.wavelength_nm[-1] >= high_nm)


def constant(value: complex, *, name: str = "") -> Spectrum:
    """A curve with the same value at every wavelength."""
    return Spectrum(wavelength_nm=np.array([550.0]), values=np.array([value]), name=name, source="constant")


def sample(spectrum: Spectrum, wavelength_nm: NDArray[np.float64], *, interpolation: Interpolation = "linear") -> NDArray[Any]:
    """The curve at ``wavelength_nm`` (V,): (..., V). Beyond its ends the end value is held.

    Notes
    -----
    "monotone cubic" is the shape-preserving cubic of Fritsch and Butland (SIAM J. Sci. Stat. Comput. 5, 300, 1984),
    taken on the real and imaginary parts apart; it never overshoots the samples, so that k stays >= 0.
    """
    if spectrum.wavelength_nm.size == 1:
        return np.broadcast_to(spectrum.values, (*spectrum.values.shape[:-1], wavelength_nm.size)).copy()
    if interpolation == "linear" or spectrum.wavelength_nm.size < 3:
        return _through(spectrum, wavelength_nm, _linear)
    return _through(spectrum, wavelength_nm, _monotone_cubic)


def _through(spectrum: Spectrum, wavelength_nm: NDArray[np.float64], curve: Any) -> NDArray[Any]:
    x = spectrum.wavelength_nm
    held = np.clip(wavelength_nm, x[0], x[-1])
    if np.iscomplexobj(spectrum.values):
        parts: NDArray[Any] = curve(x, spectrum.values.real, held) + 1j * curve(x, spectrum.values.imag, held)
        return parts
    values: NDArray[Any] = curve(x, spectrum.values, held)
    return values


def _linear(x: NDArray[np.float64], y: NDArray[np.float64], at: NDArray[np.float64]) -> NDArray[np.float64]:
    rows = y.reshape(-1, x.size)
    return np.stack([np.interp(at, x, row) for row in rows]).reshape(*y.shape[:-1], at.size)


def _monotone_cubic(x: NDArray[np.float64], y: NDArray[np.float64], at: NDArray[np.float64]) -> NDArray[np.float64]:
    values: NDArray[np.float64] = PchipInterpolator(x, y, axis=-1)(at)
    return values


def parse_csv(text: str, kind: str) -> Spectrum:
    """The curve that a CSV text holds; ``kind`` is a key of ``COLUMNS`` other than "encoding".

    Lines that start with # are comments; the first other line is the header. A material comes back complex, n - ik.

    Raises
    ------
    CurveError
        Header other than the one that ``kind`` asks for; text, NaN or a missing field (with its line); fewer than two
        rows; wavelengths twice or not rising; negative values where none can be.
    """
    columns = COLUMNS[kind]
    table = _numbers(text, columns)
    wavelength_nm, values = table[:, 0], table[:, 1:].T
    _check_rising(wavelength_nm, columns[0])
    if np.any(wavelength_nm <= 0):
        raise CurveError("a wavelength of zero or less")
    if kind != "material" and np.any(values < 0) and kind != "observer":
        raise CurveError(f"a negative value in the column {columns[1 + int(np.argmax((values < 0).any(axis=1)))]}")
    if kind == "material":
        return _index(wavelength_nm, values)
    return Spectrum(wavelength_nm=wavelength_nm, values=values[0] if len(values) == 1 else values)


def parse_encoding(text: str) -> tuple[NDArray[np.float64], NDArray[np.float64]]:
    """Codes and linear values (N,) of a CSV ``code,linear``, both rising. Raises ``CurveError`` as ``parse_csv`` does."""
    table = _numbers(text, COLUMNS["encoding"])
    _check_rising(table[:, 0], "code")
    _check_rising(table[:, 1], "linear")
    return table[:, 0], table[:, 1]


def _index(wavelength_nm: NDArray[np.float64], values: NDArray[np.float64]) -> Spectrum:
    n, k = values
    if np.any(n <= 0):
        raise CurveError("an index n of zero or less")
    if np.any(k < 0):
        raise CurveError(f"negative k at {wavelength_nm[int(np.argmax(k < 0))]:g} nm; k is zero or more (absorption)")
    return Spectrum(wavelength_nm=wavelength_nm, values=n - 1j * k)


def _numbers(text: str, columns: tuple[str, ...]) -> NDArray[np.float64]:
    lines = [
        (number, line)
        for number, line in enumerate(text.lstrip("\ufeff").splitlines(), start=1)
        if line.strip() and not line.lstrip().startswith("#")
    ]
    if not lines:
        raise CurveError(f"the file is empty; its header should be {','.join(columns)}")
    header = [field.strip() for field in lines[0][1].split(",")]
    if header != list(columns):
        hint = "; fields are parted by commas, not semicolons" if ";" in lines[0][1] else ""
        raise CurveError(f"header {lines[0][1].strip()[:80]!r} on line {lines[0][0]}; allowed: {','.join(columns)}{hint}")
    rows = [_row(line, number, columns) for number, line in lines[1:]]
    if len(rows) < 2:
        raise CurveError(f"{len(rows)} rows of numbers; two or more are needed")
    return np.array(rows)


def _row(line: str, number: int, columns: tuple[str, ...]) -> list[float]:
    fields = next(csv.reader([line]))
    if len(fields) != len(columns):
        hint = "; decimals are written with a point" if len(fields) > len(columns) else ""
        raise CurveError(f"{len(fields)} fields on line {number}; allowed: {len(columns)} ({','.join(columns)}){hint}")
    try:
        values = [float(field) for field in fields]
    except ValueError:
        raise CurveError(f"{line.strip()[:60]!r} on line {number} is not numbers") from None
    if not all(math.isfinite(value) for value in values):
        raise CurveError(f"{line.strip()[:60]!r} on line {number}: every number must be finite")
    return values


def _check_rising(values: NDArray[np.float64], what: str) -> None:
    steps = np.diff(values)
    if np.any(steps == 0):
        raise CurveError(f"{what} {values[1:][steps == 0][0]:g} stands twice")
    if np.any(steps < 0):
        raise CurveError(f"{what} does not rise: {values[:-1][steps < 0][0]:g} is followed by {values[1:][steps < 0][0]:g}")
