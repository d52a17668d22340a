"""What a reading would have shown: level, C/N and margin as predicted, and which errors move them.

A reading is compared with the median state: no fade, no reserve.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from app.air import Air
from app.assumptions import Assumptions
from app.chain.parts import Aerial, AerialPolarisation, Chain, Feeder, Outlet, Receiver
from app.chance import Cells, Knowledge, Loadings
from app.disturbance import disturbed, ear_of, effect_of
from app.link_budget import receive
from app.margin_errors import of_an_ordinary_day, wanted_errors
from app.readings import AT_THE_AERIAL, Size
from app.roof import Roof

FloatArray = NDArray[np.float64]

MEASURING_AERIAL = "measuring aerial"  # names the chain of a reading where nothing is up

# A neighbour's aerial by its looks: gain [dBd] and beamwidth; common practice, no source.
NEIGHBOURS: dict[Size, tuple[float, float]] = {"small": (6.0, 60.0), "medium": (9.0, 45.0), "large": (12.0, 30.0)}


@dataclass(frozen=True, slots=True)
class Vantage:
    """One way of looking at everything on the air: a chain turned one way, at one of its points."""

    chain: Chain
    pointing_deg: float
    polarisation: AerialPolarisation
    point: str  # "aerial", an outlet's name, or "" for the outlet that decides
    read_at: tuple[str, ...]  # (e,) the point by name, also where it is the outlet that decides
    level_dbuv: FloatArray  # (e,)
    cn_db: FloatArray  # (e,)
    margin_db: FloatArray  # (e,) above the required C/N, without reserve
    cells: Cells  # the margins with their errors
    loadings: Loadings  # (e, k) of those

    @property
    def name(self) -> str:
        """Key of its readings."""
        return f"{self.chain.name}:{self.pointing_deg:.0f}:{self.polarisation}:{self.point}"

    def level_draws(self) -> FloatArray:
        """Joint samples of the levels there. (DRAWS, e)"""
        return self.cells.draws() + (self.level_dbuv - self.margin_db)


def vantage(
    chain: Chain,
    pointing_deg: float,
    polarisation: AerialPolarisation,
    point: str,
    air: Air,
    roof: Roof,
    assumptions: Assumptions,
    known: Knowledge | None = None,
) -> Vantage:
    """Predict every emission as a reading there would show it."""
    seen = at_the_aerial(chain) if point == AT_THE_AERIAL else chain
    got = receive(seen, air.signals, air.used_dbuv_m, pointing_deg, polarisation, assumptions, roof.surroundings)
    ear = ear_of(chain, polarisation, air.company, assumptions, roof.surroundings)
    got = disturbed(got, effect_of(ear, got, ear.left(pointing_deg), "a"))
    shown = next((outlet for outlet in got.outlets if outlet.name == point), got)
    path, errors = wanted_errors(chain, polarisation, air, got, assumptions)
    parts = tuple(
        part
        for part in of_an_ordinary_day(errors)
        if not (point == AT_THE_AERIAL and part.keys[0].startswith("feeder:"))
    )
    margin_db = shown.cn_db - air.signals.required_cn_db
    cells = Cells(margin_db, path, parts, known)
    levels = shown.level_dbuv
    read_at = tuple(point or got.outlets[i].name for i in got.deciding_outlet)
    return Vantage(
        chain, pointing_deg, polarisation, point, read_at, levels, shown.cn_db, margin_db, cells, cells.loadings()
    )


def at_the_aerial(chain: Chain) -> Chain:
    """Return the aerial alone with a set at its terminals."""
    return Chain(
        name=chain.name,
        parts=(chain.aerial, Outlet(id="terminals", name=AT_THE_AERIAL), chain.receiver),
        currency=chain.currency,
    )


def neighbours_chain(size: Size) -> Chain:
    """Return what an aerial seen on another roof may be."""
    gain_dbd, beamwidth_deg = NEIGHBOURS[size]
    aerial = Aerial(
        id=f"neighbour-{size}",
        name="Neighbour's aerial",
        gain_dbd=((174, gain_dbd), (790, gain_dbd)),
        beamwidth_deg=beamwidth_deg,
        front_to_back_db=18,
    )
    feeder = Feeder(id="neighbour-feeder", name="Feeder", cable="copper-7mm", length_m=15)
    return Chain(
        name=f"neighbour {size}",
        parts=(aerial, feeder, Outlet(id="outlet", name="outlet"), Receiver(id="set", name="Set")),
    )


def measuring_chain() -> Chain:
    """Return a measuring aerial at the end of a pole: 6 dBd whatever it points at, straight into the meter."""
    aerial = Aerial(
        id="measuring-aerial",
        name="Measuring aerial",
        gain_dbd=((30, 6.0), (6000, 6.0)),
        beamwidth_deg=360,
        front_to_back_db=0,
    )
    return Chain(
        name=MEASURING_AERIAL,
        parts=(aerial, Outlet(id="terminals", name=AT_THE_AERIAL), Receiver(id="meter", name="Meter")),
    )


def only(loadings: Loadings, e: int, keep: Callable[[str], bool] = lambda key: True) -> dict[str, float]:
    """Return the normals that move one emission, by name [dB]."""
    return {key: float(db) for key, db in zip(loadings.keys, loadings.db[e], strict=True) if db != 0 and keep(key)}
