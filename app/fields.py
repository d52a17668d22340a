"""The field of every emission at a roof: median, terms, spread.

One profile per transmitter, one digest per antenna height, then every emission and time percentage of
all transmitters in one call of each method. P.1812 is used where it holds, P.1546 elsewhere; the
location terms of both Recommendations are left out, the spread of app/margins.py stands for them.
"""

from __future__ import annotations

import pathlib
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from app.assumptions import Assumptions
from app.climate import sea_is_warm
from app.disagreement import apart_reason
from app.methods import fields_of_methods
from app.paths_to_roof import Path, PathKey, paths_to_roof
from app.request import Method
from app.roof import Roof
from app.sentences import CLEAR_RATIO, Kind, path_kind, path_sentence
from app.stories import method_reason, story_of, terms_of
from app.transmitters.model import Emission, Transmitter
from propagation.digest import stacked_digests
from propagation.fading import enhancement_db, fade_db, subrefraction_db
from propagation.foliage import woodland_loss_db
from propagation.free_space import field_strength_dbuv_m
from terrain.geodesy import distance_and_bearing
from terrain.mosaic import Ground

FloatArray = NDArray[np.float64]
Found = tuple[Emission, Transmitter, float, float]  # with distance_km and bearing_deg at the roof

DOUBTFUL_FLAGS = ("erp-unknown", "pattern-unknown")


@dataclass(frozen=True, slots=True)
class PathFacts:
    """What the ground does to one path."""

    sentence: str
    kind: Kind
    line_of_sight: bool
    clearance_ratio: float
    terrain_clearance_angle_deg: float
    effective_height_m: float
    diffraction_loss_db: float
    land_km: float
    sea_km: float
    ground_kinds: tuple[str, ...]  # of the rasters that answered under the path
    sd_db: float  # spread that the kind of path and the methods' disagreement give


@dataclass(frozen=True, slots=True)
class EmissionField:
    """One emission as the roof meets it."""

    emission: Emission
    transmitter: Transmitter
    distance_km: float
    bearing_deg: float  # from the roof
    erp_kw: float  # towards the roof
    free_space_dbuv_m: float
    reason: str | None = None  # why there is no answer; then all below are empty
    path: PathFacts | None = None
    p1546_dbuv_m: float | None = None
    p1812_dbuv_m: float | None = None
    difference_db: float | None = None  # P.1812 less P.1546; None where one of them answers alone
    apart: str | None = None  # why they differ by more than 15 dB
    used_dbuv_m: float = float("nan")
    method: str | None = None
    method_reason: str | None = None
    doubt_db: float = 0.0  # part of used_dbuv_m: power or pattern not stated
    fade_db: float = 0.0
    enhancement_db: float = 0.0
    sea_is_warm: bool = False  # for P.1546, if the path crosses any
    leaves_db: float = 0.0  # part of used_dbuv_m: foliage before the aerial

    @property
    def erp_is_doubtful(self) -> bool:
        """Whether the register left the power or the pattern open."""
        return any(flag in DOUBTFUL_FLAGS for flag in self.emission.flags)


def fields_at(
    roof: Roof,
    found: Sequence[Found],
    ground: Ground,
    assumptions: Assumptions,
    availability_percent: int,
    method: Method = "both",
    refractivity_maps: pathlib.Path | None = None,
) -> list[EmissionField]:
    """Return the field of each emission found, in the same order.

    An emission whose path has no answer (no ground, too near) keeps its place with the reason.
    """
    if not found:
        return []
    keys = [PathKey(transmitter, emission.antenna_agl_m) for emission, transmitter, _, _ in found]
    paths = paths_to_roof(roof, keys, ground, assumptions, refractivity_maps)
    erp_kw = _erp_towards_roof_kw(roof, found)
    good = [e for e, key in enumerate(keys) if isinstance(paths[key], Path)]
    rows = [found[e] for e in good]
    mine = [path for key in keys if isinstance(path := paths[key], Path)]
    answered = iter(
        _answered(rows, mine, erp_kw[good], roof, assumptions, availability_percent, method) if rows else []
    )
    return [
        _unanswered(row, float(power), reason) if isinstance(reason := paths[key], str) else next(answered)
        for row, key, power in zip(found, keys, erp_kw, strict=True)
    ]


def _unanswered(row: Found, erp_kw: float, reason: str) -> EmissionField:
    emission, transmitter, distance_km, bearing_deg = row
    free_space = float(field_strength_dbuv_m(max(distance_km, 1e-3), erp_kw))
    return EmissionField(emission, transmitter, distance_km, bearing_deg, erp_kw, free_space, reason)


