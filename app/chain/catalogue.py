"""Four chains to start from: generic classes of the trade, no maker implied, prices invented.

Gains, beamwidths and front-to-back ratios lie within the spread of the trade's classes (catalogue values,
common practice, no source): half-wave dipole 2.15 dBi; wideband UHF Yagi of about ten elements 8 to 12 dBi,
35 to 60 degrees, 15 to 22 dB; long UHF Yagi 11 to 17 dBi, 18 to 35 degrees, 22 to 30 dB; masthead amplifier
12 to 34 dB with a noise figure of 1 to 3 dB and a rated output of 98 to 108 dB(µV). dBd = dBi − 2.15.
Parts with the same id are the same thing: the roof chains share feeder, splitter and outlets.
"""

from __future__ import annotations

from app.chain.parts import Aerial, Chain, Feeder, MastheadAmplifier, Outlet, Part, Receiver, Splitter

_SET = Receiver(id="set", name="Television set")

_LOFT_DIPOLE = Aerial(
    id="loft-dipole",
    name="Half-wave dipole",
    price=9,
    gain_dbd=((470, 0.0), (694, 0.0)),
    beamwidth_deg=78,
    front_to_back_db=0,
    pattern="dipole",
    place="loft",
)
_SHORT_YAGI = Aerial(
    id="short-yagi",
    name="Short UHF Yagi",
    price=22,
    gain_dbd=((470, 5.9), (582, 8.0), (694, 9.9)),
    beamwidth_deg=50,
    front_to_back_db=18,
)
_LONG_YAGI = Aerial(
    id="long-yagi",
    name="Long UHF Yagi",
    price=39,
    gain_dbd=((470, 8.9), (582, 12.2), (694, 14.4)),
    beamwidth_deg=30,
    front_to_back_db=25,
)
_MASTHEAD_AMPLIFIER = MastheadAmplifier(
    id="masthead-amplifier",
    name="Masthead amplifier with supply",
    price=29,
    gain_db=18,
    noise_figure_db=2,
    rated_output_dbuv=103,
)
_LOFT_RUN: tuple[Part, ...] = (
    Feeder(id="loft-feeder", name="Feeder from the loft", price=8, cable="copper-7mm", length_m=10),
    Outlet(id="outlet-living-room", name="Living room", price=4, loss_db=1),
    _SET,
)
_ROOF_RUN: tuple[Part, ...] = (
    Feeder(id="roof-feeder", name="Feeder from the roof", price=12, cable="copper-7mm", length_m=15),
    Splitter(id="splitter", name="Two-way splitter", price=5, ports=2),
    Outlet(id="outlet-living-room", name="Living room", price=4, loss_db=1),
    Outlet(id="outlet-bedroom", name="Bedroom", price=4, loss_db=1),
    _SET,
)


def demo_chains() -> tuple[Chain, ...]:
    """Chains of the demo, simplest first."""
    return (
        Chain(
            name="loft-dipole",
            title="Loft dipole",
            parts=(_LOFT_DIPOLE, *_LOFT_RUN),
            labour_price=0,
            visit_price=0,
        ),
        Chain(
            name="roof-yagi",
            title="Short roof Yagi",
            parts=(_SHORT_YAGI, *_ROOF_RUN),
            labour_price=15,
            visit_price=15,
        ),
        Chain(
            name="high-gain",
            title="High-gain roof aerial",
            parts=(_LONG_YAGI, *_ROOF_RUN),
            labour_price=20,
            visit_price=15,
        ),
        Chain(
            name="high-gain-masthead",
            title="High-gain with masthead amplifier",
            parts=(_LONG_YAGI, _MASTHEAD_AMPLIFIER, *_ROOF_RUN),
            labour_price=25,
            visit_price=15,
        ),
    )
