"""How errors of interferers and network members move a margin.

The margin is not linear in the errors of what disturbs it. It is replaced by a chord: if interference and
noise stand at r = I/N and the interference as a whole has the spread s,

    slope = (D(+s) - D(-s)) / 2 s,     D(x) = 10 log(1 + r 10^(x/10)),

rises from 0 (noise alone) to 1 (interference alone), and an error of an interferer that makes the share q
of I moves the margin by -slope q. s is the root of the sum of (q_i s_i)^2. The chord keeps more of a rare
strong rise than the tangent does and stays a normal, keyed by the same names as the errors of wanted
emissions: what disturbs one and is wanted elsewhere moves both. Errors that wanted and interferer have in
common cancel as far as the slope goes: what moves all signals alike counts with the share of noise in N + I,
and an interferer on the wanted emission's own mast takes its path and band errors off again. Between other
masts the correlation over bearing is left out. Members of a network carry their shares of the useful power.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from app.assumptions import Assumptions
from app.chain import aerial as response
from app.chance import ErrorPart
from app.company import STATES, Company, State
from app.disturbance import Ear, Effect
from app.interference import nuisance_power

FloatArray = NDArray[np.float64]

STRONGEST = 3  # interferers with keys of their own for each wanted emission; the others share one
NAMED_FROM_DB = 0.3  # those that move a margin by less share it too


@dataclass(frozen=True, slots=True)
class Disturbers:
    """Spreads of all interferers through one chain, (i,) each, with the names they are keyed by."""

    ids: tuple[str, ...]
    masts: tuple[str, ...]
    bands: tuple[str, ...]
    path_db: FloatArray
    band_db: float
    emission_db: float
    erp_db: FloatArray
    enhancement_db: FloatArray

    def variance_db2(self, state: State) -> FloatArray:
        """Variance of each for any pointing, (i,): without that of the rejection off the axis [dB²]."""
        fixed = self.path_db**2 + self.band_db**2 + self.emission_db**2 + self.erp_db**2
        return np.asarray(fixed + self.enhancement_db**2 if state == "b" else fixed)


def disturbers_of(
    company: Company, masts: tuple[str, ...], bands: tuple[str, ...], assumptions: Assumptions
) -> Disturbers:
    """Gather the spreads of all interferers, whose masts and bands are named as those of wanted ones."""
    ones = company.interferers
    return Disturbers(
        tuple(one.emission.id for one in ones),
        masts,
        bands,
        np.array([one.path_sd_db for one in ones]),
        assumptions.value("band_sd_db"),
        assumptions.value("emission_sd_db"),
        np.where([one.doubtful_erp for one in ones], assumptions.value("erp_unknown_sd_db"), 0.0),
        assumptions.value("enhancement_sd_share") * np.array([one.enhancement_db for one in ones]),
    )


def rejection_sd_db(ear: Ear, pointing_deg: FloatArray | float) -> FloatArray:
    """Spread of the rejection of each kind of interferers, (…, k): off the axis, and cross-polar."""
    kinds = ear.company.kinds
    off_axis = response.off_axis_deg(kinds.bearing_deg, pointing_deg)
    beyond = np.where(off_axis > ear.chain.aerial.beamwidth_deg / 2, ear.assumptions.value("off_axis_sd_db"), 0.0)
    crossed = np.array([one not in (ear.polarisation, "mixed") for one in kinds.polarisation], dtype=bool)
    return np.asarray(np.where(crossed, np.maximum(beyond, ear.assumptions.value("cross_polar_sd_db")), beyond))


@dataclass(frozen=True, slots=True)
class Squares:
    """Squares of what each kind of interferers would bring into each wanted channel, in one state. (e, k) each."""

    plain: FloatArray
    moving: FloatArray  # each times the variance of its interferer for any pointing


def squares_of(ear: Ear, disturbers: Disturbers) -> dict[State, Squares]:
    """Gather what the spread of the interference takes at any pointing."""
    company = ear.company
    found: dict[State, Squares] = {}
    for state in STATES:
        squares = company.brought(state, ear.on_axis[state]) ** 2
        moving = squares * disturbers.variance_db2(state)[company.pairs.disturber]
        found[state] = Squares(company.by_kind(squares), company.by_kind(moving))
    return found


def slope_and_spread(effect: Effect, squares: Squares, rejection_db: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Slope of each margin over the interference as a whole, and that one's spread [dB], (…, e) both.

    `rejection_db` (…, k) is the spread of the rejection of each kind of interferers.
    """
    if not effect.ear.company.pairs.disturber.size:
        return np.zeros(effect.i_over_c.shape), np.zeros(effect.i_over_c.shape)
    left = effect.left**2
    moving = nuisance_power(left, squares.moving) + nuisance_power(left * rejection_db**2, squares.plain)
    with np.errstate(invalid="ignore", divide="ignore"):
        spread = np.where(moving > 0, np.sqrt(moving) / (effect.i_over_c * effect.carrier), 0.0)
    step = np.maximum(spread, 1e-3)
    ratio = 10 ** (step / 10)
    rise = 10 * np.log10((1 + effect.i_over_n * ratio) / (1 + effect.i_over_n / ratio))
    return rise / (2 * step), spread


@dataclass(frozen=True, slots=True)
class Moved:
    """What the company's errors do to the margins of one chain turned one way. (e,) arrays."""

    parts: tuple[ErrorPart, ...]
    leader: NDArray[np.intp]  # whose errors a margin mainly carries: itself, or the network's strongest
    leader_share: FloatArray  # of the carrier
    path_off_db: FloatArray  # taken off the path error: interferers on the same mast
    band_off_db: FloatArray
    common: FloatArray  # factor on what moves all signals alike


