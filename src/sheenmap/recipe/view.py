"""[view]: from where, through what cone, and in which polarisation the part is seen."""

from pathlib import Path

from sheenmap.optics import Polarisation
from sheenmap.recipe.files import Folder
from sheenmap.recipe.reader import Reader
from sheenmap.recipe.types import Quantity, ViewSetup

WIDEST_APERTURE = 0.95
LARGEST_ANGLE_U = 45.0
POLARISATIONS: dict[str, Polarisation] = {"none": "none", "s": "s", "p": "p"}


def read_view(reader: Reader | None, folder: Folder, base: ViewSetup) -> ViewSetup:
    """The view of a photograph; what the table leaves out comes from ``base``."""
    if reader is None:
        return base
    place = _place(reader)
    angle, photo, inherited_place = _angle(reader, folder, base)
    if place is not None:
        angle, photo = Quantity(value=0.0), None
    aperture = reader.number("aperture", base.aperture, low=0.0, high=WIDEST_APERTURE)
    polarisation = POLARISATIONS[reader.choice("polarisation", tuple(POLARISATIONS), base.polarisation)]
    reader.finish()
    return ViewSetup(
        angle_deg=angle,
        angle_photo=photo,
        camera_mm=inherited_place if place is None else place,
        aperture=aperture,
        polarisation=polarisation,
    )


def _place(reader: Reader) -> tuple[float, float, float] | None:
    place = reader.numbers("camera_mm", 3)
    if "camera_mm" in reader.table and "angle_deg" in reader.table:
        reader.fault("camera_mm", "both camera_mm and angle_deg", "one of the two")
    if place is None:
        return None
    if place[2] <= 0:
        reader.fault("camera_mm", f"found a height of {place[2]:g}", "a lens above the part: the third number is above 0")
        return None
    return place[0], place[1], place[2]


def _angle(reader: Reader, folder: Folder, base: ViewSetup) -> tuple[Quantity, Path | None, tuple[float, float, float] | None]:
    """Angle, its picture, and the lens's place: those of ``base`` unless the table has an angle of its own."""
    if "angle_deg" not in reader.table:
        reader.raw("angle_deg")
        return base.angle_deg, base.angle_photo, base.camera_mm
    if isinstance(reader.table["angle_deg"], dict):
        return (*_angle_table(reader.table_of("angle_deg"), folder, base), None)
    return Quantity(value=reader.number("angle_deg", 0.0, low=0.0, high=90.0, open_high=True)), None, None


def _angle_table(reader: Reader | None, folder: Folder, base: ViewSetup) -> tuple[Quantity, Path | None]:
    """{ value, u }, or { photo, u } with one float for each pixel."""
    if reader is None:
        return base.angle_deg, base.angle_photo
    value = reader.number("value", 0.0, low=0.0, high=90.0, open_high=True)
    text = reader.text("photo", None)
    path = None if text is None else folder.path(reader, "photo", text)
    u = reader.number("u", 0.0, low=0.0, high=LARGEST_ANGLE_U)
    if ("value" in reader.table) == ("photo" in reader.table):
        found = "both value and photo" if "value" in reader.table else "nothing"
        reader.fault("value", found, "value, or photo with one float for each pixel")
    reader.finish()
    return Quantity(value=value, u=u), path
