"""[stack]: medium, layers, substrate, back."""

from dataclasses import dataclass

from sheenmap.optics import Back, Layer, Stack
from sheenmap.recipe.files import Folder, material
from sheenmap.recipe.reader import Reader
from sheenmap.recipe.types import Quantity
from sheenmap.spectra import Spectrum

THICKEST_NM = 20_000.0


@dataclass(frozen=True, kw_only=True)
class ReadStack:
    """A stack with what belongs to its searched layer, and every curve in it by the key that names it."""

    stack: Stack | None
    search_nm: tuple[float, float] | None
    index_scale: Quantity
    curves: list[tuple[str, Spectrum]]


def read_stack(reader: Reader, folder: Folder, *, searched: bool = True) -> ReadStack:
    """Read a stack; ``searched`` says whether exactly one layer must be searched, or none."""
    curves: list[tuple[str, Spectrum]] = []
    medium = _noted(reader, "medium", material(reader, "medium", folder, default="air"), curves)
    if medium is not None and abs(medium.values.imag).max() > 1e-9:
        reader.fault("medium", "an absorbing material", "a medium that light passes, such as air or water")
    layers, searches, scale = [], [], Quantity(value=1.0)
    for layer_reader in reader.tables_of("layers"):
        layer, search_nm, layer_scale = _layer(layer_reader, folder, curves)
        if search_nm is not None:
            searches.append(search_nm)
            scale = layer_scale
        if layer is not None:
            layers.append(layer)
    wanted = sum("search_nm" in item for item in _tables(reader))
    if searched and wanted != 1:
        reader.fault("layers", f"{wanted or 'no'} layers with search_nm", "exactly one layer is searched")
    if not searched and wanted:
        reader.fault("layers", "a layer with search_nm", "layers of known thickness only")
    substrate = _noted(reader, "substrate", material(reader, "substrate", folder), curves)
    rough_nm = reader.number("substrate_rough_nm", 0.0, low=0.0, high=200.0)
    back = _back(reader.table_of("back"), folder, curves)
    reader.finish()
    stack = None
    if medium is not None and substrate is not None and sum(layer.thickness_nm is None for layer in layers) <= 1:
        stack = Stack(medium=medium, layers=tuple(layers), substrate=substrate, back=back, substrate_rough_nm=rough_nm)
    return ReadStack(stack=stack, search_nm=searches[0] if searches else None, index_scale=scale, curves=curves)


def _tables(reader: Reader) -> list[dict[str, object]]:
    value = reader.table.get("layers", [])
    return [item for item in value if isinstance(item, dict)] if isinstance(value, list) else []


def _layer(
    reader: Reader, folder: Folder, curves: list[tuple[str, Spectrum]]
) -> tuple[Layer | None, tuple[float, float] | None, Quantity]:
    name = reader.text("name", "")
    index = _noted(reader, "material", material(reader, "material", folder), curves)
    thickness_nm = reader.number("thickness_nm", None, low=0.0, high=1e6)
    search_nm = _search(reader)
    if ("thickness_nm" in reader.table) == ("search_nm" in reader.table):
        found = "both thickness_nm and search_nm" if "search_nm" in reader.table else "neither thickness_nm nor search_nm"
        reader.fault("thickness_nm", found, "one of the two")
    scale = quantity(reader, "index_scale", 1.0, low=0.5, high=2.0)
    rough_nm = reader.number("rough_nm", 0.0, low=0.0, high=200.0)
    inclusion, volume = _fraction(reader.table_of("fraction"), folder, curves)
    reader.finish()
    if index is None:
        return None, search_nm, scale
    layer = Layer(
        index=index, thickness_nm=None if search_nm is not None else (thickness_nm or 0.0), name=name,
        index_scale=scale.value, rough_nm=rough_nm, inclusion=inclusion, inclusion_volume=volume,
    )  # fmt: skip
    return layer, search_nm, scale


def _search(reader: Reader) -> tuple[float, float] | None:
    pair = reader.numbers("search_nm", 2)
    if pair is None:
        return None
    low, high = pair
    if not 0 <= low < high <= THICKEST_NM:
        reader.fault("search_nm", f"found [{low:g}, {high:g}]", f"[low, high] with 0 <= low < high <= {THICKEST_NM:g}")
        return None
    return low, high


def _fraction(reader: Reader | None, folder: Folder, curves: list[tuple[str, Spectrum]]) -> tuple[Spectrum | None, float]:
    if reader is None:
        return None, 0.0
    inclusion = _noted(reader, "material", material(reader, "material", folder), curves)
    volume = reader.number("volume", None, low=0.0, high=1.0)
    if volume is None and "volume" not in reader.table:
        reader.fault("volume", "nothing", "a share of the volume, 0 to 1")
    reader.finish()
    return inclusion, volume or 0.0


def _back(reader: Reader | None, folder: Folder, curves: list[tuple[str, Spectrum]]) -> Back | None:
    if reader is None:
        return None
    medium = _noted(reader, "medium", material(reader, "medium", folder, default="air"), curves)
    thickness_mm = reader.number("thickness_mm", None, low=0.0, high=1000.0, open_low=True)
    if thickness_mm is None and "thickness_mm" not in reader.table:
        reader.fault("thickness_mm", "nothing", "the substrate's thickness in mm")
    reader.finish()
    return None if medium is None or thickness_mm is None else Back(medium=medium, thickness_mm=thickness_mm)


def quantity(reader: Reader, key: str, default: float, *, low: float, high: float, open_high: bool = False) -> Quantity:
    """A number, or { value, u } with its standard uncertainty."""
    if not isinstance(reader.table.get(key), dict):
        return Quantity(value=reader.number(key, default, low=low, high=high, open_high=open_high))
    inner = reader.table_of(key)
    if inner is None:
        return Quantity(value=default)
    value = inner.number("value", default, low=low, high=high, open_high=open_high)
    u = inner.number("u", 0.0, low=0.0, high=high)
    inner.finish()
    return Quantity(value=value, u=u)


def _noted(reader: Reader, key: str, spectrum: Spectrum | None, curves: list[tuple[str, Spectrum]]) -> Spectrum | None:
    if spectrum is not None:
        curves.append((reader.name(key), spectrum))
    return spectrum
