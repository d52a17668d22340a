"""Many geodesics at once against pyproj."""

import numpy as np
from pyproj import Geod

from terrain.ways import points_on

PATHS, EACH = 500, 5


def test_points_on_geodesics_are_those_of_karney():
    """pyproj (C. F. F. Karney, J. Geodesy 87, 2013), to 1000 km: within 0.1 mm, Vincenty's own figure."""
    random = np.random.default_rng(1)
    lat, lon = np.degrees(np.arcsin(random.uniform(-1, 1, PATHS))), random.uniform(-180, 180, PATHS)
    bearing, away_km = random.uniform(0, 360, PATHS), random.uniform(0, 1000, PATHS * EACH)
    got_lat, got_lon = points_on(lat, lon, bearing, np.arange(PATHS + 1) * EACH, away_km)
    one = np.repeat(np.arange(PATHS), EACH)
    geod = Geod(ellps="WGS84")
    want_lon, want_lat, _ = geod.fwd(lon[one], lat[one], bearing[one], 1e3 * away_km)
    assert geod.inv(got_lon, got_lat, want_lon, want_lat)[2].max() < 1e-4
    assert got_lon.min() >= -180
    assert got_lon.max() < 180


def test_nothing_away_is_the_start_itself():
    lat, lon = points_on(np.array([47.0]), np.array([-180.0]), np.array([33.0]), np.array([0, 1]), np.zeros(1))
    np.testing.assert_allclose([lat[0], lon[0]], [47.0, -180.0], atol=1e-12)
