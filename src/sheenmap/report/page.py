"""The page as text, and as a file that is whole or not there."""

import json
import math
import os
import tempfile
from importlib.resources import files
from pathlib import Path
from typing import Any

import jinja2
import numpy as np

from sheenmap import __version__
from sheenmap.errors import OutputError
from sheenmap.flags import BLOCKING_MASK, FLAGS, OUTSIDE
from sheenmap.measure import Measurement
from sheenmap.report import words
from sheenmap.report.arrays import WIDEST, grid_of, packed_planes
from sheenmap.report.pictures import colour_scale, photo_address
from sheenmap.uniformity import SiteReading
from sheenmap.wafer import Region, part_mm

MOST_BYTES = 2_900_000  # travels by e-mail
MOST_SITES, MOST_PRINTED_SITES = 400, 60
SCRIPTS = ("core.js", "plots.js", "stage.js")
# After Okabe and Ito's eight colours for all eyes; one a flag, in the order of the bits.
FLAG_COLOURS = ("#8f8f8f", "#d55e00", "#000000", "#cc79a7", "#e69f00", "#56b4e9", "#009e73", "#f0e442")


def write_report(measurement: Measurement, path: Path) -> None:
    """Write the page; its folder is made when it is missing.

    Raises
    ------
    OutputError
        The file cannot be written; what stood at ``path`` is whole.
    """
    _replace(path, page_html(measurement).encode())


def page_html(measurement: Measurement) -> str:
    """The page: style, script, pictures and numbers inside it; under 3 MB, whatever the size of the photograph."""
    widest = WIDEST
    text = _rendered(measurement, widest)
    while len(text) > MOST_BYTES and widest > 100:
        widest = round(0.8 * widest)
        text = _rendered(measurement, widest)
    return text


def _rendered(measurement: Measurement, widest: int) -> str:
    environment = jinja2.Environment(autoescape=True, undefined=jinja2.StrictUndefined, trim_blocks=True, lstrip_blocks=True)
    rows = words.flag_rows(measurement.flags)
    sites = measurement.sites[:MOST_SITES]
    sentence, below = words.headline(measurement)
    return environment.from_string(_source("page.html.j2")).render(
        m=measurement,
        version=__version__,
        style=_source("page.css"),
        script="\n".join(_source(name) for name in SCRIPTS),
        data=script_safe(_data(measurement, widest, sites)),
        photo=photo_address(measurement.preview),
        has_map=words.has_map(measurement),
        limits=words.limits_of(measurement),
        outcome=words.outcome(measurement),
        mark=words.OUTCOME_MARK[words.outcome(measurement)],
        sentence=sentence,
        below=below,
        numbers=words.number_rows(measurement),
        formulas=words.formula_rows(measurement),
        flag_rows=list(zip(rows, FLAG_COLOURS)),
        percent=words.percent,
        steps=words.next_steps(measurement, rows),
        sites=sites,
        printed_sites=MOST_PRINTED_SITES,
        cautions=words.CAUTIONS,
        provenance=words.provenance_rows(measurement.provenance),
        recipe_text=measurement.provenance.get("recipe_text", ""),
    )


def _source(name: str) -> str:
    return files("sheenmap.report").joinpath(name).read_text(encoding="utf-8")


def _data(measurement: Measurement, widest: int, sites: tuple[SiteReading, ...]) -> dict[str, Any]:
    height, width = measurement.flags.shape
    grid = grid_of(height, width, widest=widest)
    limits = words.limits_of(measurement)
    return {
        "width": width, "height": height,
        "stride": grid.stride, "offset": grid.offset, "columns": grid.columns, "rows": grid.rows,
        "planes": packed_planes(measurement, grid),
        "has_map": words.has_map(measurement),
        "u_common_nm": measurement.u_common_nm,
        "limits": None if limits is None else [limits.low_nm, limits.high_nm],
        "percentiles": measurement.statistics.percentiles,
        "to_mm": to_mm(measurement.region),
        "scale": colour_scale(),
        "blocking": BLOCKING_MASK, "outside": OUTSIDE.mask,
        "flags": [{"name": flag.name, "mask": flag.mask, "blocks": flag.blocks, "meaning": flag.meaning, "colour": colour}
                  for flag, colour in zip(FLAGS, FLAG_COLOURS)],
        "sites": [{"number": site.number, "x": site.x_px, "y": site.y_px, "r": math.sqrt(max(site.pixels, 1) / math.pi),
                   "nm": site.thickness_nm} for site in sites],
    }  # fmt: skip


def to_mm(region: Region) -> list[float] | None:
    """[a, b, c, d, e, f] with x_mm = a x + b y + c and y_mm = d x + e y + f; None without a scale."""
    if region.mm_per_px is None:
        return None
    x, y = part_mm(region, np.array([0.0, 1.0, 0.0]), np.array([0.0, 0.0, 1.0]))
    return [float(v) for along in (x, y) for v in (along[1] - along[0], along[2] - along[0], along[0])]


def script_safe(record: object) -> str:
    """JSON that can stand inside a script element: no text in it can end the element."""
    text = json.dumps(record, ensure_ascii=True, allow_nan=False, separators=(",", ":"))
    return text.replace("<", "\\u003c").replace("&", "\\u0026")


def _replace(path: Path, content: bytes) -> None:
    """Write beside, force to the disk, rename: a reader sees the old page or the new one, never half of one."""
    waiting: Path | None = None
    try:
        path.parent.mkdir(parents=True, exist_ok=True)
        with tempfile.NamedTemporaryFile(dir=path.parent, prefix=f".{path.name}.", suffix=".part", delete=False) as file:
            waiting = Path(file.name)
            file.write(content)
            file.flush()
            os.fsync(file.fileno())
        waiting.chmod(0o666 & ~_umask())  # a temporary file is for its owner alone; a page is as any other file
        os.replace(waiting, path)
    except OSError as error:
        if waiting is not None:
            waiting.unlink(missing_ok=True)
        raise OutputError(f"{path}: not written, {error.strerror or error}") from error


def _umask() -> int:
    mask = os.umask(0)
    os.umask(mask)
    return mask
