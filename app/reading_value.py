"""What a reading is worth before it is taken, and at which levels it turns the answer.

With U what the candidate is worth over the baseline (random under the joint model) and r a level that is going to be
read, r = f + e, e ~ N(0, s²), the rule after the reading is to change if E(U | r) > 0. Hence

    W(r) = E[max(E(U | r), 0)] - max(E(U), 0)   >= 0            (Raiffa and Schlaifer 1961: value of sample information)

Over the joint samples (f_i, U_i) of the model, by Bayes,

    E(U | r) = sum_i U_i phi((r - f_i) / s) / sum_i phi((r - f_i) / s)

which holds for any joint distribution of levels and counts: alternatives, interference, bounds already read. r runs
over even quantiles of its own distribution. Each E(U | r) has a sampling error of sd(U | r) / sqrt(samples within s):
with 4096 samples, s 3 dB and a spread of f of 7 dB, about 1/40 of sd(U | r).
"""

from __future__ import annotations

import itertools
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray
from scipy.special import ndtr

from app.chance import DRAWS, normals

FloatArray = NDArray[np.float64]

QUANTILES = 64
MOST_TRIED = 64  # readings whose value is computed: those that move most with the worth
LEAST_CORRELATION = 0.05
LEAST_VALUE = 0.01  # less than this is nothing in any currency
STEP_DB = 0.5
BINS_PER_SD = 10  # a bin's own spread adds 0.04 % to that of the reading
RARE = 0.02  # an interval of levels less likely than this is none
MOST_TIPPING = 4


@dataclass(frozen=True, slots=True)
class Readable:
    """A level that can be read at the roof."""

    emission: str
    bearing_deg: float
    level_dbuv: FloatArray  # (DRAWS,) what there is to read
    sd_db: float  # of the reading about it: meter, position, weather
    least_dbuv: float = -np.inf  # a meter shows no lower level; what it learns there is only that
    through: str = ""  # name of the chain it is read through
    point: str = ""  # where on it: an outlet's name, or "aerial"


@dataclass(frozen=True, slots=True)
class Interval:
    """What the answer is after a level between two bounds; None: open to that side."""

    from_dbuv: float | None
    to_dbuv: float | None
    answer: str
    why: str


@dataclass(frozen=True, slots=True)
class MeasureNext:
    """The reading to take."""

    emission: str
    bearing_deg: float
    value: float  # in the chains' currency
    expected_dbuv: float
    tipping: tuple[Interval, ...]
    through: str = ""  # as in Readable: a level means nothing without the place it is read at
    point: str = ""


def most_valuable(
    readables: Sequence[Readable],
    worth: FloatArray,
    has_before: FloatArray,
    has_after: FloatArray,
) -> MeasureNext | None:
    """Return the reading with the largest value; None if no reading tells anything.

    Parameters
    ----------
    worth : (DRAWS,)
        U of each sample, in the chains' currency.
    has_before, has_after : (DRAWS,)
        Wanted multiplexes that baseline and candidate receive, to say why an interval is as it is.
    """
    if not readables or float(np.ptp(worth)) == 0:
        return None
    tied = np.abs(_correlations(np.stack([one.level_dbuv for one in readables]), worth))
    tried = sorted(np.flatnonzero(tied > LEAST_CORRELATION).tolist(), key=lambda k: -tied[k])
    values = {k: value_of(readables[k], worth) for k in tried[:MOST_TRIED]}
    if not values:
        return None
    best = max(values, key=lambda k: (values[k], -k))
    if values[best] < LEAST_VALUE:
        return None
    one = readables[best]
    return MeasureNext(
        one.emission,
        one.bearing_deg,
        values[best],
        float(np.median(one.level_dbuv)),
        tipping(one, worth, has_before, has_after),
        one.through,
        one.point,
    )


def value_of(one: Readable, worth: FloatArray) -> float:
    """W of one reading, in the currency of `worth`; never negative."""
    levels = np.quantile(to_come(one), (np.arange(QUANTILES) + 0.5) / QUANTILES)
    after = expected_after(one, levels, worth)
    return float(np.maximum(after, 0).mean() - max(after.mean(), 0.0))


