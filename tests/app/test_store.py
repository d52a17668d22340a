"""The store: what is in reach, replacing a source, documents."""

import sqlite3
import threading
from datetime import date

import numpy as np
import pytest
from pyproj import Geod

from app.demo.scenario import ensure_demo
from app.errors import NotStoredError, RequestError, StoreError
from app.transmitters.model import Emission, Multiplex, Transmitter
from app.transmitters.rows import Source
from app.transmitters.store import Store


def mast(key="hill", lat=44.0, lon=-37.0, source="mine", **more):
    return Transmitter(key, key.title(), lat, lon, more.pop("ground", 120.5), source)


def emission(key="hill-1", transmitter="hill", multiplex="one", **more):
    values = {
        "channel": "47",
        "frequency_mhz": 682.0,
        "bandwidth_mhz": 8.0,
        "system": "DVB-T2",
        "mode": "any",
        "erp_kw": 10.0,
        "polarisation": "horizontal",
        "antenna_agl_m": 150.0,
    }
    return Emission(key, transmitter, multiplex, **(values | more))


ONE = Multiplex("one", "One")


@pytest.fixture
def store(tmp_path):
    return Store.open(tmp_path)


def fill(store, source="mine", transmitters=None, emissions=None, multiplexes=(ONE,)):
    return store.replace_source(
        Source(source, source), transmitters or [mast()], emissions or [emission()], multiplexes
    )


def ids(found):
    return [entry[0].id for entry in found]


def test_an_empty_store_holds_nothing(store):
    assert (store.transmitters(), store.emissions(), store.multiplexes(), store.sources()) == ([], [], {}, [])
    assert store.emissions_within(44, -37, 21_000) == []
    assert store.nearest_transmitter(44, -37) is None


def test_everything_comes_back_as_it_was_stored(store):
    full = emission(
        pattern_attenuation_db=tuple(0.01 * 37 * i for i in range(36)),
        valid_from=date(2020, 2, 29),
        valid_to=date(2030, 1, 1),
        flags=("erp-unknown", "pattern-unknown"),
        on=False,
    )
    plain = emission("hill-2", channel="", frequency_mhz=474.166)
    fill(store, transmitters=[mast(), mast("low", ground=None)], emissions=[full, plain])
    back = store.emissions()
    assert back[1] == plain
    assert back[0].pattern_attenuation_db == pytest.approx(full.pattern_attenuation_db, abs=1e-12)
    assert {f: getattr(back[0], f) for f in ("valid_from", "valid_to", "flags", "on", "mode")} == {
        f: getattr(full, f) for f in ("valid_from", "valid_to", "flags", "on", "mode")
    }
    assert store.transmitters() == [mast(), mast("low", ground=None)]
    assert store.multiplexes() == {"one": ONE}


def test_a_second_opening_finds_the_same(store, tmp_path):
    fill(store)
    assert Store.open(tmp_path).emissions() == [emission()]


@pytest.mark.parametrize(
    ("lat", "lon"),
    [(44.3, -37.2), (51.0, 179.95), (-16.5, -179.9), (89.7, 20.0), (-89.9, -100.0), (0.0, 0.0)],
)
@pytest.mark.parametrize("reach_km", [0.0, 60.0, 150.0, 500.0, 9_000.0, 21_000.0])
def test_reach_is_the_geodesic_everywhere_on_earth(tmp_path_factory, lat, lon, reach_km):
    """Against pyproj's own geodesic over every mast, across 180° and round the poles."""
    store = scattered(tmp_path_factory, lat, lon)
    geod = Geod(ellps="WGS84")
    expected = {}
    for t in store.transmitters():
        azimuth, _, metres = geod.inv(lon, lat, t.longitude_deg, t.latitude_deg)
        if metres / 1e3 <= reach_km:
            expected[t.id] = (metres / 1e3, azimuth % 360)
    found = {t.id: (km, bearing) for _, t, km, bearing in store.emissions_within(lat, lon, reach_km)}
    assert found.keys() == expected.keys()
    for key, (km, bearing) in expected.items():
        assert found[key][0] == pytest.approx(km, abs=1e-6)
        if km > 0:
            assert (found[key][1] - bearing + 180) % 360 - 180 == pytest.approx(0, abs=1e-6)


_SCATTERED = {}


def scattered(factory, lat, lon):
    """A store with masts at, near and far from a point, made once per point."""
    if (lat, lon) not in _SCATTERED:
        rng = np.random.default_rng(7)
        store = Store.open(factory.mktemp("scattered"))
        geod = Geod(ellps="WGS84")
        km = np.concatenate([[0.0], rng.uniform(0, 600, 150), rng.uniform(0, 20_000, 150)])
        east, north, _ = geod.fwd(np.full(301, lon), np.full(301, lat), rng.uniform(0, 360, 301), km * 1e3)
        places = [*zip(north, east, strict=True), (0.0, 180.0), (0.0, -180.0), (90.0, 0.0), (-90.0, 5.0)]
        masts = [mast(f"m{i}", float(n), float(e)) for i, (n, e) in enumerate(places)]
        fill(store, transmitters=masts, emissions=[emission(f"{m.id}-1", m.id) for m in masts])
        _SCATTERED[lat, lon] = store
    return _SCATTERED[lat, lon]


