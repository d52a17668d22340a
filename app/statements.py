"""One reading as statements on quantities: what it would have shown, which errors move that, how soft it is."""

from __future__ import annotations

import itertools
from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass, field, replace

import numpy as np
from numpy.typing import NDArray
from scipy.special import ndtr

from app.assumptions import Assumptions
from app.chain.parts import Chain
from app.chance import Loadings
from app.conditioning import SURELY_WRONG, Bound, Joint, Plain, Site
from app.margins import Air
from app.readings import Reading
from app.vantage import Vantage, neighbours_chain, only

FloatArray = NDArray[np.float64]

QUANTILE_99 = 2.3263  # of the standard normal: fades and enhancements are stated for 1 and 99 % of time
NEIGHBOUR_WITHIN_DEG = 20.0
DECIDED_DB = 30.0  # a margin this far from 0 is no question


@dataclass(frozen=True, slots=True)
class Situation:
    """What readings are compared with."""

    assumptions: Assumptions
    look: Callable[[Reading], tuple[Vantage, Air]]  # LookupError: no such chain or point
    neighbour: Callable[[Chain, float, str], tuple[Vantage, Air]]
    enhancement_1_db: Mapping[str, float]  # by emission
    fade_99_db: Mapping[str, float]
    multiplex_ids: Mapping[str, str]  # ids by id and by name


@dataclass(slots=True)
class Rows:
    """Quantities that were read, each with its normals."""

    names: list[str] = field(default_factory=list)
    normals: list[dict[str, float]] = field(default_factory=list)

    def row(self, name: str, normals: dict[str, float]) -> int:
        """Return the place of a quantity, a new one where its name is new."""
        if name not in self.names:
            self.names.append(name)
            self.normals.append(normals)
        return self.names.index(name)

    def loadings(self) -> Loadings:
        """All of them as one matrix."""
        keys = tuple(dict.fromkeys(key for one in self.normals for key in one))
        place = {key: k for k, key in enumerate(keys)}
        db = np.zeros((len(self.names), len(keys)))
        for f, one in enumerate(self.normals):
            for key, value in one.items():
                db[f, place[key]] = value
        return Loadings(keys, db)


@dataclass(frozen=True, slots=True)
class Statement:
    """A reading as sites: several where one word bounds several emissions."""

    reading: Reading
    sites: tuple[Site, ...]
    joint: Joint | None
    vantage: Vantage
    emission: str | None
    predicted_db: float | None
    read_db: float | None


def statement_of(reading: Reading, situation: Situation, rows: Rows) -> Statement:
    """Return what a reading says; LookupError with the reason where it says nothing here."""
    if reading.kind == "neighbour":
        return _of_a_neighbour(reading, situation, rows)
    looked, air = situation.look(reading)
    if reading.kind == "count":
        return _of_a_count(reading, looked, air, situation, rows)
    if reading.kind == "order":
        return _of_an_order(reading, looked, air, situation, rows)
    emissions = _emissions(reading.emission, reading.multiplex, looked, air, situation)
    if reading.kind == "seen":
        return _of_a_picture(reading, emissions, looked, air, situation, rows)
    e = max(emissions, key=lambda one: looked.level_dbuv[one])
    assert reading.value_db is not None  # Reading sees to it
    value, sd_factor, at_limit = reading.value_db, 1.0, False
    if reading.kind == "mer":
        value, sd_factor, at_limit = cn_of_mer(reading.value_db, reading.mer_limit_db())
    predicted = float((looked.level_dbuv if reading.kind == "level" else looked.cn_db)[e])
    row = _row(rows, reading, looked, e, air, situation, value > predicted, calibrated=True)
    spread = reading.spread_db()[1] * sd_factor
    site: Site = Bound(row, value - predicted, np.inf, spread) if at_limit else Plain(row, value - predicted, spread)
    return Statement(reading, (site,), None, looked, air.fields[e].emission.id, predicted, value)


def cn_of_mer(mer_db: float, limit_db: float) -> tuple[float, float, bool]:
    """C/N behind a MER, how much wider its error is, and whether only a lower bound is left.

    Noise of the signal and of the instrument add as powers, 1/MER = 1/(C/N) + 1/limit (as ratios), hence
    C/N = -10 log(10^(-MER/10) - 10^(-limit/10)) and d(C/N)/d(MER) = 1 / (1 - 10^((MER - limit)/10)). Within 1 dB of
    the limit that grows beyond 4.9, and all that is said is that C/N is at least the MER.
    """
    if mer_db > limit_db - 1:
        return mer_db, 1.0, True
    share = 1 - 10 ** ((mer_db - limit_db) / 10)
    return mer_db - 10 * float(np.log10(share)), 1 / share, False


