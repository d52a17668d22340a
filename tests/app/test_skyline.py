"""The horizon round a roof, and masts against it."""

import math

import numpy as np
import pytest

from app.assumptions import Assumptions
from app.demo.scenario import DEMO_ROOFS
from app.errors import RequestError, RoofError
from app.paths_to_roof import DrawnPath, PathKey, drawn_paths_to_roof
from app.roof import Roof
from app.skyline import skyline_document
from propagation.refraction import effective_earth_radius_km
from propagation.refractivity import refractivity
from terrain.geodesy import destination
from terrain.profile import sample_profile
from terrain.skyline import horizon, skyline

NORTH = DEMO_ROOFS[0]


@pytest.fixture(scope="module")
def seen(demo_world):
    return skyline_document(demo_world.ground, demo_world.store, NORTH.latitude_deg, NORTH.longitude_deg)


def test_horizon_is_given_for_every_half_degree(seen):
    assert seen["bearing_deg"] == [half / 2 for half in range(720)]
    assert len(seen["angle_deg"]) == len(seen["distance_km"]) == 720
    assert all(-2 < angle < 20 for angle in seen["angle_deg"] if angle is not None)


def test_masts_stand_above_or_behind_as_their_paths_say(demo_world, seen):
    """A mast above the horizon has a path in line of sight by P.1812, one behind it has not."""
    roof = Roof(NORTH.latitude_deg, NORTH.longitude_deg)
    masts = {mast.id: mast for mast in demo_world.store.transmitters()}
    keys = {row["id"]: PathKey(masts[row["id"]], row["antenna_agl_m"]) for row in seen["transmitters"]}
    paths = drawn_paths_to_roof(roof, list(keys.values()), demo_world.ground, Assumptions())
    assert {row["stands"] for row in seen["transmitters"]} == {"above", "behind"}
    for row in seen["transmitters"]:
        assert (row["stands"] == "above") == bool(paths[keys[row["id"]]].terms.line_of_sight)
        assert row["above_horizon_deg"] == pytest.approx(row["antenna_deg"] - row["horizon_deg"], abs=2e-4)


def test_horizon_is_that_of_p1812_on_the_same_samples(demo_world):
    """Rec. ITU-R P.1812-7, Attachment 1, eqs. (80) to (82): within 0.02 mrad on every hidden path."""
    roof = Roof(NORTH.latitude_deg, NORTH.longitude_deg)
    masts = list(demo_world.store.transmitters())
    paths = drawn_paths_to_roof(roof, [PathKey(mast, 30.0) for mast in masts], demo_world.ground, Assumptions())
    hidden = [path for path in paths.values() if isinstance(path, DrawnPath) and not path.terms.line_of_sight]
    assert len(hidden) >= 2
    for path in hidden:
        away_km = path.profile.distance_km[-1] - path.profile.distance_km[1:-1]
        eye_amsl_m = path.profile.bare_amsl_m[-1] + roof.aerial_agl_m
        tangent, at_km = horizon(
            away_km, path.profile.bare_amsl_m[1:-1], eye_amsl_m, float(path.digest.effective_earth_radius_km)
        )
        assert 1e3 * math.atan(tangent) == pytest.approx(float(path.terms.rx_horizon_angle_mrad), abs=0.02)
        assert at_km == pytest.approx(float(path.terms.rx_horizon_distance_km), abs=1e-6)


def test_skyline_is_not_below_the_horizons_of_single_paths(demo_world):
    """Cells keep the highest ground, so that the skyline may stand above a sampled line but not below it."""
    place = NORTH.latitude_deg, NORTH.longitude_deg
    eye_amsl_m = float(demo_world.ground.elevation_m(*place)) + 10
    radius_km = effective_earth_radius_km(refractivity(*place)[0]).item()
    all_round = skyline(demo_world.ground, *place, eye_amsl_m, radius_km, reach_km=15)
    for index in range(0, 720, 48):
        lat, lon = destination(*place, all_round.bearing_deg[index], 15.0)
        profile = sample_profile(demo_world.ground, *place, float(lat), float(lon))
        far = profile.distance_km >= 0.05
        tangent, _ = horizon(profile.distance_km[far], profile.ground_amsl_m[far], eye_amsl_m, radius_km)
        assert all_round.angle_mrad[index] >= 1e3 * math.atan(tangent) - 0.5  # samples lie between each other
        assert np.isfinite(all_round.distance_km[index])


def test_a_roof_off_the_rasters_or_a_reach_out_of_range_says_what_to_do(demo_world):
    with pytest.raises(LookupError, match="no elevation at 50"):
        skyline_document(demo_world.ground, demo_world.store, 50.0, 8.0)
    with pytest.raises(RequestError, match="reach_km 500 is not possible: use 1 to 150 km") as caught:
        skyline_document(demo_world.ground, demo_world.store, NORTH.latitude_deg, NORTH.longitude_deg, reach_km=500)
    assert not isinstance(caught.value, RoofError)
