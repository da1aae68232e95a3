"""The photographs: the main one, and the [[shot]] tables that say what differs in further ones."""

from dataclasses import replace

from sheenmap import catalogue
from sheenmap.errors import Fault
from sheenmap.recipe.around import Around
from sheenmap.recipe.light_camera import read_camera, read_light
from sheenmap.recipe.reader import Reader
from sheenmap.recipe.types import Shot, ViewSetup
from sheenmap.recipe.view import read_view

PARTS = ("light", "camera", "view")


def read_shots(reader: Reader, around: Around) -> tuple[Shot, ...]:
    """The main photograph's conditions, then those of each [[shot]]."""
    main = _read(reader, around, None)
    return main, *(_further(inner, around, main, f"shot {k}") for k, inner in enumerate(reader.tables_of("shot"), start=2))


def _read(reader: Reader, around: Around, base: Shot | None) -> Shot:
    light = read_light(reader, around, None if base is None else base.light)
    camera = read_camera(reader, around, None if base is None else base.camera)
    view = read_view(reader.table_of("view"), around.folder, ViewSetup() if base is None else base.view)
    # Where the lamp is at fault the recipe will be refused; reading goes on under an even one to find the other faults.
    return Shot(light=catalogue.lamp("E") if light is None else light, camera=camera, view=view)


def _further(reader: Reader, around: Around, main: Shot, default_name: str) -> Shot:
    reader.require("photo", "the picture's file")
    text = reader.text("photo", None)
    photo = None if text is None else around.folder.path(reader, "photo", text)
    name = reader.text("name", default_name)
    shot = _read(reader, around, main)
    reader.finish()
    camera = reader.table.get("camera")
    has_blank = isinstance(camera, dict) and "blank" in camera
    if main.camera.blank_frames and not has_blank and any(part in reader.table for part in PARTS):
        allowed = "a blank taken under this shot's own light, camera and view; the main one's was not"
        reader.faults.append(Fault(key=f"{reader.path}.camera.blank", found="nothing", allowed=allowed))
    return replace(shot, photo=photo, name=name)
