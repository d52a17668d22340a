"""The joint error model: from margins to chances.

The margin of emission e through chain c is its median plus a sum of independent normal errors, each of
which belongs to something: the roof, a mast, a band of that mast, one emission, an aerial, a run of
feeder. What two cells share moves them together; what a candidate keeps from the baseline keeps its
error, so two equal chains differ by exactly nothing.

    M[e, c] = median[e, c] + sum over parts k of sd_k[e, c] * z[key_k(e, c)],   z[key] ~ N(0, 1)

Between masts the path error has in common sqrt(rho) times a stationary field over bearing with the
correlation exp(-|difference of bearing| / scale), so that two masts correlate by
rho * exp(-|difference| / scale), the shorter way round.

An error that is no normal (the walls round an aerial in a room) is mapped from one: z is replaced by a curve of z.

A single cell has the closed form Phi(median / sigma), or its mean over that curve. Counts, alternatives
and differences are taken over quasi-random draws: every key has its own stratified sample of the
normal (a Latin hypercube, McKay, Beckman and Conover 1979, Technometrics 21), shuffled by a hash of the key, so
adding an emission leaves all other draws as they were. Its cost beside the field: measured in tests/benchmarks.

Readings replace the prior of the normals by a posterior (app/conditioning.py): Cells that carry one draw from it.
"""

from __future__ import annotations

import hashlib
from collections.abc import Sequence
from dataclasses import dataclass, replace
from functools import lru_cache
from typing import Literal, Protocol

import numpy as np
from numpy.typing import NDArray
from scipy.linalg.blas import daxpy as add_scaled  # (x, y, a=): y += a x where it stands
from scipy.special import ndtr, ndtri

FloatArray = NDArray[np.float64]

DRAWS = 4096
DEVIATES = np.linspace(-4, 4, 33)  # of the normal that an error which is none itself is mapped from
_LIKELY = np.exp(-(DEVIATES**2) / 2) / np.exp(-(DEVIATES**2) / 2).sum()
SEED = "gainworth-1"
NEVER_SD = 9.0  # as many standard deviations away: a chance of 1e-19

Grade = Literal["secure", "likely", "open", "doubtful"]
GRADES: tuple[tuple[float, Grade], ...] = (
    (0.95, "secure"),
    (0.70, "likely"),
    (0.30, "open"),
    (0.0, "doubtful"),
)


def grade(chance: float) -> Grade:
    """Return the word for a chance; 0.95 and 0.70 are the location classes of GE06 planning."""
    return next(word for least, word in GRADES if chance >= least)


@dataclass(frozen=True, slots=True)
class ErrorPart:
    """One kind of error over all emissions of one chain: which normal moves each, and by how much."""

    keys: tuple[str, ...]  # (e,) the name of the normal that moves each emission
    sd_db: FloatArray  # (e,) 0 where it does not apply; below 0 where the error lowers the margin as it rises
    curve_db: FloatArray | None = None  # (d, e) what an error that is no normal adds at each of DEVIATES


@dataclass(frozen=True, slots=True)
class PathError:
    """The errors of the paths, which neighbouring bearings have partly in common."""

    masts: tuple[str, ...]  # (e,) masts within 1 km share a name
    bearing_deg: FloatArray  # (e,)
    sd_db: FloatArray  # (e,)
    correlation: float  # in common at equal bearing, 0 to 1
    scale_deg: float  # over which that fades by e


@dataclass(frozen=True, slots=True)
class Loadings:
    """By how much each named normal moves each of some quantities."""

    keys: tuple[str, ...]  # (k,) different names
    db: FloatArray  # (e, k)

    def over(self, keys: Sequence[str]) -> FloatArray:
        """The same for another list of names, 0 where a name is not among ours. (e, len(keys))"""
        place = {key: k for k, key in enumerate(self.keys)}
        found = [(column, place[key]) for column, key in enumerate(keys) if key in place]
        result = np.zeros((len(self.db), len(keys)))
        if found:
            result[:, [column for column, _ in found]] = self.db[:, [k for _, k in found]]
        return result


class Knowledge(Protocol):
    """What is known of the normals beyond their names."""

    @property
    def is_normal(self) -> bool:
        """Whether the normals are still jointly normal, so that closed forms hold."""

    def moments(self, loadings: Loadings) -> tuple[FloatArray, FloatArray]:
        """Shift of the mean [dB] and variance [dB²] of each quantity. (e,), (e,)"""

    def applied(self, draws_db: FloatArray, loadings: Loadings) -> FloatArray:
        """Prior samples of each quantity turned into samples under what is known. (DRAWS, e)"""


