"""What stands near a roof, over ground that the tests make up themselves."""

import math
from dataclasses import replace

import numpy as np
import pytest

from app.assumptions import Assumptions
from app.errors import RoofError
from app.methods import fields_of_methods
from app.paths_to_roof import path_over, to_coast_km
from app.roof import Obstacle, Roof
from propagation.digest import stacked_digests
from terrain.geodesy import points_along
from terrain.profile import Profile

HOUSE = Obstacle(bearing_deg=0.0, distance_m=30.0, height_agl_m=15.0, width_m=20.0)
SOUTH = (46.0, 8.0)  # the roof; the mast stands due north
SPEED_OF_LIGHT = 299_792_458.0


def profile(length_km=10.0, step_m=50.0, ground_m=200.0, surface_m=None):
    """A level path from a mast in the north to the roof, with cover if given as a function of the km from the roof."""
    count = round(length_km * 1e3 / step_m) + 1
    distance_km = np.linspace(0, length_km, count)
    lat, lon = points_along(46.0 + length_km / 111.15, 8.0, *SOUTH, distance_km)
    bare = np.full(count, ground_m)
    surface = bare if surface_m is None else bare + surface_m(length_km - distance_km)
    return Profile(
        distance_km=distance_km,
        ground_amsl_m=surface,
        bare_amsl_m=bare,
        kinds=("surface",),
        zone=np.full(count, 4, dtype=np.int8),
        latitude_deg=lat,
        longitude_deg=lon,
        spacing_m=step_m,
        missing_share=0.0,
    )


def fields(ground, roof, frequency_mhz=600.0, antenna_agl_m=300.0):
    path = path_over(ground, antenna_agl_m, roof, Assumptions())
    both = fields_of_methods(
        stacked_digests([path.digest]),
        [path],
        np.array([frequency_mhz]),
        np.array(["horizontal"]),
        (50.0,),
        np.ones(1),
    )
    return path, both.p1812_dbuv_m[0, 0], both.p1546_dbuv_m[0, 0]


def knife_edge_db(height_m, distance_m, length_m, frequency_mhz):
    """Rec. ITU-R P.526-16, section 4.1, eqs. (26) and (31), written out."""
    wavelength_m = SPEED_OF_LIGHT / (frequency_mhz * 1e6)
    nu = height_m * math.sqrt(2 / wavelength_m * (1 / distance_m + 1 / (length_m - distance_m)))
    return 6.9 + 20 * math.log10(math.sqrt((nu - 0.1) ** 2 + 1) + nu - 0.1)


@pytest.mark.parametrize("frequency_mhz", [200.0, 600.0, 800.0])
def test_a_house_30_m_away_and_5_m_higher_costs_what_a_knife_edge_says(frequency_mhz):
    """The ray falls by 29 m per km from the antenna: 0.87 m higher at the house, less 0.02 m of Earth's curve."""
    ground = profile()
    _, clear_1812, clear_1546 = fields(ground, Roof(*SOUTH), frequency_mhz)
    _, house_1812, house_1546 = fields(ground, Roof(*SOUTH, obstacles=(HOUSE,)), frequency_mhz)
    into_ray_m = 5 - (290 / 10 - 0.59) * 0.03
    expected = knife_edge_db(into_ray_m, 30.0, 10e3, frequency_mhz)
    assert clear_1812 - house_1812 == pytest.approx(expected, abs=0.1)
    assert clear_1546 - house_1546 == pytest.approx(expected, abs=0.1)


@pytest.mark.parametrize(
    ("bearing_deg", "counts"),
    [(0, True), (18, True), (19, False), (342, True), (341, False), (180, False)],
)
def test_an_obstacle_counts_where_the_path_falls_within_its_width(bearing_deg, counts):
    """Half of 20 m seen from 30 m: atan(10 / 30) = 18.43 degrees."""
    path, *_ = fields(profile(), Roof(*SOUTH, obstacles=(replace(HOUSE, bearing_deg=float(bearing_deg)),)))
    assert bool(path.edges) is counts


def test_a_mast_nearer_than_the_obstacle_is_not_hidden():
    path, *_ = fields(profile(0.5), Roof(*SOUTH, obstacles=(replace(HOUSE, distance_m=600.0, width_m=600.0),)))
    assert path.edges == ()


def test_the_worst_obstacle_decides_and_two_do_not_add():
    low = replace(HOUSE, height_agl_m=11.0, distance_m=40.0)
    one, two = Roof(*SOUTH, obstacles=(HOUSE,)), Roof(*SOUTH, obstacles=(low, HOUSE))
    assert fields(profile(), one)[1:] == fields(profile(), two)[1:]


def test_a_blocking_house_makes_the_path_obstructed():
    path, *_ = fields(profile(), Roof(*SOUTH, obstacles=(HOUSE,)))
    assert path.digest.clearance_ratio(600.0) > 0.6
    assert path.clearance_ratio(600.0) < -1


