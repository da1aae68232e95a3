"""Draw the README's picture again: ``python docs/pictures/make.py``, a photograph beside the map that it gave, twice."""

from pathlib import Path

import matplotlib

matplotlib.use("Agg")

from matplotlib import pyplot as plt

from sheenmap.measure import measure
from sheenmap.pictures import read_picture
from sheenmap.recipe import read_recipe

HERE = Path(__file__).resolve().parent
SCENES = {"oxide-wafer": "500 nm of oxide on a 200-mm wafer", "soap-film": "a soap film that drains"}


def main() -> None:
    """Map both scenes and write ``map.png``."""
    figure, axes = plt.subplots(2, 2, figsize=(7.6, 6.4), layout="constrained")
    for (photo_axes, map_axes), (name, words) in zip(axes, SCENES.items()):
        folder = HERE.parents[1] / "demo_images" / name
        picture = read_picture(folder / "photo.png")
        found = measure(folder / "photo.png", read_recipe(folder / "recipe.toml"))
        photo_axes.imshow(picture.codes)
        photo_axes.set_title(f"photograph: {words}", fontsize=9)
        shown = map_axes.imshow(found.thickness_nm, cmap="cividis", interpolation="nearest")
        map_axes.set_title("map; white: not claimed", fontsize=9)
        figure.colorbar(shown, ax=map_axes, label="thickness, nm")
        for each in (photo_axes, map_axes):
            each.set_axis_off()
    figure.savefig(HERE / "map.png", dpi=90)


if __name__ == "__main__":
    main()
