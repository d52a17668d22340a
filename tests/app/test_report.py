"""The report on a kept roof: what stands in it, and that any words can stand in it."""

from __future__ import annotations

import json
import math
import re

import pytest
from starlette.testclient import TestClient

from app.report.commissioning import expected_mer_db
from app.report.content import report_content
from app.report.page import report_html
from app.report.paper import report_pdf
from app.web.main import create_app
from app.web.schemas import SavedRoofIn

KEPT = {
    "name": "12 Field Lane",
    "roof": {"latitude_deg": 44.3, "longitude_deg": -37.4507},
    "now": "roof-yagi",
    "landmark": "left of the chapel",
}
STRANGE = 'A <b>bold</b> & "quoted" #strong[name] $x$ \\ with `ticks` @ref Krähenwinkel 日本'


@pytest.fixture(scope="module")
def content(demo_world):
    request = SavedRoofIn(**KEPT).question().request(None, None, demo_world.store)
    return report_content(KEPT, request, demo_world.store, demo_world.ground)


@pytest.fixture
def client(demo_world):
    with TestClient(create_app(demo_world.store, demo_world.ground), base_url="http://localhost") as one:
        yield one


def test_the_decision_stands_in_the_first_lines_with_price_and_answer(content):
    assert re.match(r"^Today .+ of \d+\. .+ (adds|loses) .+ for \d+ EUR: .+\.$", content["decision"])
    assert content["columns"] == ["Short roof Yagi", content["chain"]]


def test_the_roof_line_names_true_and_compass_bearing_rods_height_and_landmark(content):
    words = [word for _, word in content["roof_line"]]
    assert words[0] == "from true north"
    assert words[1].startswith("by compass on ")
    # Two standard deviations of a normal hold 19 in 20; the caution on the same sheet says as much.
    doubt = re.search(r"±[\d.]+° \(19 in 20", words[1])
    assert doubt
    assert any(doubt[0] in caution for caution in content["cautions"])
    assert [content["roof_line"][place][0] for place in (2, 3, 4)] == ["rods flat", "10 m", "left of the chapel"]


def test_the_compass_is_as_doubtful_on_the_roof_line_as_in_the_cautions(content):
    [line] = [word for _, word in content["roof_line"] if word.startswith("by compass")]
    [caution] = [one for one in content["cautions"] if one.startswith("A compass points")]
    assert re.findall(r"±\s?([\d.]+)°", line) == re.findall(r"±\s?([\d.]+)°", caution) != []


def test_a_level_is_asked_for_with_its_place_and_a_reading_is_told_by_its_channel(demo_world):
    read = [{"kind": "seen", "emission": "northern-range-30", "state": "perfect"}]
    request = SavedRoofIn(**KEPT, readings=read).question().request(None, None, demo_world.store)
    content = report_content(KEPT, request, demo_world.store, demo_world.ground)
    assert content["measure"]["where"] == "at the outlet Living room through Short roof Yagi"
    assert content["readings"] == ["channel 30 from Northern Range perfect"]


def test_what_is_to_be_paid_adds_up_and_what_stays_is_named(content):
    prices = [int(price.split()[0]) for _, price in content["parts"]]
    assert content["price"].startswith(f"Together {sum(prices)} EUR. Stays up, not paid again: Feeder")
    assert f"for {sum(prices)} EUR" in content["decision"]


def test_the_commissioning_sheet_has_a_line_for_each_outlet_and_multiplex(content):
    pairs = {(row["outlet"], row["multiplex"]) for row in content["commissioning"]}
    assert len(pairs) == len(content["commissioning"]) > 0
    assert {outlet for outlet, _ in pairs} == {"Living room", "Bedroom"}
    assert all(re.match(r"^-?\d+ \(-?\d+ to -?\d+\)$", row["level"]) for row in content["commissioning"])


def test_a_meters_limit_adds_to_the_noise_of_the_signal():
    """Powers add: two equal noises make 3 dB more; far below its limit the meter shows the C/N."""
    assert expected_mer_db(36, 36) == pytest.approx(36 - 10 * math.log10(2))
    assert expected_mer_db(10, 36) == pytest.approx(10, abs=0.02)
    assert expected_mer_db(200, 36) == pytest.approx(36)


def test_words_from_outside_stay_words_on_page_and_paper(content):
    strange = content | {"name": STRANGE, "chain": STRANGE, "note": STRANGE}
    page = report_html(strange, "/report/1.pdf")
    assert "<b>bold" not in page
    assert "&lt;b&gt;bold&lt;/b&gt;" in page
    paper = report_pdf(strange)
    assert paper.startswith(b"%PDF-")
    assert b"/StructTreeRoot" in paper


