"""Lay out the tabulated field strengths of Rec. ITU-R P.1546-6: one row per figure and distance.

Takes a file with one row per figure, surface, distance and height (columns figure, frequency_mhz,
surface, time_percent, kind, distance_km, height_m, field_dbuv_m):

    python propagation/data/build_p1546_tables.py FILE.csv

Three figures serve cold and warm sea alike; their repeated rows must agree and are written once, as "sea".
"""

import csv
import sys
from pathlib import Path

OUT = Path(__file__).with_name("p1546_tables.csv")
Row = tuple[int, int, str, int, float]


def main(source: Path) -> None:
    """Write the table beside this script."""
    fields: dict[Row, dict[str, str]] = {}
    surfaces: dict[int, set[str]] = {}
    heights: list[str] = []
    with source.open(newline="", encoding="utf-8") as file:
        for line in csv.DictReader(file):
            figure, surface = int(line["figure"]), line["surface"]
            surfaces.setdefault(figure, set()).add(surface)
            row = (
                figure,
                int(line["frequency_mhz"]),
                surface,
                int(line["time_percent"]),
                float(line["distance_km"]),
            )
            column = line["height_m"] or line["kind"]
            if column not in heights:
                heights.append(column)
            fields.setdefault(row, {})[column] = line["field_dbuv_m"]

    heights.sort(key=lambda name: float(name) if name != "maximum" else float("inf"))
    lines = [",".join(["figure", "frequency_mhz", "surface", "time_percent", "distance_km", *map(_column, heights)])]
    written: dict[Row, dict[str, str]] = {}
    for row in sorted(fields):
        figure, frequency, surface, time, distance = row
        shared = (figure, frequency, "sea" if len(surfaces[figure]) == 2 else surface, time, distance)
        if shared in written:
            if written[shared] != fields[row]:
                raise SystemExit(f"figure {figure} differs between both seas at {distance:g} km: mend {source}")
            continue
        written[shared] = fields[row]
        cells = [*map(str, shared[:4]), f"{distance:g}", *(fields[row][height] for height in heights)]
        lines.append(",".join(cells))
    OUT.write_text("\n".join(lines) + "\n", encoding="utf-8", newline="\n")
    print(f"{OUT.name}: {len(lines) - 1} rows")


def _column(height: str) -> str:
    return "maximum_dbuv_m" if height == "maximum" else f"field_{height}_m_dbuv_m"


if __name__ == "__main__":
    main(Path(sys.argv[1]))
