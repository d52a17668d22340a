"""One path between two places, with every term of both methods and what a drawing of it needs."""

from __future__ import annotations

import math
import pathlib
from dataclasses import fields
from typing import Any

import numpy as np
from numpy.typing import NDArray

from app.assumptions import Assumptions
from app.disagreement import apart_reason
from app.errors import RequestError
from app.methods import fields_of_methods
from app.paths_to_roof import DrawnPath, Path, path_over
from app.roof import Roof, check
from app.sentences import path_kind, path_sentence
from app.site import missing_ground
from app.stories import method_reason, story_of, terms_of
from propagation import p1546, p1812
from propagation.digest import stacked_digests
from propagation.free_space import basic_loss_db, field_strength_dbuv_m
from terrain.errors import CoverageError
from terrain.mosaic import Ground
from terrain.profile import sample_profile
from terrain.water import SEA

TIMES_PERCENT = (50.0, 10.0, 1.0)
DRAWN_POINTS = 400
PLANES = ("horizontal", "vertical")
SHORTEST_KM, LONGEST_KM = 0.05, 1000.0


def path_document(
    ground: Ground,
    from_latitude_deg: float,
    from_longitude_deg: float,
    to_latitude_deg: float,
    to_longitude_deg: float,
    frequency_mhz: float,
    antenna_agl_m: float = 100.0,
    aerial_agl_m: float = 10.0,
    polarisation: str = "horizontal",
    refractivity_maps: pathlib.Path | None = None,
) -> dict[str, Any]:
    """Return the terms of both methods for 1 kW ERP, the path's sentence and its drawing.

    Raises
    ------
    RequestError, CoverageError
        A value or a place that is not possible, or ground that is missing.
    """
    check("frequency_mhz", frequency_mhz, 30, 4000, "MHz")
    check("antenna_agl_m", antenna_agl_m, 1, 1000, "m above the ground")
    if polarisation not in PLANES:
        raise RequestError(
            f'polarisation "{polarisation}" is not known: use {" or ".join(PLANES)}',
            field="polarisation",
            allowed=", ".join(PLANES),
        )
    start = Roof(from_latitude_deg, from_longitude_deg)
    roof = Roof(to_latitude_deg, to_longitude_deg, aerial_agl_m)
    profile = sample_profile(ground, start.latitude_deg, start.longitude_deg, roof.latitude_deg, roof.longitude_deg)
    length_km = float(profile.distance_km[-1])
    if not SHORTEST_KM <= length_km <= LONGEST_KM:
        raise RequestError(
            f"the path is {length_km:.3g} km long: use places {SHORTEST_KM:g} to {LONGEST_KM:g} km apart",
            field="to",
        )
    gaps = np.flatnonzero(np.isnan(profile.ground_amsl_m))
    if gaps.size:
        first = int(gaps[0])
        gap = missing_ground(ground, float(profile.latitude_deg[first]), float(profile.longitude_deg[first]))
        raise CoverageError(
            f"{max(profile.missing_share, 0.01):.0%} of the path has no elevation, the first gap "
            f"{profile.distance_km[first]:.1f} km from its start: {gap}"
        )
    path = path_over(profile, antenna_agl_m, roof, Assumptions(), refractivity_maps)
    if isinstance(path, str):
        raise RequestError(path)
    digest = path.digest
    ratio = path.clearance_ratio(frequency_mhz)
    kind = path_kind(ratio, bool(digest.beyond_horizon))
    one, plane, carrier = stacked_digests([digest]), np.array([polarisation]), np.array([frequency_mhz])
    both = fields_of_methods(one, [path], carrier, plane, (50.0,), np.ones(1))
    difference = float(both.p1812_dbuv_m[0, 0] - both.p1546_dbuv_m[0, 0])
    return {
        "from": {"latitude_deg": start.latitude_deg, "longitude_deg": start.longitude_deg},
        "to": {"latitude_deg": roof.latitude_deg, "longitude_deg": roof.longitude_deg},
        "frequency_mhz": frequency_mhz,
        "antenna_agl_m": antenna_agl_m,
        "aerial_agl_m": aerial_agl_m,
        "polarisation": polarisation,
        "distance_km": length_km,
        "kind": kind,
        "sentence": path_sentence(story_of(path, kind, frequency_mhz, one.diffraction(carrier, plane), both, 0)),
        "method": "p1546" if path.terms is None else "p1812",
        "method_reason": method_reason("both", path.p1812_refusal),
        "difference_db": _finite(difference),
        "apart": None if path.terms is None else apart_reason(difference, terms_of(both, one, 0)),
        "ground": {"kinds": list(profile.kinds), "spacing_m": profile.spacing_m},
        "refractivity": {
            "delta_n_per_km": path.delta_n_per_km,
            "n0": path.n0,
            "source": f"maps in {refractivity_maps}" if refractivity_maps else "table of the package, every 3 degrees",
        },
        "clearance_ratio": ratio,
        "free_space": {
            "field_dbuv_m": float(field_strength_dbuv_m(length_km, 1.0)),
            "basic_loss_db": float(basic_loss_db(length_km, frequency_mhz)),
        },
        "terms": {_key(name): _plain(getattr(digest, name)) for name in (field.name for field in fields(digest))},
        "p1546": _p1546_terms(path, frequency_mhz, aerial_agl_m),
        "p1812": _p1812_terms(path, frequency_mhz, polarisation),
        "drawing": _drawing(path, frequency_mhz, antenna_agl_m, aerial_agl_m),
    }


