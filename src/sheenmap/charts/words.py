"""The set-up and the cautions in words."""

from sheenmap.arrays import FloatArray
from sheenmap.charts.chart import Setup, White
from sheenmap.charts.repeats import MOST_NODES
from sheenmap.optics import Layer, Stack, View
from sheenmap.recipe import Recipe, Shot

OBSERVERS = {"cie-1931": "CIE 1931, 2 degrees", "cie-1964": "CIE 1964, 10 degrees"}
POLARISATIONS = {"none": "unpolarised", "s": "s-polarised", "p": "p-polarised"}

CAUTIONS = (
    "Screens and printers shift colours: take from this page which colours follow which, and compare with known films.",
    "Colours repeat from order to order. A chart alone does not tell the order.",
    "Words for colours differ from eye to eye. The eye's colours and the camera's signal are different things.",
)
THICK_NOTE_NM = 2000.0
DARK_EXPOSURE = 4.0


def describe(recipe: Recipe, shot: Shot, view: View, *, observer: str, white: White, band_nm: tuple[float, float]) -> Setup:
    """The set-up of a chart in words."""
    searched = recipe.stack.layers[recipe.stack.searched or 0]
    return Setup(
        title=recipe.title or recipe.path.stem,
        digest=recipe.digest,
        film=searched.name or searched.index.name,
        stack=_stack_words(recipe.stack, recipe.search_nm),
        light=shot.light.name or "unnamed light",
        observer=OBSERVERS.get(observer, observer),
        white=white,
        view=view_words(view),
        camera_reference=_reference_words(shot),
        band_nm=band_nm,
    )


def view_words(view: View) -> str:
    """Angle, cone and polarisation."""
    cone = "parallel light" if view.aperture == 0 else f"cone of aperture {view.aperture:g}"
    return f"angle {view.angle_deg:g} deg, {cone}, {POLARISATIONS[view.polarisation]}"


def notes_for(shot: Shot, setup: Setup, *, thickness_nm: FloatArray, exposure: float, share_out: float) -> tuple[str, ...]:
    """What is particular about this chart."""
    low, high = setup.band_nm
    against, beside = ("the perfect mirror", "a mirror") if setup.white == "light" else ("the blank", "the blank")
    lines = [
        f"The wide strip is {lit_words(exposure)}, as an eye adapts (brightest film at Y = 80); names are for it. "
        f'Lab and the strip "beside {beside}" are against {against} under the light; XYZ have the perfect mirror at Y = 100.',
        f"Summed at 1 nm from {low:g} to {high:g} nm.",
    ]
    if exposure > DARK_EXPOSURE:
        lines.append(
            "Beside the white this film is dark: an eye adapted to the film itself tells more than the differences here say."
        )
    if share_out > 0:
        lines.append(f"{100 * share_out:.1f} % of the wide strip is outside sRGB; it is marked, and shown clipped.")
    if shot.view.angle_photo is not None or shot.view.camera_mm is not None:
        lines.append(f"The recipe gives an angle per pixel; this chart is for {shot.view.angle_deg.value:g} deg alone.")
    if thickness_nm[-1] > THICK_NOTE_NM:
        lines.append("Beyond about 2 um colours merge into pale pink and green: the eye cannot tell their order.")
    if thickness_nm.size > MOST_NODES:
        lines.append("Look-alikes are found on a coarser grid than the table's.")
    return tuple(lines)


def lit_words(exposure: float) -> str:
    """How a strip is made brighter or darker than it is."""
    return f"brightened {exposure:.3g} times" if exposure >= 1 else f"dimmed to {exposure:.3g} of its light"


def _stack_words(stack: Stack, search_nm: tuple[float, float]) -> str:
    layers = [_layer_words(layer, search_nm) for layer in stack.layers]
    back = [] if stack.back is None else [f"{stack.back.thickness_mm:g} mm thick, {stack.back.medium.name} behind it"]
    return " / ".join([stack.medium.name, *layers, ", ".join([stack.substrate.name, *back])])


def _layer_words(layer: Layer, search_nm: tuple[float, float]) -> str:
    material = layer.index.name
    name = material if layer.name in ("", material) else f"{layer.name} ({material})"
    if layer.thickness_nm is None:
        return f"{name} {search_nm[0]:g} to {search_nm[1]:g} nm"
    return f"{name} {layer.thickness_nm:g} nm"


def _reference_words(shot: Shot) -> str:
    surface = shot.camera.blank_surface
    if surface is None:
        return "a perfect mirror (the recipe names no blank)"
    name = surface.substrate.name if isinstance(surface, Stack) else surface.name
    return f"the blank ({name})" if name else "the blank"
