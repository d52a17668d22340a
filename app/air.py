"""All that is on the air at a roof, as columns."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from app.company import Company, company_of
from app.fields import EmissionField
from app.interferers import Interferer
from app.link_budget import Signals
from app.loads import Beside, that_load
from app.systems import mode_of
from terrain.geodesy import distance_and_bearing

FloatArray = NDArray[np.float64]

SAME_MAST_KM = 1.0
BAND_EDGES_MHZ = (300.0, 582.0)  # Bands III, IV and V


@dataclass(frozen=True, slots=True)
class Air:
    """All emissions with an answer at a roof, as columns."""

    fields: tuple[EmissionField, ...]
    signals: Signals
    used_dbuv_m: FloatArray  # (e,) median
    fade_db: FloatArray  # (e,)
    company: Company  # what disturbs them, and what acts together
    beside: Beside  # what loads amplifiers without being wanted
    company_masts: tuple[str, ...]  # (i,) named as masts are
    company_bands: tuple[str, ...]  # (i,)
    path_sd_db: FloatArray  # (e,)
    masts: tuple[str, ...]  # (e,) transmitters within 1 km share one name
    bands: tuple[str, ...]  # (e,)
    doubtful_erp: NDArray[np.bool_]  # (e,)
    multiplex_of: tuple[str, ...]  # (e,)


def air_of(fields: Sequence[EmissionField], interferers: Sequence[Interferer]) -> Air:
    """Gather the emissions that have an answer, and what disturbs them: those themselves first, in their order."""
    kept = tuple(field for field in fields if field.path is not None)
    modes = [mode_of(field.emission.system, field.emission.mode) for field in kept]
    signals = Signals(
        frequency_mhz=np.array([field.emission.frequency_mhz for field in kept]),
        bandwidth_mhz=np.array(
            [mode.noise_bandwidth_mhz(field.emission.bandwidth_mhz) for mode, field in zip(modes, kept, strict=True)]
        ),
        required_cn_db=np.array([mode.required_cn_db for mode in modes]),
        receiver_noise_figure_db=np.array([mode.noise_figure_db for mode in modes]),
        bearing_deg=np.array([field.bearing_deg for field in kept]),
        polarisation=tuple(field.emission.polarisation for field in kept),
        mode_source=tuple(mode.source for mode in modes),
    )
    return Air(
        fields=kept,
        signals=signals,
        used_dbuv_m=np.array([field.used_dbuv_m for field in kept]),
        fade_db=np.array([field.fade_db for field in kept]),
        company=company_of(kept, interferers),
        beside=_beside(interferers[len(kept) :]),
        company_masts=_named_masts(kept, interferers),
        company_bands=tuple(_band(one.emission.frequency_mhz) for one in interferers),
        path_sd_db=np.array([field.path.sd_db for field in kept if field.path]),
        masts=_masts(kept),
        bands=tuple(_band(field.emission.frequency_mhz) for field in kept),
        doubtful_erp=np.array([field.erp_is_doubtful for field in kept], dtype=bool),
        multiplex_of=tuple(field.emission.multiplex_id for field in kept),
    )


def _masts(fields: Sequence[EmissionField]) -> tuple[str, ...]:
    """Name of the mast of each emission; a transmitter within 1 km of one earlier by id takes its name."""
    transmitters = {field.transmitter.id: field.transmitter for field in fields}
    names: dict[str, str] = {}
    heads: list[str] = []
    for key in sorted(transmitters):
        one = transmitters[key]
        near = None
        if heads:
            apart_km, _ = distance_and_bearing(
                one.latitude_deg,
                one.longitude_deg,
                np.array([transmitters[head].latitude_deg for head in heads]),
                np.array([transmitters[head].longitude_deg for head in heads]),
            )
            near = int(np.argmin(apart_km)) if float(np.min(apart_km)) < SAME_MAST_KM else None
        names[key] = key if near is None else heads[near]
        if near is None:
            heads.append(key)
    return tuple(names[field.transmitter.id] for field in fields)


def _named_masts(wanted: Sequence[EmissionField], interferers: Sequence[Interferer]) -> tuple[str, ...]:
    """Name of the mast of each interferer: that of a wanted one within 1 km, else its own."""
    names = dict(zip((field.transmitter.id for field in wanted), _masts(wanted), strict=True))
    heads = sorted(set(names.values()))
    places = {field.transmitter.id: field.transmitter for field in wanted}
    for one in interferers:
        mast = one.transmitter
        if mast.id in names:
            continue
        apart_km, _ = distance_and_bearing(
            mast.latitude_deg,
            mast.longitude_deg,
            np.array([places[head].latitude_deg for head in heads]),
            np.array([places[head].longitude_deg for head in heads]),
        )
        near = int(np.argmin(apart_km))
        names[mast.id] = heads[near] if apart_km[near] < SAME_MAST_KM else mast.id
    return tuple(names[one.transmitter.id] for one in interferers)


def _beside(others: Sequence[Interferer]) -> Beside:
    """Those of the others that load an amplifier."""
    field = np.array([one.field_dbuv_m for one in others], dtype=float)
    frequency = np.array([one.emission.frequency_mhz for one in others], dtype=float)
    rows = np.flatnonzero(that_load(field, frequency)).tolist()
    return Beside(
        frequency[rows],
        field[rows],
        np.array([others[i].bearing_deg for i in rows]),
        tuple(others[i].emission.polarisation for i in rows),
    )


def _band(frequency_mhz: float) -> str:
    return str(int(np.searchsorted(BAND_EDGES_MHZ, frequency_mhz)))
