"""The commissioning sheet: what a meter should show at each outlet, and room to write what it shows."""

from __future__ import annotations

from typing import Any

import numpy as np

QUANTILE_95 = 1.6449  # of the standard normal: nine readings in ten lie between
LEAST_CHANCE = 0.05  # what is out of reach needs no line


def sheet_rows(answer: dict[str, Any], chain: str, mer_limit_db: float) -> list[dict[str, str]]:
    """Return one row for each outlet and multiplex: expected level and MER range on an ordinary day."""
    rows = []
    for multiplex in answer["multiplexes"]:
        cell = multiplex["chains"].get(chain)
        if cell is None or cell["chance"] < LEAST_CHANCE:
            continue
        emission = next(one for one in answer["emissions"] if one["id"] == cell["emission"])
        through = emission["chains"][chain]
        spread_db = QUANTILE_95 * through["sigma_db"]  # of a margin: interference moves it, too
        louder_db = QUANTILE_95 * through["level_sigma_db"]
        for outlet in through["outlets"]:
            level = outlet["level_median_dbuv"]
            cn_db = outlet["cn_db"] + level - outlet["level_dbuv"]
            low, high = (expected_mer_db(cn_db + sign * spread_db, mer_limit_db) for sign in (-1, 1))
            channel = emission["channel"] or f"{emission['frequency_mhz']:g} MHz"
            rows.append(
                {
                    "outlet": outlet["name"],
                    "multiplex": multiplex["name"],
                    "channel": channel,
                    "level": f"{level:.0f} ({level - louder_db:.0f} to {level + louder_db:.0f})",
                    "mer": _span(max(0.0, low), max(0.0, high)),
                }
            )
    return sorted(rows, key=lambda row: row["outlet"])


def _span(low: float, high: float) -> str:
    return f"{high:.0f}" if round(low) == round(high) else f"{low:.0f} to {high:.0f}"


def expected_mer_db(cn_db: float, limit_db: float) -> float:
    """MER that a meter shows at a C/N, its own limit taken as noise beside the signal's: powers add."""
    return float(-10 * np.log10(10 ** (-cn_db / 10) + 10 ** (-limit_db / 10)))
