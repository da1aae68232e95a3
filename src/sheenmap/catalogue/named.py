"""What the catalogue holds, by name."""

from dataclasses import dataclass
from functools import lru_cache

from sheenmap.catalogue import shelf
from sheenmap.catalogue.temperature import TemperatureLamp, read_temperature_lamp
from sheenmap.errors import UnknownNameError
from sheenmap.spectra import Spectrum


@dataclass(frozen=True, kw_only=True)
class Entry:
    """What is known about one name.

    ``kind`` is "material", "lamp", "observer" or "camera"; ``range_nm`` the wavelengths that it covers; ``also`` the other
    names that it answers to; ``caution`` what a user must know before trusting it (empty where there is nothing).
    """

    name: str
    kind: str
    description: str
    source: str
    licence: str
    range_nm: tuple[float, float]
    also: tuple[str, ...] = ()
    caution: str = ""


def material(name: str) -> Spectrum:
    """The refractive index n - ik of a material, (W,) complex. Raises ``UnknownNameError``."""
    return _read("material", shelf.find("material", name).name)


def lamp(name: str) -> Spectrum:
    """The relative spectral power of a lamp, (W,).

    Parameters
    ----------
    name : str
        A CIE name ("A", "D65", "FL11", "LED-B3", "E"), or one by temperature in kelvin: "daylight 5600" (4000 to 25000),
        "blackbody 3200" (500 to 100000).

    Raises
    ------
    UnknownNameError
        Also its kind ``TemperatureError``, for a temperature outside what the formula is defined for.
    """
    by_temperature = read_temperature_lamp(name)
    return by_temperature.spectrum() if by_temperature else _read("lamp", shelf.find("lamp", name).name)


def observer(name: str) -> Spectrum:
    """The colour-matching functions (3, W): x, y, z of "cie-1931" (2 degrees) or "cie-1964" (10). Raises ``UnknownNameError``."""
    return _read("observer", shelf.find("observer", name).name)


def camera(name: str) -> Spectrum:
    """The response (3, W): red, green, blue of a camera, relative signal per watt.

    An observer's name gives its x, y, z: a camera that measures colour. Raises ``UnknownNameError``.
    """
    record = _camera_or_observer(name)
    return _read(record.kind, record.name)


def names(kind: str) -> tuple[str, ...]:
    """The names of one kind, in alphabetical order (lamps by temperature and other names left out)."""
    return tuple(shelf.shelf(kind))


def entry(kind: str, name: str) -> Entry:
    """What is known about one name. Raises ``UnknownNameError``."""
    by_temperature = read_temperature_lamp(name) if kind == "lamp" else None
    if by_temperature:
        return _entry_by_temperature(by_temperature)
    record = _camera_or_observer(name) if kind == "camera" else shelf.find(kind, name)
    spectrum = _read(record.kind, record.name)
    return Entry(
        name=record.name,
        kind=kind,
        description=record.head.get("description", ""),
        source=spectrum.source,
        licence=record.head.get("licence", "not stated"),
        range_nm=_range_nm(spectrum),
        also=record.also,
        caution=record.head.get("caution", ""),
    )


def _camera_or_observer(name: str) -> shelf.Record:
    try:
        return shelf.find("camera", name)
    except UnknownNameError:
        if shelf.fold(name) in {shelf.fold(known) for known in shelf.all_names("observer")}:
            return shelf.find("observer", name)
        raise UnknownNameError("camera", name, shelf.all_names("camera") + list(names("observer"))) from None


def _entry_by_temperature(by_temperature: TemperatureLamp) -> Entry:
    spectrum = by_temperature.spectrum()
    return Entry(
        name=spectrum.name,
        kind="lamp",
        description=by_temperature.description,
        source=spectrum.source,
        licence="a formula",
        range_nm=_range_nm(spectrum),
    )


@lru_cache(maxsize=64)
def _read(kind: str, name: str) -> Spectrum:
    return shelf.read(shelf.shelf(kind)[name])


def _range_nm(spectrum: Spectrum) -> tuple[float, float]:
    return float(spectrum.wavelength_nm[0]), float(spectrum.wavelength_nm[-1])
