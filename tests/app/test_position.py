"""Positions as people write them."""

import pytest
from hypothesis import given
from hypothesis import strategies as st

from app.errors import AppError
from app.position import parse_position

PLACE = (48.2082, 16.3738)


@pytest.mark.parametrize(
    "text",
    [
        "48.2082,16.3738", "48.2082, 16.3738", "48.2082 16.3738", " 48.2082;16.3738 ", "48,2082 16,3738",
        "48,2082, 16,3738", "48,2082; 16,3738", "48.2082N 16.3738E", "N48.2082 E16.3738", "N 48.2082, E 16.3738",
        "16.3738E 48.2082N", "48.2082° N, 16.3738° E", "48.2082°, 16.3738°", "lat 48.2082, lon 16.3738",
        "48°12'29.52\"N 16°22'25.68\"E", "48° 12′ 29.52″ N, 16° 22′ 25.68″ E", "48°12’29.52”N 16°22’25.68”E",
        "48 12 29.52 N 16 22 25.68 E", "48:12:29.52N 16:22:25.68E", "N48°12.492' E16°22.428'", "48 12.492, 16 22.428",
        "48°12'29,52\"N 16°22'25,68\"O", "48°12'29.52''N 16°22'25.68''E",
        "48.2082 North 16.3738 East", "48 12 29.52 16 22 25.68", "E16°22'25.68\" N48°12'29.52\"",
    ],
)  # fmt: skip
def test_usual_writings_give_the_same_place(text):
    found = parse_position(text)
    assert (found.latitude_deg, found.longitude_deg) == pytest.approx(PLACE, abs=2e-6)


@pytest.mark.parametrize(
    ("text", "expected"),
    [
        ("-33.8568,151.2153", (-33.8568, 151.2153)),
        ("33.8568S 151.2153E", (-33.8568, 151.2153)),
        ("33°51'24.5\"S, 70°30'00\"W", (-33.856806, -70.5)),
        ("−33.8568; −70.5", (-33.8568, -70.5)),
        ("-0.5,0.25", (-0.5, 0.25)),
        ("-0 30 0, 0 15 0", (-0.5, 0.25)),
    ],
)
def test_southern_and_western_places_keep_their_sign(text, expected):
    found = parse_position(text)
    assert (found.latitude_deg, found.longitude_deg) == pytest.approx(expected, abs=1e-6)


@pytest.mark.parametrize(
    ("text", "expected", "form"),
    [
        # Central meridian of zone 33, 500 km false easting; on the Equator of the south 10,000 km false northing.
        ("EPSG:32633 500000 0", (0.0, 15.0), "EPSG:32633"),
        ("epsg:32733 500000 10000000", (0.0, 15.0), "EPSG:32733"),
        ("33N 500000 0", (0.0, 15.0), "UTM 33N"),
        ("33 H 500000 10000000", (0.0, 15.0), "UTM 33S"),
        ("EPSG:4326 15 47.5", (47.5, 15.0), "EPSG:4326"),
        # EPSG guidance note 7-2, section on Lambert Conic Conformal (2SP) has its own; here the false origin of
        # the European LAEA grid: 4321000, 3210000 at 52 N 10 E (EPSG:3035).
        ("EPSG:3035 4321000 3210000", (52.0, 10.0), "EPSG:3035"),
    ],
)
def test_projected_coordinates_are_read_easting_first(text, expected, form):
    found = parse_position(text)
    assert (found.latitude_deg, found.longitude_deg) == pytest.approx(expected, abs=1e-6)
    assert found.form == form


@pytest.mark.parametrize(
    ("code", "latitude", "longitude"),
    [
        # Open Location Code, published decoding test data (test_data/decoding.csv, Apache-2.0), middles of the areas.
        ("7FG49Q00+", 20.375, 2.775),
        ("7FG49QCJ+2V", 20.3700625, 2.7821875),
        ("8FVC2222+22", 47.0000625, 8.0000625),
        ("4VCPPQGP+Q9", -41.2730625, 174.7859375),
        ("62G20000+", 0.5, -179.5),
    ],
)
def test_plus_codes_decode_as_published(code, latitude, longitude):
    found = parse_position(code)
    assert (found.latitude_deg, found.longitude_deg) == pytest.approx((latitude, longitude), abs=1e-9)


@pytest.mark.parametrize(
    ("text", "says"),
    [
        ("", "two parts are needed"),
        ("48.2", "two parts are needed"),
        ("north of the church", "cannot be read"),
        ("48.2082N 16.3738N", "same direction"),
        ("48 61 0 N 16 0 0 E", "stay below 60"),
        ("48.5 30 N 16 0 E", "only the last"),
        ("-48N 16E", "either a sign or a letter"),
        ("95,200", "latitudes go from -90 to 90"),
        ("EPSG:999999 1 2", "is not known as a coordinate system"),
        ("EPSG:32633 5340357 601912", "outside EPSG:32633"),
        ("99N 500000 0", "zones go from 1 to 60"),
        ("6958+72", "short Plus Code needs its place"),
    ],
)
def test_what_cannot_be_read_says_why_and_how_to_write_it(text, says):
    with pytest.raises(AppError, match=says):
        parse_position(text)


def test_a_latitude_beyond_90_is_asked_back_the_other_way_round():
    with pytest.raises(AppError, match=r"latitude 151\.2 is beyond 90 degrees: is it -33\.8,151\.2, latitude first\?"):
        parse_position("151.2,-33.8")


def test_a_place_at_sea_whose_exchange_is_on_land_is_asked():
    swapped = parse_position("5.4,52.3")  # off Somalia; 52.3 N 5.4 E is in the Netherlands
    assert swapped.question == "5.4,52.3 lies at sea, 52.3,5.4 on land: are latitude and longitude swapped?"
    assert parse_position("52.3,5.4").question is None
    assert parse_position("5.4N 52.3E").question is None


@given(st.text(max_size=40))
def test_any_text_is_a_place_or_an_error_of_ours(text):
    try:
        found = parse_position(text)
    except AppError:
        return
    assert abs(found.latitude_deg) <= 90
    assert abs(found.longitude_deg) <= 180.0000001


@given(st.floats(-89.99, 89.99), st.floats(-179.99, 179.99))
def test_decimal_degrees_come_back_as_written(lat, lon):
    found = parse_position(f"{lat:.6f},{lon:.6f}")
    assert (found.latitude_deg, found.longitude_deg) == pytest.approx((lat, lon), abs=1e-6)