def _of_a_picture(
    reading: Reading,
    emissions: Sequence[int],
    looked: Vantage,
    air: Air,
    situation: Situation,
    rows: Rows,
) -> Statement:
    near, softness = situation.assumptions.value("breaks_up_db"), situation.assumptions.value("seen_softness_db")
    low, high = {"perfect": (near, np.inf), "breaks up": (-near, near), "not found": (-np.inf, -near)}[
        str(reading.state)
    ]
    bounds = []
    for e in emissions:
        predicted = float(looked.margin_db[e])
        upward = predicted < 0 if reading.state == "perfect" else False
        row = _row(rows, reading, looked, e, air, situation, upward, calibrated=False)
        bounds.append(Bound(row, low - predicted, high - predicted, softness))
    best = max(range(len(emissions)), key=lambda b: looked.margin_db[emissions[b]])
    id_, margin = air.fields[emissions[best]].emission.id, float(looked.margin_db[emissions[best]])
    if len(bounds) == 1 or reading.state == "not found":
        return Statement(reading, tuple(bounds), None, looked, id_, margin, None)
    return Statement(reading, (), best_of(bounds, best), looked, id_, margin, None)


def best_of(bounds: Sequence[Bound], best: int) -> Joint:
    """The best of several emissions lies between the limits of its bound; `best` bears the stand-in.

    With softness s, P(best < limit) is the product of Phi((limit - f) / s) over the emissions.
    """
    rows = tuple(bound.row for bound in bounds)

    def log_likelihood(f: FloatArray) -> FloatArray:
        below_high = np.prod([ndtr((one.high_db - f[:, b]) / one.softness_db) for b, one in enumerate(bounds)], axis=0)
        below_low = np.prod([ndtr((one.low_db - f[:, b]) / one.softness_db) for b, one in enumerate(bounds)], axis=0)
        return np.asarray(np.log(np.maximum(below_high - below_low, SURELY_WRONG)))

    # Another of them may be the one that is seen. This only shapes the proposal, the samples are exact.
    return Joint(rows, log_likelihood, replace(bounds[best], wrong=0.3))


def _of_a_count(reading: Reading, looked: Vantage, air: Air, situation: Situation, rows: Rows) -> Statement:
    """So many multiplexes are received: N(number, count_sd²) over the number above what their modes need."""
    open_ones = [e for e in range(len(air.fields)) if abs(looked.margin_db[e]) < DECIDED_DB]
    sure = {air.multiplex_of[e] for e in range(len(air.fields)) if looked.margin_db[e] >= DECIDED_DB}
    numbered = tuple(_row(rows, reading, looked, e, air, situation, False, calibrated=False) for e in open_ones)
    owners = sorted({air.multiplex_of[e] for e in open_ones} - sure)
    sd = situation.assumptions.value("count_sd")
    count = reading.count or 0

    def log_likelihood(f: FloatArray) -> FloatArray:
        good = f + looked.margin_db[open_ones] >= 0
        columns = [[k for k, e in enumerate(open_ones) if air.multiplex_of[e] == name] for name in owners]
        received = [good[:, mine].any(axis=1) for mine in columns]
        number = len(sure) + np.sum(received, axis=0)
        return np.asarray(-(((number - count) / sd) ** 2) / 2)

    if not numbered:
        raise LookupError("nothing in reach is open: a count says nothing here; kept, not used")
    return Statement(reading, (), Joint(numbered, log_likelihood), looked, None, None, None)


def _of_an_order(reading: Reading, looked: Vantage, air: Air, situation: Situation, rows: Rows) -> Statement:
    places, missing = [], []
    for name in reading.stronger:
        try:
            found = _emissions(name, name, looked, air, situation)
        except LookupError:
            missing.append(name)
            continue
        places.append(max(found, key=lambda e: looked.level_dbuv[e]))
    places = list(dict.fromkeys(places))
    if len(places) < 2:
        raise LookupError(f"of this order fewer than two are on the air in reach; not known: {', '.join(missing)}")
    softness = situation.assumptions.value("order_softness_db")
    wrong = situation.assumptions.value("order_wrong_share")
    bounds = []
    for first, second in itertools.pairwise(places):
        normals = only(looked.loadings, first)
        for key, value in only(looked.loadings, second).items():
            normals[key] = normals.get(key, 0.0) - value
        name = f"{looked.name}:order:{air.fields[first].emission.id}>{air.fields[second].emission.id}"
        row = rows.row(name, {key: value for key, value in normals.items() if value != 0})
        ahead = float(looked.level_dbuv[first] - looked.level_dbuv[second])
        bounds.append(Bound(row, -ahead, np.inf, softness, wrong))
    return Statement(reading, tuple(bounds), None, looked, None, None, None)


