"""Lamps that a temperature describes: CIE daylight and the blackbody."""

import re
from collections.abc import Callable
from dataclasses import dataclass
from functools import lru_cache

import numpy as np

from sheenmap.arrays import FloatArray
from sheenmap.catalogue.shelf import data_folder
from sheenmap.errors import UnknownNameError
from sheenmap.spectra import Spectrum

SECOND_RADIATION_CONSTANT_NM_K = 1.438776877e7  # hc/k of the 2019 SI; CIE 15 rounds it to 1.4388e7
DAYLIGHT_K = (4000.0, 25000.0)  # CIE 15: no daylight locus is defined outside
BLACKBODY_K = (500.0, 100000.0)  # cooler, no visible light is left; hotter, the curve's shape no longer changes
REFERENCE_NM = 560.0  # where both are 100, as in CIE 15

_BLACKBODY_NM = np.arange(300.0, 1101.0, 2.0)
_NAME = re.compile(r"(daylight|blackbody)(?:(?:\s+|[_-])(.*))?", re.IGNORECASE)  # a minus after a space is a sign, no joint
_KELVIN = re.compile(r"(\d+(?:\.\d+)?)\s*K?", re.IGNORECASE)


class TemperatureError(UnknownNameError):
    """A lamp by temperature whose temperature is missing, no number, or outside what its formula is defined for."""

    def __init__(self, name: str, found: str, allowed_k: tuple[float, float]) -> None:
        super().__init__("lamp", name, ())
        self.allowed = f"a temperature of {allowed_k[0]:g} to {allowed_k[1]:g} kelvin, such as '{name.split()[0]} 5600'"
        self.args = (f"lamp {name!r}: {found}; allowed: {self.allowed}",)


@dataclass(frozen=True, kw_only=True)
class TemperatureLamp:
    """A lamp that a temperature describes, checked; ``spectrum`` calculates it."""

    family: str
    temperature_k: float

    @property
    def description(self) -> str:
        """What it is, for people."""
        return f"{_FAMILIES[self.family].description}, {self.temperature_k:g} K"

    def spectrum(self) -> Spectrum:
        """Its relative power, 100 at 560 nm."""
        return _FAMILIES[self.family].calculate(self.temperature_k)


def read_temperature_lamp(name: str) -> TemperatureLamp | None:
    """The lamp that a name such as "daylight 5600" means; None when the name is of another form. Raises ``TemperatureError``."""
    match = _NAME.fullmatch(name.strip())
    if match is None:
        return None
    family = match[1].lower()
    allowed_k = _FAMILIES[family].allowed_k
    kelvin = _KELVIN.fullmatch((match[2] or "").strip())
    if kelvin is None:
        found = f"{match[2]!r} is no temperature" if match[2] else "no temperature"
        raise TemperatureError(f"{family} {match[2] or ''}".strip(), found, allowed_k)
    temperature_k = float(kelvin[1])
    if not allowed_k[0] <= temperature_k <= allowed_k[1]:
        raise TemperatureError(f"{family} {temperature_k:g}", f"{temperature_k:g} K", allowed_k)
    return TemperatureLamp(family=family, temperature_k=temperature_k)


def blackbody(temperature_k: float) -> Spectrum:
    """The relative power per nanometre of a blackbody, 100 at 560 nm; 300 to 1100 nm by 2.

    Notes
    -----
    Planck's law in vacuum, with the constants of the 2019 SI. CIE illuminant A is this law at 2848 K with an older second
    constant, which makes it 2855.5 K here.
    """
    x = SECOND_RADIATION_CONSTANT_NM_K / temperature_k
    ratio = (REFERENCE_NM / _BLACKBODY_NM) ** 5 * np.expm1(x / REFERENCE_NM) / np.expm1(x / _BLACKBODY_NM)
    return Spectrum(
        wavelength_nm=_BLACKBODY_NM,
        values=100 * ratio,
        name=f"blackbody {temperature_k:g}",
        source="Planck's law, constants of the 2019 SI",
    )


def daylight(temperature_k: float) -> Spectrum:
    """The relative power of CIE daylight of a correlated colour temperature, 100 at 560 nm; 300 to 830 nm by 5.

    Notes
    -----
    S = S0 + M1 S1 + M2 S2, with M1 and M2 from the chromaticity of the daylight locus. CIE 15 rounds M1 and M2 to three
    decimals, and so do we. Its illuminants D50, D55, D65, D75 are at 5003, 5503, 6504 and 7504 K of this formula, since the
    second radiation constant was changed after they had been agreed.

    References
    ----------
    CIE 15:2004, Colorimetry, 3.1, equations 3.2 to 3.6 (from memory).
    """
    wavelength_nm, s0, s1, s2 = _daylight_components()
    x = _daylight_x(temperature_k)
    y = -3.000 * x**2 + 2.870 * x - 0.275
    scale = 0.0241 + 0.2562 * x - 0.7341 * y
    m1 = round((-1.3515 - 1.7703 * x + 5.9114 * y) / scale, 3)
    m2 = round((0.0300 - 31.4424 * x + 30.0717 * y) / scale, 3)
    return Spectrum(
        wavelength_nm=wavelength_nm,
        values=s0 + m1 * s1 + m2 * s2,
        name=f"daylight {temperature_k:g}",
        source="CIE 15, daylight of a correlated colour temperature",
    )


def _daylight_x(temperature_k: float) -> float:
    t = 1000 / temperature_k
    if temperature_k <= 7000:
        return ((-4.6070 * t + 2.9678) * t + 0.09911) * t + 0.244063
    return ((-2.0064 * t + 1.9018) * t + 0.24748) * t + 0.237040


@lru_cache(maxsize=1)
def _daylight_components() -> tuple[FloatArray, FloatArray, FloatArray, FloatArray]:
    text = (data_folder() / "daylight" / "components.csv").read_text(encoding="utf-8")
    rows = [line.split(",") for line in text.splitlines() if line and not line.startswith("#")]
    wavelength_nm, s0, s1, s2 = np.array(rows[1:], dtype=float).T
    return wavelength_nm, s0, s1, s2


@dataclass(frozen=True, kw_only=True)
class _Family:
    description: str
    allowed_k: tuple[float, float]
    calculate: Callable[[float], Spectrum]


_FAMILIES = {
    "daylight": _Family(description="CIE daylight", allowed_k=DAYLIGHT_K, calculate=daylight),
    "blackbody": _Family(description="blackbody radiator", allowed_k=BLACKBODY_K, calculate=blackbody),
}
