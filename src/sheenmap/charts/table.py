"""The chart as numbers: CSV and JSON text."""

import json
from typing import Any

import numpy as np

from sheenmap.charts.chart import Chart

COLUMNS = ("thickness_nm", "X", "Y", "Z", "L", "a", "b", "srgb_r", "srgb_g", "srgb_b", "red", "green", "blue")


def table_csv(chart: Chart) -> str:
    """A header with ``COLUMNS`` and a line for each thickness, to ten digits."""
    rows = np.column_stack([chart.thickness_nm, chart.xyz, chart.lab, chart.srgb, chart.camera])
    lines = [",".join(f"{value + 0.0:.10g}" for value in row) for row in rows]  # + 0.0: no "-0"
    return "\n".join([",".join(COLUMNS), *lines]) + "\n"


def table_json(chart: Chart) -> str:
    """The same with everything that CSV has no room for: set-up, chromaticity, gamut, names, speed, look-alikes, orders."""
    return json.dumps(chart_record(chart), indent=1, ensure_ascii=False, allow_nan=False) + "\n"


def chart_record(chart: Chart) -> dict[str, Any]:
    """The chart as plain lists and numbers for JSON; what has no value is None."""
    setup = chart.setup
    return {
        "title": setup.title,
        "recipe_sha256": setup.digest,
        "film": setup.film,
        "stack": setup.stack,
        "light": setup.light,
        "observer": setup.observer,
        "white": setup.white,
        "view": setup.view,
        "camera_reference": setup.camera_reference,
        "wavelengths_nm": list(setup.band_nm),
        "repeat_within_de00": chart.repeat_within,
        "exposure": _rounded(chart.exposure),
        "orders": [{"order": o.number, "from_nm": _rounded(o.low_nm), "to_nm": _rounded(o.high_nm)} for o in chart.orders],
        "names": [{"name": r.name, "from_nm": r.low_nm, "to_nm": r.high_nm} for r in chart.runs],
        "appearance": [{"name": r.name, "from_nm": r.low_nm, "to_nm": r.high_nm} for r in chart.appearance],
        "repeats": [{"one_nm": r.one_nm, "other_nm": r.other_nm, "de00": _rounded(r.de00)} for r in chart.repeats],
        "notes": list(chart.notes),
        "cautions": list(chart.cautions),
        "rows": [_row(chart, i) for i in range(chart.thickness_nm.size)],
    }


def _row(chart: Chart, i: int) -> dict[str, Any]:
    return {
        "thickness_nm": _rounded(chart.thickness_nm[i]),
        "XYZ": _list(chart.xyz[i]),
        "xy": _list(chart.xy[i]),
        "Lab": _list(chart.lab[i]),
        "srgb": _list(chart.srgb[i]),
        "in_gamut": bool(chart.in_gamut[i]),
        "luminous_reflectance": _rounded(chart.xyz[i, 1] / 100),
        "shown_srgb": _list(chart.shown[i]),
        "shown_in_gamut": bool(chart.shown_in_gamut[i]),
        "camera": _list(chart.camera[i]),
        "de00_per_nm": _rounded(chart.de00_per_nm[i]),
        "name": chart.names[i],
        "looks_like_nm": [_rounded(other) for other in chart.look_alikes[i]],
    }


def _list(values: Any) -> list[float | None]:
    return [_rounded(value) for value in values]


def _rounded(value: float) -> float | None:
    return float(f"{float(value) + 0.0:.10g}") if np.isfinite(value) else None