def test_behind_a_hill_the_ray_comes_from_the_hill():
    """A hill of 300 m at 3 km from the roof lifts the ray by 2.9 m at the house: 2.1 m are left of its 5."""
    ground = profile(surface_m=lambda away_km: np.where(np.abs(away_km - 3) < 0.2, 300.0, 0.0))
    path, *_ = fields(ground, Roof(*SOUTH, obstacles=(HOUSE,)))
    nearest_km = 2.8  # its foot on our side
    assert path.edges[0].into_ray_m == pytest.approx(5 - (290 / nearest_km) * 0.03, abs=0.1)


def test_the_surroundings_are_one_obstacle_unless_one_entered_is_worse():
    trees = Roof(*SOUTH, surroundings="trees")
    path, *_ = fields(profile(), trees)
    assert [edge.what for edge in path.edges] == ["surroundings"]
    assert path.p1546_surroundings_m == 15
    path, *_ = fields(profile(), replace(trees, obstacles=(replace(HOUSE, height_agl_m=25.0),)))
    assert [edge.what for edge in path.edges] == ["obstacle", "surroundings"]
    assert path.p1546_surroundings_m == 0


def test_surroundings_below_the_aerial_do_not_count():
    path, *_ = fields(profile(), Roof(*SOUTH, aerial_agl_m=16, surroundings="trees"))
    assert path.edges == ()


def test_an_aerial_just_above_its_own_roof_is_not_blocked_by_its_house():
    """A surface model shows the own house 9 m high from 8 m before the aerial to 40 m; the aerial stands at 10 m."""
    open_ground, own = (
        profile(step_m=2.0),
        profile(step_m=2.0, surface_m=lambda away_km: np.where(away_km < 0.04, 9, 0)),
    )
    roof = Roof(*SOUTH)
    assert fields(own, roof)[1:] == pytest.approx(fields(open_ground, roof)[1:], abs=1e-9)


def test_cover_is_never_added_twice():
    """What P.1812 adds to the bare ground makes the surface and no more."""
    woods = profile(surface_m=lambda away_km: np.where((away_km > 1) & (away_km < 2), 20.0, 0.0))
    path, *_ = fields(woods, Roof(*SOUTH, surroundings="trees"))
    assert path.surface_amsl_m.max() == 220
    assert path.digest.rx_ground_amsl_m == 200
    assert (path.terms.terrain_roughness_m < 1).all()  # roughness is that of the bare ground


@pytest.mark.parametrize(
    ("field", "value"),
    [("bearing_deg", 361.0), ("distance_m", 0.0), ("height_agl_m", -1.0), ("width_m", math.nan), ("distance_m", 3e3)],
)
def test_an_impossible_obstacle_is_refused_by_its_place(field, value):
    with pytest.raises(RoofError, match=f"obstacles.1.{field} .* is not possible: use") as caught:
        Roof(*SOUTH, obstacles=(HOUSE, replace(HOUSE, **{field: value})))
    assert caught.value.field == f"obstacles.1.{field}"


def test_distance_to_the_coast_counts_land_along_the_path():
    """Rec. ITU-R P.1812-7, table of inputs: over land from each end, 0 at sea, 500 km where there is none."""
    distance_km, zone = np.array([0.0, 2, 5, 9]), np.array([3, 3, 1, 1], dtype=np.int8)
    assert to_coast_km(distance_km, zone) == 5
    assert to_coast_km(9 - distance_km[::-1], zone[::-1]) == 0
    assert to_coast_km(distance_km, np.full(4, 4, dtype=np.int8)) == 500


def test_a_tree_costs_the_lesser_of_the_way_over_it_and_through_its_leaves():
    """Over: the knife edge of the house. Through 10 m of leaves at 600 MHz: 0.11 dB/m, so about 1.1 dB."""
    path, tree_1812, tree_1546 = fields(profile(), Roof(*SOUTH, obstacles=(replace(HOUSE, leaves_m=10.0),)))
    _, clear_1812, clear_1546 = fields(profile(), Roof(*SOUTH))
    assert clear_1812 - tree_1812 == pytest.approx(1.1, abs=0.15)
    assert clear_1546 - tree_1546 == pytest.approx(1.1, abs=0.15)
    _, wood_1812, _ = fields(profile(), Roof(*SOUTH, obstacles=(replace(HOUSE, leaves_m=300.0),)))
    _, house_1812, _ = fields(profile(), Roof(*SOUTH, obstacles=(HOUSE,)))
    assert wood_1812 == house_1812  # over a deep wood it is easier
    assert path.edges[0].leaves_m == 10.0


def test_a_house_behind_a_tree_still_blocks():
    tree = replace(HOUSE, height_agl_m=18.0, leaves_m=5.0)
    _, both_1812, _ = fields(profile(), Roof(*SOUTH, obstacles=(tree, HOUSE)))
    _, house_1812, _ = fields(profile(), Roof(*SOUTH, obstacles=(HOUSE,)))
    assert both_1812 == pytest.approx(house_1812, abs=1e-9)
