"""The demo: an invented island, its masts and four roofs on which the answers differ.

Every name, place and figure here is made up. The masts stand in their own source, which the store leaves
out as soon as real transmitters are imported.
"""

from __future__ import annotations

from dataclasses import dataclass, replace

from app.chain.catalogue import demo_chains
from app.chain.document import chain_to_document
from app.channels import centre_mhz
from app.demo.relief import position_deg
from app.transmitters.model import Emission, Multiplex, Polarisation, Transmitter
from app.transmitters.rows import Source
from app.transmitters.store import DEMO_SOURCE, Store

RASTER = "europe-uhf-8"


@dataclass(frozen=True, slots=True)
class DemoRoof:
    """A roof on the island and what it is there to show."""

    name: str
    latitude_deg: float
    longitude_deg: float
    now: str  # name of the chain that is up there
    shows: str


@dataclass(frozen=True, slots=True)
class _Mast:
    id: str
    name: str
    east_north_km: tuple[float, float]
    antenna_agl_m: float
    polarisation: Polarisation
    erp_kw: float
    system: str
    mode: str
    channels: tuple[tuple[str, str], ...]  # channel and multiplex
    attenuation_db: tuple[float, ...] = ()  # evenly spaced from north, clockwise; empty: round


MULTIPLEXES = (
    Multiplex("range-1", "Range One"),
    Multiplex("range-2", "Range Two"),
    Multiplex("range-3", "Range Three"),
    Multiplex("strait-1", "Strait One"),
    Multiplex("strait-2", "Strait Two"),
    Multiplex("strait-3", "Strait Three"),
    Multiplex("strait-4", "Strait Four"),
    Multiplex("spur-1", "Spur One"),
)
_T2 = ("DVB-T2", "256-QAM 2/3")
_MASTS = (
    # The strong one, on the northern range.
    _Mast("northern-range", "Northern Range", (-23.5, -8.25), 150, "horizontal", 20, *_T2,
          (("30", "range-1"), ("33", "range-2"), ("36", "range-3"))),
    # Fills in the eastern bay behind the backbone, rods upright: the same multiplexes on other channels.
    _Mast("eastern-hill", "Eastern Hill relay", (-8.95, -12.3), 30, "vertical", 0.05, *_T2,
          (("21", "range-1"), ("24", "range-2"), ("27", "range-3"))),
    # Across the strait: weak enough for a small aerial to miss it.
    _Mast("far-island", "Far Island", (32, 33), 80, "horizontal", 2.5, *_T2,
          (("39", "strait-1"), ("42", "strait-2"), ("45", "strait-3"), ("48", "strait-4"))),
    # South of the backbone, on a channel of the far island: it disturbs what arrives from there.
    _Mast("southern-spur", "Southern Spur", (-25.3, -33.4), 100, "horizontal", 20, "DVB-T", "64-QAM 2/3",
          (("45", "spur-1"),), (12, 5, 0, 0, 0, 0, 0, 0, 0, 0, 4, 10)),
)  # fmt: skip


def transmitters() -> tuple[Transmitter, ...]:
    """The invented masts; the ground under them is the relief's."""
    return tuple(
        Transmitter(mast.id, mast.name, *_position_deg(*mast.east_north_km), None, DEMO_SOURCE) for mast in _MASTS
    )


def emissions() -> tuple[Emission, ...]:
    """What the invented masts radiate."""
    return tuple(
        Emission(
            id=f"{mast.id}-{channel}",
            transmitter_id=mast.id,
            multiplex_id=multiplex,
            channel=channel,
            frequency_mhz=centre_mhz(RASTER, channel)[0],
            bandwidth_mhz=centre_mhz(RASTER, channel)[1],
            system=mast.system,
            mode=mast.mode,
            erp_kw=mast.erp_kw,
            polarisation=mast.polarisation,
            antenna_agl_m=mast.antenna_agl_m,
            pattern_attenuation_db=mast.attenuation_db,
        )
        for mast in _MASTS
        for channel, multiplex in mast.channels
    )


def _roof(name: str, east_km: float, north_km: float, now: str, shows: str) -> DemoRoof:
    return DemoRoof(name, *_position_deg(east_km, north_km), now, shows)


def _position_deg(east_km: float, north_km: float) -> tuple[float, float]:
    """Latitude and longitude to four places, as people type them."""
    latitude_deg, longitude_deg = position_deg(east_km, north_km)
    return round(latitude_deg, 4), round(longitude_deg, 4)


DEMO_ROOFS = (
    _roof("Northern fields", -20, 0, "loft-dipole", "the far island's multiplexes are missed by a small aerial"),
    _roof("Western plain", -25, -20, "loft-dipole", "all that can be had is secure already"),
    _roof(
        "Eastern bay", -7, -22, "loft-dipole", "the strong mast is behind a range; a relay with rods upright fills in"
    ),
    _roof("North shore", -19, 0, "roof-yagi", "one reading of the far island settles the answer"),
    _roof(
        "Backbone foot",
        -10,
        -22,
        "roof-yagi",
        "a mast on the same channel takes one multiplex away from a small aerial",
    ),
)


def ensure_demo(store: Store) -> None:
    """Start an empty store with the demo's masts, and one without chains with the four to start from.

    A demo stored by another version is replaced; a store that cannot be written stays as it is.
    """
    if store.read_only:
        return
    if not store.list_chains():
        for chain in demo_chains():
            store.put_chain({"id": chain.name, **chain_to_document(chain)})
    sources = {source.id for source in store.sources()}
    if not sources or (sources == {DEMO_SOURCE} and not _is_current(store)):
        source = Source(DEMO_SOURCE, "Invented island", "Apache-2.0", "invented, no real station")
        store.replace_source(source, transmitters(), emissions(), MULTIPLEXES)


def _is_current(store: Store) -> bool:
    return (
        set(store.transmitters()) == set(transmitters())
        and {replace(one, on=True) for one in store.emissions()} == set(emissions())
        and set(store.multiplexes().values()) == set(MULTIPLEXES)
    )
