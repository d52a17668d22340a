"""From the field at the roof to margins with their errors, for one chain turned one way."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from app.assumptions import Assumptions
from app.at_aerial import room_sd_db
from app.chain.parts import Aerial, AerialPolarisation, Chain
from app.chance import Cells, ErrorPart, Knowledge, PathError, capped, exceedance, not_too_much, received
from app.disturbance import Company, Effect, State, company_of, disturbed, ear_of, effect_of
from app.disturbance_errors import Disturbers, Moved, disturbers_of, moved_by, rejection_sd_db, slope_and_spread
from app.fields import EmissionField
from app.interferers import Interferer
from app.link_budget import Reception, Signals, is_overload, receive
from app.roof import Roof
from app.systems import mode_of
from terrain.geodesy import distance_and_bearing

FloatArray = NDArray[np.float64]

SAME_MAST_KM = 1.0
BAND_EDGES_MHZ = (300.0, 582.0)  # Bands III, IV and V
TIE_COUNT = 0.005  # expected multiplexes: directions closer than this are as good
HOPELESS_BELOW = 0.01  # chance of an emission that sways no pointing
BEARINGS = np.arange(360.0)


@dataclass(frozen=True, slots=True)
class Air:
    """All emissions with an answer at a roof, as columns."""

    fields: tuple[EmissionField, ...]
    signals: Signals
    used_dbuv_m: FloatArray  # (e,) median
    fade_db: FloatArray  # (e,)
    company: Company  # what disturbs them, and what acts together
    company_masts: tuple[str, ...]  # (i,) named as masts are
    company_bands: tuple[str, ...]  # (i,)
    path_sd_db: FloatArray  # (e,)
    masts: tuple[str, ...]  # (e,) transmitters within 1 km share one name
    bands: tuple[str, ...]  # (e,)
    doubtful_erp: NDArray[np.bool_]  # (e,)

    @property
    def multiplex_of(self) -> tuple[str, ...]:
        """Multiplex of each emission."""
        return tuple(field.emission.multiplex_id for field in self.fields)


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
    chance: FloatArray  # (e,)
    sweep_count: FloatArray  # (360,) expected multiplexes for each whole degree, this polarisation
    sweep_chance: FloatArray  # (360, e) chance of each emission for each whole degree, likewise

    @property
    def margin_db(self) -> FloatArray:
        """Margin at the deciding outlet after the worse of the two time states. (e,)"""
        return np.minimum(self.faded.margin_db, self.raised.margin_db)

    def state(self, e: int) -> State:
        """Time state that decides for one emission."""
        return "b" if self.raised.margin_db[e] < self.faded.margin_db[e] else "a"

    def limit(self, e: int) -> str:
        """What holds one emission back: too much level, interference above noise, time where only a fade does it."""
        return self.held_back(e).limit

    def held_back(self, e: int, outlet: int | None = None) -> HeldBack:
        """What holds one emission back, in the state that decides, at one outlet; None: at those that count."""
        state = self.state(e)
        reception, effect = (self.raised if state == "b" else self.faded), self.effects[state]
        place = self.median if outlet is None else self.median.outlets[outlet]
        if is_overload(place)[e]:
            return HeldBack("overload", state, None, None)
        if float(effect.i_over_n[e]) > 1:
            return HeldBack("interference", state, *effect.strongest(self.company, e))
        by_time = self.median.margin_db[e] >= 0 > reception.margin_db[e]
        return HeldBack("time" if by_time else "noise", state, None, None)

    def held_back_by(self, air: Air, multiplexes: Sequence[str]) -> tuple[str, ...]:
        """What holds back the best emission of each multiplex. (m,)"""
        best = [
            max((e for e, owner in enumerate(air.multiplex_of) if owner == name), key=lambda e: self.chance[e])
            for name in multiplexes
        ]
        return tuple(self.limit(e) for e in best)


@dataclass(frozen=True, slots=True)
class HeldBack:
    """What holds an emission back."""

    limit: str  # "noise", "interference", "overload", "time"
    state: State
    by: int | None  # row of the strongest interferer
    next_db: float | None  # how far below it all others together stand; None: there are none


def air_of(fields: Sequence[EmissionField], interferers: Sequence[Interferer]) -> Air:
    """Gather the emissions that have an answer, and what disturbs them: those themselves first, in their order."""
    kept = tuple(field for field in fields if field.path is not None)
    modes = [mode_of(field.emission.system, field.emission.mode) for field in kept]
    signals = Signals(
        frequency_mhz=np.array([field.emission.frequency_mhz for field in kept]),
        bandwidth_mhz=np.array(
            [mode.noise_bandwidth_mhz(field.emission.bandwidth_mhz) for mode, field in zip(modes, kept, strict=True)]
        ),
        required_cn_db=np.array([mode.required_cn_db for mode in modes]),
        receiver_noise_figure_db=np.array([mode.noise_figure_db for mode in modes]),
        bearing_deg=np.array([field.bearing_deg for field in kept]),
        polarisation=tuple(field.emission.polarisation for field in kept),
        mode_source=tuple(mode.source for mode in modes),
    )
    return Air(
        fields=kept,
        signals=signals,
        used_dbuv_m=np.array([field.used_dbuv_m for field in kept]),
        fade_db=np.array([field.fade_db for field in kept]),
        company=company_of(kept, interferers),
        company_masts=_named_masts(kept, interferers),
        company_bands=tuple(_band(one.emission.frequency_mhz) for one in interferers),
        path_sd_db=np.array([field.path.sd_db for field in kept if field.path]),
        masts=_masts(kept),
        bands=tuple(_band(field.emission.frequency_mhz) for field in kept),
        doubtful_erp=np.array([field.erp_is_doubtful for field in kept], dtype=bool),
    )


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
    best: tuple[float, float, AerialPolarisation, FloatArray, FloatArray] | None = None
    for polarisation in _polarisations(chain):
        chances = _sweep(chain, polarisation, air, roof, assumptions, known)
        counts = _expected_by_degree(chances, air, counted)
        pointing_deg = chain.pointing_deg if chain.pointing_deg is not None else _best_bearing(counts, air)
        count = float(counts[round(pointing_deg) % 360])
        if best is None or count > best[0] + 1e-9:
            best = (count, pointing_deg, polarisation, counts, chances)
    assert best is not None  # there is always a polarisation
    _, pointing_deg, polarisation, counts, chances = best
    ear = ear_of(chain, polarisation, air.company, assumptions, roof.surroundings)
    alone, alone_faded = (
        receive(
            chain,
            air.signals,
            field,
            pointing_deg,
            polarisation,
            assumptions,
            roof.surroundings,
            load_dbuv_m=air.used_dbuv_m,
        )
        for field in (air.used_dbuv_m, air.used_dbuv_m - air.fade_db)
    )
    left = ear.left(pointing_deg)
    effects: dict[State, Effect] = {
        "a": effect_of(ear, alone_faded, left, "a"),
        "b": effect_of(ear, alone, left, "b"),
    }
    faded, raised = disturbed(alone_faded, effects["a"]), disturbed(alone, effects["b"])
    median = disturbed(alone, effect_of(ear, alone, left, "a"))
    state_b = raised.margin_db < faded.margin_db
    moved = moved_by(ear, effects, state_b, _disturbers(air, assumptions), pointing_deg)
    cells = Cells(
        np.where(state_b, raised.margin_db, faded.margin_db),
        _path_error(air, assumptions, moved),
        _parts(chain, polarisation, air, faded, assumptions, state_b, moved),
        known,
    )
    chance = not_too_much(cells.chance, median.headroom_db, median.of_loudest(cells.sigma_db))
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
        chance,
        counts,
        chances,
    )


def multiplex_chances(turned: Turned, air: Air, multiplexes: Sequence[str]) -> tuple[NDArray[np.bool_], FloatArray]:
    """Return draws of what is received (draws, m) and the chance of each multiplex (m,).

    One emission alone has its closed form; alternatives are counted over the joint draws.
    """
    median = turned.median
    margins = capped(turned.cells.draws(), turned.cells.median_db, median.headroom_db, int(median.loudest))
    draws = received(margins, air.multiplex_of, multiplexes)
    chance = draws.mean(axis=0)
    for m, name in enumerate(multiplexes):
        alone = [e for e, owner in enumerate(air.multiplex_of) if owner == name]
        if len(alone) == 1:
            chance[m] = turned.chance[alone[0]]
    return draws, chance


def expected_count(
    chance: FloatArray, multiplex_of: Sequence[str], counted: Sequence[str], acting: NDArray[np.bool_] | None = None
) -> FloatArray:
    """Expected multiplexes from chances of emissions (..., e), alternatives taken as independent. (...)

    `acting` leaves out members of a network that act through another one.
    """
    total = np.zeros(chance.shape[:-1])
    for name in counted:
        owned = [e for e, owner in enumerate(multiplex_of) if owner == name and (acting is None or acting[e])]
        total += 1 - np.prod(1 - chance[..., owned], axis=-1)
    return total


def _polarisations(chain: Chain) -> tuple[AerialPolarisation, ...]:
    given = chain.polarisation or chain.aerial.polarisation
    return (given,) if given else ("horizontal", "vertical")


def _sweep(
    chain: Chain,
    polarisation: AerialPolarisation,
    air: Air,
    roof: Roof,
    assumptions: Assumptions,
    known: Knowledge | None,
) -> FloatArray:
    """Chance of each emission for each whole degree. (360, e)"""
    turned = BEARINGS[:, None]
    ear = ear_of(chain, polarisation, air.company, assumptions, roof.surroundings)
    disturbers = _disturbers(air, assumptions)
    rejection, left = rejection_sd_db(ear, turned), ear.left(turned)
    margin, moved = np.full((len(BEARINGS), len(air.fields)), np.inf), np.zeros((len(BEARINGS), len(air.fields)))
    fields: tuple[tuple[State, FloatArray], ...] = (("a", air.used_dbuv_m - air.fade_db), ("b", air.used_dbuv_m))
    for state, field in fields:
        alone = receive(
            chain,
            air.signals,
            field,
            turned,
            polarisation,
            assumptions,
            roof.surroundings,
            load_dbuv_m=air.used_dbuv_m,
        )
        effect = effect_of(ear, alone, left, state)
        reception = disturbed(alone, effect)
        slope, spread = slope_and_spread(ear, effect, disturbers.spread_db(state, rejection))
        moved = np.where(reception.margin_db < margin, slope * spread, moved)
        margin = np.minimum(margin, reception.margin_db)
    path, parts = wanted_errors(chain, polarisation, air, reception, assumptions)
    fixed = Cells(np.zeros_like(air.path_sd_db), path, parts[:-1], known)
    turned_away = _rejection_sd_db(chain.aerial, polarisation, air, reception, assumptions)
    sigma_db = np.sqrt(fixed.sigma_db**2 + turned_away**2 + moved**2)
    enough = exceedance(margin + fixed.mean_db, sigma_db)
    return not_too_much(enough, reception.headroom_db, reception.of_loudest(sigma_db))


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


def _path_error(air: Air, assumptions: Assumptions, moved: Moved) -> PathError:
    """Errors of the paths; a network's margin carries its strongest member's."""
    sd_db = moved.leader_share * air.path_sd_db[moved.leader] - moved.path_off_db
    return PathError(
        masts=tuple(air.masts[e] for e in moved.leader),
        bearing_deg=air.signals.bearing_deg[moved.leader],
        sd_db=np.maximum(sd_db, 0.0),
        correlation=assumptions.value("path_bearing_correlation"),
        scale_deg=assumptions.value("path_bearing_scale_deg"),
    )


def _disturbers(air: Air, assumptions: Assumptions) -> Disturbers:
    return disturbers_of(air.company, air.company_masts, air.company_bands, assumptions)


def _parts(
    chain: Chain,
    polarisation: AerialPolarisation,
    air: Air,
    reception: Reception,
    assumptions: Assumptions,
    state_b: NDArray[np.bool_],
    moved: Moved,
) -> tuple[ErrorPart, ...]:
    """Errors of one chain turned one way, each margin in the state that decides it."""
    ids = [air.fields[e].emission.id for e in moved.leader]
    rejection = ErrorPart(
        tuple(f"off-axis:{chain.aerial.id}:{name}" for name in ids),
        moved.leader_share * _rejection_sd_db(chain.aerial, polarisation, air, reception, assumptions)[moved.leader],
    )
    own = []
    for part in _parts_of_any_pointing(chain, air, assumptions):
        keys, sd_db = tuple(part.keys[e] for e in moved.leader), part.sd_db[moved.leader]
        kind = keys[0].split(":")[0] if keys else ""
        sd_db = sd_db * moved.common if kind in ("roof", "aerial", "feeder") else sd_db * moved.leader_share
        if kind == "band":
            sd_db = np.maximum(sd_db - moved.band_off_db, 0.0)
        if kind == "fade":
            sd_db = np.where(state_b, 0.0, sd_db)
        own.append(ErrorPart(keys, sd_db))
    return (*own, rejection, *moved.parts)


def _parts_of_any_pointing(chain: Chain, air: Air, assumptions: Assumptions) -> tuple[ErrorPart, ...]:
    ids = [field.emission.id for field in air.fields]
    aerial = chain.aerial

    def same(key: str, sd_db: float) -> ErrorPart:
        return ErrorPart((key,) * len(ids), np.full(len(ids), sd_db))

    return (
        same("roof", assumptions.value("roof_sd_db")),
        ErrorPart(
            tuple(f"band:{mast}:{band}" for mast, band in zip(air.masts, air.bands, strict=True)),
            np.full(len(ids), assumptions.value("band_sd_db")),
        ),
        ErrorPart(tuple(f"emission:{name}" for name in ids), np.full(len(ids), assumptions.value("emission_sd_db"))),
        ErrorPart(
            tuple(f"erp:{name}" for name in ids),
            np.where(air.doubtful_erp, assumptions.value("erp_unknown_sd_db"), 0.0),
        ),
        ErrorPart(tuple(f"fade:{mast}" for mast in air.masts), assumptions.value("fade_sd_share") * air.fade_db),
        same(
            f"aerial:{aerial.id}",
            assumptions.value("aerial_gain_sd_db" if aerial.measured else "aerial_own_build_sd_db"),
        ),
        same("feeder:" + "+".join(chain.part_ids_of_feeders), assumptions.value("feeder_sd_db")),
        ErrorPart(("room",) * len(ids), room_sd_db(aerial, air.signals.frequency_mhz)),
    )


def _rejection_sd_db(
    aerial: Aerial, polarisation: AerialPolarisation, air: Air, reception: Reception, assumptions: Assumptions
) -> FloatArray:
    off_axis = np.where(reception.off_axis_deg > aerial.beamwidth_deg / 2, assumptions.value("off_axis_sd_db"), 0.0)
    crossed = np.array([p not in (polarisation, "mixed") for p in air.signals.polarisation], dtype=bool)
    result: FloatArray = np.where(crossed, np.maximum(off_axis, assumptions.value("cross_polar_sd_db")), off_axis)
    return result


def _masts(fields: Sequence[EmissionField]) -> tuple[str, ...]:
    """Name of the mast of each emission; a transmitter within 1 km of one earlier by id takes its name."""
    transmitters = {field.transmitter.id: field.transmitter for field in fields}
    names: dict[str, str] = {}
    heads: list[str] = []
    for key in sorted(transmitters):
        one = transmitters[key]
        near = None
        if heads:
            apart_km, _ = distance_and_bearing(
                one.latitude_deg,
                one.longitude_deg,
                np.array([transmitters[head].latitude_deg for head in heads]),
                np.array([transmitters[head].longitude_deg for head in heads]),
            )
            near = int(np.argmin(apart_km)) if float(np.min(apart_km)) < SAME_MAST_KM else None
        names[key] = key if near is None else heads[near]
        if near is None:
            heads.append(key)
    return tuple(names[field.transmitter.id] for field in fields)


def wanted_errors(
    chain: Chain, polarisation: AerialPolarisation, air: Air, reception: Reception, assumptions: Assumptions
) -> tuple[PathError, tuple[ErrorPart, ...]]:
    """Return the errors of the wanted signals themselves, as a reading of their level meets them."""
    path = PathError(
        masts=air.masts,
        bearing_deg=air.signals.bearing_deg,
        sd_db=air.path_sd_db,
        correlation=assumptions.value("path_bearing_correlation"),
        scale_deg=assumptions.value("path_bearing_scale_deg"),
    )
    rejection = ErrorPart(
        tuple(f"off-axis:{chain.aerial.id}:{field.emission.id}" for field in air.fields),
        _rejection_sd_db(chain.aerial, polarisation, air, reception, assumptions),
    )
    return path, (*_parts_of_any_pointing(chain, air, assumptions), rejection)


def _named_masts(wanted: Sequence[EmissionField], interferers: Sequence[Interferer]) -> tuple[str, ...]:
    """Name of the mast of each interferer: that of a wanted one within 1 km, else its own."""
    names = dict(zip((field.transmitter.id for field in wanted), _masts(wanted), strict=True))
    heads = sorted(set(names.values()))
    places = {field.transmitter.id: field.transmitter for field in wanted}
    for one in interferers:
        mast = one.transmitter
        if mast.id in names:
            continue
        apart_km, _ = distance_and_bearing(
            mast.latitude_deg,
            mast.longitude_deg,
            np.array([places[head].latitude_deg for head in heads]),
            np.array([places[head].longitude_deg for head in heads]),
        )
        near = int(np.argmin(apart_km))
        names[mast.id] = heads[near] if apart_km[near] < SAME_MAST_KM else mast.id
    return tuple(names[one.transmitter.id] for one in interferers)


def _band(frequency_mhz: float) -> str:
    return str(int(np.searchsorted(BAND_EDGES_MHZ, frequency_mhz)))
