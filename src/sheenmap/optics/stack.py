"""What light meets: layers, their stack, the back of a clear substrate, and the way it is looked at."""

import math
from dataclasses import dataclass
from typing import Literal

from sheenmap.spectra import Spectrum

Polarisation = Literal["none", "s", "p"]


@dataclass(frozen=True, kw_only=True)
class Layer:
    """One layer of a stack.

    Parameters
    ----------
    index : Spectrum
        Complex index n - ik.
    thickness_nm : float or None
        None marks the layer whose thickness is searched.
    name : str
        What the recipe calls it.
    index_scale : float
        Multiplies n - 1 (the density of the film); k is multiplied alike.
    rough_nm : float
        Rms roughness of the layer's upper face.
    inclusion, inclusion_volume : Spectrum or None, float
        A second material mixed in by volume share (Bruggeman's effective medium).
    """

    index: Spectrum
    thickness_nm: float | None
    name: str = ""
    index_scale: float = 1.0
    rough_nm: float = 0.0
    inclusion: Spectrum | None = None
    inclusion_volume: float = 0.0

    def __post_init__(self) -> None:
        if self.thickness_nm is not None and not 0 <= self.thickness_nm < math.inf:
            raise ValueError(f"thickness_nm is {self.thickness_nm}; zero or more")
        if not (self.index_scale > 0 and self.rough_nm >= 0 and 0 <= self.inclusion_volume <= 1):
            raise ValueError(
                f"index_scale {self.index_scale} (above 0), rough_nm {self.rough_nm} (zero or more), "
                f"inclusion_volume {self.inclusion_volume} (0 to 1)"
            )


@dataclass(frozen=True, kw_only=True)
class Back:
    """The far face of a transparent substrate: what lies behind it, and how far away."""

    medium: Spectrum
    thickness_mm: float

    def __post_init__(self) -> None:
        if not 0 < self.thickness_mm < math.inf:
            raise ValueError(f"thickness_mm is {self.thickness_mm}; more than 0")


@dataclass(frozen=True, kw_only=True)
class Stack:
    """Medium, layers as the light meets them, substrate; ``back`` adds the incoherent far face.

    ``substrate_rough_nm`` is the rms roughness of the substrate's upper face. At most one layer is searched.
    """

    medium: Spectrum
    layers: tuple[Layer, ...]
    substrate: Spectrum
    back: Back | None = None
    substrate_rough_nm: float = 0.0

    def __post_init__(self) -> None:
        if self.substrate_rough_nm < 0:
            raise ValueError(f"substrate_rough_nm is {self.substrate_rough_nm}; zero or more")
        if sum(layer.thickness_nm is None for layer in self.layers) > 1:
            raise ValueError("more than one layer is searched")

    @property
    def searched(self) -> int | None:
        """Position in ``layers`` of the layer whose thickness is searched; None when all are known."""
        return next((i for i, layer in enumerate(self.layers) if layer.thickness_nm is None), None)


@dataclass(frozen=True, kw_only=True)
class View:
    """How the stack is lit and seen.

    Parameters
    ----------
    angle_deg : float
        Of incidence, in the medium; 0 up to, not including, 90.
    aperture : float
        Numerical aperture, 0 to 1, of the evenly filled cone about that direction: the medium's index times the sine of the
        cone's half angle. What of the cone would come from below the film's plane is left out.
    polarisation : {"none", "s", "p"}
        Against the plane of the cone's axis and the film's normal. At angle 0 that plane is any.
    """

    angle_deg: float = 0.0
    aperture: float = 0.0
    polarisation: Polarisation = "none"

    def __post_init__(self) -> None:
        if not (0 <= self.angle_deg < 90 and 0 <= self.aperture <= 1):
            raise ValueError(f"angle_deg {self.angle_deg} (0 up to, not including, 90), aperture {self.aperture} (0 to 1)")
