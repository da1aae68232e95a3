"""The curves that a recipe names: catalogue names, CSV files beside it, database pages, and plain numbers."""

from collections.abc import Callable
from dataclasses import dataclass
from typing import Any

from sheenmap import catalogue
from sheenmap.errors import CurveError
from sheenmap.recipe.files import Folder, csv_header, is_csv
from sheenmap.recipe.reader import Reader, as_number, shown
from sheenmap.spectra import COLUMNS, Spectrum, constant, parse_csv

DATABASE = "database:"
MATERIAL = 'a name that the catalogue lists, a CSV wavelength_nm,n,k, a page "database:main/Si/Green-2008", or an index'
LAMP = 'a name that the catalogue lists such as "D65", "daylight 5600" or "blackbody 3200", or a CSV wavelength_nm,power'
CAMERA = 'a name that the catalogue lists, "cie-1931", or a CSV wavelength_nm,red,green,blue'
WANTED = {"material": MATERIAL, "lamp": LAMP, "camera": CAMERA}
LOWEST_INDEX, HIGHEST_INDEX = 0.1, 10.0


@dataclass(frozen=True, kw_only=True)
class NamedCurve:
    """A curve and the full name of the key that asks for it."""

    key: str
    spectrum: Spectrum


def read_curve(reader: Reader, key: str, folder: Folder, text: str, kind: str) -> Spectrum | None:
    """A curve by catalogue name or CSV, or None after a fault; ``kind`` is "material", "lamp" or "camera"."""
    if is_csv(text):
        content = folder.csv(reader, key, text)
        return None if content is None else parsed(reader, key, text, content, kind)
    if kind == "material" and text.startswith(DATABASE):
        page = text[len(DATABASE) :]
        # The recipe's own band is held against every curve at the end, also against this one.
        return reader.attempt(
            key, lambda: catalogue.database_page(page, must_cover_nm=None), found=shown(text), allowed="a page of the database"
        )
    find: dict[str, Callable[[str], Spectrum]] = {
        "material": catalogue.material,
        "lamp": catalogue.lamp,
        "camera": catalogue.camera,
    }
    return reader.attempt(key, lambda: find[kind](text), found=shown(text), allowed=WANTED[kind])


def parsed(reader: Reader, key: str, text: str, content: str, kind: str) -> Spectrum | None:
    """The curve in a CSV's content, called by the file's name ``text``."""
    found = reader.attempt(key, lambda: parse_csv(content, kind), found=shown(text))
    if found is None:
        return None
    return Spectrum(wavelength_nm=found.wavelength_nm, values=found.values, name=text, source=text)


def read_material(
    reader: Reader, key: str, folder: Folder, curves: list[NamedCurve], *, default: object = None
) -> Spectrum | None:
    """The material under ``key``: a name, a CSV, a database page, or a number that is its index at every wavelength."""
    value: Any = reader.raw(key)
    value = default if value is None else value
    if value is None:
        reader.fault(key, "nothing", MATERIAL)
        return None
    number = as_number(value)
    if number is not None:
        found = _index(reader, key, number)
    elif isinstance(value, str) and value:
        found = read_curve(reader, key, folder, value, "material")
    else:
        reader.fault(key, f"found {shown(value)}", MATERIAL)
        return None
    if found is not None:
        curves.append(NamedCurve(key=reader.name(key), spectrum=found))
    return found


def _index(reader: Reader, key: str, number: float) -> Spectrum | None:
    if not LOWEST_INDEX <= number <= HIGHEST_INDEX:
        reader.fault(key, f"found {number:g}", f"an index of {LOWEST_INDEX:g} to {HIGHEST_INDEX:g}")
        return None
    return constant(number, name=f"n = {number:g}")


def read_reflectance(reader: Reader, key: str, text: str, content: str) -> Spectrum | None:
    """A surface's reflectance, at most 1, from the content of a CSV."""

    def read() -> Spectrum:
        found = parse_csv(content, "surface")
        if found.values.max() > 1.0 + 1e-9:
            raise CurveError(f"a reflectance of {found.values.max():g}; allowed: 0 to 1")
        return Spectrum(wavelength_nm=found.wavelength_nm, values=found.values, name=text, source=text)

    return reader.attempt(key, read, found=shown(text))


def holds(content: str, kind: str) -> bool:
    """Whether a CSV's content is of that kind, by its header."""
    return csv_header(content) == ",".join(COLUMNS[kind])
