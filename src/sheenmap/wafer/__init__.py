"""Where the part is, its scale, and its sites."""

from sheenmap.wafer.region import Disc, Region, Sites
from sheenmap.wafer.spec import RegionSpec, SiteSpec

__all__ = ["Disc", "Region", "RegionSpec", "SiteSpec", "Sites"]
