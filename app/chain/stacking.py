"""Two or four equal aerials side by side or above each other, by their array factor.

The aerials are taken as alike, fed alike in phase and not to disturb each other: what mutual coupling does at close
spacing is not in it. The power pattern of n aerials at spacing d, combined without loss, is the single pattern
times

    |sin(n u) / (n sin u)|²      with u = π d t / λ and t the cosine of the angle to the line they stand on,

1 on the axis. How much more directive the group is than one of them follows by integrating both over the sphere.
The array factor is the sum of cos(2 π s t / λ) over all pairs, s being how far they are apart, so one integral over
t for each distance in the group does it: t is Gauss-Legendre, the pattern averaged over the ring at each t.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import lru_cache
from typing import Literal

import numpy as np
from numpy.typing import ArrayLike, NDArray

from app.assumptions import ASSUMPTIONS
from app.chain.aerial import class_pattern_loss_db
from app.chain.parts import Aerial
from app.errors import ChainError
from propagation.units import wavelength_m

FloatArray = NDArray[np.float64]

Layout = Literal["horizontal", "vertical", "square"]
LAYOUTS: tuple[Layout, ...] = ("horizontal", "vertical", "square")
COUNTS = (2, 4)
SHORTEST_M, LONGEST_M = 0.1, 20.0

RULES_OF_THUMB = (
    ("Spacing about λ / (2 sin(θ/2)), θ being the beamwidth in the plane they are stacked in: 1.5 λ for 40°.", "MH"),
    ("Closer than 0.75 λ they disturb each other and little is gained.", "MH"),
    ("Two give 2.2 to 2.8 dB in practice, four 4.5 to 5.5 dB, combiner and leads included.", "T"),
    ("Leads of exactly the same length and kind, the same way round on every dipole, or they cancel.", "T"),
)

_NODES, _WEIGHTS = np.polynomial.legendre.leggauss(800)  # enough for 60 m at 1 GHz, 200 wavelengths
_STEPS = 360  # of the angle round each ring


@dataclass(frozen=True, slots=True)
class Stack:
    """How equal aerials are mounted together."""

    count: int  # 2 or 4
    layout: Layout  # in a row, above each other, or four as two by two
    spacing_m: float  # between neighbours
    combiner_loss_db: float = 0.5  # combiner and its leads; common practice, no source

    def __post_init__(self) -> None:
        """Refuse what is no stack."""
        if self.count not in COUNTS:
            raise ChainError(f"{self.count} stacked aerials: use 2 or 4", field="count", allowed="2, 4")
        if self.layout not in LAYOUTS:
            listed = ", ".join(LAYOUTS)
            raise ChainError(f'layout "{self.layout}" is not known: use {listed}', field="layout", allowed=listed)
        if self.layout == "square" and self.count != 4:
            raise ChainError("a square takes four aerials: use 4, or another layout", field="layout")
        if not SHORTEST_M <= self.spacing_m <= LONGEST_M:
            raise ChainError(
                f"spacing_m {self.spacing_m:g} is not possible: use {SHORTEST_M:g} to {LONGEST_M:g} m",
                field="spacing_m",
                allowed=f"{SHORTEST_M:g} to {LONGEST_M:g}",
            )
        if not 0 <= self.combiner_loss_db <= 20:
            raise ChainError(
                f"combiner_loss_db {self.combiner_loss_db:g} is not possible: use 0 to 20 dB",
                field="combiner_loss_db",
                allowed="0 to 20",
            )

    @property
    def beside(self) -> int:
        """How many stand beside each other."""
        return {"horizontal": self.count, "vertical": 1, "square": 2}[self.layout]

    @property
    def above(self) -> int:
        """How many stand above each other."""
        return {"horizontal": 1, "vertical": self.count, "square": 2}[self.layout]


def stacked_loss_db(
    stack: Stack,
    off_axis_deg: ArrayLike,
    frequency_mhz: ArrayLike,
    null_db: float = ASSUMPTIONS["dipole_null_db"].value,
) -> FloatArray:
    """Loss off the axis that stacking adds to a single aerial's pattern [dB, 0 or more]; broadcasts.

    Only what stands side by side changes the pattern round the horizon. Nulls are no deeper than `null_db`:
    unlike aerials and reflections fill them.
    """
    across = np.sin(np.radians(np.asarray(off_axis_deg, dtype=float)))
    power = _array_factor(stack.beside, stack.spacing_m, across, frequency_mhz)
    loss: FloatArray = -10 * np.log10(np.maximum(power, 10 ** (-null_db / 10)))
    return loss + 0.0


def stacked_gain_db(
    stack: Stack, aerial: Aerial, frequency_mhz: ArrayLike, polarisation: str = "horizontal"
) -> FloatArray:
    """Gain on the axis over that of one of the aerials [dB], combiner loss taken off, (e,).

    10 log n at wide spacing, 0 dB at none, each less the combiner; a little more at the best spacing, where the
    side lobes of the array fall where the single aerial is weak.
    """
    f = np.atleast_1d(np.asarray(frequency_mhz, dtype=float))
    return directivity_increase_db(stack, aerial, f, polarisation) - stack.combiner_loss_db


def directivity_increase_db(
    stack: Stack, aerial: Aerial, frequency_mhz: FloatArray, polarisation: str = "horizontal"
) -> FloatArray:
    """How much more directive the group is than one aerial [dB], (e,), for frequencies (e,) [MHz].

    Parameters
    ----------
    aerial : Aerial
        A "class" pattern is taken as the same in every plane through the axis, a dipole as cos² of the angle to
        the plane across its rods: the catalogue states one plane only.

    References
    ----------
    Pattern multiplication and directivity as 4π over the integral of the normalised power pattern: antenna texts,
    such as C. A. Balanis, Antenna Theory, chapters 2 and 6.
    """
    single = _over_sphere(aerial, polarisation, 0.0, 0.0, frequency_mhz)
    places = [
        (column * stack.spacing_m, row * stack.spacing_m)
        for column in range(stack.beside)
        for row in range(stack.above)
    ]
    pairs = sum(
        _over_sphere(aerial, polarisation, x - other_x, y - other_y, frequency_mhz)
        for x, y in places
        for other_x, other_y in places
    )
    return np.asarray(10 * np.log10(stack.count**2 * single / pairs))


def null_spacing_m(frequency_mhz: ArrayLike, off_axis_deg: ArrayLike) -> FloatArray:
    """Spacing of a pair side by side whose first null points off the axis, d = λ / (2 sin φ) [m]; broadcasts.

    Geometry: the way to one aerial is half a wavelength longer. Odd multiples have a null there as well.
    """
    angle = np.radians(np.asarray(off_axis_deg, dtype=float))
    return np.asarray(wavelength_m(frequency_mhz) / (2 * np.abs(np.sin(angle))))


def _array_factor(count: int, spacing_m: float, cosine: ArrayLike, frequency_mhz: ArrayLike) -> FloatArray:
    """Power of `count` equal sources in a row, 1 where all are in phase."""
    u = np.pi * spacing_m * np.asarray(cosine, dtype=float) / wavelength_m(frequency_mhz)
    # cos u and cos 2u: sin(n u) / (n sin u) for 1, 2 and 4 without a division by 0
    factor = np.ones_like(u) if count == 1 else np.cos(u)
    if count == 4:
        factor = factor * np.cos(2 * u)
    return np.asarray(factor**2)


def _over_sphere(
    aerial: Aerial, polarisation: str, across_m: float, upward_m: float, frequency_mhz: FloatArray
) -> FloatArray:
    """Power pattern times cos(2 π s t / λ), over the sphere in units of 2π, for one distance in the group (e,)."""
    distance_m = float(np.hypot(across_m, upward_m))
    if aerial.pattern == "dipole":
        rods_m = upward_m if polarisation == "vertical" else across_m
        ring = _dipole_rings(rods_m / distance_m if distance_m else 0.0)
    else:
        ring = _class_rings(aerial.beamwidth_deg, aerial.front_to_back_db)
    phase = 2 * np.pi * distance_m / wavelength_m(frequency_mhz)
    return np.asarray(np.cos(phase[:, np.newaxis] * _NODES) @ (_WEIGHTS * ring))


def _dipole_rings(along: float) -> FloatArray:
    """1 − cos² of the angle to the rods, averaged over rings about a line at the cosine `along` to the rods."""
    return np.asarray(1 - along**2 * _NODES**2 - (1 - along**2) * (1 - _NODES**2) / 2)


@lru_cache(maxsize=64)
def _class_rings(beamwidth_deg: float, front_to_back_db: float) -> FloatArray:
    """Power pattern averaged over rings about a line across the axis; the same for every such line."""
    around = np.cos((np.arange(_STEPS) + 0.5) * np.pi / _STEPS)
    forward = np.sqrt(1 - _NODES**2)[:, np.newaxis] * around
    loss = class_pattern_loss_db(np.degrees(np.arccos(forward)), beamwidth_deg, front_to_back_db)
    return np.asarray(np.mean(10 ** (-loss / 10), axis=1))
