"""[light], [camera] and [view]: how the part is lit, taken and seen."""

from dataclasses import dataclass
from pathlib import Path

from sheenmap import catalogue
from sheenmap.camera import Encoding, parse_encoding_name
from sheenmap.errors import CurveError
from sheenmap.optics import Stack
from sheenmap.recipe.files import Folder, csv_header, curve, is_csv, is_surface, surface_curve
from sheenmap.recipe.reader import Reader, is_number, shown
from sheenmap.recipe.stack import quantity, read_stack
from sheenmap.recipe.types import CameraSetup, NoiseSpec, Quantity, Shot, ViewSetup
from sheenmap.spectra import Spectrum, parse_csv, parse_encoding

ENCODINGS = '"linear", "srgb", "power 2.2", or a CSV code,linear'
WIDEST_APERTURE = 0.95


@dataclass(frozen=True, kw_only=True)
class Around:
    """What the reader of a shot needs from the rest of the recipe."""

    folder: Folder
    stack: Stack | None
    substrate_text: object
    curves: list[tuple[str, Spectrum]]


def read_shot(reader: Reader, around: Around, base: Shot | None) -> Shot:
    """The conditions of a photograph; what a [[shot]] leaves out it takes from ``base``, the main one."""
    light = _light(reader.table_of("light"), around, None if base is None else base.light, reader)
    camera = _camera(reader.table_of("camera"), around, None if base is None else base.camera)
    view = _view(reader.table_of("view"), around.folder, ViewSetup() if base is None else base.view)
    return Shot(light=light, camera=camera, view=view)


def _light(reader: Reader | None, around: Around, inherited: Spectrum | None, outer: Reader) -> Spectrum:
    if reader is None:
        if inherited is None:
            outer.fault("light", "nothing", 'a table with spectrum = "D65", another CIE name, or a CSV wavelength_nm,power')
        return catalogue.lamp("E") if inherited is None else inherited
    text = reader.text("spectrum", None)
    if text is None and "spectrum" not in reader.table:
        reader.fault("spectrum", "nothing", "a CIE name or a CSV wavelength_nm,power")
    lamp = None if text is None else curve(reader, "spectrum", around.folder, text, "lamp")
    if lamp is not None:
        around.curves.append((reader.name("spectrum"), lamp))
    reader.finish()
    return catalogue.lamp("E") if lamp is None else lamp


def _camera(reader: Reader | None, around: Around, base: CameraSetup | None) -> CameraSetup:
    fallback = CameraSetup(response=catalogue.camera("cie-1931"), encoding=Encoding()) if base is None else base
    if reader is None:
        return fallback
    response = _response(reader, around, fallback)
    encoding = _encoding(reader, around.folder, fallback.encoding)
    dark, stray = (_frames(reader, key, around.folder, inherited) for key, inherited in (
        ("dark", fallback.dark_frames), ("stray", fallback.stray_frames),
    ))  # fmt: skip
    blank_frames, surface = _blank(reader.table_of("blank"), around, fallback)
    noise = _noise(reader.table_of("noise"), fallback.noise)
    level_u = reader.number("level_u", fallback.level_u, low=0.0, high=1.0)
    colour_u = reader.number("colour_u", fallback.colour_u, low=0.0, high=0.5)
    shading_u = reader.number("shading_u", fallback.shading_u, low=0.0, high=0.5)
    reader.not_supported(["profile"])
    reader.finish()
    return CameraSetup(
        response=response, encoding=encoding, dark_frames=dark, stray_frames=stray, blank_frames=blank_frames,
        blank_surface=surface, noise=noise, level_u=level_u, colour_u=colour_u, shading_u=shading_u,
    )  # fmt: skip


def _response(reader: Reader, around: Around, fallback: CameraSetup) -> Spectrum:
    text = reader.text("response", None)
    found = None if text is None else curve(reader, "response", around.folder, text, "camera")
    if found is None:
        return fallback.response
    around.curves.append((reader.name("response"), found))
    return found


def _encoding(reader: Reader, folder: Folder, fallback: Encoding) -> Encoding:
    text = reader.text("encoding", None)
    if text is None:
        return fallback
    if not is_csv(text):
        named = parse_encoding_name(text)
        if named is None:
            reader.fault("encoding", f"found {shown(text)}", ENCODINGS)
        return named or fallback
    content = folder.csv(reader, "encoding", text)
    if content is None:
        return fallback

    def read() -> Encoding:
        code, linear = parse_encoding(content)
        if linear[0] < 0 or linear[-1] > 1 + 1e-9:
            raise CurveError(f"linear values of {linear[0]:g} to {linear[-1]:g}; allowed: 0 to 1")
        return Encoding(kind="curve", code=code, linear=linear)

    return reader.attempt("encoding", read, found=shown(text)) or fallback


def _frames(reader: Reader, key: str, folder: Folder, inherited: tuple[Path, ...]) -> tuple[Path, ...]:
    value = reader.raw(key)
    if value is None:
        return inherited
    names = [value] if isinstance(value, str) else value
    if not isinstance(names, list) or not names or not all(isinstance(name, str) and name for name in names):
        reader.fault(key, f"found {shown(value)}", "a picture's file, or a list of them")
        return inherited
    paths = [folder.path(reader, key, name) for name in names]
    return tuple(path for path in paths if path is not None)


