"""What readings say about the named normals of the error model.

Let z be the named normals, z ~ N(0, S), S diagonal (1, or more for a part that its readings measure by
themselves), and f = A z the quantities that were read, less their prediction. A plain reading says
y = f + e, e ~ N(0, R). With T = diag(1 / R), B = I + T^(1/2) A S A' T^(1/2) and W = T^(1/2) B^(-1) T^(1/2):

    E(z | y)   = S A' W y                     (y as differences from the prediction)
    Cov(z | y) = S - S A' W A S               the textbook conditional of a normal (Rasmussen and Williams 2006,
                                              Gaussian Processes for Machine Learning, appendix A.2)

A bound (perfect, not found, at least the instrument's limit) says

    t(f) = q + (1 - q) [Phi((f - low) / s) - Phi((f - high) / s)]

with a softness s and a share q of cases in which the statement is wrong. Its normal stand-in is moment-matched
by expectation propagation (Minka 2001; Rasmussen and Williams, section 3.6): with the rest of the posterior of f
being N(m, v), Z(m) = q + (1 - q) [Phi((m - low)/sqrt(s² + v)) - Phi((m - high)/sqrt(s² + v))], the exact mean and
variance are m + v g and v - v² (g² - h), g = Z'/Z, h = Z''/Z. All stand-ins are renewed together, damped.

Samples: z is drawn from its prior, keyed by names, and moved by Matheron's rule, z + S A' W (y - A z - e); where
bounds or statements on several emissions are among the readings, the samples are weighted by true over stand-in
likelihood and drawn again in even steps of the cumulated weight, which makes them samples of the exact posterior.
If the weights leave fewer than LEAST_SHARE of the samples effective ((sum w)² / sum w²), the moment-matched ones
stay as they are.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray
from scipy.linalg import cho_factor, cho_solve
from scipy.special import ndtr

from app.chance import DRAWS, Loadings, normals

FloatArray = NDArray[np.float64]
IndexArray = NDArray[np.intp]

ROUNDS = 60
DAMPING = 0.7  # share of each new stand-in, so that those of one quantity do not overshoot together
SETTLED_DB = 1e-6  # change of the posterior means at which the rounds end
LEAST_SHARE = 0.1  # of samples that must stay effective
SURELY_WRONG = 1e-6  # least share of statements that are wrong: keeps every bound finite
FAR_SD = 3.5  # beyond this a reading waits until it is confirmed
FAR_CHANCE = 2.3e-4  # the same for a bound: one tail of the normal beyond 3.5


@dataclass(frozen=True, slots=True)
class Plain:
    """A reading with a normal error: value of one quantity less its prediction."""

    row: int  # quantity
    value_db: float
    sd_db: float


@dataclass(frozen=True, slots=True)
class Bound:
    """A quantity less its prediction lies between two limits, softly."""

    row: int
    low_db: float  # -inf: none
    high_db: float  # inf: none
    softness_db: float
    wrong: float = 0.0  # share of such statements that are wrong


@dataclass(frozen=True, slots=True)
class Joint:
    """A statement on several quantities at once, which only the samples can weigh."""

    rows: tuple[int, ...]
    log_likelihood: Callable[[FloatArray], FloatArray]  # (DRAWS, rows) -> (DRAWS,)
    stand_in: Bound | None = None  # stands for it among the moment-matched ones, near enough to propose samples


Site = Plain | Bound


@dataclass(frozen=True, slots=True)
class Posterior:
    """The named normals after readings: a Knowledge for Cells."""

    keys: tuple[str, ...]  # (k,)
    mean: FloatArray  # (k,)
    covariance: FloatArray  # (k, k)
    gain: FloatArray  # (k, f) S A', how each quantity that was read moves the normals
    moved: FloatArray  # (DRAWS, f) by how much, sample by sample
    widened: FloatArray  # (k,) prior standard deviation less 1
    picked: IndexArray | None  # (DRAWS,) samples that stand for the exact posterior; None: all once
    is_normal: bool
    effective_share: float  # of the samples; 1 without bounds

    def moments(self, loadings: Loadings) -> tuple[FloatArray, FloatArray]:
        """Shift of the mean [dB] and variance [dB²] of each quantity (e,), (e,); moment-matched with bounds."""
        ours = loadings.over(self.keys)
        prior = (loadings.db**2).sum(axis=1) - (ours**2).sum(axis=1)
        spread = prior + ((ours @ self.covariance) * ours).sum(axis=1)
        return ours @ self.mean, np.maximum(spread, 0.0)

    def applied(self, draws_db: FloatArray, loadings: Loadings) -> FloatArray:
        """Prior samples of each quantity turned into samples of the posterior. (DRAWS, e)"""
        ours = loadings.over(self.keys)
        after: FloatArray = draws_db + self.moved @ (ours @ self.gain).T
        for k in np.flatnonzero(self.widened):
            after += np.outer(normals(self.keys[k]), self.widened[k] * ours[:, k])
        return after if self.picked is None else after[self.picked]

    def of(self, key: str) -> tuple[float, float]:
        """Mean and standard deviation of one named normal."""
        if key not in self.keys:
            return 0.0, 1.0
        k = self.keys.index(key)
        return float(self.mean[k]), float(np.sqrt(self.covariance[k, k]))


@dataclass(frozen=True, slots=True)
class Matched:
    """Normal stand-ins of all sites and the posterior of the quantities under them."""

    precision: FloatArray  # (sites,)
    pull: FloatArray  # (sites,) precision times value
    mean_db: FloatArray  # (f,)
    covariance: FloatArray  # (f, f)
    weights: FloatArray  # (f, f) W
    lean: FloatArray  # (f,) W y, so that mean = A S A' lean


def condition(
    loadings: Loadings,
    sites: Sequence[Site],
    joint: Sequence[Joint] = (),
    wide: Mapping[str, float] | None = None,
    names: Sequence[str] | None = None,
) -> Posterior:
    """Return the posterior of the named normals.

    Parameters
    ----------
    loadings : Loadings
        Of the quantities that were read, one row each.
    sites : sequence of Plain and Bound
        What was read of them.
    joint : sequence of Joint
        Statements on several of them.
    wide : mapping
        Prior standard deviation of normals that differ from 1.
    names : sequence of str
        Name of each quantity, which keys the sampling of its errors; default: its number.
    """
    prior_sd = np.array([(wide or {}).get(key, 1.0) for key in loadings.keys])
    scaled = loadings.db * prior_sd
    proposing = [*sites, *(one.stand_in for one in joint if one.stand_in)]
    matched = match(scaled @ scaled.T, proposing)
    gain = prior_sd[:, None] * scaled.T  # S A'  (k, f)
    mean = gain @ matched.lean
    covariance = np.diag(prior_sd**2) - gain @ matched.weights @ gain.T

    before = np.stack([normals(key) for key in loadings.keys], axis=1) @ scaled.T
    precision = np.bincount([site.row for site in proposing], matched.precision, len(loadings.db))
    noise = np.stack(
        [normals(f"reading:{names[f] if names else f}") for f in range(len(loadings.db))] or [np.zeros(DRAWS)], axis=1
    )
    # W (y - f - e): e has the variance 1 / precision, so that W e = W T^(-1/2) times a standard normal.
    root = np.sqrt(precision)
    scatter = np.divide(1.0, root, out=np.zeros_like(root), where=root > 0)
    moved = matched.lean - (before + noise[:, : len(root)] * scatter) @ matched.weights

    picked, share = None, 1.0
    bounds = [s for s, site in enumerate(proposing) if isinstance(site, Bound)]
    if bounds or joint:
        f = before + moved @ (scaled @ scaled.T)
        log_weight = np.zeros(DRAWS)
        for s in bounds:
            site = proposing[s]
            assert isinstance(site, Bound)
            x = f[:, site.row]
            log_weight -= matched.pull[s] * x - matched.precision[s] * x**2 / 2
            if s < len(sites):
                log_weight += np.log(likelihood(site, x))
        for one in joint:
            log_weight += one.log_likelihood(f[:, one.rows])
        weight = np.exp(log_weight - log_weight.max())
        weight /= weight.sum()
        share = float(1 / (weight**2).sum() / DRAWS)
        if share >= LEAST_SHARE:
            steps = (np.arange(DRAWS) + 0.5) / DRAWS
            picked = np.minimum(np.searchsorted(np.cumsum(weight), steps), DRAWS - 1)
    return Posterior(loadings.keys, mean, covariance, gain, moved, prior_sd - 1, picked, not (bounds or joint), share)


def match(prior_covariance: FloatArray, sites: Sequence[Site]) -> Matched:
    """Return the normal stand-ins of all sites: exact for plain readings, moment-matched for bounds."""
    count = len(prior_covariance)
    row = np.array([site.row for site in sites], dtype=int)
    precision = np.array([1 / site.sd_db**2 if isinstance(site, Plain) else 0.0 for site in sites])
    pull = precision * np.array([site.value_db if isinstance(site, Plain) else 0.0 for site in sites])
    bounds = [s for s, site in enumerate(sites) if isinstance(site, Bound)]
    state = _posterior(prior_covariance, row, precision, pull, count)
    for _ in range(ROUNDS if bounds else 0):
        mean, variance = state.mean_db[row[bounds]], np.diag(state.covariance)[row[bounds]]
        rest_precision = np.maximum(1 / np.maximum(variance, 1e-12) - precision[bounds], 1e-9)
        rest_mean = (mean / np.maximum(variance, 1e-12) - pull[bounds]) / rest_precision
        for s, m, v in zip(bounds, rest_mean, 1 / rest_precision, strict=True):
            site = sites[s]
            assert isinstance(site, Bound)
            new_precision, new_pull = _stand_in(site, float(m), float(v))
            precision[s] += DAMPING * (new_precision - precision[s])
            pull[s] += DAMPING * (new_pull - pull[s])
        renewed = _posterior(prior_covariance, row, precision, pull, count)
        change = float(np.abs(renewed.mean_db - state.mean_db).max(initial=0.0))
        state = renewed
        if change < SETTLED_DB:
            break
    return state


def surprise(site: Site, mean_db: float, variance: float) -> float:
    """How far a reading lies from N(mean, variance) of its quantity, in standard deviations; a bound by its tail.

    3.5 means for a plain reading 3.5 standard deviations, for a bound a probability of 2.3e-4.
    """
    if isinstance(site, Plain):
        return abs(site.value_db - mean_db) / float(np.sqrt(variance + site.sd_db**2))
    return 4.0 if float(_mass(site, mean_db, variance)) < FAR_CHANCE else 0.0


def without(matched: Matched, sites: Sequence[Site], s: int) -> tuple[float, float]:
    """Mean and variance of a site's quantity from everything but that site."""
    row = sites[s].row
    variance = max(float(matched.covariance[row, row]), 1e-12)
    precision = max(1 / variance - matched.precision[s], 1e-9)
    return float((matched.mean_db[row] / variance - matched.pull[s]) / precision), float(1 / precision)


