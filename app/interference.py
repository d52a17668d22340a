"""Other emissions on the channel and beside it: protection ratios, spectral shares, the nuisance sum.

The power that disturbs a wanted emission is referred to its own channel,

    I = sum over i of P_i 10^((PR_i - C/N required) / 10),

so that noise and interference add up and one condition, C / (N + I) >= C/N required, holds for both
(nuisance fields: GE06 and Rec. ITU-R BT.1368, common planning practice). A noise-like emission on the same
channel needs PR = C/N required, so it counts with its full power; one that overlaps in part, on a raster of
another width, counts with the share of its spectrum inside. Beside the channel the table of protection
ratios decides; a pair without a row takes the row of any pair, and says so.
"""

from __future__ import annotations

import itertools
from dataclasses import dataclass, field
from functools import cache

import numpy as np
from numpy.typing import NDArray
from scipy.sparse import csr_array

from app.tables import rows

FloatArray = NDArray[np.float64]

SAME_MHZ = 1e-3  # edges closer than this touch
SPECTRAL = "by the share of its spectrum inside the channel; noise-like, ratio as the required C/N"


@dataclass(frozen=True, slots=True)
class Spectra:
    """Where emissions stand in the spectrum, one row each."""

    system: tuple[str, ...]  # (n,)
    frequency_mhz: FloatArray  # (n,) centre
    channel_mhz: FloatArray  # (n,) width of the channel
    occupied_mhz: FloatArray  # (n,) width that the signal fills


@dataclass(frozen=True, slots=True)
class Pairs:
    """Which emission disturbs which: one entry per pair that does, by rising wanted one. All arrays (k,)."""

    disturber: NDArray[np.intp]
    wanted: NDArray[np.intp]
    steady_db: FloatArray  # PR - C/N required, for what is there half of the time
    tropospheric_db: FloatArray  # the same for what rises for a small share of the time
    rule: NDArray[np.object_]  # where the ratio is from, for people
    shape: tuple[int, int]  # disturbers, wanted
    told: dict[int, dict[int, str]] = field(default_factory=dict)  # rules by wanted and disturber, once looked up

    def weights(self, tropospheric: bool) -> csr_array:
        """Factor by which each disturber's power counts, (wanted, disturbers), sparse."""
        ratio_db = self.tropospheric_db if tropospheric else self.steady_db
        return csr_array((10 ** (ratio_db / 10), (self.wanted, self.disturber)), shape=self.shape[::-1], dtype=float)

    def of_wanted(self, e: int) -> range:
        """Return the entries that disturb one wanted emission."""
        first, end = np.searchsorted(self.wanted, [e, e + 1])
        return range(int(first), int(end))

    def rule_of(self, i: int, e: int) -> str | None:
        """Where the ratio of one pair is from; None: the one does not disturb the other."""
        if e not in self.told:
            self.told[e] = {int(self.disturber[k]): self.rule[k] for k in reversed(self.of_wanted(e))}
        return self.told[e].get(i)


@dataclass(frozen=True, slots=True)
class _Ratio:
    wanted: str
    interferer: str
    offset: float
    unit: str
    ratio_db: float
    tropospheric_ratio_db: float
    source: str