def test_the_paper_is_tagged_a4_and_holds_sixty_long_names(content):
    one = content["changed"][0]
    many = content | {
        "name": "A long name of a block of flats " * 6,
        "changed": [one | {"name": f"Multiplex with quite a long name {k} of sixty"} for k in range(60)],
        "same": [f"Verylongmultiplexnamewithoutanyspace{k} (99 in 100 secure)" for k in range(60)],
        "commissioning": content["commissioning"] * 9,
    }
    paper = report_pdf(many)
    assert b"/StructTreeRoot" in paper
    assert b"pdfuaid" in paper
    boxes = set(re.findall(rb"/MediaBox\s*\[([^\]]*)\]", paper))
    assert {tuple(round(float(n)) for n in box.split()) for box in boxes} == {(0, 0, 595, 842)}  # 210 x 297 mm


def test_report_of_a_kept_roof_is_served_and_of_none_is_refused(client):
    kept = client.post("/api/roofs", json=KEPT).json()
    page = client.get(f"/report/{kept['id']}")
    assert page.status_code == 200
    assert "Commissioning sheet" in page.text
    assert "style-src" not in page.headers["content-security-policy"] or "unsafe" not in page.text
    paper = client.get(f"/report/{kept['id']}.pdf")
    assert paper.headers["content-type"] == "application/pdf"
    client.delete(f"/api/roofs/{kept['id']}")
    assert client.get(f"/report/{kept['id']}").status_code == 404


def test_a_roof_keeps_what_was_asked_for_it(client):
    asked = KEPT | {"assumptions": {"reserve_db": 5.0}, "availability_percent": 90, "second": "high-gain"}
    kept = client.post("/api/roofs", json=asked).json()
    assert {key: kept[key] for key in ("assumptions", "availability_percent", "second", "landmark")} == {
        key: asked[key] for key in ("assumptions", "availability_percent", "second", "landmark")
    }
    assert "reserve_db = 5" in client.get(f"/report/{kept['id']}").text
    client.delete(f"/api/roofs/{kept['id']}")


def test_an_idea_that_is_no_longer_stored_is_named_in_the_report(client):
    kept = client.post("/api/roofs", json=KEPT | {"idea": "gone", "second": "lost"}).json()
    page = client.get(f"/report/{kept['id']}").text
    assert "Idea 1 was &quot;gone&quot;, which is not among the chains any more: the best of the others stands" in page
    assert "Idea 2 was &quot;lost&quot;, which is not among the chains any more: it is left out." in page
    client.delete(f"/api/roofs/{kept['id']}")


def test_an_emission_that_is_switched_off_takes_no_part(client):
    def received() -> str:
        return json.dumps(client.post("/api/assess", json={"roof": KEPT["roof"]}).json()["emissions"])

    assert '"far-island-39"' in received()
    assert client.put("/api/emissions/far-island-39", json={"on": False}).json()["on"] is False
    assert '"far-island-39"' not in received()
    assert client.put("/api/emissions/far-island-39", json={"on": True}).json()["on"] is True
    assert client.put("/api/emissions/none", json={"on": True}).status_code == 404


def test_ledgers_come_only_for_the_emissions_that_are_asked_for(client):
    question = {"roof": KEPT["roof"], "chains": ["roof-yagi"], "ledgers": ["far-island-39"]}
    emissions = client.post("/api/assess", json=question).json()["emissions"]
    told = {one["id"] for one in emissions if one["chains"]["roof-yagi"]["outlets"][0]["ledger"]}
    assert told == {"far-island-39"}


def test_chances_by_degree_are_whole_percent_and_agree_with_the_answer_where_it_points(client):
    """At the chosen degree the sweep and the answer are one figure, to the percent that is sent."""
    document = client.post("/api/assess", json={"roof": KEPT["roof"], "chains": ["roof-yagi"]}).json()
    pointing = document["chains"]["roof-yagi"]["pointings"][0]
    assert len(pointing["pattern_loss_db_by_degree"]) == 360
    assert pointing["pattern_loss_db_by_degree"][0] == 0
    for name, percent in pointing["chance_percent_by_degree"].items():
        assert len(percent) == 360
        cell = next(one for one in document["multiplexes"] if one["id"] == name)["chains"]["roof-yagi"]
        assert percent[round(pointing["pointing_deg"])] == pytest.approx(100 * cell["chance"], abs=3)
