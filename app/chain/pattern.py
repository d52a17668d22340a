"""Measured patterns of an aerial over bearing: interpolation, and what makes a set of points a pattern."""

from __future__ import annotations

import itertools
from dataclasses import dataclass
from functools import cached_property
from typing import Literal

import numpy as np
from numpy.typing import ArrayLike, NDArray

from app.chain.files import refuse

FloatArray = NDArray[np.float64]
Polarisation = Literal["horizontal", "vertical"]

FIELD = "pattern"  # of the part, where the page shows a refusal
LARGEST_GAP_DEG = 15.0  # between measured bearings; an aerial of 30° falls by 3 dB within it
FEWEST_POINTS = 8
DEEPEST_DB = 100.0
HALF_POWER_DB = 3.0
AXIS_DB = 3.0  # the aerial's axis lies within its main lobe


@dataclass(frozen=True)
class Cut:
    """Loss round the horizon at one frequency and polarisation, against the strongest direction."""

    angle_deg: tuple[float, ...]  # from the axis, clockwise seen from above, 0 up to 360, rising
    loss_db: tuple[float, ...]
    frequency_mhz: float | None = None  # None: for all
    polarisation: Polarisation | None = None  # of the aerial, how it was mounted; None: not said
    emission: Polarisation | None = None  # what it was lit with; None: the same

    @property
    def is_cross(self) -> bool:
        """Whether it tells what the aerial picks up of the other polarisation."""
        return self.emission is not None and self.emission != self.polarisation

    def at(self, angle_deg: ArrayLike) -> FloatArray:
        """Loss at angles from the axis, elementwise: linear in dB between the bearings measured, all round."""
        return np.asarray(np.interp(np.asarray(angle_deg, dtype=float), self.angle_deg, self.loss_db, period=360))

    @property
    def beamwidth_deg(self) -> float:
        """Angle between the half-power points of the main lobe [deg], to 0.1; 360 if it nowhere falls so far."""
        strongest = self.angle_deg[int(np.argmin(self.loss_db))]
        away = np.arange(0, 1801) / 10
        sides = [self.at(strongest + side * away) - min(self.loss_db) >= HALF_POWER_DB for side in (-1, 1)]
        if not all(side.any() for side in sides):
            return 360.0
        return round(float(sum(away[int(np.argmax(side))] for side in sides)), 1)

    @property
    def back_db(self) -> float:
        """Least loss within 60 degrees of the back [dB]: the trade's front-to-back ratio (practice, no source)."""
        return round(float(self.at(np.arange(120, 241)).min() - min(self.loss_db)), 1)


@dataclass(frozen=True)
class MeasuredPattern:
    """Measured cuts of one aerial; its gain where the file says it."""

    name: str
    cuts: tuple[Cut, ...]
    gain_dbd: tuple[tuple[float, float], ...] = ()  # (frequency_mhz, gain over a half-wave dipole)

    @cached_property
    def polarisations(self) -> tuple[Polarisation | None, ...]:
        """How the aerial was mounted when it was measured; None where the file does not say."""
        return tuple(dict.fromkeys(cut.polarisation for cut in self.cuts if not cut.is_cross))

    def loss_db(self, angle_deg: ArrayLike, frequency_mhz: ArrayLike, mounted: Polarisation) -> FloatArray:
        """Loss against the strongest direction for emissions of the aerial's own polarisation [dB].

        Parameters
        ----------
        angle_deg : array (…, e)
            Bearing less pointing: clockwise from the axis, any turn. A measured pattern has two sides.
        frequency_mhz : array (e,)
            Linear in dB between the frequencies measured, the nearest one beyond them.
        mounted : "horizontal" or "vertical"
            How the aerial is mounted now.

        Raises
        ------
        ChainError
            The pattern was measured with the aerial mounted the other way only.
        """
        return self._loss(angle_deg, frequency_mhz, mounted, is_cross=False)

    def has_cross(self, mounted: Polarisation) -> bool:
        """Whether it was measured what the aerial, so mounted, picks up of the other polarisation."""
        return any(cut.is_cross and cut.polarisation == mounted for cut in self.cuts)

    def cross_loss_db(self, angle_deg: ArrayLike, frequency_mhz: ArrayLike, mounted: Polarisation) -> FloatArray:
        """Return the same for emissions of the other polarisation: pattern and polarisation together."""
        return self._loss(angle_deg, frequency_mhz, mounted, is_cross=True)

    def _loss(
        self, angle_deg: ArrayLike, frequency_mhz: ArrayLike, mounted: Polarisation, is_cross: bool
    ) -> FloatArray:
        fitting = [cut for cut in self.cuts if cut.is_cross == is_cross and cut.polarisation in (mounted, None)]
        exact = [cut for cut in fitting if cut.polarisation == mounted]
        cuts = sorted(exact or fitting, key=lambda cut: cut.frequency_mhz or 0)
        if not cuts:
            which = "the other polarisation" if is_cross else f"the rods {mounted}"
            refuse(self.name, f"has no cut for {which}", "mount the aerial as it was measured, or add the cut", FIELD)
        angle, f = np.broadcast_arrays(np.asarray(angle_deg, dtype=float), np.asarray(frequency_mhz, dtype=float))
        losses = np.stack([cut.at(angle) for cut in cuts])
        if len(cuts) == 1:
            return np.asarray(losses[0])
        measured = np.array([cut.frequency_mhz for cut in cuts], dtype=float)
        place = np.interp(f, measured, np.arange(len(cuts)))
        lower = np.minimum(place.astype(np.intp), len(cuts) - 2)[np.newaxis]
        below, above = (np.take_along_axis(losses, lower + step, axis=0)[0] for step in (0, 1))
        return np.asarray(below + (place - lower[0]) * (above - below))


