"""[light] and [camera]: what the part is lit with, and what takes its picture."""

from sheenmap import catalogue
from sheenmap.camera import Encoding, parse_encoding_name
from sheenmap.errors import CurveError
from sheenmap.recipe.around import Around
from sheenmap.recipe.blank import read_blank, read_frames
from sheenmap.recipe.curves import CAMERA, LAMP, read_curve
from sheenmap.recipe.files import Folder, is_csv
from sheenmap.recipe.reader import Reader, did_you_mean, shown
from sheenmap.recipe.types import CameraSetup, NoiseSpec
from sheenmap.spectra import Spectrum, parse_encoding

ENCODINGS = '"linear", "srgb", "power 2.2" (0.2 to 5), or a CSV code,linear'
LARGEST_U = 0.5


def read_light(reader: Reader, around: Around, inherited: Spectrum | None) -> Spectrum | None:
    """The lamp of a photograph, or None after a fault; what a [[shot]] leaves out it takes from ``inherited``."""
    inner = reader.table_of("light")
    if inner is None:
        if inherited is None and "light" not in reader.table:
            reader.fault("light", "nothing", f"a table with spectrum: {LAMP}")
        return inherited
    if inherited is None:
        inner.require("spectrum", LAMP)
    text = inner.text("spectrum", None)
    lamp = inherited if text is None else read_curve(inner, "spectrum", around.folder, text, "lamp")
    inner.finish()
    return lamp


def read_camera(reader: Reader, around: Around, inherited: CameraSetup | None) -> CameraSetup:
    """The camera of a photograph. Without any [camera] it is the standard observer, linear: enough for a chart."""
    base = CameraSetup(response=catalogue.camera("cie-1931"), encoding=Encoding()) if inherited is None else inherited
    inner = reader.table_of("camera")
    if inner is None:
        return base
    if inherited is None:
        _require_calibration(inner)
    setup = _camera(inner, around, base)
    inner.not_supported(["profile"])
    inner.finish()
    return setup


def _require_calibration(reader: Reader) -> None:
    """What cannot be guessed about a camera that takes pictures: a wrong guess gives a wrong thickness that looks sure."""
    if "profile" in reader.table:
        return
    reader.require("response", CAMERA)
    if {"blank", "dark", "stray"} & reader.table.keys():
        reader.require("encoding", ENCODINGS)


def _camera(reader: Reader, around: Around, base: CameraSetup) -> CameraSetup:
    text = reader.text("response", None)
    response = None if text is None else read_curve(reader, "response", around.folder, text, "camera")
    encoding = _encoding(reader, around.folder)
    blank_frames, surface = read_blank(reader.table_of("blank"), around, base)
    return CameraSetup(
        response=base.response if response is None else response,
        encoding=base.encoding if encoding is None else encoding,
        dark_frames=read_frames(reader, "dark", around.folder, base.dark_frames),
        stray_frames=read_frames(reader, "stray", around.folder, base.stray_frames),
        blank_frames=blank_frames,
        blank_surface=surface,
        noise=_noise(reader.table_of("noise"), base.noise),
        level_u=reader.number("level_u", base.level_u, low=0.0, high=LARGEST_U),
        colour_u=reader.number("colour_u", base.colour_u, low=0.0, high=LARGEST_U),
        shading_u=reader.number("shading_u", base.shading_u, low=0.0, high=LARGEST_U),
    )


def _encoding(reader: Reader, folder: Folder) -> Encoding | None:
    text = reader.text("encoding", None)
    if text is None:
        return None
    if not is_csv(text):
        named = parse_encoding_name(text)
        if named is None:
            reader.fault("encoding", f"found {shown(text)}", ENCODINGS, did_you_mean(text, ("linear", "srgb", "power 2.2")))
        return named
    content = folder.csv(reader, "encoding", text)
    return None if content is None else reader.attempt("encoding", lambda: _encoding_curve(content), found=shown(text))


def _encoding_curve(content: str) -> Encoding:
    code, linear = parse_encoding(content)
    if linear[0] < 0 or linear[-1] > 1 + 1e-9:
        raise CurveError(f"linear values of {linear[0]:g} to {linear[-1]:g}; allowed: 0 to 1")
    return Encoding(kind="curve", code=code, linear=linear)


def _noise(reader: Reader | None, inherited: NoiseSpec) -> NoiseSpec:
    if reader is None:
        return inherited
    for key in ("full_well_e", "read_noise_e"):
        reader.require(key, "electrons; both are needed")
    full_well_e = reader.number("full_well_e", None, low=10.0, high=1e9)
    read_noise_e = reader.number("read_noise_e", None, low=0.0, high=1e6)
    reader.finish()
    return NoiseSpec(full_well_e=full_well_e, read_noise_e=read_noise_e)