def _key(name: str) -> str:
    """Name of a term with its unit, where the model's own name has none: both still wait for a wavelength."""
    if name == "clearance":
        return "clearance_m_per_root_km"
    return f"{name}_root_m" if "_edge" in name else name


def told_path(document: dict[str, Any]) -> str:
    """Return the path in plain text: the sentence, then every term."""
    free = document["free_space"]
    lines = [
        document["sentence"],
        "",
        f"free space: field {free['field_dbuv_m']:.2f} dB(µV/m), loss {free['basic_loss_db']:.2f} dB",
        f"method: {document['method_reason']}",
        f"ground: {', '.join(document['ground']['kinds'])}, a point every {document['ground']['spacing_m']:.0f} m",
        f"refractivity: lapse {document['refractivity']['delta_n_per_km']:.1f} N/km, "
        f"{document['refractivity']['n0']:.0f} N at sea level ({document['refractivity']['source']})",
    ]
    if document["difference_db"] is not None:
        lines.append(f"P.1812 less P.1546: {document['difference_db']:+.1f} dB")
    if document["apart"]:
        lines.append(document["apart"])
    for name, title in (("p1812", "Rec. ITU-R P.1812-7"), ("p1546", "Rec. ITU-R P.1546-6")):
        lines += ["", f"{title}, 1 kW ERP"]
        if document[name] is None:
            lines.append("  does not hold on this path")
            continue
        times = " ".join(f"{time:>12g}" for time in document[name]["time_percent"])
        lines.append(f"  {'time_percent':<44}{times}")
        for key, values in document[name].items():
            if key != "time_percent":
                row = values if isinstance(values, list) else [values]
                lines.append(f"  {key:<44}" + " ".join("           -" if v is None else f"{v:>12.4f}" for v in row))
    return "\n".join(lines)


def _p1546_terms(path: Path, frequency_mhz: float, aerial_agl_m: float) -> dict[str, Any]:
    digest = path.digest
    result = p1546.field_strength(
        frequency_mhz=frequency_mhz,
        time_percent=np.array(TIMES_PERCENT),
        path_length_km=digest.path_length_km,
        land_km=digest.land_km,
        cold_sea_km=digest.sea_km,
        h1_source_height_m=digest.h1_source_height_m,
        tx_height_agl_m=path.antenna_agl_m,
        rx_height_agl_m=aerial_agl_m,
        rx_environment="rural",
        tx_clearance_angle_deg=digest.tx_clearance_angle_deg,
        rx_clearance_angle_deg=digest.rx_clearance_angle_deg,
        tx_ground_amsl_m=digest.tx_ground_amsl_m,
        rx_ground_amsl_m=digest.rx_ground_amsl_m,
    )
    terms = {_key(field.name): _plain(getattr(result, field.name)) for field in fields(result)}
    return {"time_percent": list(TIMES_PERCENT), **terms}


def _p1812_terms(path: Path, frequency_mhz: float, polarisation: str) -> dict[str, Any] | None:
    if path.terms is None:
        return None
    result = p1812.loss_of_path(
        path.terms,
        frequency_mhz=frequency_mhz,
        time_percent=np.array(TIMES_PERCENT),
        polarisation=polarisation,
        n0=path.n0,
    )
    terms = {_key(field.name): _plain(getattr(result, field.name)) for field in fields(result)}
    return {"time_percent": list(TIMES_PERCENT), **terms}


def _drawing(path: DrawnPath, frequency_mhz: float, antenna_agl_m: float, aerial_agl_m: float) -> dict[str, Any]:
    """Points for a drawing: the highest ground of each of up to 400 stretches, so that no ridge is lost."""
    x, ground = path.profile.distance_km, path.surface_amsl_m
    inner = np.array_split(np.arange(1, len(x) - 1), min(DRAWN_POINTS, max(1, len(x) - 2)))
    keep = np.array([0, *(int(stretch[np.argmax(ground[stretch])]) for stretch in inner if stretch.size), len(x) - 1])
    d1, d2 = x[keep], x[-1] - x[keep]
    radius_km = float(path.digest.effective_earth_radius_km)
    start, end = ground[0] + antenna_agl_m, ground[-1] + aerial_agl_m
    return {
        "distance_km": _rounded(x[keep], 4),
        "ground_amsl_m": _rounded(ground[keep], 1),
        "bare_amsl_m": _rounded(path.profile.bare_amsl_m[keep], 1),
        "bulge_m": _rounded(500 * d1 * d2 / radius_km, 2),
        "line_amsl_m": _rounded(start + (end - start) * d1 / x[-1], 2),
        "first_fresnel_m": _rounded(np.sqrt(299.792458 / frequency_mhz * 1e3 * d1 * d2 / x[-1]), 2),
        "water": [bool(one) for one in path.profile.zone[keep] == SEA],
        "effective_earth_radius_km": radius_km,
    }


def _rounded(values: NDArray[np.float64], digits: int) -> list[float]:
    return [round(float(value), digits) for value in values]


def _plain(value: Any) -> Any:
    """Turn an array into JSON: numbers, None for not applicable, lists for more than one."""
    listed = np.asarray(value).tolist()
    return [_finite(one) for one in listed] if isinstance(listed, list) else _finite(listed)


def _finite(value: Any) -> Any:
    return None if isinstance(value, float) and not math.isfinite(value) else value
