"""camera.blank: the photograph of a bare surface, and what that surface is; and the frames of the other pictures."""

from pathlib import Path

from sheenmap import catalogue
from sheenmap.optics import Stack
from sheenmap.recipe.around import Around
from sheenmap.recipe.curves import NamedCurve, holds, parsed, read_curve, read_reflectance
from sheenmap.recipe.files import Folder, csv_header, is_csv
from sheenmap.recipe.reader import Reader, shown
from sheenmap.recipe.stack import read_stack
from sheenmap.recipe.types import CameraSetup
from sheenmap.spectra import Spectrum

SURFACE = "a material's name, a table like [stack], or a CSV wavelength_nm,reflectance or wavelength_nm,n,k"


def read_frames(reader: Reader, key: str, folder: Folder, inherited: tuple[Path, ...]) -> tuple[Path, ...]:
    """The picture under ``key``, or the list of them; ``inherited`` where there is none."""
    value = reader.raw(key)
    if value is None:
        return inherited
    names = [value] if isinstance(value, str) else value
    if not isinstance(names, list) or not names or not all(isinstance(name, str) and name for name in names):
        reader.fault(key, f"found {shown(value)}", "a picture's file, or a list of them")
        return inherited
    paths = [folder.path(reader, key, name) for name in names]
    return tuple(path for path in paths if path is not None)


def read_blank(reader: Reader | None, around: Around, base: CameraSetup) -> tuple[tuple[Path, ...], Stack | Spectrum | None]:
    """Frames and surface of the blank; what the table leaves out comes from ``base``."""
    if reader is None:
        return base.blank_frames, base.blank_surface
    frames = read_frames(reader, "photo", around.folder, base.blank_frames)
    value = reader.raw("surface")
    if value is None:
        if base.blank_surface is None:
            reader.fault("surface", "nothing", SURFACE)
        surface = base.blank_surface
    else:
        surface = _surface(reader, around, value)
    reader.finish()
    return frames, surface


def _surface(reader: Reader, around: Around, value: object) -> Stack | Spectrum | None:
    if isinstance(value, dict):
        inner = Reader(value, reader.name("surface"), reader.faults)
        return read_stack(inner, around.folder, around.curves, searched=False, medium=around.medium_as_written).stack
    if not isinstance(value, str) or not value:
        reader.fault("surface", f"found {shown(value)}", SURFACE)
        return None
    if is_csv(value):
        return _surface_csv(reader, around, value)
    return _bare(reader, around, value, read_curve(reader, "surface", around.folder, value, "material"))


def _surface_csv(reader: Reader, around: Around, text: str) -> Stack | Spectrum | None:
    content = around.folder.csv(reader, "surface", text)
    if content is None:
        return None
    if holds(content, "material"):
        return _bare(reader, around, text, parsed(reader, "surface", text, content, "material"))
    if not holds(content, "surface"):
        found = f"found {shown(text)}: header {shown(csv_header(content))}"
        reader.fault("surface", found, "wavelength_nm,reflectance or wavelength_nm,n,k")
        return None
    found_curve = read_reflectance(reader, "surface", text, content)
    if found_curve is not None:
        around.curves.append(NamedCurve(key=reader.name("surface"), spectrum=found_curve))
    return found_curve


def _bare(reader: Reader, around: Around, text: str, substrate: Spectrum | None) -> Stack | None:
    """A bare surface; of the part's own substrate it has the same back."""
    if substrate is None:
        return None
    around.curves.append(NamedCurve(key=reader.name("surface"), spectrum=substrate))
    if around.stack is None:
        return Stack(medium=catalogue.material("air"), layers=(), substrate=substrate)
    back = around.stack.back if text == around.substrate_as_written else None
    return Stack(medium=around.stack.medium, layers=(), substrate=substrate, back=back)
