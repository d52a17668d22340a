"""Lay out published worked examples compactly: one row per case, each profile column stored once.

Takes a folder that holds `p1546_examples` and `p1812_examples`, each with index.csv, cases/*.json and
profiles/*.csv (ITU-R Study Group 3's validation examples in a layout of one file per case):

    python propagation/data/examples/build_examples.py FOLDER
"""

import csv
import hashlib
import json
import sys
from itertools import groupby
from pathlib import Path
from typing import Any

HERE = Path(__file__).parent
SETS = {"p1546": "p1546_examples", "p1812": "p1812_examples"}
PROFILE_COLUMNS = {
    "distance_km": "distance_km",
    "terrain_m_amsl": "terrain_amsl_m",
    "clutter_height_m": "clutter_height_m",
    "zone": "zone",
}
RENAMED = (
    ("_m_agl", "_agl_m"),
    ("_m_amsl", "_amsl_m"),
    ("_lat_", "_latitude_"),
    ("_lon_", "_longitude_"),
    ("basic_transmission_loss", "basic_loss"),
)


def main(source: Path) -> None:
    """Write p1546.csv, p1812.csv, profiles.json and their source files beside this script."""
    columns: dict[str, Any] = {}
    profiles: dict[str, dict[str, str]] = {}
    for name, folder in SETS.items():
        cases = [json.loads(path.read_text()) for path in sorted((source / folder / "cases").glob("*.json"))]
        for case in cases:
            profiles.setdefault(
                f"{name}/{Path(case['profile']).stem}",
                _profile(source / folder / case["profile"], columns),
            )
        _write(HERE / f"{name}.csv", _table(name, cases))
    # one line per column and profile: small, and a change shows in a diff
    lines = ['{"columns": {']
    lines.append(",\n".join(f"{json.dumps(key)}: {json.dumps(value)}" for key, value in columns.items()))
    lines.append('}, "profiles": {')
    lines.append(",\n".join(f"{json.dumps(key)}: {json.dumps(value)}" for key, value in profiles.items()))
    lines.append("}}\n")
    _write(HERE / "profiles.json", "\n".join(lines))


def _profile(path: Path, columns: dict[str, Any]) -> dict[str, str]:
    """Store the profile's columns, each run of equal values once, and return their keys."""
    with path.open(newline="") as file:
        rows = list(csv.DictReader(file))
    keys = {}
    for theirs, ours in PROFILE_COLUMNS.items():
        values = [float(row[theirs]) if row[theirs] else None for row in rows]
        whole = [int(v) if v is not None and v == int(v) else v for v in values]
        runs = [[value, len(list(run))] for value, run in groupby(whole)]
        stored: Any = {"runs": runs} if 2 * len(runs) < len(whole) else whole
        key = next((key for key, column in columns.items() if column == stored), f"c{len(columns)}")
        columns[key] = stored
        keys[ours] = key
    return keys


def _table(name: str, cases: list[dict[str, Any]]) -> str:
    rows = [_row(name, case) for case in cases]
    header = list(rows[0])
    lines = [",".join(header)]
    for row in rows:
        if list(row) != header:
            raise SystemExit(f"case {row['case']} has other fields than the first: mend the folder")
        lines.append(",".join(_cell(value) for value in row.values()))
    return "\n".join(lines) + "\n"


def _row(name: str, case: dict[str, Any]) -> dict[str, Any]:
    row = {
        "case": case["case"],
        "profile": f"{name}/{Path(case['profile']).stem}",
        "profile_first_point": case.get("profile_first_point", "tx"),
    }
    derived = dict(case.get("derived_inputs", {}))
    steps = dict(case["intermediate"])
    derived.pop("h1_source", None)  # says in words which mean the height is over
    if "h1_m_logged" in derived:
        steps = {"h1_m": derived.pop("h1_m_logged"), **steps}
    sections = derived.pop("sections", None)
    if sections is not None:
        for surface in ("land", "cold_sea", "warm_sea"):
            row[f"derived.{surface}_km"] = sum(s["length_km"] for s in sections if s["surface"] == surface)
    for group, values in (
        ("input", case["inputs"]),
        ("derived", derived),
        ("step", steps),
        ("expected", {k: v for k, v in case["expected"].items() if not k.startswith("published_")}),
    ):
        for key, value in values.items():
            row[f"{group}.{_renamed(key)}"] = value
    return row


def _renamed(key: str) -> str:
    for theirs, ours in RENAMED:
        key = key.replace(theirs, ours)
    return key


def _cell(value: Any) -> str:
    return "" if value is None else value if isinstance(value, str) else repr(value)


def _write(path: Path, text: str) -> None:
    path.write_text(text, encoding="utf-8", newline="\n")
    print(f"{path.name}: {len(text)} bytes, sha256 {hashlib.sha256(text.encode()).hexdigest()}")


if __name__ == "__main__":
    main(Path(sys.argv[1]))
