"""Picture file to array, or a named reason why not.

Pictures are (H, W, 3) in red, green, blue, upright, in the codes of the file.
"""

from sheenmap.pictures.decode import Codes
from sheenmap.pictures.read import Averaged, Picture, average_frames, read_mask, read_picture, read_plane

__all__ = ["Averaged", "Codes", "Picture", "average_frames", "read_mask", "read_picture", "read_plane"]
