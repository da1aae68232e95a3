"""Results as files: each whole or not there, and read back with the same care.

Pictures are TIFF in the photograph's size, thickness and uncertainty in nm (float32, NaN where nothing is claimed), flags as
bits of ``sheenmap.flags``. The summary is JSON in which a value that does not exist is null, never NaN. The files of one
measurement carry one identifier, so that a mixture of two runs is found when it is read.
"""

from sheenmap.storage.atomic import check_folder, write_atomically, write_together
from sheenmap.storage.document import SCHEMA_VERSION, render_json, summary, to_plain
from sheenmap.storage.finished import FinishedMap, MapError, read_map
from sheenmap.storage.measurement import renew_summary, write_measurement
from sheenmap.storage.picture import write_png

__all__ = [
    "SCHEMA_VERSION",
    "FinishedMap",
    "MapError",
    "check_folder",
    "read_map",
    "render_json",
    "renew_summary",
    "summary",
    "to_plain",
    "write_atomically",
    "write_measurement",
    "write_png",
    "write_together",
]
