"""Where the data files are, and what their heads say.

A file is a CSV whose first lines are ``# key: value``. A file without them still counts: its name is then the file's.
"""

import re
from collections.abc import Iterable
from dataclasses import dataclass
from functools import lru_cache
from importlib.resources import files
from importlib.resources.abc import Traversable
from pathlib import Path

from sheenmap.errors import CurveError, UnknownNameError
from sheenmap.spectra import Spectrum, parse_csv

FOLDERS = {"material": "materials", "lamp": "lamps", "observer": "observers", "camera": "cameras"}
_HEAD_LINE = re.compile(r"#\s*([A-Za-z0-9_ -]+?)\s*:\s*(.*)")


@dataclass(frozen=True, kw_only=True)
class Record:
    """One file: its kind, the keys of its head (``name``, ``also``, ``source``, ``licence`` ...) and where it is."""

    kind: str
    name: str
    also: tuple[str, ...]
    head: dict[str, str]
    file: Traversable


def data_folder() -> Traversable:
    """The folder of the data files: the installed package's, or the source checkout's."""
    installed = files("sheenmap.catalogue") / "data"
    return installed if installed.is_dir() else Path(__file__).resolve().parents[3] / "calibration"


@lru_cache(maxsize=len(FOLDERS))
def shelf(kind: str) -> dict[str, Record]:
    """Every file of one kind, by its name, in alphabetical order (capitals and small letters together).

    Raises ``ValueError`` when ``kind`` is no key of ``FOLDERS``.
    """
    if kind not in FOLDERS:
        raise ValueError(f"kind {kind!r}; allowed: {', '.join(FOLDERS)}")
    return records_in(data_folder() / FOLDERS[kind], kind)


def records_in(folder: Traversable, kind: str) -> dict[str, Record]:
    """Every CSV file of a folder, by its name."""
    records = [_record(kind, file) for file in folder.iterdir() if file.name.endswith(".csv")]
    return {record.name: record for record in sorted(records, key=lambda record: (record.name.casefold(), record.name))}


def by_folded_name(records: Iterable[Record]) -> dict[str, Record]:
    """Files by each of their names, folded; a file's own name goes before another's alias."""
    records = tuple(records)
    by_name: dict[str, Record] = {}
    for record in records:
        for also in record.also:
            by_name.setdefault(fold(also), record)
    return by_name | {fold(record.name): record for record in records}


@lru_cache(maxsize=len(FOLDERS))
def _folded(kind: str) -> dict[str, Record]:
    return by_folded_name(shelf(kind).values())


def find(kind: str, name: str) -> Record:
    """The file that ``name`` or one of its other names stands for. Raises ``UnknownNameError``."""
    record = _folded(kind).get(fold(name))
    if record is None:
        raise UnknownNameError(kind, name, all_names(kind))
    return record


def all_names(kind: str) -> list[str]:
    """The names of one kind and then their other names."""
    records = shelf(kind).values()
    return [record.name for record in records] + [also for record in records for also in record.also]


def read(record: Record) -> Spectrum:
    """The curve of one file, with its name and source. Raises ``CurveError`` that names the file."""
    try:
        spectrum = parse_csv(record.file.read_text(encoding="utf-8"), record.kind)
    except CurveError as error:
        raise CurveError(f"{record.file.name}: {error}") from None
    return Spectrum(
        wavelength_nm=spectrum.wavelength_nm,
        values=spectrum.values,
        name=record.name,
        source=record.head.get("source", f"file {record.file.name}"),
    )


def fold(name: str) -> str:
    """A name without the differences that do not count: case, and how its words are joined."""
    return re.sub(r"[\s_-]+", "-", name.strip().casefold())


def head_of(text: str) -> dict[str, str]:
    """The ``# key: value`` lines that stand before the first line of data; a key said twice keeps its first value."""
    head: dict[str, str] = {}
    for line in text.lstrip("\ufeff").splitlines():
        if line.strip() and not line.lstrip().startswith("#"):
            break
        if match := _HEAD_LINE.fullmatch(line.strip()):
            head.setdefault(match[1].casefold(), match[2].strip())
    return head


def _record(kind: str, file: Traversable) -> Record:
    head = head_of(file.read_text(encoding="utf-8"))
    also = tuple(word.strip() for word in head.get("also", "").split(",") if word.strip())
    return Record(kind=kind, name=head.get("name") or file.name.removesuffix(".csv"), also=also, head=head, file=file)
