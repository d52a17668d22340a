"""The report's PDF checked from outside: by a checker of PDF/UA-1 and by another library's view of its tags."""

from __future__ import annotations

import io
import re
from itertools import pairwise

import page
import pypdf
import pytest
import typst
from PIL import Image
from pypdf.generic import ArrayObject, DictionaryObject

from app.report.content import report_content
from app.report.masts import MOST_PATHS, masts_that_matter
from app.report.paper import TEMPLATE, inputs, report_pdf
from app.roof import Roof
from app.web.schemas import SavedRoofIn

KEPT = {
    "name": "12 Field Lane",
    "roof": {
        "latitude_deg": 44.3,
        "longitude_deg": -37.4507,
        "obstacles": [{"bearing_deg": 57, "distance_m": 40, "height_agl_m": 9, "width_m": 12}],
    },
    "now": "roof-yagi",
}


@pytest.fixture(scope="module")
def content(demo_world):
    request = SavedRoofIn(**KEPT).question().request(None, None, demo_world.store)
    return report_content(KEPT, request, demo_world.store, demo_world.ground)


@pytest.fixture(scope="module")
def crowded(content):
    """Sixty emissions, names of two hundred letters without a space."""
    word = "Donaudampfschifffahrt" * 9
    row = content["changed"][0] | {"name": word, "from": f"channel 48 from {word}"}
    line = content["commissioning"][0] | {"outlet": word, "multiplex": word, "channel": "1234.5 MHz"}
    return content | {
        "name": word,
        "chain": word,
        "columns": [word, word, word],
        "roles": ["up now", "idea 1", "idea 2"],
        "changed": [row | {"cells": ["2 in 10 doubtful"] * 3}] * 30,
        "same": [f"{word} (99 in 100 secure)"] * 30,
        "paths": [one | {"title": word} for one in content["paths"]] * 4,
        "commissioning": [line] * 60,
    }


def elements(data: bytes) -> list[tuple[str, DictionaryObject]]:
    """Every tagged element in reading order: its kind and its dictionary."""
    found: list[tuple[str, DictionaryObject]] = []

    def walk(node: object) -> None:
        if isinstance(node, ArrayObject):
            for one in node:
                walk(one.get_object())
        elif isinstance(node, DictionaryObject):
            if "/S" in node:
                found.append((str(node["/S"]), node))
            if "/K" in node:
                walk(node["/K"].get_object())

    root = pypdf.PdfReader(io.BytesIO(data)).trailer["/Root"]["/StructTreeRoot"]
    walk(root["/K"].get_object())
    return found


@pytest.mark.parametrize("which", ["content", "crowded"])
def test_an_outside_checker_finds_no_fault_against_pdf_ua(which, request):
    """page-validation, an independent checker of ISO 14289-1; it reports how many rules it looked at."""
    report = page.validate_pdf_bytes(report_pdf(request.getfixturevalue(which)), profile="ua1")
    assert [one.message for one in report.failures] == []
    assert report.rules.passed == report.rules.total > 100


def test_the_checker_does_find_a_fault_where_there_is_one(content):
    """Without its mark of being tagged the same file must fail, else the test above proves nothing."""
    broken = re.sub(rb"/Marked true", rb"/Marked null", report_pdf(content))
    assert not page.validate_pdf_bytes(broken, profile="ua1").is_compliant


def test_title_and_language_are_said_and_headings_go_down_by_one(content):
    reader = pypdf.PdfReader(io.BytesIO(report_pdf(content)))
    root = reader.trailer["/Root"]
    assert reader.metadata.title == "Report on 12 Field Lane"
    assert root["/Lang"] == "en"
    assert root["/ViewerPreferences"]["/DisplayDocTitle"]
    levels = [int(kind[2]) for kind, _ in elements(report_pdf(content)) if re.fullmatch("/H[1-6]", kind)]
    assert levels[0] == 1
    assert levels.count(1) == 1
    assert all(after - before <= 1 for before, after in pairwise(levels))


def test_every_drawing_has_the_sentence_of_its_path_in_words(content):
    figures = [str(one["/Alt"]) for kind, one in elements(report_pdf(content)) if kind == "/Figure"]
    assert figures == [one["picture"]["text"] for one in content["paths"]]
    assert all(one["sentence"] in text for one, text in zip(content["paths"], figures, strict=True))


def test_every_table_has_heads_for_its_columns(content):
    tags = elements(report_pdf(content))
    heads = [one for kind, one in tags if kind == "/TH"]
    assert sum(kind == "/Table" for kind, _ in tags) == 3
    assert len(heads) == 3 + 2 + 7  # what changes, parts, the commissioning sheet
    assert all("/Column" in str(one["/A"]) for one in heads)


def test_the_decision_is_read_before_all_but_name_and_place(content):
    text = pypdf.PdfReader(io.BytesIO(report_pdf(content))).pages[0].extract_text()
    first = " ".join(text.split())[:400]
    assert first.startswith("12 Field Lane 44.3000 N 37.4507 W")
    assert content["decision"][:40] in first


def test_nothing_is_set_outside_the_margins(crowded):
    """The sheets as pictures: left and right of the text, 17 mm of A4's 210 stay white (the margins are 18 mm)."""
    sheets = typst.compile(TEMPLATE, format="png", ppi=60, sys_inputs=inputs(crowded))
    assert len(sheets) > 5
    for sheet in sheets:
        picture = Image.open(io.BytesIO(sheet)).convert("L")
        width, height = picture.size
        edge = round(17 / 210 * width)
        for left in (0, width - edge):
            darkest, _ = picture.crop((left, 0, left + edge, height)).getextrema()
            assert darkest == 255


def test_masts_beyond_twelve_are_counted_and_the_likeliest_kept(demo_world):
    def emission(k: int) -> dict:
        return {
            "id": f"e{k}",
            "transmitter": f"t{k}",
            "transmitter_name": f"Mast {k}",
            "bearing_deg": 5.0 * k,
            "distance_km": 0.01,
            "channel": "30",
            "frequency_mhz": 546.0,
            "latitude_deg": 44.3,
            "longitude_deg": -37.4507,
            "antenna_agl_m": 30.0,
            "path": None,
            "reason": "no ground",
            "field": {"p1812_dbuv_m": None, "p1546_dbuv_m": 50.0},
        }

    answer = {
        "emissions": [emission(k) for k in range(20)],
        "multiplexes": [{"chains": {"a": {"chance": k / 20, "emission": f"e{k}"}}} for k in range(20)],
    }
    rows, left_out = masts_that_matter(answer, "a", Roof(44.3, -37.4507), demo_world.ground, None)
    assert (len(rows), left_out) == (MOST_PATHS, 8)
    assert rows[0]["title"] == "040° Mast 8, 0 km"
    assert all(row["picture"] is None for row in rows)
    assert rows[0]["channels"] == ["channel 30: P.1546 50 dB(µV/m)"]