@dataclass(frozen=True, slots=True)
class Cells:
    """Margins of all emissions through one chain, with everything that may move them."""

    median_db: FloatArray  # (e,) margin
    path: PathError
    parts: tuple[ErrorPart, ...]
    known: Knowledge | None = None  # None: nothing read, the normals are as they are named

    @property
    def sigma_db(self) -> FloatArray:
        """Standard deviation of each margin. (e,)"""
        if self.known is not None:
            return np.sqrt(self.known.moments(self.loadings())[1])
        variance = self.path.sd_db**2 + sum((part.sd_db**2 for part in self.parts), np.zeros_like(self.median_db))
        return np.sqrt(variance)

    @property
    def mean_db(self) -> FloatArray:
        """Mean of each margin; the median as computed unless readings moved it. (e,)"""
        return self.median_db if self.known is None else self.median_db + self.known.moments(self.loadings())[0]

    @property
    def chance(self) -> FloatArray:
        """Probability that each margin is at least 0: in closed form, or over the draws once bounds were read. (e,)"""
        if self.known is not None and not self.known.is_normal:
            chance: FloatArray = (self.draws() >= 0).mean(axis=0)
            return chance
        return exceedance_through(self.mean_db, self.sigma_db, self.curved)

    @property
    def curved(self) -> ErrorPart | None:
        """The part that is no normal; None once readings have made every error part of one normal."""
        return None if self.known else next((part for part in self.parts if part.curve_db is not None), None)

    def loadings(self) -> Loadings:
        """Every named normal of these margins; the field over bearing by its white noise at whole degrees."""
        columns: dict[str, FloatArray] = {}
        count = len(self.median_db)

        def add(key: str, e: int, db: float) -> None:
            columns.setdefault(key, np.zeros(count))[e] += db

        common = np.sqrt(self.path.correlation)
        own = np.sqrt(1 - self.path.correlation)
        for e, mast in enumerate(self.path.masts):
            add(f"path:{mast}", e, float(self.path.sd_db[e] * own))
        for part in self.parts:
            for e, key in enumerate(part.keys):
                if part.sd_db[e] != 0:
                    add(key, e, float(part.sd_db[e]))
        rows = np.stack([_bearing_row(float(one), self.path.scale_deg) for one in self.path.bearing_deg])
        over_bearing = common * self.path.sd_db[:, None] * rows
        return Loadings(
            (*columns, *(f"bearing:{degree}" for degree in range(360))),
            np.hstack([np.stack(list(columns.values()), axis=1), over_bearing]),
        )

    def of(self, rows: Sequence[int]) -> Cells:
        """Return some of the margins only, whose draws stay the same."""
        taken = list(rows)
        path = replace(
            self.path,
            masts=tuple(self.path.masts[e] for e in taken),
            bearing_deg=self.path.bearing_deg[taken],
            sd_db=self.path.sd_db[taken],
        )
        parts = tuple(
            ErrorPart(
                tuple(part.keys[e] for e in taken),
                part.sd_db[taken],
                None if part.curve_db is None else part.curve_db[:, taken],
            )
            for part in self.parts
        )
        return Cells(self.median_db[taken], path, parts, self.known)

    def draws(self) -> FloatArray:
        """Return joint samples of the margins. (DRAWS, e)"""
        margins = np.repeat(self.median_db[:, np.newaxis], DRAWS, axis=1)  # the draws of one lie together
        common = np.sqrt(self.path.correlation) * self.path.sd_db
        own = np.sqrt(1 - self.path.correlation) * self.path.sd_db
        for e, (mast, bearing_deg) in enumerate(zip(self.path.masts, self.path.bearing_deg.tolist(), strict=True)):
            add_scaled(bearing_field(round(bearing_deg) % 360, self.path.scale_deg), margins[e], a=common[e])
            add_scaled(normals(f"path:{mast}"), margins[e], a=own[e])
        curved = self.curved
        for part in self.parts:
            if part is curved and part.curve_db is not None:
                for e, key in enumerate(part.keys):
                    margins[e] += np.interp(normals(key), DEVIATES, part.curve_db[:, e])
            else:
                for e in np.flatnonzero(part.sd_db).tolist():  # below 0: what disturbs lowers the margin as it rises
                    add_scaled(normals(part.keys[e]), margins[e], a=part.sd_db[e])
        return margins.T if self.known is None else self.known.applied(margins.T, self.loadings())


