"""A finished map, read back from its folder."""

import json
import struct
import zlib
from dataclasses import dataclass, fields
from pathlib import Path
from typing import Any, TypeVar

import numpy as np
import tifffile
from numpy.typing import NDArray

from sheenmap.errors import SheenmapError
from sheenmap.flags import FLAGS, OUTSIDE, FlagArray, has
from sheenmap.storage.document import SCHEMA_VERSION
from sheenmap.storage.measurement import CANDIDATES, SIGMA, SUMMARY, THICKNESS
from sheenmap.storage.measurement import FLAGS as FLAGS_FILE
from sheenmap.uniformity import SiteReading, Statistics
from sheenmap.wafer import Disc, Region

Kind = TypeVar("Kind")
# what a TIFF parser stumbles over in a broken file
BROKEN = (tifffile.TiffFileError, OSError, ValueError, IndexError, KeyError, TypeError, struct.error, zlib.error)


class MapError(SheenmapError):
    """A folder that holds no whole map; the message names the file and what is wrong with it."""


@dataclass(frozen=True, kw_only=True, eq=False)
class FinishedMap:
    """What a map's folder holds.

    Parameters
    ----------
    folder : Path
    thickness_nm, sigma_nm : (H, W) float32
    flags : (H, W) uint16
    candidates_nm : (K, H, W) float32 or None
    region : Region
    statistics : Statistics
    sites : tuple of SiteReading
    u_common_nm : float
    document : dict
        ``summary.json`` as it was read.
    """

    folder: Path
    thickness_nm: NDArray[np.float32]
    sigma_nm: NDArray[np.float32]
    flags: FlagArray
    candidates_nm: NDArray[np.float32] | None
    region: Region
    statistics: Statistics
    sites: tuple[SiteReading, ...]
    u_common_nm: float
    document: dict[str, Any]


def read_map(folder: Path) -> FinishedMap:
    """Read a map that ``write_measurement`` wrote.

    Raises
    ------
    MapError
        A file is missing, broken, of another size or of another run, or the summary is of a form that this version does not
        know.
    """
    document = _read_summary(folder / SUMMARY)
    thickness_nm = _read_plane(folder / THICKNESS, document, np.float32)
    sigma_nm = _read_plane(folder / SIGMA, document, np.float32)
    flags = _read_plane(folder / FLAGS_FILE, document, np.uint16)
    candidates_nm = _read_pages(folder / CANDIDATES, document) if (folder / CANDIDATES).exists() else None
    try:
        return FinishedMap(
            folder=folder,
            thickness_nm=thickness_nm,
            sigma_nm=sigma_nm,
            flags=flags,
            candidates_nm=candidates_nm,
            region=_region(document["region"], flags),
            statistics=_record(Statistics, document["statistics"]),
            sites=tuple(_record(SiteReading, site) for site in document["sites"]),
            u_common_nm=float(document["u_common_nm"]),
            document=document,
        )
    except (KeyError, TypeError, ValueError) as error:
        raise MapError(f"{folder / SUMMARY}: not as sheenmap writes it, at {error}") from error


def _read_summary(path: Path) -> dict[str, Any]:
    if not path.parent.is_dir():
        raise MapError(f"{path.parent}: no such folder")
    try:
        document = json.loads(path.read_text(encoding="utf-8"))
    except FileNotFoundError as error:
        raise MapError(f"{path.parent}: holds no {SUMMARY}, so it is not a finished map") from error
    except OSError as error:
        raise MapError(f"{path}: cannot be read, {error.strerror}") from error
    except ValueError as error:
        raise MapError(f"{path}: is no JSON, {error}") from error
    version = document.get("schema_version") if isinstance(document, dict) else None
    if version != SCHEMA_VERSION:
        raise MapError(f"{path}: schema_version is {version}, this version reads {SCHEMA_VERSION}; map the photograph again")
    missing = [key for key in ("flags", "picture", "identifier") if key not in document]
    if missing:
        raise MapError(f"{path}: not as sheenmap writes it, at {missing[0]}")
    _check_bits(path, document)
    return dict(document)


def _check_bits(path: Path, document: dict[str, Any]) -> None:
    """Flags are read by our own registry, so the file must have been written by the same."""
    try:
        written = {name: (flag["bit"], flag["blocks"]) for name, flag in document["flags"].items()}
    except (AttributeError, KeyError, TypeError) as error:
        raise MapError(f"{path}: not as sheenmap writes it, at flags") from error
    if written != {flag.name: (flag.bit, flag.blocks) for flag in FLAGS}:
        raise MapError(f"{path}: its flags are of another version; map the photograph again")


def _read_plane(path: Path, document: dict[str, Any], kind: type[np.generic]) -> NDArray[Any]:
    pages = _read_pages(path, document, kind)
    if pages.shape[0] != 1:
        raise MapError(f"{path}: {pages.shape[0]} pages found, one is expected")
    return np.asarray(pages[0])


def _read_pages(path: Path, document: dict[str, Any], kind: type[np.generic] = np.float32) -> NDArray[Any]:
    try:
        with tifffile.TiffFile(path) as file:
            described = file.pages.first.description
            pages = np.stack([page.asarray() for page in file.pages])
    except FileNotFoundError as error:
        raise MapError(f"{path.parent}: holds no {path.name}, so it is not a finished map") from error
    except BROKEN as error:
        raise MapError(f"{path}: cannot be read as a TIFF, {error}") from error
    size = (document["picture"].get("height"), document["picture"].get("width"))
    if pages.dtype != kind or pages.shape[1:] != size:
        found = f"{pages.dtype} of {pages.shape[-1]} x {pages.shape[-2]} pixels"
        raise MapError(f"{path}: {found} found, {np.dtype(kind)} of {size[1]} x {size[0]} expected")
    if _identifier(described) != document["identifier"]:
        raise MapError(f"{path}: is of another run than {SUMMARY}; map the photograph again")
    return pages


def _identifier(described: str) -> str | None:
    try:
        found = json.loads(described)
    except ValueError:
        return None
    return found.get("identifier") if isinstance(found, dict) else None


def _region(record: dict[str, Any], flags: FlagArray) -> Region:
    found = record["disc"]
    disc = None
    if found is not None:
        found = _known(Disc, found)
        disc = Disc(**{**found, "oval": tuple(found["oval"])})
    return Region(
        inside=~has(flags, OUTSIDE),
        origin_px=(float(record["origin_px"][0]), float(record["origin_px"][1])),
        mm_per_px=record["mm_per_px"],
        disc=disc,
        rotation_deg=record["rotation_deg"],
        edge_exclusion_mm=record["edge_exclusion_mm"],
    )


def _record(kind: type[Kind], values: dict[str, Any]) -> Kind:
    return kind(**_known(kind, values))


def _known(kind: type[Any], values: dict[str, Any]) -> dict[str, Any]:
    names = {field.name for field in fields(kind)}
    return {key: value for key, value in values.items() if key in names}