def test_found_emissions_come_nearest_first(store):
    fill(
        store,
        transmitters=[mast("far", 45.0), mast("near", 44.1)],
        emissions=[emission("a", "far"), emission("b", "near")],
    )
    assert ids(store.emissions_within(44, -37, 150)) == ["b", "a"]
    nearest, km = store.nearest_transmitter(44, -37)
    assert (nearest.id, round(km)) == ("near", 11)


def test_the_nearest_transmitter_may_be_on_the_other_side_of_the_earth(store):
    fill(store)
    assert store.nearest_transmitter(-44, 143)[1] == pytest.approx(20_004, abs=1)  # half a meridian


def test_what_is_off_or_not_valid_that_day_is_left_out(store):
    fill(
        store,
        emissions=[
            emission("always"),
            emission("off", on=False),
            emission("past", valid_to=date(2026, 6, 30)),
            emission("future", valid_from=date(2026, 7, 1)),
        ],
    )
    assert ids(store.emissions_within(44, -37, 10, date(2026, 6, 30))) == ["always", "past"]
    assert ids(store.emissions_within(44, -37, 10, date(2026, 7, 1))) == ["always", "future"]
    assert len(store.emissions()) == 4


@pytest.mark.parametrize("position", [(91, 0), (0, 181), (float("nan"), 0), (0, float("inf"))])
def test_a_position_off_the_earth_is_refused(store, position):
    with pytest.raises(RequestError, match="use latitudes -90 to 90"):
        store.emissions_within(*position, 100)


def test_the_demo_is_left_out_beside_any_other_source(store):
    fill(store, "demo", [mast("d", source="demo")], [emission("d-1", "d")], [ONE, Multiplex("two", "Two")])
    assert ids(store.emissions_within(44, -37, 10)) == ["d-1"]
    fill(store)
    assert ids(store.emissions_within(44, -37, 10)) == ["hill-1"]
    assert [t.id for t in store.transmitters()] == ["hill"]
    assert list(store.multiplexes()) == ["one"]
    assert [s.id for s in store.sources()] == ["demo", "mine"]


def test_replacing_a_source_tells_what_changed_and_leaves_others_alone(store):
    fill(store, "other", [mast("o", source="other")], [emission("o-1", "o")])
    fill(store, emissions=[emission("a"), emission("b"), emission("c")])
    replaced = fill(
        store, transmitters=[mast(lat=45)], emissions=[emission("b", erp_kw=20), emission("c"), emission("d")]
    )
    assert (replaced.added, replaced.changed, replaced.gone) == (("d",), ("b",), ("a",))
    assert [e.id for e in store.emissions()] == ["b", "c", "d", "o-1"]
    assert [s.rows_kept for s in store.sources()] == [3, 1]
    assert ids(store.emissions_within(44, -37, 10)) == ["o-1"]  # the old position has left the index too
    assert ids(store.emissions_within(45, -37, 10)) == ["b", "c", "d"]


@pytest.mark.parametrize(
    ("transmitters", "emissions"),
    [
        ([mast()], [emission(transmitter="nowhere")]),
        ([mast()], [emission(multiplex="nothing")]),
        ([mast()], [emission(), emission()]),
        ([mast(), mast()], [emission()]),
        ([mast("o")], [emission("mine-1", "o")]),
        ([mast()], [emission("o-1")]),
    ],
    ids=[
        "no such mast",
        "no such multiplex",
        "emission twice",
        "mast twice",
        "other's mast",
        "other's emission",
    ],
)
def test_a_source_that_does_not_fit_together_changes_nothing(store, transmitters, emissions):
    fill(store, "other", [mast("o", source="other")], [emission("o-1", "o")])
    fill(store, emissions=[emission("kept")])
    with pytest.raises(StoreError, match="nothing was changed"):
        fill(store, transmitters=transmitters, emissions=emissions)
    assert [e.id for e in store.emissions()] == ["kept", "o-1"]


def test_thousands_of_emissions_are_found_in_a_moment(store):
    places = np.random.default_rng(3).uniform((40, -45), (50, -30), (5_000, 2))
    masts = [mast(f"m{i}", *map(float, place)) for i, place in enumerate(places)]
    rows = [emission(f"{m.id}-{n}", m.id) for m in masts for n in range(4)]
    fill(store, transmitters=masts, emissions=rows)
    found = store.emissions_within(45, -37, 100)
    assert 0 < len(found) < 2_000
    assert len(store.emissions()) == 20_000


