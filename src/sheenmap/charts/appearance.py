"""Oil on water: classes of appearance by thickness."""

from sheenmap.charts.chart import Run
from sheenmap.optics import Stack

# Bonn Agreement Oil Appearance Code as tabulated in A. Lewis, Current status of the BAOAC, January 2007; limits in nm.
# Classes 4 and 5 are the oil's own colour and no interference; they begin at 50 um, beyond any colour chart.
OIL_CLASSES = (("sheen (silvery/grey)", 40.0, 300.0), ("rainbow", 300.0, 5_000.0), ("metallic", 5_000.0, 50_000.0))

OIL_CAUTION = (
    "Oil on water: the appearance classes bound the thickness broadly and nothing more. The area covered is the chief doubt of "
    "any volume; follow the authority's procedures and trained observers. Not for legal evidence."
)


def is_oil_on_water(stack: Stack) -> bool:
    """Whether one film whose material says it is an oil lies on water."""
    films = [layer.index.name.casefold() for layer in stack.layers]
    return len(films) == 1 and "oil" in films[0] and "water" in stack.substrate.name.casefold()


def appearance_classes(low_nm: float, high_nm: float) -> tuple[Run, ...]:
    """The classes of appearance that reach into ``low_nm`` to ``high_nm``, cut to it."""
    return tuple(
        Run(name=name, low_nm=max(low, low_nm), high_nm=min(high, high_nm))
        for name, low, high in OIL_CLASSES
        if low < high_nm and high > low_nm
    )
