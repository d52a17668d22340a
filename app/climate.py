"""Which seas are warm, and what the seasons do: choices that the Recommendations leave to their user."""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike, NDArray

# Rec. ITU-R P.1546 has curves for cold seas (as the North Sea) and warm seas (as the Mediterranean) and draws no
# line between them. Ours: warm up to 30 degrees of latitude, and in the enclosed seas below. South, west, north, east.
WARM_TO_LATITUDE_DEG = 30.0
WARM_SEAS_DEG = ((30.0, -6.0, 46.0, 36.5), (40.5, 27.0, 47.5, 42.0))  # Mediterranean with Adriatic; Black Sea
# The western box reaches over Biscay, which is not warm.
_NOT_WARM_DEG = ((43.0, -6.0, 46.0, 0.0),)

SEASON = (
    "Signals beyond the horizon are those of an average year: in warm, still weather, most often in summer and over "
    "sea, far transmitters come in stronger and disturb more; leaves cost more in summer."
)


def sea_is_warm(latitude_deg: ArrayLike, longitude_deg: ArrayLike) -> NDArray[np.bool_]:
    """Whether a sea at positions counts as warm for Rec. ITU-R P.1546, elementwise. Our choice, no source."""
    lat, lon = np.broadcast_arrays(np.asarray(latitude_deg, dtype=float), np.asarray(longitude_deg, dtype=float))
    warm = np.asarray(np.abs(lat) <= WARM_TO_LATITUDE_DEG)
    for south, west, north, east in WARM_SEAS_DEG:
        warm = warm | ((lat >= south) & (lat <= north) & (lon >= west) & (lon <= east))
    for south, west, north, east in _NOT_WARM_DEG:
        warm = warm & ~((lat >= south) & (lat <= north) & (lon >= west) & (lon <= east))
    return np.asarray(warm)
