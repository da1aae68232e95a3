"""Picture to linear signal, with its variance."""

from sheenmap.camera.encoding import Encoding, code_step, decode, encode, parse_encoding_name
from sheenmap.camera.fuse import fused_signal, moved_signal
from sheenmap.camera.noise import Noise, Rounding, estimate_noise, stated_noise
from sheenmap.camera.signal import Frame, Signal, linear_codes, linear_frame, relative_signal

__all__ = [
    "Encoding",
    "Frame",
    "Noise",
    "Rounding",
    "Signal",
    "code_step",
    "decode",
    "encode",
    "estimate_noise",
    "fused_signal",
    "linear_codes",
    "linear_frame",
    "moved_signal",
    "parse_encoding_name",
    "relative_signal",
    "stated_noise",
]
