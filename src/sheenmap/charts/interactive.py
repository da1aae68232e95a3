"""One self-contained page with a pointer: thickness, colour, camera and look-alikes wherever it points."""

import base64
import json
from importlib.resources import files

import cv2
import jinja2
import numpy as np

from sheenmap.arrays import FloatArray
from sheenmap.charts.chart import Chart
from sheenmap.charts.drawing import camera_strip
from sheenmap.charts.orders import ORDER_WAVELENGTH_NM
from sheenmap.charts.table import chart_record
from sheenmap.charts.words import lit_words
from sheenmap.colour import encode_srgb

TEMPLATE = "page.html.j2"


def chart_html(chart: Chart) -> str:
    """The page as text: style, data and script inside it; it opens without a network."""
    environment = jinja2.Environment(autoescape=True, undefined=jinja2.StrictUndefined, trim_blocks=True, lstrip_blocks=True)
    source = files("sheenmap.charts").joinpath(TEMPLATE).read_text(encoding="utf-8")
    return environment.from_string(source).render(
        chart=chart,
        setup=chart.setup,
        lit=lit_words(chart.exposure),
        order_wavelength_nm=f"{ORDER_WAVELENGTH_NM:g}",
        shown=strip_address(chart.shown),
        plain=strip_address(chart.srgb),
        camera=strip_address(encode_srgb(camera_strip(chart.camera))),
        data=script_safe(chart_record(chart)),
    )


def strip_address(rgb: FloatArray) -> str:
    """Colours (T, 3) as the data address of a PNG one pixel high."""
    codes = np.round(255 * rgb).astype(np.uint8)[None, :, ::-1]
    _, encoded = cv2.imencode(".png", codes)
    return "data:image/png;base64," + base64.b64encode(encoded.tobytes()).decode("ascii")


def script_safe(record: object) -> str:
    """JSON that can stand inside a script element: no text in it can end the element."""
    return (
        json.dumps(record, ensure_ascii=True, allow_nan=False, separators=(",", ":"))
        .replace("<", "\\u003c")
        .replace("&", "\\u0026")
    )
