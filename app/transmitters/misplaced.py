"""Positions that stand far from the others of their file and would be near them if written otherwise."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
from numpy.typing import NDArray

FloatArray = NDArray[np.float64]

# Our choice: three distinct places make a neighbourhood, of at least this radius.
FEWEST_PLACES = 3
SMALLEST_RADIUS_KM = 300.0
_EARTH_RADIUS_KM = 6371.0  # sphere: good to 0.6 %, far below what is asked here


def misplaced(latitude_deg: Sequence[float], longitude_deg: Sequence[float]) -> list[str | None]:
    """Say for each place how it was probably meant, None where nothing is wrong.

    A place is suspected only if it stands outside the neighbourhood of the others and one of the usual
    slips (latitude and longitude swapped, a sign lost) would bring it inside. Whatever else stands far
    off is left alone: islands do.

    Inputs (n,) in degrees, latitudes within ±90 and longitudes within ±180.
    """
    lat, lon = np.asarray(latitude_deg, dtype=float), np.asarray(longitude_deg, dtype=float)
    places = np.unique(np.round(np.column_stack([lat, lon]), 3), axis=0)
    if len(places) < FEWEST_PLACES:
        return [None] * len(lat)
    # The middle is the place with the least sum of distances to the others: slips do not move it.
    # Of many places every so-manieth is asked; they are sorted, so that covers all.
    sample = _vectors(places[:, 0], places[:, 1])[:: 1 + len(places) // 1000]
    middle = sample[int(np.argmin(np.arccos(np.clip(sample @ sample.T, -1, 1)).sum(axis=1)))]
    away_km = _km(places[:, 0], places[:, 1], middle)
    # Half of the places at least are right; three times the radius that holds half of them is still home.
    radius_km = max(SMALLEST_RADIUS_KM, 3 * float(np.median(away_km)))

    outside = _km(lat, lon, middle) > radius_km
    slips = (
        ("latitude and longitude swapped?", np.where(np.abs(lon) <= 90, lon, np.nan), lat),
        ("sign of the longitude lost?", lat, -lon),
        ("sign of the latitude lost?", -lat, lon),
    )
    said: list[str | None] = [None] * len(lat)
    for text, as_lat, as_lon in slips:
        with np.errstate(invalid="ignore"):
            home = outside & (_km(as_lat, as_lon, middle) <= radius_km)
        for i in np.flatnonzero(home):
            said[i] = said[i] or text
    return said


def _vectors(lat: FloatArray, lon: FloatArray) -> FloatArray:
    """Unit vectors (n, 3) of places given in degrees."""
    a, b = np.radians(lat), np.radians(lon)
    return np.stack([np.cos(a) * np.cos(b), np.cos(a) * np.sin(b), np.sin(a)], axis=-1)


def _km(lat: FloatArray, lon: FloatArray, middle: FloatArray) -> FloatArray:
    distance: FloatArray = _EARTH_RADIUS_KM * np.arccos(np.clip(_vectors(lat, lon) @ middle, -1, 1))
    return distance
