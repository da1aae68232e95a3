"""Named materials, lamps, observers and cameras, each with its source; opens nothing but the package's own data.

Everything comes back as a ``Spectrum``: an index is complex, n - ik with k >= 0; a lamp is relative power per nanometre;
an observer is (3, W): x, y, z; a camera is (3, W): red, green, blue, relative signal per watt. Names are found whatever
their case and however their words are joined ("Soap water", "soap-water"). The files are plain CSVs: the folder
``calibration`` of the source, ``sheenmap/catalogue/data`` once installed.
"""

from sheenmap.catalogue.database import MissingDatabaseError, database_page
from sheenmap.catalogue.named import Entry, camera, entry, lamp, material, names, observer
from sheenmap.catalogue.temperature import TemperatureError, blackbody

__all__ = [
    "Entry",
    "MissingDatabaseError",
    "TemperatureError",
    "blackbody",
    "camera",
    "database_page",
    "entry",
    "lamp",
    "material",
    "names",
    "observer",
]
