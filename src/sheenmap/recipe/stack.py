"""[stack]: medium, layers, substrate, back."""

from dataclasses import dataclass

from sheenmap.optics import Back, Layer, Stack
from sheenmap.recipe.curves import NamedCurve, read_material
from sheenmap.recipe.files import Folder
from sheenmap.recipe.quantity import read_quantity
from sheenmap.recipe.reader import Reader
from sheenmap.recipe.types import Quantity
from sheenmap.spectra import Spectrum

THICKEST_SEARCH_NM = 20_000.0
THICKEST_NM, THICKEST_MM = 1e6, 1000.0
ROUGHEST_NM = 200.0
CLEAR_K = 1e-3  # water, alcohols and oils stay below 1e-4; at an angle the optics takes no medium that absorbs more
PLAIN = Quantity(value=1.0)


@dataclass(frozen=True, kw_only=True)
class ReadStack:
    """A stack with what belongs to its searched layer; parts are None where a fault was found."""

    stack: Stack | None
    search_nm: tuple[float, float] | None = None
    index_scale: Quantity = PLAIN


@dataclass(frozen=True, kw_only=True)
class ReadLayer:
    """A layer, None where its material is faulty, with its search range and its index scale."""

    layer: Layer | None
    search_nm: tuple[float, float] | None
    index_scale: Quantity


def read_stack(
    reader: Reader, folder: Folder, curves: list[NamedCurve], *, searched: bool = True, medium: object = "air"
) -> ReadStack:
    """Read a stack and note its curves; ``searched`` says whether exactly one layer must be searched, or none.

    ``medium`` is what the light comes from where the table does not say it.
    """
    above = _medium(reader, folder, curves, medium)
    layers = [_layer(inner, folder, curves) for inner in reader.tables_of("layers")]
    _check_searched(reader, wanted=searched)
    substrate = read_material(reader, "substrate", folder, curves)
    rough_nm = reader.number("substrate_rough_nm", 0.0, low=0.0, high=ROUGHEST_NM)
    back = _back(reader.table_of("back"), folder, curves)
    reader.finish()
    read = [layer.layer for layer in layers if layer.layer is not None]
    ranged = next((layer for layer in layers if layer.search_nm is not None), None)
    stack = None
    if above is not None and substrate is not None and sum(layer.thickness_nm is None for layer in read) <= searched:
        stack = Stack(medium=above, layers=tuple(read), substrate=substrate, back=back, substrate_rough_nm=rough_nm)
    if ranged is None:
        return ReadStack(stack=stack)
    return ReadStack(stack=stack, search_nm=ranged.search_nm, index_scale=ranged.index_scale)


def _medium(reader: Reader, folder: Folder, curves: list[NamedCurve], default: object) -> Spectrum | None:
    found = read_material(reader, "medium", folder, curves, default=default)
    if found is not None and abs(found.values.imag).max() > CLEAR_K:
        reader.fault("medium", "an absorbing material", "one that light passes, such as air or water")
    return found


def _check_searched(reader: Reader, *, wanted: bool) -> None:
    value = reader.table.get("layers", [])
    count = sum(isinstance(item, dict) and "search_nm" in item for item in value) if isinstance(value, list) else 0
    if wanted and count != 1:
        reader.fault("layers", f"{count or 'no'} layer{'s' * (count != 1)} with search_nm", "exactly one layer is searched")
    if not wanted and count:
        reader.fault("layers", "a layer with search_nm", "layers of known thickness_nm only")


def _layer(reader: Reader, folder: Folder, curves: list[NamedCurve]) -> ReadLayer:
    name = reader.text("name", "")
    index = read_material(reader, "material", folder, curves)
    thickness_nm = reader.number("thickness_nm", None, low=0.0, high=THICKEST_NM)
    search_nm = _search(reader)
    if ("thickness_nm" in reader.table) == ("search_nm" in reader.table):
        found = "both thickness_nm and search_nm" if "search_nm" in reader.table else "neither thickness_nm nor search_nm"
        reader.fault("thickness_nm", found, "one of the two")
    scale = read_quantity(reader, "index_scale", PLAIN, low=0.5, high=2.0, largest_u=0.5)
    if scale.u > 0 and "search_nm" not in reader.table:
        reader.fault("index_scale", f"found u = {scale.u:g}", "an uncertainty on the layer with search_nm only")
    rough_nm = reader.number("rough_nm", 0.0, low=0.0, high=ROUGHEST_NM)
    inclusion, volume = _fraction(reader.table_of("fraction"), folder, curves)
    reader.finish()
    if index is None:
        return ReadLayer(layer=None, search_nm=search_nm, index_scale=scale)
    layer = Layer(
        index=index, thickness_nm=None if "search_nm" in reader.table else (thickness_nm or 0.0), name=name,
        index_scale=scale.value, rough_nm=rough_nm, inclusion=inclusion, inclusion_volume=volume,
    )  # fmt: skip
    return ReadLayer(layer=layer, search_nm=search_nm, index_scale=scale)


def _search(reader: Reader) -> tuple[float, float] | None:
    pair = reader.numbers("search_nm", 2)
    if pair is None:
        return None
    low, high = pair
    if not 0 <= low < high <= THICKEST_SEARCH_NM:
        allowed = f"[low, high] with 0 <= low < high <= {THICKEST_SEARCH_NM:g}"
        hint = f"did you mean [{high:g}, {low:g}]?" if 0 <= high < low <= THICKEST_SEARCH_NM else ""
        reader.fault("search_nm", f"found [{low:g}, {high:g}]", allowed, hint)
        return None
    return low, high


def _fraction(reader: Reader | None, folder: Folder, curves: list[NamedCurve]) -> tuple[Spectrum | None, float]:
    if reader is None:
        return None, 0.0
    inclusion = read_material(reader, "material", folder, curves)
    reader.require("volume", "a share of the volume, 0 to 1")
    volume = reader.number("volume", 0.0, low=0.0, high=1.0)
    reader.finish()
    return inclusion, volume


def _back(reader: Reader | None, folder: Folder, curves: list[NamedCurve]) -> Back | None:
    if reader is None:
        return None
    medium = read_material(reader, "medium", folder, curves, default="air")
    reader.require("thickness_mm", "the substrate's thickness in mm")
    thickness_mm = reader.number("thickness_mm", None, low=0.0, high=THICKEST_MM, open_low=True)
    reader.finish()
    return None if medium is None or thickness_mm is None else Back(medium=medium, thickness_mm=thickness_mm)
