"""Measured files over HTTP: match and pattern as the page sends them, and what is refused."""

import math
from base64 import b64encode

import pytest
from fastapi.testclient import TestClient

from app.chain.document import part_from_document
from app.chain.pattern import Cut
from app.web.main import create_app

AERIAL = {"kind": "aerial", "id": "a", "name": "A", "gain_dbd": [[470, 8], [694, 10]]}


@pytest.fixture(scope="module")
def client(demo_world):
    return TestClient(create_app(demo_world.store, demo_world.ground), base_url="http://127.0.0.1")


def file(name, text):
    content = text if isinstance(text, bytes) else text.encode()
    return {"name": name, "base64": b64encode(content).decode()}


def sweep(reflection, low=470, high=694, ohm=75):
    rows = "".join(f"{f} {reflection} 0\n" for f in range(low, high + 1, 4))
    return file("aerial.s1p", f"# MHz S RI R {ohm}\n{rows}")


def post(client, address, **body):
    return client.post(f"/api/{address}", json=body)


def refused(response, words, field=None, status=422):
    assert response.status_code == status, response.text
    error = response.json()["error"]
    assert words in error["message"]
    assert error["field"] == field
    assert "Traceback" not in response.text


def test_a_reflection_of_a_third_is_a_standing_wave_ratio_of_two(client):
    """By the definitions: VSWR (1 + 1/3) / (1 - 1/3) = 2, return loss 20 log 3, mismatch -10 log(1 - 1/9)."""
    emissions = [
        one["id"] for one in client.get("/api/emissions").json()["emissions"] if one["channel"] in ("30", "48")
    ]
    found = post(client, "match", sweep=sweep(0.3333333), calibrated="behind-pad", emissions=emissions).json()
    assert [one["channel"] for one in found["channels"]] == ["30", "48"]
    for one in found["channels"]:
        assert one["vswr"] == pytest.approx(2, abs=1e-4)
        assert one["return_loss_db"] == pytest.approx(20 * math.log10(3), abs=1e-3)
        assert one["mismatch_loss_db"] == pytest.approx(-10 * math.log10(8 / 9), abs=1e-4)
    assert found["caution"].startswith("Match is not gain")
    assert found["points"] == len(found["reflection"]) == 57


def test_the_pad_is_removed(client):
    """A series resistor of 25 ohms makes 50 of 75 with no aerial at fault: 75 + 25 = 100, seen from 50 a third."""
    sent = sweep(1 / 3, ohm=50)
    found = post(client, "match", sweep=sent, calibrated="before-pad", pad="series-25", channels=["30"]).json()
    assert found["channels"][0]["return_loss_db"] > 40
    assert found["pad_loss_db"] > 0


def test_a_match_can_be_taken_into_an_aerial(client):
    found = post(client, "match", sweep=sweep(0.2), calibrated="behind-pad").json()
    aerial = AERIAL | {"beamwidth_deg": 40, "front_to_back_db": 20, "reflection": found["reflection"]}
    assert part_from_document(aerial).reflection[0] == (470, 0.2)


@pytest.mark.parametrize(
    ("change", "words", "field"),
    [
        ({"sweep": file("a.txt", "x")}, "a.txt: is no .s1p or .s2p file: export it", "match"),
        ({"sweep": file("a.s1p", b"\x00\x01\x02")}, "a.s1p: is binary, not text: export it as text", "match"),
        ({"sweep": file("a.s1p", "")}, "a.s1p: is empty: save it again", "match"),
        ({"sweep": file("a.s1p", "  ")}, "a.s1p: is empty: save it again", "match"),
        ({"sweep": file("a.s1p", "470 1 0")}, "a.s1p: line 1: data before the option line", "match"),
        ({"sweep": {"name": "a.s1p", "base64": "%%%"}}, "sweep.base64 cannot be read", "sweep.base64"),
        ({"sweep": sweep(1.4)}, "calibrate the analyser again", "match"),
        ({"calibrated": "before-pad", "pad": "own"}, "give its .s2p as well", "match"),
        ({"calibrated": "somewhere"}, "use behind-pad or before-pad", "calibrated"),
        ({"emissions": ["none"]}, 'emission "none" is not stored', "emissions"),
        ({"channels": ["99"]}, 'has no channel "99"', "channel"),
        ({"standard_ohm": 0.0}, "give the load used, 50 or 75 ohms", "match"),
    ],
)
def test_what_cannot_be_read_is_refused_in_plain_words(client, change, words, field):
    body = {"sweep": sweep(0.2), "calibrated": "behind-pad"} | change
    refused(post(client, "match", **body), words, field)


