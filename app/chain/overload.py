"""How hard an amplifier is driven: third-order products of all that passes it, and where it gives up.

Rated output is the level of each of two carriers whose third-order products lie 60 dB below them. A product falls
by 2 dB relative to its carriers for each decibel less, hence

    OIP3 = rated output + 30 dB.

Multiplexes are like noise. Noise-like loading of total level U leaves in the middle of the band

    C/I3 = 2 (OIP3 − U) − 10 log 1.5 dB

for a multiplex of the mean level; what is weaker has its level difference less of it, as the products are spread
over the band and do not care. A stronger one is given no more than the mean: its own products fall beside itself.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike, NDArray

from app.tables import rows
from propagation.units import db_from_ratio, ratio_from_db

FloatArray = NDArray[np.float64]

RATED_BELOW_DB = 60.0  # third-order products at the rated output of two carriers, EN 50083-5
BAND_CENTRE_DB = 10 * float(np.log10(1.5))  # noise-like loading, products in the middle of the band
OVERLOAD_BELOW_OIP3_DB = 12.0  # total output above this: the amplifier is in compression, our choice

_DERATING = tuple((int(row["channels"]), float(row["derating_db"])) for row in rows("derating"))
DERATING_SOURCE = "{source} ({flag})".format(**rows("derating")[0])


def power_sum_dbuv(level_dbuv: ArrayLike, axis: int = -1) -> FloatArray:
    """Level of everything together [dB(µV)], powers added along an axis; NaN adds nothing, nothing is −inf."""
    power = np.nansum(ratio_from_db(level_dbuv), axis=axis)
    with np.errstate(divide="ignore"):
        return db_from_ratio(power)


def mean_level_dbuv(level_dbuv: ArrayLike, axis: int = -1) -> FloatArray:
    """Mean in-band level [dB(µV)] along an axis; −inf if none is known.

    The mean weighs each power by itself, Σ p² / Σ p: for equal levels it is their level, and any number of weak
    emissions from far away does not pull it down.
    """
    power = np.nan_to_num(ratio_from_db(level_dbuv))
    with np.errstate(divide="ignore", invalid="ignore"):
        mean = db_from_ratio(np.sum(power**2, axis=axis) / np.sum(power, axis=axis))
    return np.where(np.isnan(mean), -np.inf, mean)


def output_intercept_dbuv(rated_output_dbuv: ArrayLike) -> FloatArray:
    """Third-order output intercept [dB(µV)] of an amplifier's rated output [dB(µV)], elementwise."""
    return np.asarray(np.asarray(rated_output_dbuv, dtype=float) + RATED_BELOW_DB / 2)


def carrier_to_intermodulation_db(output_dbuv: ArrayLike, rated_output_dbuv: ArrayLike) -> FloatArray:
    """C/I3 that an amplifier leaves to each of the signals at its output.

    Parameters
    ----------
    output_dbuv : array (…, e)
        Level of everything that passes at the amplifier's output, one row of the last axis per emission or block
        of a mobile network; NaN where not known, which loads nothing and stays NaN. [dB(µV)]
    rated_output_dbuv : array (…)
        Two carriers, products 60 dB down; broadcasts against the batch. [dB(µV)]

    Returns
    -------
    array (…, e)
        Falls by 2 dB for each decibel more of everything. [dB]

    References
    ----------
    Third-order law for noise-like loading in the middle of the band; formula from memory (MH).
    """
    level = np.asarray(output_dbuv, dtype=float)
    total = power_sum_dbuv(level)
    mean = mean_level_dbuv(level)
    at_mean = 2 * (output_intercept_dbuv(rated_output_dbuv) - total) - BAND_CENTRE_DB
    with np.errstate(invalid="ignore"):
        return np.asarray(at_mean[..., np.newaxis] + np.minimum(level - mean[..., np.newaxis], 0))


def headroom_db(output_dbuv: ArrayLike, rated_output_dbuv: ArrayLike) -> FloatArray:
    """How much more of everything (…, e) the amplifier stands before it is overloaded [dB], (…).

    Below 0 it is overloaded: the total lies above OIP3 − 12 dB, and nothing behind it can be relied on.
    """
    ceiling = output_intercept_dbuv(rated_output_dbuv) - OVERLOAD_BELOW_OIP3_DB
    return np.asarray(ceiling - power_sum_dbuv(output_dbuv))


def derating_db(channels: int) -> float:
    """How far below its rating an amplifier is run with so many channels [dB], by the trade's table.

    For the ledger, beside what the third-order law says: between rows linear, beyond the last 7.5 log (n − 1),
    never less than the last row (EN 50083-5 and IEC 60728-3, from memory).
    """
    last_count, last_db = _DERATING[-1]
    if channels > last_count:
        return max(last_db, 7.5 * float(np.log10(channels - 1)))
    table = np.array(_DERATING)
    return float(np.interp(channels, table[:, 0], table[:, 1]))