def exceedance(median_db: FloatArray, sigma_db: FloatArray) -> FloatArray:
    """Probability that a normal of this median and spread is at least 0; a spread of 0 decides by sign."""
    with np.errstate(divide="ignore", invalid="ignore", over="ignore"):
        score = np.where(sigma_db > 0, median_db / sigma_db, np.where(median_db >= 0, np.inf, -np.inf))
    result: FloatArray = ndtr(score)
    return result


def exceedance_through(median_db: FloatArray, sigma_db: FloatArray, curved: ErrorPart | None) -> FloatArray:
    """Return the same where one part of the spread (…, e) is no normal: the mean over what that part may be."""
    if curved is None or curved.curve_db is None:
        return exceedance(median_db, sigma_db)
    rest_db = np.sqrt(np.maximum(sigma_db**2 - curved.sd_db**2, 0))
    chances = (
        share * exceedance(median_db + moved, rest_db) for share, moved in zip(_LIKELY, curved.curve_db, strict=True)
    )
    return sum(chances, np.zeros(np.shape(median_db)))


def not_too_much(chance: FloatArray, headroom_db: FloatArray, loudest_sd_db: FloatArray) -> FloatArray:
    """Chance of enough signal less that of too much; the error of the loudest level eats up the headroom of all."""
    near = np.asarray(headroom_db <= NEVER_SD * loudest_sd_db)
    if not near.any():
        return chance
    result: FloatArray = np.maximum(chance - exceedance(-headroom_db, loudest_sd_db), 0)
    return result


def capped(draws_db: FloatArray, headroom_db: FloatArray, louder_db: FloatArray) -> FloatArray:
    """Draws of margins (DRAWS, e), below 0 also where the loudest level's draws (DRAWS,) exceed the headroom (e,)."""
    result: FloatArray = np.minimum(draws_db.T, headroom_db[:, np.newaxis] - louder_db).T
    return result


def received(draws_db: FloatArray, multiplex_of: Sequence[str], multiplexes: Sequence[str]) -> NDArray[np.bool_]:
    """Whether at least one emission of each multiplex is receivable, draw by draw. (DRAWS, m)"""
    good = draws_db.T >= 0  # the draws of one emission lie together
    rows = rows_of(multiplex_of)
    found = np.zeros((len(multiplexes), len(draws_db)), dtype=bool)
    for m, name in enumerate(multiplexes):
        good[rows.get(name, [])].any(axis=0, out=found[m])
    return found.T


def rows_of(multiplex_of: Sequence[str]) -> dict[str, list[int]]:
    """Rows of the emissions of each multiplex."""
    rows: dict[str, list[int]] = {}
    for e, owner in enumerate(multiplex_of):
        rows.setdefault(owner, []).append(e)
    return rows


@lru_cache(maxsize=8192)
def normals(key: str) -> FloatArray:
    """Return the stratified standard normals that belong to a key, always the same for it. (DRAWS,)"""
    sample = _strata()[_generator(key).permutation(DRAWS)]
    sample.flags.writeable = False
    return sample


@lru_cache(maxsize=1024)
def bearing_field(bearing_deg: int, scale_deg: float) -> FloatArray:
    """Return the common path error towards a bearing in whole degrees. (DRAWS,)

    A stationary normal field on the circle with the correlation exp(-|difference| / scale): the symmetric
    square root of its circulant covariance times white noise keyed by whole degrees.
    """
    field: FloatArray = _bearing_row(bearing_deg, scale_deg) @ _bearing_noise()
    field.flags.writeable = False
    return field


def _bearing_row(bearing_deg: float, scale_deg: float) -> FloatArray:
    return _bearing_root(scale_deg)[(np.arange(360) - round(bearing_deg)) % 360]


@lru_cache(maxsize=8)
def _bearing_root(scale_deg: float) -> FloatArray:
    separation = np.minimum(np.arange(360), 360 - np.arange(360))
    spectrum = np.fft.fft(np.exp(-separation / scale_deg)).real
    root: FloatArray = np.fft.ifft(np.sqrt(np.maximum(spectrum, 0))).real
    return root


@lru_cache(maxsize=1)
def _bearing_noise() -> FloatArray:
    return np.stack([normals(f"bearing:{degree}") for degree in range(360)])


@lru_cache(maxsize=1)
def _strata() -> FloatArray:
    centres: FloatArray = ndtri((np.arange(DRAWS) + 0.5) / DRAWS)
    strata: FloatArray = centres / centres.std()
    return strata


def _generator(key: str) -> np.random.Generator:
    digest = hashlib.blake2b(f"{SEED}:{key}".encode(), digest_size=16).digest()
    return np.random.Generator(np.random.PCG64(int.from_bytes(digest, "little")))
