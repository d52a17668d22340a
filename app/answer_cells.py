"""What the answer says of each emission through one chain, reckoned for all emissions at once."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

import numpy as np
from numpy.typing import NDArray

from app.air import Air
from app.chance import exceedance, not_too_much
from app.margins import HeldBack, Turned

FloatArray = NDArray[np.float64]

QUANTILE_95 = 1.6449  # of the standard normal


def cells_of(turned: Turned, air: Air) -> list[dict[str, Any]]:
    """Return margin, spread, chance, limit and outlets of each emission, with ledgers left empty. (e,)"""
    sigma_db, margin_db = turned.sigma_db, turned.margin_db + turned.read_db
    outlets = [_at_outlet(turned, number, air) for number in range(len(turned.median.outlets))]
    columns: dict[str, list[Any]] = {
        "margin_db": _rounded(margin_db),
        "margin_p05_db": _rounded(margin_db - QUANTILE_95 * sigma_db),
        "margin_p95_db": _rounded(margin_db + QUANTILE_95 * sigma_db),
        "sigma_db": _rounded(sigma_db),
        "level_sigma_db": _rounded(turned.level_sd_db),
        "chance": _rounded(np.clip(turned.chance, 0, 1), 4),
        "held_back_by": _limits(turned, turned.held_back()),
        "outlets": [list(ones) for ones in zip(*outlets, strict=True)],
    }
    return _rows(columns)


def ledger_of_readings(turned: Turned, e: int, margin_db: float) -> list[dict[str, Any]]:
    """The step by which readings of this roof moved the margin, which they leave; none without readings."""
    if turned.cells.known is None:
        return []
    return [
        {
            "step": "readings of this roof",
            "value_db": round(float(turned.read_db[e]), 2),
            "total": margin_db,
            "source": "conditioning of the error model on the readings listed",
            "state": turned.state(e),
        }
    ]


def probability(value: float) -> float:
    """Return a chance as the answer carries it."""
    return round(float(np.clip(value, 0, 1)), 4)


def _at_outlet(turned: Turned, number: int, air: Air) -> list[dict[str, Any]]:
    """What stands at one outlet for each emission, in the time state that decides. (e,)"""
    faded, raised, median = (one.outlets[number] for one in (turned.faded, turned.raised, turned.median))
    by_raised = turned.raised.margin_db < turned.faded.margin_db
    margin_db = np.where(by_raised, raised.margin_db, faded.margin_db)
    better_off = margin_db != turned.margin_db  # than the outlet that decides
    here = np.maximum(turned.enough, exceedance(margin_db + turned.read_db, turned.sigma_db))
    enough = np.where(better_off, here, turned.enough)
    chance = not_too_much(enough, median.headroom_db, turned.median.of_loudest(turned.level_sd_db))
    columns: dict[str, list[Any]] = {
        "name": [median.name] * len(margin_db),
        "level_dbuv": _rounded(np.where(by_raised, raised.level_dbuv, faded.level_dbuv)),
        "level_median_dbuv": _rounded(median.level_dbuv),
        "cn_db": _rounded(np.where(by_raised, raised.cn_db, faded.cn_db)),
        "required_cn_db": _rounded(air.signals.required_cn_db),
        "margin_db": _rounded(margin_db + turned.read_db),
        "headroom_db": _rounded(median.headroom_db),
        "chance": _rounded(np.clip(chance, 0, 1), 4),
        "held_back_by": _limits(turned, turned.held_back(number)),
        "ledger": [[] for _ in margin_db],
    }
    return _rows(columns)


def _limits(turned: Turned, held: Sequence[HeldBack]) -> list[dict[str, Any]]:
    interferers = turned.company.interferers
    found = []
    for one in held:
        by = None if one.by is None else interferers[one.by]
        found.append(
            {
                "limit": one.limit,
                "state": one.state,
                "emission": None if by is None else by.emission.id,
                "transmitter_name": None if by is None else by.transmitter.name,
                "bearing_deg": None if by is None else round(by.bearing_deg, 2),
                "next_db": None if one.next_db is None else round(one.next_db, 2),
            }
        )
    return found


def _rows(columns: dict[str, list[Any]]) -> list[dict[str, Any]]:
    """Turn columns of one length into one mapping per row."""
    return [dict(zip(columns, row, strict=True)) for row in zip(*columns.values(), strict=True)]


def _rounded(values: FloatArray, places: int = 2) -> list[float]:
    # Python's rounding, not numpy's: of the digits that are printed.
    return [round(one, places) for one in values.tolist()]
