"""What turning a chain's aerial would change: the pattern round its axis, and chances for each whole degree."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

import numpy as np

from app.air import Air
from app.chain.aerial import pattern_loss_db
from app.chain.parts import Aerial, AerialPolarisation
from app.margins import Turned, chance_of_each

LEAST_PERCENT = 0.5  # a multiplex that never reaches it in any direction is left out


def turning_document(turned: Turned, air: Air, multiplexes: Sequence[str]) -> dict[str, Any]:
    """Return the loss round the aerial's axis and the chances of every multiplex, in whole percent, by degree.

    The chances are those of the polarisation chosen, of alternatives as if independent; a multiplex that no
    direction brings is left out.
    """
    each = chance_of_each(turned.sweep.chance, air.multiplex_of, multiplexes, air.company.acting)
    return {
        "pattern_loss_db_by_degree": _pattern(
            turned.chain.aerial, turned.polarisation, float(np.median(air.signals.frequency_mhz))
        ),
        "chance_percent_by_degree": {
            name: np.rint(100 * chance).astype(int).tolist()
            for name, chance in each.items()
            if 100 * chance.max() >= LEAST_PERCENT
        },
    }


def _pattern(aerial: Aerial, polarisation: AerialPolarisation, frequency_mhz: float) -> list[float]:
    """Loss at 0 to 359 degrees off the axis, at the middle of what is on the air."""
    off_axis = np.abs((np.arange(360.0) + 180) % 360 - 180)
    loss: list[float] = np.round(
        pattern_loss_db(aerial, off_axis, polarisation, frequency_mhz=frequency_mhz), 1
    ).tolist()
    return loss
