"""What an aerial makes of a field: gain over frequency, pattern over bearing, polarisation."""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike, NDArray

from app.assumptions import ASSUMPTIONS
from app.chain.parts import Aerial, AerialPolarisation
from app.chain.pattern import MeasuredPattern

HALF_POWER = 10**-0.3  # the 3 dB that define a beamwidth


def gain_dbd(
    aerial: Aerial,
    frequency_mhz: ArrayLike,
    fall_db_per_octave: float = ASSUMPTIONS["aerial_out_of_range_db_per_octave"].value,
) -> NDArray[np.float64]:
    """Gain over a half-wave dipole on the aerial's axis [dBd], elementwise over frequency above 0 [MHz].

    Linear in frequency between the points of the aerial's table. Outside the table nobody states a gain:
    there it falls from the nearer end by `fall_db_per_octave`, a choice of ours.
    """
    f = np.asarray(frequency_mhz, dtype=float)
    table = np.array(aerial.gain_dbd)
    inside = np.interp(f, table[:, 0], table[:, 1])
    nearest = np.clip(f, table[0, 0], table[-1, 0])
    gain: NDArray[np.float64] = inside - fall_db_per_octave * np.abs(np.log2(f / nearest))
    return gain


def in_range(aerial: Aerial, frequency_mhz: ArrayLike) -> NDArray[np.bool_]:
    """Whether the aerial's table states a gain there, elementwise."""
    f = np.asarray(frequency_mhz, dtype=float)
    return np.asarray((f >= aerial.gain_dbd[0][0]) & (f <= aerial.gain_dbd[-1][0]))


def off_axis_deg(bearing_deg: ArrayLike, pointing_deg: ArrayLike) -> NDArray[np.float64]:
    """Angle between a bearing and the aerial's axis, the shorter way round, 0 to 180 [deg]; broadcasts."""
    # Whole turns are taken off before the two meet: a remainder of each of many differences is slow.
    apart = np.abs(np.asarray(bearing_deg, dtype=float) % 360 - np.asarray(pointing_deg, dtype=float) % 360)
    return np.asarray(np.minimum(apart, 360 - apart))


def clockwise_deg(bearing_deg: ArrayLike, pointing_deg: ArrayLike) -> NDArray[np.float64]:
    """Angle of a bearing clockwise from the aerial's axis, 0 to 360 [deg]; broadcasts."""
    difference = np.asarray(bearing_deg, dtype=float) % 360 - np.asarray(pointing_deg, dtype=float) % 360
    return np.asarray(np.where(difference < 0, difference + 360, difference))


def pattern_loss_db(
    aerial: Aerial,
    off_axis_deg: ArrayLike,
    polarisation: str = "horizontal",
    null_db: float = ASSUMPTIONS["dipole_null_db"].value,
    frequency_mhz: ArrayLike | None = None,
) -> NDArray[np.float64]:
    """Loss against the aerial's axis [dB, 0 or more], elementwise over the angle off the axis [deg].

    Pattern "class" is `class_pattern_loss_db`.

    Pattern "dipole" is a figure of eight, cos(x)^2, with nulls no deeper than `null_db`. With its rods
    upright (`polarisation` "vertical") a dipole is round.

    Pattern "measured" has two sides, so angles count clockwise, and cuts by frequency [MHz]; None: the middle of
    the gain table.

    References
    ----------
    The half-wave dipole's figure of eight is taken as the cosine of the short dipole (antenna texts; 90
    instead of 78 degrees between the half-power points).
    """
    if aerial.pattern == "measured":
        f = np.mean([pair[0] for pair in aerial.gain_dbd]) if frequency_mhz is None else frequency_mhz
        return measured_pattern(aerial).loss_db(off_axis_deg, f, mounted(polarisation))
    if aerial.pattern == "class":
        return class_pattern_loss_db(off_axis_deg, aerial.beamwidth_deg, aerial.front_to_back_db)
    x = np.radians(np.asarray(off_axis_deg, dtype=float))
    if polarisation == "vertical":
        return np.zeros_like(x)
    loss: NDArray[np.float64] = -10 * np.log10(np.maximum(np.cos(x) ** 2, 10 ** (-null_db / 10)))
    return loss + 0.0  # no negative zero on the axis


def measured_pattern(aerial: Aerial) -> MeasuredPattern:
    """Measured pattern of an aerial that has one."""
    return MeasuredPattern(f'aerial "{aerial.name}"', aerial.cuts)


def mounted(polarisation: str) -> AerialPolarisation:
    """Say how the rods stand."""
    return "vertical" if polarisation == "vertical" else "horizontal"


def class_pattern_loss_db(
    off_axis_deg: ArrayLike, beamwidth_deg: float, front_to_back_db: float
) -> NDArray[np.float64]:
    """Loss against the axis of an aerial known by its beamwidth and front-to-back ratio only [dB, 0 or more].

    With b the power to the back and w the beamwidth its power is

        p(x) = b + (1 - b) cos(x / 2)^(2 n)      where p(w / 2) = half power,

    the smooth curve that is 1 on the axis, 0.5 at half the beamwidth and b at the back; it falls all the way
    and is the same on both sides. Real side lobes and nulls are not in it: the error model's rejection off axis
    stands for them. A round aerial (360 degrees) loses nothing.
    """
    x = np.radians(np.asarray(off_axis_deg, dtype=float))
    if beamwidth_deg == 360:
        return np.zeros_like(x)
    back = 10 ** (-front_to_back_db / 10)
    exponent = np.log((HALF_POWER - back) / (1 - back)) / np.log(np.cos(np.radians(beamwidth_deg) / 4))
    loss: NDArray[np.float64] = -10 * np.log10(back + (1 - back) * np.abs(np.cos(x / 2)) ** exponent)
    return loss + 0.0  # no negative zero on the axis


def polarisation_loss_db(
    aerial_polarisation: str,
    emission_polarisation: str,
    cross_polar_db: float = ASSUMPTIONS["cross_polar_db"].value,
) -> float:
    """Loss on the axis between an aerial as mounted and an emission [dB].

    0 where both agree, `cross_polar_db` where one is horizontal and the other vertical. A mixed emission
    is taken to share its stated power equally between both planes, so one plane of it is 3 dB less.
    """
    if emission_polarisation == "mixed":
        return float(10 * np.log10(2))
    return 0.0 if aerial_polarisation == emission_polarisation else cross_polar_db