def to_come(one: Readable) -> FloatArray:
    """Samples of the figure that will be read. (DRAWS,)"""
    return one.level_dbuv + one.sd_db * normals("the reading to come")


def expected_after(one: Readable, levels_dbuv: FloatArray, worth: FloatArray) -> FloatArray:
    """E(worth | reading) at each level, samples gathered in bins of a tenth of the reading's spread. (levels,)"""
    width = one.sd_db / BINS_PER_SD
    bins = np.rint(one.level_dbuv / width).astype(int)
    first = int(bins.min())
    count = np.bincount(bins - first)
    total = np.bincount(bins - first, worth)
    used = np.flatnonzero(count)
    half_square = ((levels_dbuv[:, None] - (used + first) * width) / one.sd_db) ** 2 / 2
    weight = np.exp(half_square.min(axis=1, keepdims=True) - half_square)
    after: FloatArray = weight @ total[used] / (weight @ count[used])
    # Below what a meter shows, all that is learnt is that nothing is shown.
    hidden = ndtr((one.least_dbuv - (used + first) * width) / one.sd_db)
    if float(hidden @ count[used]) > 0:
        after[levels_dbuv < one.least_dbuv] = float(hidden @ total[used] / (hidden @ count[used]))
    return after


def tipping(one: Readable, worth: FloatArray, has_before: FloatArray, has_after: FloatArray) -> tuple[Interval, ...]:
    """Intervals of the level with the answer in each, without those rarer than RARE; empty if nothing turns it."""
    read = to_come(one)
    low, high = np.quantile(read, [0.005, 0.995])
    levels = np.arange(np.floor(low), np.ceil(high) + STEP_DB, STEP_DB)
    good = expected_after(one, levels, worth) > 0
    edges = [float(levels[k] + levels[k + 1]) / 2 for k in np.flatnonzero(np.diff(good))]
    answers = [bool(good[0])]
    for _ in edges:
        answers.append(not answers[-1])
    while edges:
        bounds = [-np.inf, *edges, np.inf]
        share = [float(((read >= a) & (read < b)).mean()) for a, b in itertools.pairwise(bounds)]
        rarest = int(np.argmin(share))
        if share[rarest] >= RARE and len(edges) <= MOST_TIPPING:
            break
        # An interval that falls away joins its neighbours, which have one answer.
        gone = [k for k in (rarest - 1, rarest) if 0 <= k < len(edges)]
        inner = len(gone) == 2
        edges = [edge for k, edge in enumerate(edges) if k not in gone]
        answers = answers[: max(rarest, 1) if inner else rarest] + answers[rarest + (2 if inner else 1) :]
    if not edges:
        return ()
    bounds = [-np.inf, *edges, np.inf]
    return tuple(
        Interval(
            None if np.isinf(a) else round(a),
            None if np.isinf(b) else round(b),
            "worth it" if answer else "not worth it",
            _why(answer, read, a, b, has_before, has_after),
        )
        for answer, a, b in zip(answers, bounds, bounds[1:], strict=False)
    )


def _why(answer: bool, read: FloatArray, low: float, high: float, has_before: FloatArray, has_after: FloatArray) -> str:
    inside = (read >= low) & (read < high)
    before, after = float(has_before[inside].mean()), float(has_after[inside].mean())
    if answer:
        return "the candidate brings them"
    if np.isinf(low):
        return "out of reach"  # whatever else of the wanted is there already
    return "works already" if before > after / 2 and before >= 0.5 else "out of reach"


def _correlations(levels: FloatArray, worth: FloatArray) -> FloatArray:
    """Correlation of each row of levels (r, DRAWS) with the worth (DRAWS,); 0 where a row does not vary. (r,)"""
    away = worth - worth.mean()
    spread = levels.std(axis=1) * worth.std()
    common = levels @ away / DRAWS  # whatever the mean of a row: away has none
    return np.asarray(np.divide(common, spread, out=np.zeros_like(common), where=spread > 0))
