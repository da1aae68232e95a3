"""Where the part is, its scale, and its sites.

Conventions of this room: pixels have x to the right and y down with the centre of the first at 0, 0; directions are degrees
counter-clockwise from the picture's +x as a viewer sees it; a part's millimetres have y up and the notch down.
"""

from sheenmap.wafer.coordinates import distance_mm, part_mm, picture_px
from sheenmap.wafer.dies import Dies, die_grid
from sheenmap.wafer.disc import find_disc, find_discs
from sheenmap.wafer.faults import NoDiscError, RegionError, SiteError
from sheenmap.wafer.locate import locate, locate_each
from sheenmap.wafer.region import Disc, Region, Sites
from sheenmap.wafer.register import Registration, register
from sheenmap.wafer.sites import site_positions
from sheenmap.wafer.spec import RegionSpec, SiteSpec
from sheenmap.wafer.viewing import viewing_angle_deg

__all__ = [
    "Dies",
    "Disc",
    "NoDiscError",
    "Region",
    "RegionError",
    "RegionSpec",
    "Registration",
    "SiteError",
    "SiteSpec",
    "Sites",
    "die_grid",
    "distance_mm",
    "find_disc",
    "find_discs",
    "locate",
    "locate_each",
    "part_mm",
    "picture_px",
    "register",
    "site_positions",
    "viewing_angle_deg",
]