def moved_by(
    ear: Ear,
    effects: dict[State, Effect],
    state_b: NDArray[np.bool_],
    disturbers: Disturbers,
    pointing_deg: float,
) -> Moved:
    """Parts of the errors for one pointing, each margin in the state that decides it."""
    company, count = ear.company, len(state_b)
    by_kind, squares = rejection_sd_db(ear, pointing_deg), squares_of(ear, disturbers)
    rejection = by_kind[company.kinds.of]
    leader, leader_share, second = _network_shares(company, effects, state_b)
    path_off, band_off, common = np.zeros(count), np.zeros(count), np.ones(count)
    ranks = [_Rank(count) for _ in range(STRONGEST)]
    rest = np.zeros(count)
    masts = np.array(disturbers.masts, dtype=object)
    for state in STATES:
        effect, decides = effects[state], state_b == (state == "b")
        slope, _ = slope_and_spread(effect, squares[state], by_kind)
        common = np.where(decides, 1 / (1 + effect.i_over_n), common)
        ours = decides[company.pairs.wanted]
        wanted, who = company.pairs.wanted[ours], company.pairs.disturber[ours]
        share = slope[wanted] * effect.brought[ours] / (effect.i_over_c * effect.carrier)[wanted]
        moves_db = share * np.sqrt(disturbers.variance_db2(state) + rejection**2)[who]
        order = np.lexsort((-moves_db, wanted))  # by wanted emission, what moves it most first
        wanted, who, share, moves_db = wanted[order], who[order], share[order], moves_db[order]
        place = np.arange(len(wanted)) - np.searchsorted(wanted, wanted)
        named = (place < STRONGEST) & (moves_db >= NAMED_FROM_DB)
        rest += np.sqrt(np.bincount(wanted[~named], moves_db[~named] ** 2, count))
        for number, rank in enumerate(ranks):
            here = named & (place == number)
            e, i, moves = wanted[here], who[here], share[here]
            same_mast = masts[i] == masts[leader[e]]
            path_off[e] += np.where(same_mast, moves * disturbers.path_db[i], 0.0)
            band_off[e] += np.where(same_mast, moves * disturbers.band_db, 0.0)
            rank.put(e, i, moves, disturbers, rejection[i], state, same_mast)
    ids = disturbers.ids
    parts = [part for rank in ranks for part in rank.parts(ear.chain.aerial.id, disturbers)]
    parts.append(ErrorPart(tuple(f"interference:{ids[e]}" for e in range(count)), rest))
    parts += [
        ErrorPart(tuple(f"path:{disturbers.masts[i]}" for i in who), share * disturbers.path_db[who])
        for who, share in second
    ]
    return Moved(tuple(parts), leader, leader_share, path_off, band_off, common)


class _Rank:
    """The interferers of one rank, one for each wanted emission, as parts of the error."""

    def __init__(self, count: int) -> None:
        self.who = np.zeros(count, dtype=int)
        self.sd_db = {name: np.zeros(count) for name in ("path", "band", "emission", "erp", "enhancement", "off-axis")}

    def put(
        self,
        e: NDArray[np.intp],
        i: NDArray[np.intp],
        moves: FloatArray,
        ones: Disturbers,
        rejection_db: FloatArray,
        state: State,
        same_mast: NDArray[np.bool_],
    ) -> None:
        self.who[e] = i
        # Signs: an interferer above its median lowers the margin.
        self.sd_db["path"][e] = np.where(same_mast, 0.0, -moves * ones.path_db[i])
        self.sd_db["band"][e] = np.where(same_mast, 0.0, -moves * ones.band_db)
        self.sd_db["emission"][e] = -moves * ones.emission_db
        self.sd_db["erp"][e] = -moves * ones.erp_db[i]
        self.sd_db["enhancement"][e] = -moves * ones.enhancement_db[i] if state == "b" else 0.0
        self.sd_db["off-axis"][e] = -moves * rejection_db

    def parts(self, aerial_id: str, ones: Disturbers) -> list[ErrorPart]:
        keys = {
            "path": [f"path:{ones.masts[i]}" for i in self.who],
            "band": [f"band:{ones.masts[i]}:{ones.bands[i]}" for i in self.who],
            "emission": [f"emission:{ones.ids[i]}" for i in self.who],
            "erp": [f"erp:{ones.ids[i]}" for i in self.who],
            "enhancement": [f"enhancement:{ones.masts[i]}" for i in self.who],
            "off-axis": [f"off-axis:{aerial_id}:{ones.ids[i]}" for i in self.who],
        }
        return [ErrorPart(tuple(keys[name]), sd) for name, sd in self.sd_db.items() if sd.any()]


def _network_shares(
    company: Company, effects: dict[State, Effect], state_b: NDArray[np.bool_]
) -> tuple[NDArray[np.intp], FloatArray, list[tuple[NDArray[np.intp], FloatArray]]]:
    """Leader and its share of the carrier for each margin, and the second member with its share."""
    count = len(state_b)
    leader, share = np.arange(count), np.ones(count)
    second, second_share = np.arange(count), np.zeros(count)
    for one in company.networks:
        effect = effects["b" if state_b[one.members[0]] else "a"]
        # carrier / gain is a member's own power; with its useful share it is what the member brings
        brings = effect.useful[one.members] * 10 ** (-effect.gain_db[one.members] / 10)
        order = np.argsort(-brings)
        leader[one.members], share[one.members] = one.members[order[0]], brings[order[0]]
        second[one.members], second_share[one.members] = one.members[order[1]], brings[order[1]]
    return leader, share, [(second, second_share)] if company.networks else []
