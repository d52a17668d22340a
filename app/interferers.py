"""Which emissions disturb the wanted ones at a roof, and the field of each.

All that overlap a wanted channel or stand beside it, within 250 km, or within 500 km where at least half
the path is sea. Two rungs keep the question fast: a bound (Rec. ITU-R P.1546-6 without terrain, the antenna
as high over the sea as it can be) leaves out what all together stays far below the noise of a large aerial;
the strongest masts that remain are reckoned over the ground like wanted ones, the others, and those whose
path lacks ground, by P.1546 without terrain, which is said.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from functools import cache
from pathlib import Path

import numpy as np
from numpy.typing import NDArray

from app.assumptions import Assumptions
from app.errors import ModeError
from app.fields import EmissionField, Found, fields_at
from app.interference import Spectra, occupied_mhz, pairs_between
from app.levels import level_dbuv
from app.request import Method
from app.roof import Roof
from app.systems import mode_of
from app.transmitters.model import Emission, Transmitter
from propagation import p1546
from propagation.free_space import field_strength_dbuv_m
from propagation.noise import noise_power_dbm
from propagation.units import dbuv_from_dbm
from terrain.geodesy import distance_and_bearing, points_along
from terrain.mosaic import Ground

FloatArray = NDArray[np.float64]

MOBILE = "mobile"  # system of a block of a mobile network: never wanted, it only disturbs
LAND_REACH_KM, SEA_REACH_KM = 250.0, 500.0
NEAREST_KM = 0.05  # an interferer nearer than this counts as standing there
OVER_GROUND_MASTS = 40  # the strongest so many are reckoned over the ground; ours, for speed
SEA_POINTS = 32  # looked at along a path to tell how much of it is sea
LEFT_OUT_DB = -15.0  # all that is left out together, against the noise of a large aerial: 0.14 dB at most
LARGE_AERIAL_DBD, QUIET_SET_DB = 14.0, 3.0
ROUGH_SD_DB = 8.0  # of a path without terrain, before the factor for one method alone


@dataclass(frozen=True, slots=True)
class Interferer:
    """One emission as it disturbs a roof."""

    emission: Emission
    transmitter: Transmitter
    distance_km: float
    bearing_deg: float  # from the roof
    field_dbuv_m: float  # median; an unstated power or pattern counts with its maximum
    enhancement_db: float  # rise in the time state (b)
    path_sd_db: float
    doubtful_erp: bool
    over_ground: bool  # False: P.1546 without terrain


def interferers_at(
    roof: Roof,
    fields: Sequence[EmissionField],
    found: Sequence[Found],
    ground: Ground,
    assumptions: Assumptions,
    availability_percent: int,
    method: Method = "both",
    refractivity_maps: Path | None = None,
) -> list[Interferer]:
    """Return what may disturb the wanted emissions with an answer: those themselves first, in their order.

    Parameters
    ----------
    fields : wanted emissions at the roof, with an answer or without
    found : what is on the air within 500 km, as `Store.emissions_within` gives it
    """
    wanted = [field for field in fields if field.path is not None]
    own = [_of_field(field) for field in wanted]
    known = {field.emission.id for field in wanted}
    far = [row for row in found if row[0].id not in known]
    if not wanted or not far:
        return own
    weight = _closeness(wanted, far)
    near = np.flatnonzero(weight.max(axis=1) > -np.inf)
    far, weight = [far[i] for i in near], weight[near]
    if not far:
        return own
    sea = _sea_share(roof, far, ground)
    distance_km = np.array([row[2] for row in far])
    in_reach = (distance_km <= LAND_REACH_KM) | ((distance_km <= SEA_REACH_KM) & (sea >= 0.5))
    times = np.array([50.0, min(50.0, 100.0 - availability_percent)])
    bound = _without_terrain(roof, far, sea, times, _highest_m(far, ground))
    kept = np.flatnonzero(in_reach & _matters(wanted, bound.max(axis=0), weight))
    if not kept.size:
        return own
    rows, sea = [far[i] for i in kept], sea[kept]
    strongest = _strongest_masts(rows, (bound.max(axis=0)[kept][:, None] + weight[kept]).max(axis=1))
    asked = [row for row in rows if row[1].id in strongest]
    answered = fields_at(roof, asked, ground, assumptions, availability_percent, method, refractivity_maps)
    over_ground = {field.emission.id: _of_field(field) for field in answered if field.path is not None}
    return own + _reckoned(roof, rows, sea, times, ground, assumptions, over_ground)


def spectra_of(emissions: Sequence[Emission]) -> Spectra:
    """Where emissions stand in the spectrum; a system that the tables do not know fills its channel."""
    return Spectra(
        tuple(emission.system for emission in emissions),
        np.array([emission.frequency_mhz for emission in emissions], dtype=float),
        np.array([emission.bandwidth_mhz for emission in emissions], dtype=float),
        np.array([_occupied_mhz(emission) for emission in emissions], dtype=float),
    )


def _occupied_mhz(emission: Emission) -> float:
    return _width_mhz(emission.system, emission.mode, emission.bandwidth_mhz)


@cache
def _width_mhz(system: str, mode: str, channel_mhz: float) -> float:
    try:
        width = mode_of(system, mode).noise_bandwidth_mhz(channel_mhz)
    except ModeError:
        return channel_mhz
    return occupied_mhz(system, channel_mhz, width)


def _of_field(field: EmissionField) -> Interferer:
    assert field.path is not None
    return Interferer(
        field.emission,
        field.transmitter,
        field.distance_km,
        field.bearing_deg,
        field.used_dbuv_m - field.doubt_db,
        field.enhancement_db,
        field.path.sd_db,
        field.erp_is_doubtful,
        True,
    )


def _closeness(wanted: Sequence[EmissionField], far: Sequence[Found]) -> FloatArray:
    """PR less required C/N of every pair, (far, wanted); minus infinity where none disturbs."""
    required = np.array([mode_of(one.emission.system, one.emission.mode).required_cn_db for one in wanted])
    pairs = pairs_between(spectra_of([one.emission for one in wanted]), required, spectra_of([row[0] for row in far]))
    weight = np.full(pairs.shape, -np.inf)
    weight[pairs.disturber, pairs.wanted] = np.maximum(pairs.steady_db, pairs.tropospheric_db)
    return weight


def _sea_share(roof: Roof, far: Sequence[Found], ground: Ground) -> FloatArray:
    """Share of each path that is sea as far as the ground tells, (far,)."""
    masts = {row[1].id: row for row in far}
    along = (np.arange(SEA_POINTS) + 0.5) / SEA_POINTS
    share = {}
    for key, (_, mast, distance_km, _) in masts.items():
        latitude, longitude = points_along(
            roof.latitude_deg, roof.longitude_deg, mast.latitude_deg, mast.longitude_deg, along * distance_km
        )
        share[key] = float(np.mean(ground.is_water(latitude, longitude)))
    return np.array([share[row[1].id] for row in far])


def _highest_m(far: Sequence[Found], ground: Ground) -> FloatArray:
    """Antennas over the sea: as high over the mean ground as they can be. (far,)"""
    return np.array([row[0].antenna_agl_m for row in far]) + np.maximum(_mast_ground_m(far, ground, 500.0), 0)


def _mast_ground_m(far: Sequence[Found], ground: Ground, unknown_m: float) -> FloatArray:
    stated = np.array([np.nan if row[1].ground_amsl_m is None else row[1].ground_amsl_m for row in far])
    if np.isnan(stated).any():
        seen = ground.elevation_m(
            np.array([row[1].latitude_deg for row in far]), np.array([row[1].longitude_deg for row in far])
        )
        stated = np.where(np.isnan(stated), seen, stated)
    return np.where(np.isnan(stated), unknown_m, stated)


def _without_terrain(
    roof: Roof, far: Sequence[Found], sea_share: FloatArray, times: FloatArray, h1_m: FloatArray
) -> FloatArray:
    """Field by Rec. ITU-R P.1546-6 without terrain for each time, (t, far) [dB(µV/m)]."""
    distance_km = np.maximum(np.array([row[2] for row in far]), NEAREST_KM)
    erp_kw = _erp_towards_roof_kw(roof, far)
    field = p1546.field_strength(
        frequency_mhz=np.array([row[0].frequency_mhz for row in far]),
        time_percent=times[:, None],
        path_length_km=distance_km,
        land_km=distance_km * (1 - sea_share),
        cold_sea_km=distance_km * sea_share,
        h1_source_height_m=h1_m,
        tx_height_agl_m=np.array([row[0].antenna_agl_m for row in far]),
        rx_height_agl_m=roof.aerial_agl_m,
        rx_environment="rural",
        terrain_information=False,
        erp_kw=erp_kw,
    ).field_dbuv_m
    ceiling = field_strength_dbuv_m(distance_km, erp_kw)
    return np.where(distance_km < 1, np.minimum(field, ceiling), field)


def _erp_towards_roof_kw(roof: Roof, far: Sequence[Found]) -> FloatArray:
    _, from_mast_deg = distance_and_bearing(
        np.array([row[1].latitude_deg for row in far]),
        np.array([row[1].longitude_deg for row in far]),
        roof.latitude_deg,
        roof.longitude_deg,
    )
    lost_db = [row[0].attenuation_db(bearing) for row, bearing in zip(far, from_mast_deg.tolist(), strict=True)]
    return np.array([row[0].erp_kw for row in far]) * 10 ** (-np.array(lost_db) / 10)


def _matters(wanted: Sequence[EmissionField], bound_dbuv_m: FloatArray, weight: FloatArray) -> NDArray[np.bool_]:
    """Whether an interferer is needed so that all others stay below the noise of a large aerial. (far,)"""
    frequency = np.array([one.emission.frequency_mhz for one in wanted])
    width = np.array([_occupied_mhz(one.emission) for one in wanted])
    noise = dbuv_from_dbm(noise_power_dbm(width) + QUIET_SET_DB) + LEFT_OUT_DB
    power = 10 ** ((level_dbuv(bound_dbuv_m[:, None], LARGE_AERIAL_DBD, frequency) + weight - noise) / 10)
    order = np.argsort(power, axis=0)
    summed = np.cumsum(np.take_along_axis(power, order, axis=0), axis=0)
    needed = np.zeros(power.shape, dtype=bool)
    np.put_along_axis(needed, order, summed > 1, axis=0)
    return np.asarray(needed.any(axis=1))


def _strongest_masts(rows: Sequence[Found], strength: FloatArray) -> set[str]:
    strongest: dict[str, float] = {}
    for row, value in zip(rows, strength.tolist(), strict=True):
        strongest[row[1].id] = max(value, strongest.get(row[1].id, -np.inf))
    return set(sorted(strongest, key=lambda key: -strongest[key])[:OVER_GROUND_MASTS])


def _reckoned(
    roof: Roof,
    rows: Sequence[Found],
    sea: FloatArray,
    times: FloatArray,
    ground: Ground,
    assumptions: Assumptions,
    over_ground: Mapping[str, Interferer],
) -> list[Interferer]:
    """Return the interferers, those that have no answer over the ground by P.1546 without terrain."""
    roof_m = float(ground.elevation_m(roof.latitude_deg, roof.longitude_deg))
    over_roof_m = np.maximum(_mast_ground_m(rows, ground, 0.0) - np.nan_to_num(roof_m), 0)
    antenna_m = np.array([row[0].antenna_agl_m for row in rows])
    median, raised = _without_terrain(roof, rows, sea, times, antenna_m + over_roof_m)
    sd_db = ROUGH_SD_DB * assumptions.value("single_method_factor")
    return [
        over_ground.get(
            row[0].id,
            Interferer(
                row[0],
                row[1],
                row[2],
                row[3],
                float(median[i]),
                max(0.0, float(raised[i] - median[i])),
                sd_db,
                any(flag in ("erp-unknown", "pattern-unknown") for flag in row[0].flags),
                False,
            ),
        )
        for i, row in enumerate(rows)
    ]
