"""A number, or a number with the standard uncertainty that the recipe states for it."""

from sheenmap.recipe.reader import Reader
from sheenmap.recipe.types import Quantity


def read_quantity(reader: Reader, key: str, default: Quantity, *, low: float, high: float, largest_u: float) -> Quantity:
    """The number under ``key``, or its table { value, u }; ``default`` where there is none."""
    if not isinstance(reader.table.get(key), dict):
        value = reader.number(key, None, low=low, high=high)
        return default if value is None else Quantity(value=value)
    inner = reader.table_of(key)
    if inner is None:
        return default
    inner.require("value", "a number; u is its standard uncertainty")
    value = inner.number("value", default.value, low=low, high=high)
    u = inner.number("u", 0.0, low=0.0, high=largest_u)
    inner.finish()
    return Quantity(value=value, u=u)
