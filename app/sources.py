"""The published documents that an answer rests on."""

from __future__ import annotations

SOURCES: tuple[dict[str, str], ...] = (
    {"id": "p525", "title": "Calculation of free-space attenuation", "document": "Rec. ITU-R P.525"},
    {"id": "p526", "title": "Propagation by diffraction", "document": "Rec. ITU-R P.526"},
    {
        "id": "p1546",
        "title": "Method for point-to-area predictions for terrestrial services, 30 MHz to 4 GHz",
        "document": "Rec. ITU-R P.1546-6",
    },
    {
        "id": "p1812",
        "title": "A path-specific propagation prediction method for point-to-area services",
        "document": "Rec. ITU-R P.1812-7",
    },
    {"id": "p453", "title": "The radio refractive index", "document": "Rec. ITU-R P.453-14"},
    {"id": "p372", "title": "Radio noise", "document": "Rec. ITU-R P.372"},
    {
        "id": "ge06",
        "title": "Planning formulas for digital terrestrial broadcasting",
        "document": "GE06 Agreement, chapter 3",
    },
)
