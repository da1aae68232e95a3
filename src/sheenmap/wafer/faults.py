"""What can be wrong with a region or its sites.

::

    SheenmapError
    └── RegionError             the part cannot be placed in the picture
        ├── NoDiscError         no disc, too little of its rim, or more than one
        └── SiteError           the sites cannot be placed on the part
"""

from sheenmap.errors import SheenmapError


class RegionError(SheenmapError):
    """The part cannot be placed in the picture; the message says what was found and what is allowed."""


class NoDiscError(RegionError):
    """The picture shows no disc, too little of its rim, or more than one."""


class SiteError(RegionError):
    """The sites cannot be placed on the part."""
