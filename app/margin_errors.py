"""Errors of the margins of one chain: what each belongs to, and by how much it moves them."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
from numpy.typing import NDArray

from app.air import Air
from app.assumptions import Assumptions
from app.at_aerial import room_error_db
from app.chain.parts import Aerial, AerialPolarisation, Chain
from app.chance import DEVIATES, ErrorPart, PathError
from app.disturbance_errors import Disturbers, Moved, disturbers_of
from app.link_budget import Reception

FloatArray = NDArray[np.float64]

BAD_NIGHT = ("fade:", "enhancement:")  # how the normals of a time state are named


def wanted_errors(
    chain: Chain, polarisation: AerialPolarisation, air: Air, reception: Reception, assumptions: Assumptions
) -> tuple[PathError, tuple[ErrorPart, ...]]:
    """Return the errors of the wanted signals themselves, as a reading of their level meets them."""
    path = PathError(
        masts=air.masts,
        bearing_deg=air.signals.bearing_deg,
        sd_db=air.path_sd_db,
        correlation=assumptions.value("path_bearing_correlation"),
        scale_deg=assumptions.value("path_bearing_scale_deg"),
    )
    aerial_id = chain.aerial.id
    rejection = ErrorPart(
        tuple(f"off-axis:{aerial_id}:{field.emission.id}" for field in air.fields),
        wanted_rejection_sd_db(chain.aerial, polarisation, air, reception, assumptions),
    )
    return path, (*_parts_of_any_pointing(chain, air, assumptions), rejection)


def of_an_ordinary_day(parts: Sequence[ErrorPart]) -> tuple[ErrorPart, ...]:
    """Return the errors that a level has at its median: all but those of a bad night."""
    return tuple(part for part in parts if not all(key.startswith(BAD_NIGHT) for key in part.keys))


def path_error(air: Air, assumptions: Assumptions, moved: Moved) -> PathError:
    """Errors of the paths; a network's margin carries its strongest member's."""
    sd_db = moved.leader_share * air.path_sd_db[moved.leader] - moved.path_off_db
    return PathError(
        masts=tuple(air.masts[e] for e in moved.leader),
        bearing_deg=air.signals.bearing_deg[moved.leader],
        sd_db=np.maximum(sd_db, 0.0),
        correlation=assumptions.value("path_bearing_correlation"),
        scale_deg=assumptions.value("path_bearing_scale_deg"),
    )


def parts_of(
    chain: Chain,
    polarisation: AerialPolarisation,
    air: Air,
    reception: Reception,
    assumptions: Assumptions,
    state_b: NDArray[np.bool_],
    moved: Moved,
) -> tuple[ErrorPart, ...]:
    """Errors of one chain turned one way, each margin in the state that decides it."""
    aerial_id = chain.aerial.id
    rejection = ErrorPart(
        tuple(f"off-axis:{aerial_id}:{air.fields[e].emission.id}" for e in moved.leader),
        moved.leader_share
        * wanted_rejection_sd_db(chain.aerial, polarisation, air, reception, assumptions)[moved.leader],
    )
    own = []
    for part in _parts_of_any_pointing(chain, air, assumptions):
        keys, sd_db = tuple(part.keys[e] for e in moved.leader), part.sd_db[moved.leader]
        kind = keys[0].split(":")[0] if keys else ""
        sd_db = sd_db * moved.common if kind in ("roof", "aerial", "feeder") else sd_db * moved.leader_share
        if kind == "band":
            sd_db = np.maximum(sd_db - moved.band_off_db, 0.0)
        if kind == "fade":
            sd_db = np.where(state_b, 0.0, sd_db)
        curve_db = None if part.curve_db is None else moved.leader_share * part.curve_db[:, moved.leader]
        own.append(ErrorPart(keys, sd_db, curve_db))
    return (*own, rejection, *moved.parts)


def air_disturbers(air: Air, assumptions: Assumptions) -> Disturbers:
    """Spreads of everything that disturbs, named as the wanted ones are."""
    return disturbers_of(air.company, air.company_masts, air.company_bands, assumptions)


def _parts_of_any_pointing(chain: Chain, air: Air, assumptions: Assumptions) -> tuple[ErrorPart, ...]:
    ids = [field.emission.id for field in air.fields]
    aerial = chain.aerial

    def same(key: str, sd_db: float) -> ErrorPart:
        return ErrorPart((key,) * len(ids), np.full(len(ids), sd_db))

    return (
        same("roof", assumptions.value("roof_sd_db")),
        ErrorPart(
            tuple(f"band:{mast}:{band}" for mast, band in zip(air.masts, air.bands, strict=True)),
            np.full(len(ids), assumptions.value("band_sd_db")),
        ),
        ErrorPart(tuple(f"emission:{name}" for name in ids), np.full(len(ids), assumptions.value("emission_sd_db"))),
        ErrorPart(
            tuple(f"erp:{name}" for name in ids),
            np.where(air.doubtful_erp, assumptions.value("erp_unknown_sd_db"), 0.0),
        ),
        ErrorPart(tuple(f"fade:{mast}" for mast in air.masts), assumptions.value("fade_sd_share") * air.fade_db),
        same(
            f"aerial:{aerial.id}",
            assumptions.value("aerial_gain_sd_db" if aerial.measured else "aerial_own_build_sd_db"),
        ),
        same("feeder:" + "+".join(chain.part_ids_of_feeders), assumptions.value("feeder_sd_db")),
        ErrorPart(("room",) * len(ids), *room_error_db(aerial, air.signals.frequency_mhz, DEVIATES)),
    )


def wanted_rejection_sd_db(
    aerial: Aerial, polarisation: AerialPolarisation, air: Air, reception: Reception, assumptions: Assumptions
) -> FloatArray:
    """Spread of what each wanted emission loses off the axis or cross-polar [dB], (…, e)."""
    off_axis = np.where(reception.off_axis_deg > aerial.beamwidth_deg / 2, assumptions.value("off_axis_sd_db"), 0.0)
    crossed = np.array([p not in (polarisation, "mixed") for p in air.signals.polarisation], dtype=bool)
    result: FloatArray = np.where(crossed, np.maximum(off_axis, assumptions.value("cross_polar_sd_db")), off_axis)
    return result
