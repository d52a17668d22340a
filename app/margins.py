"""From the field at the roof to margins with their errors, for one chain turned one way."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from app.assumptions import Assumptions
from app.chain.parts import Aerial, AerialPolarisation, Chain
from app.chance import Cells, ErrorPart, Knowledge, PathError, exceedance, received
from app.fields import EmissionField
from app.link_budget import Reception, Signals, receive
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
    faded: Reception  # time state (a): the wanted signal at its availability
    median: Reception  # without the fade
    cells: Cells
    chance: FloatArray  # (e,)
    sweep_count: FloatArray  # (360,) expected multiplexes for each whole degree, this polarisation
    sweep_chance: FloatArray  # (360, e) chance of each emission for each whole degree, likewise

    def limit(self, e: int) -> str:
        """What holds one emission back: time where only the fade takes it below what it needs, else noise."""
        return "time" if self.median.margin_db[e] >= 0 > self.faded.margin_db[e] else "noise"

    def held_back_by(self, air: Air, multiplexes: Sequence[str]) -> tuple[str, ...]:
        """What holds back the best emission of each multiplex. (m,)"""
        best = [
            max((e for e, owner in enumerate(air.multiplex_of) if owner == name), key=lambda e: self.chance[e])
            for name in multiplexes
        ]
        return tuple(self.limit(e) for e in best)


def air_of(fields: Sequence[EmissionField]) -> Air:
    """Gather the emissions that have an answer."""
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
        path_sd_db=np.array([field.path.sd_db for field in kept if field.path]),
        masts=_masts(kept),
        bands=tuple(str(int(np.searchsorted(BAND_EDGES_MHZ, field.emission.frequency_mhz))) for field in kept),
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
        counts = _counts(chances, air, counted)
        pointing_deg = chain.pointing_deg if chain.pointing_deg is not None else _best_bearing(counts, air)
        count = float(counts[round(pointing_deg) % 360])
        if best is None or count > best[0] + 1e-9:
            best = (count, pointing_deg, polarisation, counts, chances)
    assert best is not None  # there is always a polarisation
    _, pointing_deg, polarisation, counts, chances = best
    faded = receive(
        chain,
        air.signals,
        air.used_dbuv_m - air.fade_db,
        pointing_deg,
        polarisation,
        assumptions,
        roof.surroundings,
    )
    median = receive(chain, air.signals, air.used_dbuv_m, pointing_deg, polarisation, assumptions, roof.surroundings)
    parts = error_parts(chain, polarisation, air, faded, assumptions)
    cells = Cells(faded.margin_db, path_error(air, assumptions), parts, known)
    return Turned(chain, pointing_deg, polarisation, faded, median, cells, cells.chance, counts, chances)


def multiplex_chances(turned: Turned, air: Air, multiplexes: Sequence[str]) -> tuple[NDArray[np.bool_], FloatArray]:
    """Return draws of what is received (draws, m) and the chance of each multiplex (m,).

    One emission alone has its closed form; alternatives are counted over the joint draws.
    """
    draws = received(turned.cells.draws(), air.multiplex_of, multiplexes)
    chance = draws.mean(axis=0)
    for m, name in enumerate(multiplexes):
        alone = [e for e, owner in enumerate(air.multiplex_of) if owner == name]
        if len(alone) == 1:
            chance[m] = turned.chance[alone[0]]
    return draws, chance


def expected_count(chance: FloatArray, multiplex_of: Sequence[str], counted: Sequence[str]) -> FloatArray:
    """Expected multiplexes from chances of emissions (..., e), alternatives taken as independent. (...)"""
    total = np.zeros(chance.shape[:-1])
    for name in counted:
        owned = [e for e, owner in enumerate(multiplex_of) if owner == name]
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
    reception = receive(
        chain,
        air.signals,
        air.used_dbuv_m - air.fade_db,
        BEARINGS[:, None],
        polarisation,
        assumptions,
        roof.surroundings,
    )
    nowhere = np.zeros_like(air.path_sd_db)
    fixed = Cells(nowhere, path_error(air, assumptions), _parts_of_any_pointing(chain, air, assumptions), known)
    turned_away = _rejection_sd_db(chain.aerial, polarisation, air, reception, assumptions)
    return exceedance(reception.margin_db + fixed.mean_db, np.sqrt(fixed.sigma_db**2 + turned_away**2))


def _counts(chance: FloatArray, air: Air, counted: Sequence[str]) -> FloatArray:
    """Expected multiplexes for each whole degree (360,) from the chances of emissions (360, e).

    What no direction brings does not sway the choice of one, however much of it there is.
    """
    within_reach = {owner for e, owner in enumerate(air.multiplex_of) if float(chance[:, e].max()) >= HOPELESS_BELOW}
    return expected_count(chance, air.multiplex_of, [one for one in counted if one in within_reach])


def _best_bearing(counts: FloatArray, air: Air) -> float:
    strongest = float(air.signals.bearing_deg[int(np.argmax(air.used_dbuv_m))])
    as_good = np.flatnonzero(counts >= counts.max() - TIE_COUNT)
    away = np.abs((as_good - strongest + 180) % 360 - 180)
    return float(as_good[int(np.argmin(away))])


def path_error(air: Air, assumptions: Assumptions) -> PathError:
    """Return the errors of the paths of all emissions."""
    return PathError(
        masts=air.masts,
        bearing_deg=air.signals.bearing_deg,
        sd_db=air.path_sd_db,
        correlation=assumptions.value("path_bearing_correlation"),
        scale_deg=assumptions.value("path_bearing_scale_deg"),
    )


def error_parts(
    chain: Chain, polarisation: AerialPolarisation, air: Air, reception: Reception, assumptions: Assumptions
) -> tuple[ErrorPart, ...]:
    """Return every error beside the paths' for one chain turned one way."""
    ids = [field.emission.id for field in air.fields]
    rejection = ErrorPart(
        tuple(f"off-axis:{chain.aerial.id}:{name}" for name in ids),
        _rejection_sd_db(chain.aerial, polarisation, air, reception, assumptions),
    )
    return (*_parts_of_any_pointing(chain, air, assumptions), rejection)


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