def _of_a_neighbour(reading: Reading, situation: Situation, rows: Rows) -> Statement:
    assert reading.pointing_deg is not None  # Reading sees to it
    chain = neighbours_chain(reading.size or "medium")
    looked, air = situation.neighbour(chain, reading.pointing_deg, reading.polarisation or "horizontal")
    off = np.abs((air.signals.bearing_deg - reading.pointing_deg + 180) % 360 - 180)
    meant = [
        e
        for e in np.flatnonzero(off <= NEIGHBOUR_WITHIN_DEG)
        if reading.polarisation in (None, "mixed", air.signals.polarisation[e])
        or air.signals.polarisation[e] == "mixed"
    ]
    if not meant:
        raise LookupError(
            f"nothing in reach is on the air within {NEIGHBOUR_WITHIN_DEG:g}° of {reading.pointing_deg:g}° "
            "with that polarisation: check the bearing, or reach farther"
        )
    e = int(max(meant, key=lambda one: looked.margin_db[one]))
    normals = only(looked.loadings, e, lambda key: not key.startswith(("roof", "aerial:", "feeder:", "off-axis:")))
    row = rows.row(f"{looked.name}:{air.fields[e].emission.id}", normals)
    margin = float(looked.margin_db[e])
    value = situation.assumptions.value
    low, high = (-margin, np.inf) if reading.works else (-np.inf, -margin)
    bound = Bound(row, low, high, value("neighbour_softness_db"), value("neighbour_wrong_share"))
    return Statement(reading, (bound,), None, looked, air.fields[e].emission.id, margin, None)


def _emissions(
    emission: str | None, multiplex: str | None, looked: Vantage, air: Air, situation: Situation
) -> list[int]:
    """Rows of what a reading is of; LookupError if it is not on the air here."""
    ids = [one.emission.id for one in air.fields]
    if emission in ids:
        return [ids.index(str(emission))]
    by_channel = [e for e, one in enumerate(air.fields) if one.emission.channel == emission]
    if by_channel:
        return [max(by_channel, key=lambda e: looked.level_dbuv[e])]
    wanted = situation.multiplex_ids.get(multiplex or "", multiplex)
    owned = [e for e, owner in enumerate(air.multiplex_of) if owner == wanted]
    if not owned:
        raise LookupError(
            f'"{emission or multiplex}" is not on the air in reach of this roof: '
            "check the name and its dates; kept, not used"
        )
    return owned


def _row(
    rows: Rows,
    reading: Reading,
    looked: Vantage,
    e: int,
    air: Air,
    situation: Situation,
    upward: bool,
    calibrated: bool,
) -> int:
    """The quantity a reading shows: the model's errors and those of the circumstances."""
    value = situation.assumptions.value
    emission = air.fields[e].emission.id
    day = reading.day.isoformat() if reading.day else "undated"
    stand = f"{looked.chain.aerial.id}:{reading.aerial_agl_m or 0:g}"
    normals = only(looked.loadings, e)
    normals[f"position:{stand}:{emission}"] = value("position_sd_db")
    weather = (situation.enhancement_1_db if upward else situation.fade_99_db).get(emission, 0.0) / QUANTILE_99
    if weather > 0:
        normals[f"weather:{air.masts[e]}:{day}"] = weather
    if reading.aerial_agl_m is not None:
        normals[f"height:{stand}:{air.masts[e]}"] = value("other_height_sd_db")
    if calibrated:
        common = reading.spread_db()[0]
        if common > 0:
            normals[f"meter:{reading.instrument}"] = common
    else:
        normals[f"set:{looked.chain.receiver.id}"] = value("sensitivity_sd_db")
    quantity = reading.kind if calibrated else "seen"
    return rows.row(f"{looked.name}:{stand}:{quantity}:{emission}:{day}:{reading.instrument}:{upward}", normals)
