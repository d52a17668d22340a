"""Classes of cables and splitters, read once from the tables."""

from __future__ import annotations

from dataclasses import dataclass

from app.tables import rows


@dataclass(frozen=True, slots=True)
class Cable:
    """Attenuation of one class of cable at 20 °C: a √f + b f per 100 m, f in MHz."""

    id: str
    name: str
    a_db: float
    b_db: float
    flag: str  # how the figure is known
    source: str
    loop_ohm_per_km: float  # direct current, there and back


@dataclass(frozen=True, slots=True)
class SplitterLoss:
    """Loss from the input of an even splitter to each port."""

    ports: int
    loss_db: float
    flag: str
    source: str


CABLES: dict[str, Cable] = {
    row["id"]: Cable(
        row["id"],
        row["name"],
        float(row["a_db_per_100m"]),
        float(row["b_db_per_100m"]),
        row["flag"],
        row["source"],
        float(row["loop_ohm_per_km"]),
    )
    for row in rows("cables")
}

SPLITTERS: dict[int, SplitterLoss] = {
    int(row["ports"]): SplitterLoss(int(row["ports"]), float(row["loss_db"]), row["flag"], row["source"])
    for row in rows("splitters")
}
