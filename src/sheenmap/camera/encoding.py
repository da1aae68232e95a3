"""From the codes of a picture to the linear signal: the encoding and its slope."""

import re
from dataclasses import dataclass
from typing import Literal

import numpy as np

from sheenmap.arrays import FloatArray

Kind = Literal["linear", "srgb", "power", "curve"]

SRGB_BREAK_ENCODED = 0.04045  # IEC 61966-2-1:1999


@dataclass(frozen=True, kw_only=True, eq=False)
class Encoding:
    """How codes stand for light.

    ``kind`` "linear", "srgb" (IEC 61966-2-1), "power" (with ``gamma``), or "curve" (with ``code`` and ``linear``, both (N,)
    and rising; ``code`` in units of the file's codes, ``linear`` from 0 to 1).
    """

    kind: Kind = "linear"
    gamma: float = 1.0
    code: FloatArray | None = None
    linear: FloatArray | None = None


def parse_encoding_name(text: str) -> Encoding | None:
    """The encoding that a recipe names ("linear", "srgb", "power 2.2"), or None when the text is no such name."""
    if text == "linear":
        return Encoding(kind="linear")
    if text == "srgb":
        return Encoding(kind="srgb")
    match = re.fullmatch(r"power\s+([0-9]+(?:\.[0-9]+)?)", text)
    if match and 0.2 <= float(match[1]) <= 5:
        return Encoding(kind="power", gamma=float(match[1]))
    return None


def decode(encoding: Encoding, codes: FloatArray, full_scale: float) -> FloatArray:
    """Linear signal, 0 to 1, of ``codes`` (any shape) of a picture whose largest code is ``full_scale``."""
    share = codes / full_scale
    if encoding.kind == "linear":
        return share
    if encoding.kind == "srgb":
        return np.where(share <= SRGB_BREAK_ENCODED, share / 12.92, ((np.maximum(share, 0) + 0.055) / 1.055) ** 2.4)
    if encoding.kind == "power":
        return np.sign(share) * np.abs(share) ** encoding.gamma
    if encoding.code is None or encoding.linear is None:
        raise ValueError("an encoding of kind 'curve' needs code and linear")
    return np.interp(codes, encoding.code, encoding.linear)


def encode(encoding: Encoding, linear: FloatArray, full_scale: float) -> FloatArray:
    """Codes, not yet rounded, that stand for ``linear`` (any shape, 0 to 1): the inverse of ``decode``."""
    if encoding.kind == "linear":
        return linear * full_scale
    if encoding.kind == "srgb":
        low = linear <= SRGB_BREAK_ENCODED / 12.92
        return full_scale * np.where(low, 12.92 * linear, 1.055 * np.maximum(linear, 1e-12) ** (1 / 2.4) - 0.055)
    if encoding.kind == "power":
        return full_scale * np.sign(linear) * np.abs(linear) ** (1 / encoding.gamma)
    if encoding.code is None or encoding.linear is None:
        raise ValueError("an encoding of kind 'curve' needs code and linear")
    return np.interp(linear, encoding.linear, encoding.code)


def code_step(encoding: Encoding, linear: FloatArray, full_scale: float) -> FloatArray:
    """Width of one code in linear units at ``linear`` (any shape, 0 to 1): what rounding to whole codes costs there."""
    level = np.clip(linear, 0.0, 1.0)
    if encoding.kind == "linear":
        return np.full(level.shape, 1.0 / full_scale)
    if encoding.kind == "srgb":
        steep = 2.4 / 1.055 * np.maximum(level, SRGB_BREAK_ENCODED / 12.92) ** (1.4 / 2.4)
        return np.where(level <= SRGB_BREAK_ENCODED / 12.92, 1 / 12.92, steep) / full_scale
    if encoding.kind == "power":
        return encoding.gamma * np.maximum(level, 1e-6) ** (1 - 1 / encoding.gamma) / full_scale
    if encoding.code is None or encoding.linear is None:
        raise ValueError("an encoding of kind 'curve' needs code and linear")
    return np.interp(level, encoding.linear, np.gradient(encoding.linear, encoding.code))
