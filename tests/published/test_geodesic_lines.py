"""Published geodesic lines against terrain/geodesy.py.

Flag MH: the figures are from memory of the documents, with high confidence.
"""

import pytest

from terrain.geodesy import destination, distance_and_bearing


def dms(degrees: float, minutes: float, seconds: float) -> float:
    return degrees + minutes / 60 + seconds / 3600


def test_karney_2013_direct_example():
    """C. F. F. Karney, J. Geodesy 87 (2013), table 2 (from memory): WGS 84, 40 N, bearing 30 deg, 10,000 km.

    The table gives the end at 41.793 310 205 06 N, 137.844 900 043 77 E; 1e-9 deg is 0.1 mm.
    """
    lat, lon = destination(40, 0, 30, 10_000)
    assert lat == pytest.approx(41.79331020506, abs=1e-9)
    assert lon == pytest.approx(137.84490004377, abs=1e-9)


def test_flinders_peak_to_buninyon():
    """Geocentric Datum of Australia Technical Manual, chapter 4 (from memory), on GRS 80.

    Flinders Peak to Buninyon: 54 972.271 m at 306 deg 52' 05.37". GRS 80 and WGS 84 differ by
    0.1 mm in the minor axis, far below the millimetre of the table.
    """
    distance_km, bearing_deg = distance_and_bearing(
        -dms(37, 57, 3.72030), dms(144, 25, 29.52440), -dms(37, 39, 10.15610), dms(143, 55, 35.38390)
    )
    assert distance_km == pytest.approx(54.972271, abs=1e-6)
    assert bearing_deg == pytest.approx(dms(306, 52, 5.37), abs=0.01 / 3600)


def test_quarter_meridian():
    """Length from equator to pole on WGS 84: 10 001.965 729 km (Karney 2013; NIMA TR8350.2), from memory."""
    assert distance_and_bearing(0, 0, 90, 0)[0] == pytest.approx(10_001.965729, abs=1e-6)