def _blank(reader: Reader | None, around: Around, fallback: CameraSetup) -> tuple[tuple[Path, ...], Stack | Spectrum | None]:
    if reader is None:
        return fallback.blank_frames, fallback.blank_surface
    frames = _frames(reader, "photo", around.folder, fallback.blank_frames)
    surface = _surface(reader, around) if "surface" in reader.table else fallback.blank_surface
    if surface is None and "surface" not in reader.table:
        reader.fault("surface", "nothing", "what the blank is made of: a material, a stack, or a CSV wavelength_nm,reflectance")
    reader.raw("surface")
    reader.finish()
    return frames, surface


def _surface(reader: Reader, around: Around) -> Stack | Spectrum | None:
    value = reader.raw("surface")
    if isinstance(value, dict):
        inner = reader.table_of("surface")
        read = None if inner is None else read_stack(inner, around.folder, searched=False)
        around.curves.extend([] if read is None else read.curves)
        return None if read is None else read.stack
    if isinstance(value, str) and is_csv(value):
        content = around.folder.csv(reader, "surface", value)
        if content is None:
            return None
        if is_surface(content):
            found = surface_curve(reader, "surface", value, content)
        elif csv_header(content).replace(" ", "").startswith("wavelength_nm,n"):
            found = reader.attempt("surface", lambda: parse_csv(content, "material"), found=shown(value))
            return _bare(reader, around, found, value)
        else:
            allowed = "wavelength_nm,reflectance or wavelength_nm,n,k"
            reader.fault("surface", f'header "{csv_header(content)[:60]}" in {value}', allowed)
            return None
        if found is not None:
            around.curves.append((reader.name("surface"), found))
        return found
    if isinstance(value, str):
        return _bare(reader, around, curve(reader, "surface", around.folder, value, "material"), value)
    if is_number(value):
        reader.fault("surface", f"found {value}", "a material's name, a stack, or a CSV wavelength_nm,reflectance")
        return None
    reader.fault("surface", f"found {shown(value)}", "a material, a table like [stack], or a CSV")
    return None


def _bare(reader: Reader, around: Around, substrate: Spectrum | None, text: object) -> Stack | None:
    """A bare surface; of the part's own substrate it has the same back."""
    if substrate is None:
        return None
    around.curves.append((reader.name("surface"), substrate))
    back = around.stack.back if around.stack is not None and text == around.substrate_text else None
    medium = around.stack.medium if around.stack is not None else catalogue.material("air")
    return Stack(medium=medium, layers=(), substrate=substrate, back=back)


def _noise(reader: Reader | None, fallback: NoiseSpec) -> NoiseSpec:
    if reader is None:
        return fallback
    full_well_e = reader.number("full_well_e", None, low=10.0, high=1e9)
    read_noise_e = reader.number("read_noise_e", None, low=0.0, high=1e6)
    for key in ("full_well_e", "read_noise_e"):
        if key not in reader.table:
            reader.fault(key, "nothing", "electrons; both are needed")
    reader.finish()
    return NoiseSpec(full_well_e=full_well_e, read_noise_e=read_noise_e)


def _view(reader: Reader | None, folder: Folder, fallback: ViewSetup) -> ViewSetup:
    if reader is None:
        return fallback
    photo, angle = _angle(reader, folder, fallback)
    camera_mm = reader.numbers("camera_mm", 3)
    if camera_mm is not None and camera_mm[2] <= 0:
        reader.fault("camera_mm", f"found a height of {camera_mm[2]:g}", "a lens above the part: the third number is above 0")
    if camera_mm is not None and "angle_deg" in reader.table:
        reader.fault("camera_mm", "both camera_mm and angle_deg", "one of the two")
    aperture = reader.number("aperture", fallback.aperture, low=0.0, high=WIDEST_APERTURE)
    polarisation = reader.choice("polarisation", ("none", "s", "p"), fallback.polarisation)
    reader.finish()
    place = None if camera_mm is None else (camera_mm[0], camera_mm[1], camera_mm[2])
    if place is None and "angle_deg" not in reader.table:
        place = fallback.camera_mm
    return ViewSetup(
        angle_deg=angle, angle_photo=photo, camera_mm=place, aperture=aperture,
        polarisation="s" if polarisation == "s" else "p" if polarisation == "p" else "none",
    )  # fmt: skip


def _angle(reader: Reader, folder: Folder, fallback: ViewSetup) -> tuple[Path | None, Quantity]:
    value = reader.table.get("angle_deg")
    if isinstance(value, dict) and "photo" in value:
        inner = reader.table_of("angle_deg")
        text = None if inner is None else inner.text("photo", None)
        path = None if inner is None or text is None else folder.path(inner, "photo", text)
        u = 0.0 if inner is None else inner.number("u", 0.0, low=0.0, high=45.0)
        if inner is not None:
            inner.finish()
        return path, Quantity(value=0.0, u=u)
    if value is None:
        reader.raw("angle_deg")
        return fallback.angle_photo, fallback.angle_deg
    return None, quantity(reader, "angle_deg", 0.0, low=0.0, high=90.0, open_high=True)