def test_four_writers_and_four_readers_at_once_lose_nothing(store):
    faults = []

    def write(n):
        try:
            for i in range(10):
                store.put_roof({"name": f"{n} {i}", "n": n})
        except Exception as error:
            faults.append(error)

    def read():
        try:
            for _ in range(10):
                store.list_roofs()
        except Exception as error:
            faults.append(error)

    threads = [threading.Thread(target=write, args=[n]) for n in range(4)]
    threads += [threading.Thread(target=read) for _ in range(4)]
    for thread in threads:
        thread.start()
    for thread in threads:
        thread.join()
    assert faults == []
    assert len(store.list_roofs()) == 40


def test_a_roof_is_kept_changed_and_removed(store):
    made = store.put_roof({"name": " Mill ", "latitude_deg": 44.25, "obstacles": [{"bearing_deg": 90}]})
    assert made["name"] == "Mill"
    assert made["created"] == made["updated"]
    assert store.get_roof(made["id"]) == made
    changed = store.put_roof(made | {"latitude_deg": 44.5})
    assert (changed["id"], changed["latitude_deg"], changed["created"]) == (made["id"], 44.5, made["created"])
    store.put_roof({"name": "Mill"})  # two roofs may share a name
    assert len(store.list_roofs()) == 2
    store.delete_roof(made["id"])
    with pytest.raises(NotStoredError, match="there is no roof"):
        store.get_roof(made["id"])


def test_a_chain_is_asked_for_by_id_or_name(store):
    store.put_chain({"id": "long", "name": "Long aerial", "parts": []})
    assert store.get_chain("long") == store.get_chain("Long aerial")
    with pytest.raises(NotStoredError, match='there is no chain "short": stored are "Long aerial"'):
        store.get_chain("short")
    store.delete_chain("Long aerial")
    with pytest.raises(NotStoredError, match="no chain is stored yet"):
        store.delete_chain("long")


def test_two_chains_cannot_share_a_name(store):
    store.put_chain({"id": "long", "name": "Long"})
    with pytest.raises(RequestError, match='a chain "Long" already'):
        store.put_chain({"name": "Long"})
    with pytest.raises(RequestError, match='a chain "long" already'):
        store.put_chain({"name": "long"})
    assert len(store.list_chains()) == 1


@pytest.mark.parametrize("name", ["", "  ", None, 3, "x" * 121, "a\nb"])
def test_a_document_needs_a_fit_name(store, name):
    with pytest.raises(RequestError, match="write 1 to 120 printable characters"):
        store.put_roof({"name": name})


@pytest.mark.parametrize("value", [float("nan"), float("inf"), {1, 2}, "\ud800"])
def test_contents_that_json_cannot_hold_are_refused(store, value):
    with pytest.raises(RequestError, match="cannot be stored"):
        store.put_roof({"name": "Mill", "value": value})
    assert store.list_roofs() == []


def test_documents_come_in_the_order_in_which_they_were_made(store):
    for name in ("short", "long", "another"):
        store.put_chain({"id": name, "name": name})
    store.put_chain({"id": "short", "name": "zz"})  # a change keeps the place
    assert [chain["id"] for chain in store.list_chains()] == ["short", "long", "another"]


def test_damaged_rows_are_told_not_raised_as_faults(store):
    """What another program did to the file is the user's to mend: a message, no traceback."""
    ensure_demo(store)
    with sqlite3.connect(store.path) as connection:
        connection.execute("UPDATE document SET body = '{' WHERE kind = 'chain'")
        connection.execute("UPDATE emission SET valid_from = 'soon'")
    with pytest.raises(StoreError, match="is damaged: restore a backup"):
        store.list_chains()
    with pytest.raises(StoreError, match=r"is damaged .*: import its file again"):
        store.emissions()


def test_a_source_can_be_taken_out_and_the_demo_comes_back(store):
    ensure_demo(store)
    shown = len(store.emissions())
    mast = Transmitter("own:mast", "Mast", 10.0, 20.0, None, "own")
    mux = Multiplex("own-1", "Own One")
    emission = Emission("own:1", mast.id, mux.id, "30", 546.0, 8.0, "DVB-T2", "256-QAM 2/3", 1.0, "horizontal", 50.0)
    store.replace_source(Source("own", "own.csv"), [mast], [emission], [mux])
    assert len(store.emissions()) == 1
    assert store.delete_source("own") == 1
    assert len(store.emissions()) == shown
    with pytest.raises(NotStoredError, match='no source "own": stored are demo'):
        store.delete_source("own")


def test_guard_interval_and_delay_come_back_as_stored(tmp_path):
    store = Store.open(tmp_path)
    mast = Transmitter("m", "Mast", 44.0, -37.0, None, "s")
    sent = [
        Emission(
            f"e{k}",
            "m",
            "x",
            "",
            650.0 + 8 * k,
            8,
            "DVB-T2",
            "256-QAM 2/3",
            1,
            "horizontal",
            50,
            guard=guard,
            static_delay_us=late,
        )
        for k, (guard, late) in enumerate((("32K 1/8", 7.5), ("", None)))
    ]
    store.replace_source(Source("s", "s"), [mast], sent, [Multiplex("x", "X")])
    assert store.emissions() == sent
    assert [one for one, *_ in store.emissions_within(44.0, -37.0, 10)] == sent
