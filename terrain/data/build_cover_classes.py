"""Builds cover_classes.csv: the class codes of three land-cover maps in our categories."""

from __future__ import annotations

import csv
from pathlib import Path

# category of our own: what the Recommendations ask for, and what the sea needs
WORLDCOVER = """
10 trees tree cover|20 shrubs shrubland|30 open grassland|40 open cropland|50 suburban built-up
60 open bare or sparse vegetation|70 open snow and ice|80 water permanent water|90 open herbaceous wetland
95 trees mangroves|100 open moss and lichen
"""
NLCD = """
11 water open water|12 open perennial ice and snow|21 open developed, open space|22 suburban developed, low intensity
23 suburban developed, medium intensity|24 urban developed, high intensity|31 open barren land|41 trees deciduous forest
42 trees evergreen forest|43 trees mixed forest|51 shrubs dwarf scrub|52 shrubs shrub and scrub
71 open grassland and herbaceous|72 open sedge and herbaceous|73 open lichens|74 open moss|81 open pasture and hay
82 open cultivated crops|90 trees woody wetlands|95 open emergent herbaceous wetlands
"""
CORINE = """
111 urban continuous urban fabric|112 suburban discontinuous urban fabric|121 urban industrial or commercial units
122 open road and rail networks|123 open port areas|124 open airports|131 open mineral extraction sites
132 open dump sites|133 open construction sites|141 trees green urban areas|142 open sport and leisure facilities
211 open non-irrigated arable land|212 open irrigated land|213 open rice fields|221 open vineyards
222 shrubs fruit trees and berry plantations|223 shrubs olive groves|231 open pastures
241 open annual with permanent crops|242 open complex cultivation|243 open agriculture with natural vegetation
244 trees agro-forestry areas|311 trees broad-leaved forest|312 trees coniferous forest|313 trees mixed forest
321 open natural grasslands|322 shrubs moors and heathland|323 shrubs sclerophyllous vegetation
324 shrubs transitional woodland-shrub|331 open beaches, dunes, sands|332 open bare rocks
333 open sparsely vegetated areas|334 open burnt areas|335 open glaciers and perpetual snow|411 open inland marshes
412 open peat bogs|421 open salt marshes|422 open salines|423 sea intertidal flats|511 inland-water water courses
512 inland-water water bodies|521 sea coastal lagoons|522 sea estuaries|523 sea sea and ocean
"""


def rows() -> list[tuple[str, int, str, str]]:
    """Table, code, category and name of every class."""
    found = []
    for table, text in (("worldcover", WORLDCOVER), ("nlcd", NLCD), ("corine", CORINE)):
        for number, entry in enumerate(text.strip().replace("\n", "|").split("|"), 1):
            code, category, name = entry.split(" ", 2)
            found.append((table, int(code), category, name))
            if table == "corine":  # rasters hold the place of the class in the list, 1 to 44, or its code
                found.append((table, number, category, name))
    return sorted(found)


if __name__ == "__main__":
    with Path(__file__).with_name("cover_classes.csv").open("w", newline="", encoding="utf-8") as file:
        writer = csv.writer(file, lineterminator="\n")
        writer.writerow(("table", "code", "category", "name"))
        writer.writerows(rows())
