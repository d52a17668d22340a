"""What holds for the page's files as they stand: nothing inline, nothing from elsewhere, one module that asks."""

import re
from pathlib import Path

STATIC = Path(__file__).parent.parent.parent / "static"
PAGES = sorted(STATIC.glob("*.html"))
SCRIPTS = sorted((STATIC / "scripts").glob("*.js"))
STYLES = sorted((STATIC / "styles").glob("*.css"))


def test_pages_have_no_inline_script_or_style():
    assert len(PAGES) == 2
    for page in PAGES:
        text = page.read_text()
        assert not re.search(r"<script(?![^>]*\bsrc=)", text), page.name
        assert not re.search(r"<style|\sstyle=|\son[a-z]+=", text), page.name


def test_nothing_is_loaded_from_elsewhere():
    for path in (*PAGES, *SCRIPTS, *STYLES):
        found = set(re.findall(r"https?://[^\s'\"`)]+", path.read_text())) - {"http://www.w3.org/2000/svg"}
        assert found == set(), path.name


def test_only_the_api_module_asks_the_server():
    asking = [
        path.name for path in SCRIPTS if re.search(r"\bfetch\(|XMLHttpRequest|sendBeacon|EventSource", path.read_text())
    ]
    assert asking == ["api.js"]


def test_names_enter_the_page_as_text():
    for path in SCRIPTS:
        assert not re.search(r"innerHTML|outerHTML|insertAdjacentHTML|document\.write|\beval\(", path.read_text()), (
            path.name
        )


def test_pure_modules_know_neither_page_nor_network():
    for name in (
        "state",
        "units",
        "sentence",
        "drawing",
        "bearings",
        "openapi",
        "latest",
        "horizon",
        "history",
        "air_list",
        "part_fields",
        "chain_edits",
        "sent_file",
    ):
        text = (STATIC / "scripts" / f"{name}.js").read_text()
        assert not re.search(r"\b(document\.(get|query|create)|window\.|localStorage|fetch\()", text), name


def test_every_file_of_the_page_is_used():
    report = STATIC.parent / "app" / "report" / "page.py"
    pages = "".join(page.read_text() for page in (*PAGES, report))
    scripts = "".join(path.read_text() for path in SCRIPTS)
    for path in STYLES:
        assert f"/static/styles/{path.name}" in pages
    for path in SCRIPTS:
        assert f"/static/scripts/{path.name}" in pages or f"'./{path.name}'" in scripts, path.name
