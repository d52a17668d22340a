"""From the field at the roof to margins with their errors, for one chain turned one way."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from app.air import Air
from app.assumptions import Assumptions
from app.chain.parts import AerialPolarisation, Chain
from app.chance import Cells, Knowledge, capped, exceedance_through, not_too_much, received, rows_of
from app.company import STATES, Company, State
from app.disturbance import Ear, Effect, disturbed, ear_of, effect_of
from app.disturbance_errors import moved_by, rejection_sd_db, slope_and_spread, squares_of
from app.link_budget import Reception, is_overload, receive
from app.margin_errors import (
    air_disturbers,
    of_an_ordinary_day,
    parts_of,
    path_error,
    wanted_errors,
    wanted_rejection_sd_db,
)
from app.roof import Roof

FloatArray = NDArray[np.float64]

TIE_COUNT = 0.005  # expected multiplexes: directions closer than this are as good
NEVER = 1e-9  # chance of an emission that none of the draws would show
HOPELESS_BELOW = 0.01  # chance of an emission that sways no pointing
BEARINGS = np.arange(360.0)


@dataclass(frozen=True, slots=True)
class Swept:
    """Every emission for each whole degree of pointing, in one polarisation."""

    chance: FloatArray  # (360, e)
    lost_db: FloatArray  # (360, e) what interference takes off C/N, in the time state that decides


@dataclass(frozen=True, slots=True)
class Turned:
    """One chain turned one way: what it receives, and how surely."""

    chain: Chain
    pointing_deg: float
    polarisation: AerialPolarisation
    faded: Reception  # time state (a): the wanted signal at its availability, interferers at their medians
    raised: Reception  # time state (b): the wanted signal at its median, interferers risen
    median: Reception  # all at their medians
    company: Company
    effects: dict[State, Effect]
    cells: Cells
    level: Cells  # of the levels on an ordinary day, relative to their medians
    sigma_db: FloatArray  # (e,) of the cells
    level_sd_db: FloatArray  # (e,)
    read_db: FloatArray  # (e,) by how much readings moved the margin
    enough: FloatArray  # (e,) chance that the margin is at least 0
    chance: FloatArray  # (e,) likewise, less that of too much level
    sweep_count: FloatArray  # (360,) expected multiplexes for each whole degree, this polarisation
    sweep: Swept  # each emission for each whole degree, likewise

    @property
    def margin_db(self) -> FloatArray:
        """Margin at the deciding outlet after the worse of the two time states. (e,)"""
        return np.minimum(self.faded.margin_db, self.raised.margin_db)

    def state(self, e: int) -> State:
        """Time state that decides for one emission."""
        return "b" if self.raised.margin_db[e] < self.faded.margin_db[e] else "a"

    def held_back(self, outlet: int | None = None) -> list[HeldBack]:
        """What holds each emission back, in the state that decides, at one outlet; None: at those that count. (e,)

        Too much level, interference above noise, time where only a fade does it, or else noise.
        """
        overloaded = is_overload(self.median if outlet is None else self.median.outlets[outlet])
        disturbed = {state: effect.i_over_n > 1 for state, effect in self.effects.items()}
        by_time = (self.median.margin_db >= 0) & (self.margin_db < 0)
        found = []
        for e in range(len(by_time)):
            state = self.state(e)
            if overloaded[e]:
                found.append(HeldBack("overload", state, None, None))
            elif disturbed[state][e]:
                found.append(HeldBack("interference", state, *self.effects[state].strongest(e)))
            else:
                found.append(HeldBack("time" if by_time[e] else "noise", state, None, None))
        return found

    def held_back_by(self, air: Air, multiplexes: Sequence[str]) -> tuple[str, ...]:
        """What holds back the best emission of each multiplex. (m,)"""
        rows, held = rows_of(air.multiplex_of), self.held_back()
        return tuple(held[max(rows[name], key=lambda e: self.chance[e])].limit for name in multiplexes)


@dataclass(frozen=True, slots=True)
class HeldBack:
    """What holds an emission back."""

    limit: str  # "noise", "interference", "overload", "time"
    state: State
    by: int | None  # row of the strongest interferer
    next_db: float | None  # how far below it all others together stand; None: there are none


def turn(
    chain: Chain,
    air: Air,
    roof: Roof,
    counted: Sequence[str],
    assumptions: Assumptions,
    known: Knowledge | None = None,
) -> Turned:
    """Turn a chain to where it was said to point, else to the whole degree with the largest expected count.

    `counted` are the multiplexes that count for the choice, `known` is what readings say of the errors.
    Ties go to the direction nearest to the bearing of the strongest emission.
    """
    best: tuple[float, float, Ear, AerialPolarisation, FloatArray, Swept] | None = None
    for polarisation in _polarisations(chain):
        ear = ear_of(chain, polarisation, air.company, assumptions, roof.surroundings)
        swept = _sweep(ear, polarisation, air, roof, assumptions, known)
        counts = _expected_by_degree(swept.chance, air, counted)
        pointing_deg = chain.pointing_deg if chain.pointing_deg is not None else _best_bearing(counts, air)
        count = float(counts[round(pointing_deg) % 360])
        if best is None or count > best[0] + 1e-9:
            best = (count, pointing_deg, ear, polarisation, counts, swept)
    assert best is not None  # there is always a polarisation
    _, pointing_deg, ear, polarisation, counts, swept = best
    stacked = receive(
        chain,
        air.signals,
        np.stack([air.used_dbuv_m, air.used_dbuv_m - air.fade_db]),
        pointing_deg,
        polarisation,
        assumptions,
        roof.surroundings,
        load_dbuv_m=air.used_dbuv_m,
        beside=air.beside,
    )
    alone, alone_faded = stacked.of_field(0), stacked.of_field(1)
    left = ear.left(pointing_deg)
    effects: dict[State, Effect] = {
        "a": effect_of(ear, alone_faded, left, "a"),
        "b": effect_of(ear, alone, left, "b"),
    }
    faded, raised = disturbed(alone_faded, effects["a"]), disturbed(alone, effects["b"])
    median = disturbed(alone, effect_of(ear, alone, left, "a"))
    state_b = raised.margin_db < faded.margin_db
    moved = moved_by(ear, effects, state_b, air_disturbers(air, assumptions), pointing_deg)
    cells = Cells(
        np.where(state_b, raised.margin_db, faded.margin_db),
        path_error(air, assumptions, moved),
        parts_of(chain, polarisation, air, faded, assumptions, state_b, moved),
        known,
    )
    own_path, own_parts = wanted_errors(chain, polarisation, air, median, assumptions)
    level = Cells(np.zeros_like(air.fade_db), own_path, of_an_ordinary_day(own_parts), known)
    sigma_db, level_sd_db, enough = cells.sigma_db, level.sigma_db, cells.chance
    return Turned(
        chain,
        pointing_deg,
        polarisation,
        faded,
        raised,
        median,
        air.company,
        effects,
        cells,
        level,
        sigma_db,
        level_sd_db,
        cells.mean_db - cells.median_db,
        enough,
        not_too_much(enough, median.headroom_db, median.of_loudest(level_sd_db)),
        counts,
        swept,
    )


def multiplex_chances(turned: Turned, air: Air, multiplexes: Sequence[str]) -> tuple[NDArray[np.bool_], FloatArray]:
    """Return draws of what is received (draws, m) and the chance of each multiplex (m,).

    One emission alone has its closed form. Of alternatives the best one's chance of enough signal has it; what the
    others add, and too much level takes, is counted over the joint draws. What is hopeless is not drawn.
    """
    median = turned.median
    rows = [e for e, chance in enumerate(turned.enough.tolist()) if chance >= NEVER]
    enough = turned.cells.of(rows).draws()
    margins = enough
    if rows:
        margins = capped(enough, median.headroom_db[rows], turned.level.of([int(median.loudest)]).draws()[:, 0])
    draws = received(margins, [air.multiplex_of[e] for e in rows], multiplexes)
    owned, drawn = rows_of(air.multiplex_of), {e: row for row, e in enumerate(rows)}
    chance = np.empty(len(multiplexes))
    for m, name in enumerate(multiplexes):
        best = max(owned[name], key=lambda e: turned.chance[e])
        chance[m] = turned.chance[best]
        if len(owned[name]) > 1 and best in drawn:
            counted = draws[:, m].mean() - (enough[:, drawn[best]] >= 0).mean()
            chance[m] = max(chance[m], turned.enough[best] + counted)
    return draws, chance


def expected_count(
    chance: FloatArray, multiplex_of: Sequence[str], counted: Sequence[str], acting: NDArray[np.bool_] | None = None
) -> FloatArray:
    """Expected multiplexes from chances of emissions (..., e). (...)"""
    each = chance_of_each(chance, multiplex_of, counted, acting)
    return sum(each.values(), np.zeros(chance.shape[:-1]))


def chance_of_each(
    chance: FloatArray, multiplex_of: Sequence[str], counted: Sequence[str], acting: NDArray[np.bool_] | None = None
) -> dict[str, FloatArray]:
    """Chance of each multiplex (...) from chances of emissions (..., e), alternatives taken as independent.

    `acting` leaves out members of a network that act through another one.
    """
    rows = rows_of(multiplex_of)
    missed = 1 - chance
    found: dict[str, FloatArray] = {}
    for name in counted:
        owned = [e for e in rows.get(name, []) if acting is None or acting[e]]
        found[name] = 1 - np.prod(missed[..., owned], axis=-1)
    return found


def _polarisations(chain: Chain) -> tuple[AerialPolarisation, ...]:
    return (chain.polarisation,) if chain.polarisation else chain.aerial.mountings


def _sweep(
    ear: Ear,
    polarisation: AerialPolarisation,
    air: Air,
    roof: Roof,
    assumptions: Assumptions,
    known: Knowledge | None,
) -> Swept:
    """Chance of each emission, and what interference takes, for each whole degree."""
    turned = BEARINGS[:, None]
    squares = squares_of(ear, air_disturbers(air, assumptions))
    rejection, left = rejection_sd_db(ear, turned), ear.left(turned)
    shape = (len(BEARINGS), len(air.fields))
    margin, moved, lost = np.full(shape, np.inf), np.zeros(shape), np.zeros(shape)
    both = receive(
        ear.chain,
        air.signals,
        np.stack([air.used_dbuv_m - air.fade_db, air.used_dbuv_m])[:, None],
        turned,
        polarisation,
        assumptions,
        roof.surroundings,
        load_dbuv_m=air.used_dbuv_m,
        beside=air.beside,
    )
    for number, state in enumerate(STATES):
        alone = both.of_field(number)
        effect = effect_of(ear, alone, left, state)
        reception = disturbed(replace(alone, outlets=()), effect)  # where it decides, not at each outlet
        slope, spread = slope_and_spread(effect, squares[state], rejection)
        decides = reception.margin_db < margin
        moved = np.where(decides, slope * spread, moved)
        lost = np.where(decides, effect.cn_db - reception.cn_db, lost)
        margin = np.minimum(margin, reception.margin_db)
    path, parts = wanted_errors(ear.chain, polarisation, air, reception, assumptions)
    fixed = Cells(np.zeros_like(air.path_sd_db), path, parts[:-1], known)
    turned_away = wanted_rejection_sd_db(ear.chain.aerial, polarisation, air, reception, assumptions)
    sigma_db = np.sqrt(fixed.sigma_db**2 + turned_away**2 + moved**2)
    enough = exceedance_through(margin + fixed.mean_db, sigma_db, fixed.curved)
    level = replace(fixed, parts=of_an_ordinary_day(parts[:-1]))
    level_sd_db = np.sqrt(level.sigma_db**2 + turned_away**2)
    return Swept(not_too_much(enough, reception.headroom_db, reception.of_loudest(level_sd_db)), lost)


def _expected_by_degree(chances: FloatArray, air: Air, counted: Sequence[str]) -> FloatArray:
    """Expected multiplexes for each whole degree; what no direction brings does not sway the choice. (360,)"""
    within_reach = {owner for e, owner in enumerate(air.multiplex_of) if float(chances[:, e].max()) >= HOPELESS_BELOW}
    counted = [one for one in counted if one in within_reach]
    return expected_count(chances, air.multiplex_of, counted, air.company.acting)


def _best_bearing(counts: FloatArray, air: Air) -> float:
    """Return the whole degree with the largest count; of those as good, the one on the strongest mast.

    Where no mast stands in a direction as good as the best, it is the one nearest to the strongest.
    """
    as_good = np.flatnonzero(counts >= counts.max() - TIE_COUNT)
    by_strength = air.signals.bearing_deg[np.argsort(-air.used_dbuv_m, kind="stable")]
    away = np.abs((as_good - by_strength[:, None] + 180) % 360 - 180)  # (e, candidates)
    on_a_mast = away.min(axis=1) <= 0.5
    row = int(np.argmax(on_a_mast)) if on_a_mast.any() else 0
    return float(as_good[int(np.argmin(away[row]))])
