"""Charts and tables as files: whole, or not at all."""

import os
import tempfile
from collections.abc import Sequence
from pathlib import Path

from sheenmap.charts.chart import Chart
from sheenmap.charts.interactive import chart_html
from sheenmap.charts.page import page_bytes
from sheenmap.charts.sheet import Paper
from sheenmap.charts.sidebyside import side_by_side_bytes
from sheenmap.charts.table import table_csv, table_json
from sheenmap.charts.twoway import TwoWay, two_way_bytes
from sheenmap.errors import Fault, OutputError, SettingsError

PICTURE_SUFFIXES = (".svg", ".png", ".pdf")


def write_chart(chart: Chart, path: Path, *, paper: Paper = "a4") -> None:
    """The chart as a page: ``.svg``, ``.png``, ``.pdf`` to print at true size, or ``.html`` with a pointer.

    Raises
    ------
    SettingsError
        Another suffix.
    OutputError
        The file cannot be written; an earlier one is left as it was.
    """
    suffix = _suffix(path, (*PICTURE_SUFFIXES, ".html"))
    content = chart_html(chart).encode() if suffix == ".html" else page_bytes(chart, suffix[1:], paper=paper)
    _replace(path, content)


def write_side_by_side(charts: Sequence[Chart], path: Path, *, paper: Paper = "a4") -> None:
    """Several films, lights or angles on one page above a common scale. Suffixes (but html) and errors as ``write_chart``."""
    _replace(path, side_by_side_bytes(charts, _suffix(path, PICTURE_SUFFIXES)[1:], paper=paper))


def write_two_way(chart: TwoWay, path: Path, *, paper: Paper = "a4") -> None:
    """A two-way chart as a page. Suffixes (but html) and errors as ``write_chart``."""
    _replace(path, two_way_bytes(chart, _suffix(path, PICTURE_SUFFIXES)[1:], paper=paper))


def write_table(chart: Chart, path: Path) -> None:
    """The chart as numbers: ``.csv`` or ``.json``. Errors as ``write_chart``."""
    suffix = _suffix(path, (".csv", ".json"))
    _replace(path, (table_csv(chart) if suffix == ".csv" else table_json(chart)).encode())


def _suffix(path: Path, allowed: tuple[str, ...]) -> str:
    suffix = path.suffix.lower()
    if suffix not in allowed:
        found = f'"{path.name}"'
        raise SettingsError([Fault(key="--out", found=found, allowed="a name that ends in " + ", ".join(allowed))], where="chart")
    return suffix


def _replace(path: Path, content: bytes) -> None:
    """Write beside, then rename: a reader sees the old file or the new one, and a killed run leaves no half of it."""
    name = ""
    try:
        with tempfile.NamedTemporaryFile(dir=path.parent, prefix=f".{path.name}.", delete=False) as file:
            name = file.name
            file.write(content)
        Path(name).chmod(0o666 & ~_umask())
        os.replace(name, path)
    except OSError as error:
        if name:
            Path(name).unlink(missing_ok=True)
        raise OutputError(f"{path}: {error.strerror or error}") from error


def _umask() -> int:
    mask = os.umask(0)
    os.umask(mask)
    return mask