def _answered(
    rows: Sequence[Found],
    paths: Sequence[Path],
    erp_kw: FloatArray,
    roof: Roof,
    assumptions: Assumptions,
    availability_percent: int,
    method: Method,
) -> list[EmissionField]:
    digest = stacked_digests([path.digest for path in paths])
    frequency_mhz = np.array([row[0].frequency_mhz for row in rows])
    plane = np.array(["vertical" if row[0].polarisation == "vertical" else "horizontal" for row in rows])
    n0 = np.array([path.n0 for path in paths])
    times = (50.0, 1.0, min(50.0, 100.0 - availability_percent))

    middle = [_middle_deg(roof, row[1]) for row in rows]
    warm_sea = sea_is_warm([lat for lat, _ in middle], [lon for _, lon in middle])
    both = fields_of_methods(
        digest, paths, frequency_mhz, plane, times, erp_kw, with_p1812=method != "p1546", warm_sea=warm_sea
    )
    leaves_db = woodland_loss_db(frequency_mhz, roof.leaves_m)
    by_p1546, by_p1812 = both.p1546_dbuv_m - leaves_db, both.p1812_dbuv_m - leaves_db
    holds = ~np.isnan(by_p1812[0])
    at_50, at_1, in_state_b = np.where(holds, by_p1812, by_p1546)
    difference = by_p1812[0] - by_p1546[0]

    fade = fade_db(
        availability_percent,
        subrefraction_db=subrefraction_db(digest, frequency_mhz, plane, n0),
        enhancement_1_db=at_1 - at_50,
        line_of_sight=digest.line_of_sight,
        sea_km=digest.sea_km,
        least_fade_99_db=assumptions.value("least_fade_99_db"),
        sea_fade_99_db=assumptions.value("sea_fade_99_db"),
        fade_share_90=assumptions.value("fade_share_90"),
    )
    rise = enhancement_db(in_state_b, at_50)
    free_space = field_strength_dbuv_m(digest.path_length_km, erp_kw)
    clearance = np.array([path.clearance_ratio(f) for path, f in zip(paths, frequency_mhz.tolist(), strict=True)])
    diffraction = digest.diffraction(frequency_mhz, plane)
    kinds = [path_kind(c, b) for c, b in zip(clearance.tolist(), digest.beyond_horizon.tolist(), strict=True)]
    sd = _path_sd_db(clearance, digest.beyond_horizon, by_p1812[0], by_p1546[0], assumptions)
    unstated = assumptions.value("erp_unknown_mean_db")

    answers = []
    for e, (emission, transmitter, distance_km, bearing_deg) in enumerate(rows):
        doubt = unstated if any(flag in DOUBTFUL_FLAGS for flag in emission.flags) else 0.0
        facts = PathFacts(
            sentence=path_sentence(story_of(paths[e], kinds[e], float(frequency_mhz[e]), diffraction, both, e)),
            kind=kinds[e],
            line_of_sight=bool(digest.line_of_sight[e]) and float(clearance[e]) >= 0,
            clearance_ratio=float(clearance[e]),
            terrain_clearance_angle_deg=float(digest.rx_clearance_angle_deg[e]),
            effective_height_m=float(digest.h1_source_height_m[e]),
            diffraction_loss_db=float(diffraction.loss_db[e] + both.near_edge_db[e]),
            land_km=float(digest.land_km[e]),
            sea_km=float(digest.sea_km[e]),
            ground_kinds=paths[e].kinds,
            sd_db=float(sd[e]),
        )
        answers.append(
            EmissionField(
                emission=emission,
                transmitter=transmitter,
                distance_km=distance_km,
                bearing_deg=bearing_deg,
                erp_kw=float(erp_kw[e]),
                free_space_dbuv_m=float(free_space[e]),
                path=facts,
                p1546_dbuv_m=float(by_p1546[0, e]),
                p1812_dbuv_m=float(by_p1812[0, e]) if holds[e] else None,
                difference_db=float(difference[e]) if holds[e] else None,
                apart=apart_reason(float(difference[e]), terms_of(both, digest, e)) if holds[e] else None,
                used_dbuv_m=float(at_50[e]) + doubt,
                method="p1812" if holds[e] else "p1546",
                method_reason=method_reason(method, paths[e].p1812_refusal),
                doubt_db=doubt,
                fade_db=float(fade[e]),
                enhancement_db=float(rise[e]),
                sea_is_warm=bool(warm_sea[e]),
                leaves_db=float(leaves_db[e]),
            )
        )
    return answers


def _path_sd_db(
    clearance_ratio: FloatArray,
    beyond_horizon: NDArray[np.bool_],
    p1812_dbuv_m: FloatArray,
    p1546_dbuv_m: FloatArray,
    assumptions: Assumptions,
) -> FloatArray:
    """Spread of the path error: by kind, interpolated in the clearance ratio, and by disagreement."""
    value = assumptions.value
    by_kind = np.interp(
        clearance_ratio,
        [-1.0, 0.0, CLEAR_RATIO],
        [value("path_obstructed_sd_db"), value("path_grazing_sd_db"), value("path_clear_sd_db")],
    )
    by_kind = np.where(beyond_horizon, value("path_beyond_horizon_sd_db"), by_kind)
    apart = np.abs(p1812_dbuv_m - p1546_dbuv_m)
    disagreement = np.clip((apart - value("disagreement_free_db")) / 2, 0, value("disagreement_sd_max_db"))
    both = np.hypot(by_kind, disagreement)
    return np.where(np.isnan(p1812_dbuv_m), by_kind * value("single_method_factor"), both)


def _middle_deg(roof: Roof, mast: Transmitter) -> tuple[float, float]:
    """About the middle of a path: near enough to tell which sea it crosses."""
    across = (mast.longitude_deg - roof.longitude_deg + 180) % 360 - 180
    return (roof.latitude_deg + mast.latitude_deg) / 2, (roof.longitude_deg + across / 2 + 180) % 360 - 180


def _erp_towards_roof_kw(roof: Roof, found: Sequence[Found]) -> FloatArray:
    """Radiated power of each emission in the direction of the roof. (e,)"""
    _, from_mast_deg = distance_and_bearing(
        np.array([row[1].latitude_deg for row in found]),
        np.array([row[1].longitude_deg for row in found]),
        roof.latitude_deg,
        roof.longitude_deg,
    )
    attenuation_db = [
        row[0].attenuation_db(bearing_deg) for row, bearing_deg in zip(found, from_mast_deg.tolist(), strict=True)
    ]
    return np.array([row[0].erp_kw for row in found]) * 10 ** (-np.array(attenuation_db) / 10)