def checked_cut(
    name: str,
    angle_deg: ArrayLike,
    loss_db: ArrayLike,
    *,
    frequency_mhz: float | None = None,
    polarisation: Polarisation | None = None,
    emission: Polarisation | None = None,
    is_envelope: bool = False,
) -> Cut:
    """Cut of points in any order, angles in any turn; refuses what is no round.

    An envelope is given by the corners of a line, which may be far apart; all others need a point every 15 degrees.

    Raises
    ------
    ChainError
        Too few points, a gap, a bearing with two values, or a loss that is none; the file and the mend are named.
    """
    what = name if frequency_mhz is None else f"{name} at {frequency_mhz:g} MHz"
    angles = np.asarray(angle_deg, dtype=float)
    losses = np.asarray(loss_db, dtype=float)
    if not (np.isfinite(angles).all() and np.isfinite(losses).all()):
        refuse(what, "holds values that are no numbers", "correct or leave out those lines", FIELD)
    if (np.abs(angles) > 360).any():
        refuse(
            what, f"has an angle of {angles[np.abs(angles) > 360][0]:g}°", "use -180 to 180 or 0 to 360 degrees", FIELD
        )
    if (losses < 0).any() or (losses > DEEPEST_DB).any():
        wrong = losses[(losses < 0) | (losses > DEEPEST_DB)][0]
        refuse(
            what,
            f"has a loss of {wrong:g} dB",
            f"use 0 to {DEEPEST_DB:g} dB against the strongest direction",
            FIELD,
        )
    points: dict[float, float] = {}
    for angle, loss in zip((angles % 360).tolist(), losses.tolist(), strict=True):
        if abs(points.setdefault(angle, loss) - loss) > 0.5:
            refuse(what, f"says both {points[angle]:g} and {loss:g} dB at {angle:g}°", "keep one of them", FIELD)
    if len(points) < (2 if is_envelope else FEWEST_POINTS):
        refuse(what, f"has {len(points)} bearings", f"measure all round, every {LARGEST_GAP_DEG:g}° or closer", FIELD)
    ordered = sorted(points)
    if not is_envelope:
        for low, high in itertools.pairwise([*ordered, ordered[0] + 360]):
            if high - low > LARGEST_GAP_DEG + 1e-6:
                refuse(
                    what,
                    f"has a gap from {low:g}° to {high % 360:g}°",
                    f"measure every {LARGEST_GAP_DEG:g}° or closer, all round",
                    FIELD,
                )
    return Cut(tuple(ordered), tuple(points[angle] for angle in ordered), frequency_mhz, polarisation, emission)


def checked_pattern(
    name: str, cuts: tuple[Cut, ...], gain_dbd: tuple[tuple[float, float], ...] = ()
) -> MeasuredPattern:
    """Pattern of cuts that go together; each strongest direction has 0 dB and lies near the axis.

    Raises
    ------
    ChainError
        No cut, two for the same frequency and polarisation, cuts with and without a frequency, or angles that do
        not count from the axis.
    """
    if not any(not cut.is_cross for cut in cuts):
        refuse(
            name,
            "has no cut round the horizon of its own polarisation",
            "give one: horizontal plane, H/H or V/V",
            FIELD,
        )
    keys = [(cut.frequency_mhz, cut.polarisation, cut.emission) for cut in cuts]
    if len(set(keys)) < len(keys):
        refuse(name, "has two cuts for the same frequency and polarisation", "keep one of them", FIELD)
    for polarisation, is_cross in {(cut.polarisation, cut.is_cross) for cut in cuts}:
        group = [cut for cut in cuts if (cut.polarisation, cut.is_cross) == (polarisation, is_cross)]
        if len(group) > 1 and any(cut.frequency_mhz is None for cut in group):
            refuse(name, "has cuts with and without a frequency", "state the frequency of each", FIELD)
    for cut in cuts:
        if cut.is_cross:
            continue
        if float(cut.at(0)) - min(cut.loss_db) > AXIS_DB:
            strongest = cut.angle_deg[int(np.argmin(cut.loss_db))]
            refuse(name, f"is strongest at {strongest:g}°", "count the angles from the aerial's axis, clockwise", FIELD)
    return MeasuredPattern(name, cuts, gain_dbd)
