"""Where the part is, its scale, and its sites."""

from sheenmap.wafer.spec import RegionSpec, SiteSpec

__all__ = ["RegionSpec", "SiteSpec"]