def likelihood(site: Bound, x: FloatArray) -> FloatArray:
    """How likely a bound is to be said at values of its quantity."""
    q = max(site.wrong, SURELY_WRONG)
    result: FloatArray = q + (1 - q) * _mass(site, x, 0.0)
    return result


def _mass(site: Bound, mean: FloatArray | float, variance: float) -> FloatArray:
    scale = np.sqrt(site.softness_db**2 + variance)
    low, high = (np.asarray(mean) - site.low_db) / scale, (np.asarray(mean) - site.high_db) / scale
    # On the far side both are near 1: take the difference of the other tails there.
    result: FloatArray = np.where(high > 0, ndtr(-high) - ndtr(-low), ndtr(low) - ndtr(high))
    return result


def _stand_in(site: Bound, m: float, v: float) -> tuple[float, float]:
    """Precision and pull of the normal that gives N(m, v) times the bound its exact mean and variance."""
    scale = float(np.sqrt(site.softness_db**2 + v))
    q = max(site.wrong, SURELY_WRONG)
    z = q + (1 - q) * float(_mass(site, m, v))
    first = second = 0.0
    for limit, sign in ((site.low_db, 1.0), (site.high_db, -1.0)):
        if np.isfinite(limit):
            u = (m - limit) / scale
            density = float(np.exp(-(u**2) / 2) / np.sqrt(2 * np.pi))
            first += sign * density / scale
            second -= sign * u * density / scale**2
    g, h = (1 - q) * first / z, (1 - q) * second / z
    curve = g**2 - h
    if curve <= 0:  # a doubtful statement may widen the quantity; its stand-in then says nothing
        return 0.0, 0.0
    precision = curve / max(1 - v * curve, 1e-9)
    return precision, precision * m + g * (1 + precision * v)


def _posterior(
    prior: FloatArray, row: NDArray[np.int_], precision: FloatArray, pull: FloatArray, count: int
) -> Matched:
    total, total_pull = np.bincount(row, precision, count), np.bincount(row, pull, count)
    root = np.sqrt(total)
    factor = cho_factor(np.eye(count) + root[:, None] * prior * root, lower=True)
    weights = root[:, None] * cho_solve(factor, np.diag(root))
    lean = total_pull - weights @ (prior @ total_pull)
    return Matched(precision, pull, prior @ lean, prior - prior @ weights @ prior, weights, lean)
