"""Both published methods on the same paths, with the terms by which they differ.

P.1812 follows the profile of its path; P.1546 takes from it an effective height, an angle and lengths. Both stand
at 50 % of locations: the spread of app/margin_errors.py takes the place of their location terms.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from app.paths_to_roof import Path
from propagation import p1546, p1812
from propagation.diffraction import knife_edge_loss_db
from propagation.digest import PathDigest
from propagation.free_space import field_strength_dbuv_m
from propagation.p1546.field import P1546Result
from propagation.units import wavelength_m

FloatArray = NDArray[np.float64]


@dataclass(frozen=True, slots=True)
class MethodFields:
    """Fields of both methods for each time (t, e), and what each takes off free space at the first time (e,)."""

    p1546_dbuv_m: FloatArray  # (t, e)
    p1812_dbuv_m: FloatArray  # (t, e) NaN where it does not hold or was not asked for
    curves_db: FloatArray  # P.1546: curves for its effective height, all that is not named below
    clearance_angle_db: FloatArray  # P.1546: ground that rises before the aerial
    surroundings_db: FloatArray  # P.1546: height of the aerial and cover round it
    obstacle_db: FloatArray  # P.1546: the worst obstacle entered, a knife edge
    p1546_scatter_db: FloatArray  # P.1546: what scatter makes good
    near_edge_db: FloatArray  # P.1812: the worst edge near the roof, a knife edge
    diffraction_db: FloatArray  # P.1812: over the ground; NaN where it does not hold
    brought_back_db: FloatArray  # P.1812: what scatter and ducting make good of the diffraction


def fields_of_methods(
    digest: PathDigest,
    paths: Sequence[Path],
    frequency_mhz: FloatArray,
    plane: NDArray[np.str_],
    times_percent: Sequence[float],
    erp_kw: FloatArray,
    with_p1812: bool = True,
    warm_sea: NDArray[np.bool_] | None = None,
) -> MethodFields:
    """Return both fields for each time and emission; `digest` stacks those of the paths (e,).

    `warm_sea` (e,) tells where P.1546 takes its curves for warm sea; None: nowhere.
    """
    times = np.asarray(times_percent, dtype=float)[:, None]
    near = np.array([path.edges[0].size if path.edges else -np.inf for path in paths])
    near_edge_db = knife_edge_loss_db(near / np.sqrt(wavelength_m(frequency_mhz)))
    for e, path in enumerate(paths):
        if any(edge.leaves_m for edge in path.edges):
            near_edge_db[e] = max(float(edge.loss_db(frequency_mhz[e])) for edge in path.edges)
    # P.1546 has its own way with what surrounds an aerial; only an obstacle entered is an edge to it
    obstacle_db = np.where([path.p1546_surroundings_m > 0 for path in paths], 0.0, near_edge_db)
    result = _p1546(digest, paths, frequency_mhz, times, erp_kw, warm_sea)
    by_p1546 = result.field_dbuv_m - obstacle_db

    by_p1812 = np.full_like(by_p1546, np.nan)
    diffraction, brought_back = np.full(len(paths), np.nan), np.zeros(len(paths))
    inside = [e for e, path in enumerate(paths) if with_p1812 and path.terms is not None]
    if inside:
        terms = p1812.stacked_paths([path.terms for path in paths if path.terms is not None])
        loss = p1812.loss_of_path(
            terms,
            frequency_mhz=frequency_mhz[inside],
            time_percent=times,
            polarisation=plane[inside],
            n0=np.array([path.n0 for path in paths])[inside],
            erp_kw=erp_kw[inside],
        )
        by_p1812[:, inside] = loss.field_dbuv_m - near_edge_db[inside]
        diffraction[inside] = loss.diffraction_median_db
        brought_back[inside] = np.maximum(0.0, loss.loss_diffraction_median_db - loss.basic_loss_db[0])

    first = {
        name: getattr(result, name)[0]
        for name in ("tca_correction_db", "rx_height_correction_db", "field_after_step11_dbuv_m", "tropo_field_dbuv_m")
    }
    clearance_angle, surroundings = -first["tca_correction_db"], -first["rx_height_correction_db"]
    scatter = np.maximum(
        0.0, first["tropo_field_dbuv_m"] - (first["field_after_step11_dbuv_m"] + first["tca_correction_db"])
    )
    total = field_strength_dbuv_m(digest.path_length_km, erp_kw) - by_p1546[0]
    return MethodFields(
        p1546_dbuv_m=by_p1546,
        p1812_dbuv_m=by_p1812,
        curves_db=total - clearance_angle - surroundings - obstacle_db + scatter,
        clearance_angle_db=clearance_angle,
        surroundings_db=surroundings,
        obstacle_db=obstacle_db,
        p1546_scatter_db=scatter,
        near_edge_db=near_edge_db,
        diffraction_db=diffraction,
        brought_back_db=brought_back,
    )


def _p1546(
    digest: PathDigest,
    paths: Sequence[Path],
    frequency_mhz: FloatArray,
    times_percent: FloatArray,
    erp_kw: FloatArray,
    warm_sea: NDArray[np.bool_] | None,
) -> P1546Result:
    cover_m = np.array([path.p1546_surroundings_m for path in paths])
    return p1546.field_strength(
        frequency_mhz=frequency_mhz,
        time_percent=times_percent,
        path_length_km=digest.path_length_km,
        land_km=digest.land_km,
        cold_sea_km=digest.sea_km if warm_sea is None else np.where(warm_sea, 0.0, digest.sea_km),
        warm_sea_km=0.0 if warm_sea is None else np.where(warm_sea, digest.sea_km, 0.0),
        h1_source_height_m=digest.h1_source_height_m,
        tx_height_agl_m=np.array([path.antenna_agl_m for path in paths]),
        rx_height_agl_m=np.array([path.aerial_agl_m for path in paths]),
        rx_environment=np.where(cover_m > 0, "urban", "rural"),
        rx_clutter_height_m=cover_m,
        tx_clearance_angle_deg=digest.tx_clearance_angle_deg,
        rx_clearance_angle_deg=digest.rx_clearance_angle_deg,
        tx_ground_amsl_m=digest.tx_ground_amsl_m,
        rx_ground_amsl_m=digest.rx_ground_amsl_m,
        erp_kw=erp_kw,
    )
