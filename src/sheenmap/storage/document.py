"""What is said of a map, as a document: ``summary.json``, and what ``--json`` prints."""

import hashlib
import json
import math
from collections.abc import Mapping
from dataclasses import asdict, fields, is_dataclass
from enum import Enum
from pathlib import Path
from typing import Any

import numpy as np

from sheenmap import __version__
from sheenmap.flags import FLAGS, OUTSIDE, FlagArray
from sheenmap.measure import Measurement
from sheenmap.wafer import Region

SCHEMA_VERSION = 1
CHUNK = 1 << 20  # pixels counted at once: the counter's copy stays inside the cache


def summary(measurement: Measurement) -> dict[str, Any]:
    """The document: only dicts, lists, str, int, finite float, bool and None.

    Everything in nm, or in the unit that its name says. ``fraction`` of a flag is of all pixels of the picture,
    ``region_fraction`` of those of the region (null for the flag that marks what is not of it).
    """
    height, width = measurement.flags.shape
    document = {
        "schema_version": SCHEMA_VERSION,
        "sheenmap": __version__,
        "title": measurement.title,
        "sentence": measurement.sentence,
        "verdict": measurement.verdict,
        "picture": {"width": width, "height": height},
        "flags": flag_table(measurement.flags),
        "statistics": measurement.statistics,
        "nonuniformity_percent": measurement.nonuniformity_percent,
        "sites": measurement.sites,
        "u_common_nm": measurement.u_common_nm,
        "budget": measurement.budget,
        "region": region_record(measurement.region),
        "notes": measurement.notes,
        "history": measurement.history,
        "provenance": measurement.provenance,
    }
    plain: dict[str, Any] = to_plain(document)
    return {**plain, "identifier": _identifier(plain)}


def flag_table(flags: FlagArray) -> dict[str, dict[str, Any]]:
    """Every flag of the registry with its bit, whether it blocks, how many pixels carry it, its meaning and advice."""
    counts = _counts(flags)
    total, inside = flags.size, flags.size - counts[OUTSIDE.bit]
    return {
        flag.name: {
            "bit": flag.bit,
            "blocks": flag.blocks,
            "pixels": counts[flag.bit],
            "fraction": counts[flag.bit] / total if total else 0.0,
            "region_fraction": None if flag is OUTSIDE or not inside else counts[flag.bit] / inside,
            "meaning": flag.meaning,
            "advice": flag.advice,
        }
        for flag in FLAGS
    }


def _counts(flags: FlagArray) -> list[int]:
    """Pixels that carry each bit, from one histogram of the few values that flags take."""
    flat = flags.reshape(-1)
    histogram = np.zeros(1 << 16, np.int64)
    for start in range(0, flat.size, CHUNK):
        histogram += np.bincount(flat[start : start + CHUNK], minlength=1 << 16)
    values = np.arange(histogram.size)
    return [int(histogram[(values >> flag.bit) & 1 == 1].sum()) for flag in FLAGS]


def region_record(region: Region) -> dict[str, Any]:
    """Where the part is, without the mask itself (``flags.tif`` has it)."""
    return {
        "origin_px": list(region.origin_px),
        "mm_per_px": region.mm_per_px,
        "rotation_deg": region.rotation_deg,
        "edge_exclusion_mm": region.edge_exclusion_mm,
        "disc": None if region.disc is None else asdict(region.disc),
    }


def _identifier(document: Mapping[str, Any]) -> str:
    """Names the measurement: the same inputs, read the same way, give the same one."""
    return hashlib.sha256(render_json(document).encode()).hexdigest()[:16]


def to_plain(value: Any) -> Any:
    """``value`` in terms of JSON: records as dicts, arrays as lists, and what is not a finite number as None."""
    if isinstance(value, Enum):
        return to_plain(value.value)
    if isinstance(value, np.generic | np.ndarray):
        return to_plain(value.tolist())
    if isinstance(value, float):
        return value if math.isfinite(value) else None
    if value is None or isinstance(value, bool | int | str):
        return value
    if isinstance(value, Mapping):
        return {str(key): to_plain(item) for key, item in value.items()}
    if isinstance(value, list | tuple | set | frozenset):
        return [to_plain(item) for item in (sorted(value) if isinstance(value, set | frozenset) else value)]
    if is_dataclass(value):
        return {field.name: to_plain(getattr(value, field.name)) for field in fields(value)}
    if isinstance(value, Path):
        return value.as_posix()
    raise ValueError(f"{type(value).__name__} has no place in a summary")


def render_json(document: Any) -> str:
    """The document as text, one item a line, ending with a line feed."""
    return json.dumps(document, indent=2, ensure_ascii=False, allow_nan=False) + "\n"
