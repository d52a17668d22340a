"""The field a coverage plan asks for: the fixed-allowance chain of GE06, by our own link budget.

Where `link_budget` asks what one roof gets, a plan asks which median field serves a share of places
through a reference aerial, with fixed allowances for noise from outside, height and walls.
"""

from __future__ import annotations

from dataclasses import dataclass
from statistics import NormalDist

import numpy as np

from app.assumptions import Assumptions
from app.chain.parts import Aerial, Chain, Outlet, Receiver
from app.levels import FREE_SPACE_IMPEDANCE_OHM, effective_aperture_dbm2
from app.link_budget import Signals, receive_with_noise
from propagation.units import db_from_ratio, dbm_from_dbuv


@dataclass(frozen=True, slots=True)
class PlanningField:
    """Every term of the chain, in its order; the standards' symbols in brackets."""

    noise_dbw: float  # (Pn) of the set
    minimum_power_dbw: float  # (Ps min) at the set
    minimum_level_dbuv: float  # (Us min) at the set, 75 ohms
    aperture_dbm2: float  # (Aa) of the aerial
    minimum_density_dbw_m2: float  # (φmin) at the aerial
    minimum_field_dbuv_m: float  # (Emin) at the aerial
    man_made_allowance_db: float  # (Pmmn)
    location_correction_db: float  # (Cl)
    height_loss_db: float  # (Lh)
    entry_loss_db: float  # (Lb)
    median_field_dbuv_m: float  # (Emed) at 10 m, 50 % of locations


def minimum_field(
    *,
    frequency_mhz: float,
    noise_bandwidth_mhz: float,
    noise_figure_db: float,
    required_cn_db: float,
    gain_dbd: float,
    feeder_loss_db: float,
    location_percent: float = 50.0,
    location_sd_db: float = 5.5,
    man_made_allowance_db: float = 0.0,
    height_loss_db: float = 0.0,
    entry_loss_db: float = 0.0,
    entry_loss_sd_db: float = 0.0,
) -> PlanningField:
    """Median field that a plan asks for, with every intermediate term.

    All scalars; units as named. `location_percent` lies above 0 and below 100; the two standard deviations
    join as independent ones. The least field is the one at which the margin of `receive` is zero, without
    reserve and with nothing from outside but 290 K.

    Raises
    ------
    ChainError
        A gain, loss or noise figure that no part can have.

    References
    ----------
    GE06 Final Acts (2006), chapter 3 to annex 2, minimum field strength; the same chain in Rec. ITU-R
    BT.1368 and EBU Tech 3348.
    """
    chain = Chain(
        "reference",
        (
            Aerial(
                id="aerial",
                name="reference aerial",
                gain_dbd=((30, gain_dbd), (6000, gain_dbd)),
                beamwidth_deg=360,
                front_to_back_db=0,
            ),
            Outlet(id="outlet", name="behind the reference feeder", loss_db=feeder_loss_db),
            Receiver(id="set", name="reference receiver"),
        ),
    )
    signals = Signals(
        frequency_mhz=np.array([frequency_mhz]),
        bandwidth_mhz=np.array([noise_bandwidth_mhz]),
        required_cn_db=np.array([required_cn_db]),
        receiver_noise_figure_db=np.array([noise_figure_db]),
        bearing_deg=np.zeros(1),
        polarisation=("horizontal",),
    )
    got = receive_with_noise(chain, signals, 0.0, 0.0, "horizontal", Assumptions({"reserve_db": 0.0}), 0.0)
    least = -got.margin_db.item()
    level = got.noise_dbuv.item() + required_cn_db
    location = NormalDist().inv_cdf(location_percent / 100) * float(np.hypot(location_sd_db, entry_loss_sd_db))
    return PlanningField(
        noise_dbw=dbm_from_dbuv(got.noise_dbuv).item() - 30,
        minimum_power_dbw=dbm_from_dbuv(level).item() - 30,
        minimum_level_dbuv=level,
        aperture_dbm2=effective_aperture_dbm2(gain_dbd, frequency_mhz).item(),
        minimum_density_dbw_m2=least - 120 - db_from_ratio(FREE_SPACE_IMPEDANCE_OHM).item(),
        minimum_field_dbuv_m=least,
        man_made_allowance_db=man_made_allowance_db,
        location_correction_db=location,
        height_loss_db=height_loss_db,
        entry_loss_db=entry_loss_db,
        median_field_dbuv_m=least + man_made_allowance_db + location + height_loss_db + entry_loss_db,
    )
