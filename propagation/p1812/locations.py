"""Variation between locations and entry into buildings, Rec. ITU-R P.1812-7, sections 4.7 and 4.8."""

import numpy as np
from numpy.typing import ArrayLike, NDArray

from propagation.errors import RangeError
from propagation.p1812.limits import within
from propagation.p1812.normal import inverse_complementary_normal

FloatArray = NDArray[np.float64]


def location_deviation_db(
    frequency_mhz: ArrayLike,
    area_side_m: ArrayLike,
    rx_height_agl_m: ArrayLike,
    rx_clutter_height_m: ArrayLike,
) -> FloatArray:
    """Spread of the loss between outdoor locations of one small square.

    Inputs broadcast. NaN in, NaN out.

    Parameters
    ----------
    frequency_mhz : array
        Carrier frequency, 30 to 6000. [MHz]
    area_side_m : array
        Side of the square for which the prediction stands, 50 to 1000. [m]
    rx_height_agl_m, rx_clutter_height_m : array
        Height of the receiving antenna and of the cover around it, above ground. [m]

    Returns
    -------
    array
        Standard deviation, falling to 0 between the top of the cover and 10 m above it. [dB]

    Raises
    ------
    RangeError
        A frequency or side outside.

    References
    ----------
    Rec. ITU-R P.1812-7, section 4.7; no published example exercises it.
    """
    f = within("frequency", frequency_mhz, 30, 6000, "MHz") / 1000
    side = within("side of the area", area_side_m, 50, 1000, "m")
    above = np.asarray(rx_height_agl_m, dtype=float) - np.asarray(rx_clutter_height_m, dtype=float)
    return np.asarray((0.52 + 0.024 * f) * side**0.28 * np.clip(1 - above / 10, 0, 1))


def location_loss_db(
    location_percent: ArrayLike,
    location_sigma_db: ArrayLike | None,
    rx_at_sea: ArrayLike,
    building_entry_median_db: ArrayLike = 0.0,
    building_entry_sigma_db: ArrayLike = 0.0,
) -> FloatArray:
    """Loss that a share of the locations adds to the median, with entry into a building.

    The entry loss comes from outside (Rec. ITU-R P.2109 for one). Its median adds, its spread
    joins the outdoor one as a root of squares. No published example has it.

    Parameters
    ----------
    location_percent : array
        Share of locations at which the loss is not exceeded, 1 to 99. [%]
    location_sigma_db : array, optional
        Outdoor standard deviation; may be left out at 50 % of locations. [dB]
    rx_at_sea : array of bool
        No outdoor variation where the receiving point is sea.
    building_entry_median_db, building_entry_sigma_db : array
        Median and standard deviation of the entry loss, 0 outdoors. [dB]

    Returns
    -------
    array
        Loss, negative below 50 % of locations. [dB]

    Raises
    ------
    RangeError
        Locations outside, a negative deviation, or none where one is needed.

    References
    ----------
    Rec. ITU-R P.1812-7, sections 4.7 and 4.8.
    """
    share = within("share of locations", location_percent, 1, 99, "%")
    entry_median = np.asarray(building_entry_median_db, dtype=float)
    entry_sigma = _deviation(building_entry_sigma_db)
    if location_sigma_db is None:
        off_median = (share != 50) & ~np.isnan(share)
        if off_median.any():
            raise RangeError(
                f"{share[off_median].flat[0]:g} % of locations needs location_sigma_db: "
                "give the spread in dB, 5.5 is usual for broadcasting, or ask for 50 %"
            )
        return np.asarray(entry_median + 0 * share)
    sigma = np.where(rx_at_sea, 0.0, _deviation(location_sigma_db))
    spread = np.sqrt(sigma**2 + entry_sigma**2)
    return np.asarray(entry_median - inverse_complementary_normal(share / 100) * spread)


def _deviation(value_db: ArrayLike) -> FloatArray:
    sigma = np.asarray(value_db, dtype=float)
    if (sigma < 0).any():
        raise RangeError(f"standard deviation {sigma.min():g} dB is negative: use 0 or more")
    return sigma
