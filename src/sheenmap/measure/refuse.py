"""What a recipe may ask for that a map cannot give: said, never ignored."""

from sheenmap.errors import Fault, RecipeError
from sheenmap.recipe import Recipe


def refuse_what_is_not_supported(recipe: Recipe) -> None:
    """Raise ``RecipeError`` for a recipe that describes more than one photograph of the part."""
    if len(recipe.shots) > 1:
        found = f"{len(recipe.shots) - 1} more"
        fault = Fault(
            key="shot", found=found, allowed="none: fusing several shots is not supported yet", hint="map each by itself"
        )
        raise RecipeError([fault], where=recipe.path.name)
