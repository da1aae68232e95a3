"""The curves that a recipe names: catalogue names, CSV files beside the recipe, database pages, and plain numbers."""

import hashlib
from pathlib import Path
from typing import Any

from sheenmap import catalogue
from sheenmap.errors import CurveError, Fault
from sheenmap.recipe.reader import Reader, is_number, shown
from sheenmap.spectra import COLUMNS, Spectrum, constant, parse_csv

LARGEST_CSV_BYTES = 20_000_000
VISIBLE_NM = (400.0, 700.0)
DATABASE = "database:"


class Folder:
    """Where a recipe stands; it reads the files that the recipe names and remembers their contents for the digest."""

    def __init__(self, place: Path) -> None:
        self.place = place
        self.contents: dict[str, bytes] = {}

    def path(self, reader: Reader, key: str, text: str) -> Path | None:
        """The file of that name, or None after a fault when there is none."""
        path = self.place / text
        if not path.is_file():
            what = "is a folder" if path.is_dir() else "no such file beside the recipe"
            reader.fault(key, f'found "{text}"', what)
            return None
        return path

    def csv(self, reader: Reader, key: str, text: str) -> str | None:
        """The text of a CSV file, or None after a fault."""
        path = self.path(reader, key, text)
        if path is None:
            return None
        if path.stat().st_size > LARGEST_CSV_BYTES:
            reader.fault(key, f'"{text}" has {path.stat().st_size / 1e6:.0f} MB', f"at most {LARGEST_CSV_BYTES / 1e6:.0f} MB")
            return None
        data = path.read_bytes()
        try:
            content = data.decode("utf-8-sig")
        except UnicodeDecodeError:
            reader.fault(key, f'"{text}" is no text', "a CSV in UTF-8")
            return None
        self.contents[text] = data
        return content

    def digest(self, recipe_text: str) -> str:
        """SHA-256 over the recipe's text and every CSV that it names."""
        whole = hashlib.sha256(recipe_text.encode())
        for name in sorted(self.contents):
            whole.update(name.encode() + b"\0" + self.contents[name])
        return whole.hexdigest()


def is_csv(text: str) -> bool:
    """Whether a name is that of a CSV file."""
    return text.lower().endswith(".csv")


def csv_header(text: str) -> str:
    """The header of a CSV text: its first line that is no comment."""
    return next((line.strip() for line in text.splitlines() if line.strip() and not line.lstrip().startswith("#")), "")


def curve(reader: Reader, key: str, folder: Folder, text: str, kind: str) -> Spectrum | None:
    """A curve by catalogue name or CSV; ``kind`` is "material", "lamp" or "camera"."""
    if is_csv(text):
        content = folder.csv(reader, key, text)
        if content is None:
            return None
        found = reader.attempt(key, lambda: parse_csv(content, kind), found=f'"{text}"')
        return (
            found if found is None else Spectrum(wavelength_nm=found.wavelength_nm, values=found.values, name=text, source=text)
        )
    if kind == "material" and text.startswith(DATABASE):
        return reader.attempt(key, lambda: catalogue.database_page(text[len(DATABASE) :]), found=f'"{text}"')
    read = {"material": catalogue.material, "lamp": catalogue.lamp, "camera": catalogue.camera}[kind]
    return reader.attempt(key, lambda: read(text), found=f'"{text}"')


def material(reader: Reader, key: str, folder: Folder, *, default: str | None = None) -> Spectrum | None:
    """The material under ``key``: a name, a CSV, a database page, or a number that is its index at every wavelength."""
    value: Any = reader.raw(key)
    if value is None and default is None:
        reader.fault(key, "nothing", "a material: a name, a CSV wavelength_nm,n,k, or an index")
        return None
    value = default if value is None else value
    if is_number(value):
        if not 0.1 <= value <= 10:
            reader.fault(key, f"found {value:g}", "an index of 0.1 to 10")
            return None
        return constant(float(value), name=f"n = {value:g}")
    if not isinstance(value, str) or not value:
        reader.fault(key, f"found {shown(value)}", "a material: a name, a CSV wavelength_nm,n,k, or an index")
        return None
    return curve(reader, key, folder, value, "material")


def surface_curve(reader: Reader, key: str, text: str, content: str) -> Spectrum | None:
    """A surface's reflectance, at most 1, from the text of a CSV."""

    def read() -> Spectrum:
        found = parse_csv(content, "surface")
        if found.values.max() > 1.0 + 1e-9:
            raise CurveError(f"a reflectance of {found.values.max():g}; allowed: 0 to 1")
        return found

    return reader.attempt(key, read, found=f'"{text}"')


def is_surface(content: str) -> bool:
    """Whether a CSV text is that of a reflectance, by its header."""
    return csv_header(content).replace(" ", "") == ",".join(COLUMNS["surface"])


def coverage_faults(named: list[tuple[str, Spectrum]], band_nm: tuple[float, float]) -> list[Fault]:
    """A fault for each curve that does not reach over the band in which light and response both have power."""
    faults = []
    for key, spectrum in named:
        if not spectrum.covers(*band_nm):
            grid = spectrum.wavelength_nm
            faults.append(
                Fault(
                    key=key,
                    found=f"covers {grid[0]:g} to {grid[-1]:g} nm",
                    allowed=f"{band_nm[0]:g} to {band_nm[1]:g} nm, where the lamp shines and the camera sees",
                    hint="allow_extrapolation = true holds the end values",
                )
            )
    return faults
