"""Picture to linear signal, with its variance."""

from sheenmap.camera.encoding import Encoding, decode, encode, parse_encoding_name

__all__ = ["Encoding", "decode", "encode", "parse_encoding_name"]
