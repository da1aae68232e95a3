"""A measurement into its folder."""

from functools import partial
from pathlib import Path
from typing import Any, BinaryIO

import numpy as np
from numpy.typing import NDArray

from sheenmap.errors import OutputError
from sheenmap.measure import Measurement
from sheenmap.storage.atomic import Writer, write_atomically, write_together
from sheenmap.storage.document import render_json, summary, to_plain
from sheenmap.storage.tiff import write_tiff

THICKNESS, SIGMA, FLAGS, CANDIDATES, SUMMARY = "thickness.tif", "sigma.tif", "flags.tif", "candidates.tif", "summary.json"


def write_measurement(measurement: Measurement, folder: Path, *, compress: bool = False) -> None:
    """Write ``thickness.tif``, ``sigma.tif``, ``flags.tif``, ``candidates.tif`` where there are any, and ``summary.json``.

    Parameters
    ----------
    measurement : Measurement
        What is written.
    folder : Path
        Made when it is missing. Files of an earlier map are replaced together; its ``candidates.tif`` goes when this map has
        none.
    compress : bool
        Deflate the TIFFs, which takes longer.

    Raises
    ------
    OutputError
        Nothing was replaced: files of an earlier map are whole.
    """
    document = summary(measurement)
    planes = _planes(measurement)
    writers: dict[str, Writer] = {}
    for name, (quantity, array, unit) in planes.items():
        description = {"quantity": quantity, "unit": unit, "identifier": document["identifier"]}
        if measurement.region.mm_per_px is not None:
            description["mm_per_px"] = float(measurement.region.mm_per_px)
        writers[name] = partial(
            write_tiff, array=array, description=description, mm_per_px=measurement.region.mm_per_px, compress=compress
        )
    writers[SUMMARY] = partial(_write_text, text=render_json(document))
    write_together(folder, writers)
    if CANDIDATES not in writers:
        _remove(folder / CANDIDATES)


def renew_summary(folder: Path, document: dict[str, Any]) -> None:
    """Replace ``summary.json`` of a finished map, as its verdict is given anew. Raises ``OutputError``."""
    write_atomically(folder / SUMMARY, partial(_write_text, text=render_json(to_plain(document))))


def _planes(measurement: Measurement) -> dict[str, tuple[str, NDArray[Any], str]]:
    """Name of the file -> what it holds, the array, its unit."""
    planes: dict[str, tuple[str, NDArray[Any], str]] = {
        THICKNESS: ("film thickness", np.ascontiguousarray(measurement.thickness_nm, np.float32), "nm"),
        SIGMA: ("standard uncertainty of a pixel's thickness", np.ascontiguousarray(measurement.sigma_nm, np.float32), "nm"),
        FLAGS: ("flags, a bit each", np.ascontiguousarray(measurement.flags, np.uint16), ""),
    }
    if measurement.candidates_nm is not None and measurement.candidates_nm.shape[0] > 0:
        candidates = np.ascontiguousarray(measurement.candidates_nm, np.float32)
        planes[CANDIDATES] = ("other thicknesses that fit, best first", candidates, "nm")
    return planes


def _write_text(stream: BinaryIO, text: str) -> None:
    stream.write(text.encode())


def _remove(path: Path) -> None:
    try:
        path.unlink(missing_ok=True)
    except OSError as error:
        raise OutputError(f"{path}: left from an earlier map and cannot be removed, {error.strerror}") from error