def pairs_between(wanted: Spectra, required_cn_db: FloatArray, disturbers: Spectra) -> Pairs:
    """Every pair in which one emission disturbs another, with the ratio that it takes.

    Parameters
    ----------
    required_cn_db : array (e,)
        Planning value of each wanted emission's mode.

    Emissions of the same index in both are pairs too: the caller leaves out what belongs together.
    """
    apart_mhz = disturbers.frequency_mhz[:, None] - wanted.frequency_mhz[None, :]
    # Three channels of the wider of the two: the table reaches no farther.
    near = np.abs(apart_mhz) < 3 * np.maximum(disturbers.channel_mhz[:, None], wanted.channel_mhz[None, :])
    i, e = np.nonzero(near)
    apart = apart_mhz[i, e]
    steady, tropospheric = np.full(len(i), -np.inf), np.full(len(i), -np.inf)
    rule = np.full(len(i), "", dtype=object)

    of_wanted, of_disturber = np.array(wanted.system, dtype=object), np.array(disturbers.system, dtype=object)
    channels = apart / ((disturbers.channel_mhz[i] + wanted.channel_mhz[e]) / 2)
    analogue = np.zeros(len(i), dtype=bool)  # no spectrum like noise: ratios by MHz alone
    for pair in itertools.product(sorted(set(wanted.system)), sorted(set(disturbers.system))):
        mine = (of_wanted == pair[0])[e] & (of_disturber == pair[1])[i]
        table = _table(*pair)
        by_mhz = [row for row in table if row.unit == "MHz"]
        if by_mhz:
            analogue |= mine
            offsets = [row.offset for row in by_mhz]
            inside = mine & (np.abs(apart) <= offsets[-1] + SAME_MHZ)
            steady[inside] = np.interp(np.abs(apart[inside]), offsets, [row.ratio_db for row in by_mhz])
            tropospheric[inside] = np.interp(
                np.abs(apart[inside]), offsets, [row.tropospheric_ratio_db for row in by_mhz]
            )
            rule[inside] = by_mhz[0].source
            continue
        for row in table:
            beside = mine & (np.rint(channels) == row.offset) & (np.abs(channels) >= 0.5)
            steady[beside], tropospheric[beside] = row.ratio_db, row.tropospheric_ratio_db
            rule[beside] = f"{row.offset:+g} channel, protection ratio {row.ratio_db:g} dB: {row.source}"
    relative = [values - required_cn_db[e] for values in (steady, tropospheric)]

    share = spectral_share(apart, wanted.occupied_mhz[e], disturbers.occupied_mhz[i])
    with np.errstate(divide="ignore"):
        share_db = np.where(analogue, -np.inf, 10 * np.log10(share))
    overlaps = share_db > relative[0]
    rule[overlaps] = SPECTRAL
    both = [np.maximum(values, share_db) for values in relative]
    kept = np.flatnonzero(np.isfinite(both[0]))
    kept = kept[np.argsort(e[kept], kind="stable")]
    return Pairs(
        i[kept], e[kept], both[0][kept], both[1][kept], rule[kept], (len(disturbers.system), len(wanted.system))
    )


def spectral_share(apart_mhz: FloatArray, wanted_mhz: FloatArray, disturber_mhz: FloatArray) -> FloatArray:
    """Share of a flat spectrum that lies inside another's width, elementwise, 0 to 1.

    Parameters
    ----------
    apart_mhz : array
        Difference of the centres. [MHz]
    wanted_mhz, disturber_mhz : array
        Widths occupied, above 0. [MHz]
    """
    common = (wanted_mhz + disturber_mhz) / 2 - np.abs(apart_mhz)
    overlap = np.clip(common, 0, np.minimum(wanted_mhz, disturber_mhz))
    return np.asarray(np.where(overlap > SAME_MHZ, overlap / disturber_mhz, 0.0))


def nuisance_power(power: FloatArray, weights: csr_array | FloatArray) -> FloatArray:
    """Sum of what disturbs each wanted emission, (…, i) and (e, i) to (…, e), linear power."""
    return np.asarray(power @ weights.T)


def degradation_db(cn_db: FloatArray, i_over_c: FloatArray) -> FloatArray:
    """Fall from C/N to C/(N + I) [dB], elementwise, for the interference over the carrier (linear)."""
    return np.asarray(10 * np.log10(1 + i_over_c * 10 ** (cn_db / 10)))


def occupied_mhz(system: str, channel_mhz: float, noise_bandwidth_mhz: float) -> float:
    """Width that a signal fills [MHz]: the noise bandwidth, unless the table knows better."""
    for row in _widths():
        if row["system"] == system and float(row["channel_bandwidth_mhz"]) == channel_mhz:
            return float(row["occupied_mhz"])
    return noise_bandwidth_mhz


@cache
def _widths() -> list[dict[str, str]]:
    return rows("occupied_bandwidths")


@cache
def _ratios() -> tuple[_Ratio, ...]:
    return tuple(
        _Ratio(
            row["wanted"],
            row["interferer"],
            float(row["offset"]),
            row["unit"],
            float(row["ratio_db"]),
            float(row["tropospheric_ratio_db"]),
            f"{row['source']} ({row['flag']})",
        )
        for row in rows("protection_ratios")
    )


@cache
def _table(wanted: str, interferer: str) -> tuple[_Ratio, ...]:
    """Rows for a pair of systems: its own, else those for any interferer, else those for any pair."""
    for key in ((wanted, interferer), (wanted, "*"), ("*", "*")):
        found = tuple(row for row in _ratios() if (row.wanted, row.interferer) == key)
        if found:
            return found
    return ()