def test_a_file_that_is_too_large_is_refused_before_it_is_read(client):
    refused(
        post(client, "pattern", file=file("p.csv", "0,0\n" * 300_000)), "too large: send at most 1024 kB", status=413
    )


def cosine_pattern():
    """A half-wave dipole's figure of eight, cos²: half power at 45 degrees either side."""
    rows = "".join(
        f"{a},{min(40, -20 * math.log10(max(abs(math.cos(math.radians(a))), 0.01))):.4f}\n" for a in range(360)
    )
    return file("p.csv", f"angle_deg,loss_db\n{rows}")


def test_a_pattern_is_an_aerials_keys_with_its_figures(client):
    found = post(client, "pattern", file=cosine_pattern()).json()
    assert found["cuts"] == [
        {"frequency_mhz": None, "polarisation": None, "emission": None, "points": 360,
         "beamwidth_deg": pytest.approx(90, abs=0.5), "back_db": 0}
    ]  # fmt: skip
    aerial = part_from_document(AERIAL | found["aerial"])
    assert aerial.pattern == "measured"
    assert aerial.beamwidth_deg == pytest.approx(90, abs=0.5)


def test_a_measured_pattern_works_in_a_chain(client):
    found = post(client, "pattern", file=cosine_pattern()).json()
    chain = next(one for one in client.get("/api/chains").json()["chains"] if one["name"] == "high-gain")
    chain = {key: chain[key] for key in chain if key not in ("id", "created", "updated")}
    chain["parts"][0] |= found["aerial"]
    roof = {"latitude_deg": 44.3, "longitude_deg": -37.4507}
    answer = client.post("/api/assess", json={"roof": roof, "chains": [chain], "now": "nothing"})
    assert answer.status_code == 200
    plain = client.post("/api/assess", json={"roof": roof, "chains": ["high-gain"], "now": "nothing"}).json()
    counts = [one["chains"]["high-gain"]["expected_count"] for one in (answer.json(), plain)]
    assert counts[0] != counts[1]


def test_an_aerial_is_mounted_as_its_pattern_was_measured(client):
    """One cut with the rods upright: no other way is tried, and another is refused with its chain and part."""
    rows = "".join(f"{a},{10 * (1 - math.cos(math.radians(a))):.3f},vertical\n" for a in range(0, 360, 5))
    found = post(client, "pattern", file=file("p.csv", f"angle_deg,loss_db,polarisation\n{rows}")).json()
    chain = next(one for one in client.get("/api/chains").json()["chains"] if one["name"] == "high-gain")
    chain = {key: chain[key] for key in chain if key not in ("id", "created", "updated")}
    chain["parts"][0] |= found["aerial"]
    asked = {"roof": {"latitude_deg": 44.3, "longitude_deg": -37.4507}, "now": "nothing"}
    answer = client.post("/api/assess", json=asked | {"chains": [chain]}).json()
    assert answer["chains"]["high-gain"]["pointings"][0]["polarisation"] == "vertical"
    refusal = client.post("/api/assess", json=asked | {"chains": [chain | {"polarisation": "horizontal"}]})
    refused(
        refusal, "measured with the rods vertical only, and they are to stand horizontal", "chains[0].parts[0].pattern"
    )


@pytest.mark.parametrize(
    ("name", "text", "words"),
    [
        ("p.csv", "angle,loss\n0,0", "begin with a line such as angle_deg,loss_db"),
        ("p.csv", "angle_deg,loss_db\n0,x", "line 2: loss_db is"),
        ("p.csv", "angle_deg,loss_db\n" + "".join(f"{a},0\n" for a in range(0, 90, 5)), "has a gap from"),
        ("p.csv", b"PK\x03\x04\x00", "is binary, not text"),
        ("p.nsm", "REVNUM:,NSMA WG16.99.050\n", "p.nsm"),
    ],
)
def test_a_pattern_that_is_none_is_refused_in_plain_words(client, name, text, words):
    refused(post(client, "pattern", file=file(name, text)), words, "pattern")


def test_beamwidth_and_back_of_a_cut_by_hand():
    """A triangle of 1 dB a degree up to 20 dB: 3 dB at 3 degrees either side; a round cut has no half-power point."""
    angles = tuple(float(a) for a in range(360))
    lobe = tuple(float(min(20, a, 360 - a)) for a in range(360))
    assert (Cut(angles, lobe).beamwidth_deg, Cut(angles, lobe).back_db) == (6.0, 20.0)
    assert Cut(angles, (0.0,) * 360).beamwidth_deg == 360
