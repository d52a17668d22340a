"""The aerial as it is bought, described or measured."""

from __future__ import annotations

from dataclasses import dataclass
from typing import ClassVar, Literal

from app.chain.base import Part, one_of, refuse, rising, within
from app.chain.pattern import Cut, checked_cut, checked_pattern

AerialPolarisation = Literal["horizontal", "vertical"]
AERIAL_POLARISATIONS: tuple[AerialPolarisation, ...] = ("horizontal", "vertical")
PATTERNS = ("class", "dipole", "measured")
PLACES = ("roof", "loft", "room")
BUILDINGS = ("traditional", "thermally_efficient")
STACK_LAYOUTS = ("horizontal", "vertical", "square")
STACKS = (1, 2, 4)
Table = tuple[tuple[float, float], ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class Aerial(Part):
    """The antenna on the roof, in the loft or in a room."""

    kind: ClassVar[str] = "aerial"

    gain_dbd: Table  # (frequency_mhz, gain over a half-wave dipole), rising
    beamwidth_deg: float  # between the half-power points, horizontally; 360: round
    front_to_back_db: float  # how far the pattern falls at most; 0: round, or a dipole
    pattern: Literal["class", "dipole", "measured"] = "class"
    cuts: tuple[Cut, ...] = ()  # only if the pattern was measured: loss round the horizon
    polarisation: AerialPolarisation | None = None  # None: may be mounted either way
    place: Literal["roof", "loft", "room"] = "roof"
    building: Literal["traditional", "thermally_efficient"] = "traditional"  # round a room
    measured: bool = True  # False: own build whose gain nobody measured
    reflection: Table = ()  # (frequency_mhz, |Γ| at 75 ohms) as measured
    gain_includes_mismatch: bool = True  # a catalogue's or measured gain does
    stacked: int = 1  # alike, side by side or one above the other: 1, 2 or 4
    stack_spacing_m: float = 0.0
    stack_layout: Literal["horizontal", "vertical", "square"] = "vertical"
    stack_loss_db: float = 0.5  # combiner and leads between them
    pointing_deg: float | None = None  # of a second aerial; the first one's is the chain's
    wind_area_m2: float | None = None
    above_clamp_m: float | None = None  # of its centre over the upper clamp; None: at the top of the mast

    def __post_init__(self) -> None:
        """Refuse a gain table or a pattern that describes no aerial."""
        Part.__post_init__(self)
        if self.after:
            refuse(self, "is fed by another part", "leave out after: an aerial is where a chain begins", "after")
        one_of(self, "pattern", self.pattern, PATTERNS)
        one_of(self, "place", self.place, PLACES)
        one_of(self, "building", self.building, BUILDINGS)
        if self.polarisation is not None:
            one_of(self, "polarisation", self.polarisation, AERIAL_POLARISATIONS)
        if self.pointing_deg is not None:
            within(self, "pointing_deg", self.pointing_deg, 0, 360, "degrees from true north")
        if self.wind_area_m2 is not None:
            within(self, "wind_area_m2", self.wind_area_m2, 0, 10, "m²")
        if self.above_clamp_m is not None:
            within(self, "above_clamp_m", self.above_clamp_m, 0, 20, "m over the upper clamp")
        self._check_gain()
        self._check_reflection()
        self._check_stack()
        within(self, "beamwidth_deg", self.beamwidth_deg, 1, 360, "degrees between the half-power points")
        within(self, "front_to_back_db", self.front_to_back_db, 0, 60, "dB")
        self._check_pattern()

    @property
    def mountings(self) -> tuple[AerialPolarisation, ...]:
        """How the rods may stand: as stated, else as the pattern was measured, else either way."""
        if self.polarisation is not None:
            return (self.polarisation,)
        measured = {cut.polarisation for cut in self.cuts if not cut.is_cross}
        return tuple(one for one in AERIAL_POLARISATIONS if not measured or None in measured or one in measured)

    def check_mounting(self, polarisation: AerialPolarisation) -> None:
        """Refuse rods that stand otherwise than in any cut of a measured pattern."""
        measured = {cut.polarisation for cut in self.cuts if not cut.is_cross}
        if measured and None not in measured and polarisation not in measured:
            listed = " or ".join(str(one) for one in measured)
            came = f"its pattern was measured with the rods {listed} only, and they are to stand {polarisation}"
            refuse(self, came, "mount it as it was measured, or add the cut", "pattern")

    def _check_gain(self) -> None:
        rising(self, "gain_dbd", self.gain_dbd, "[frequency_mhz, gain_dbd]", (30, 6000, "MHz"), "gain")
        for _, gain_dbd in self.gain_dbd:
            within(self, "gain_dbd: gain", gain_dbd, -40, 40, "dBd")

    def _check_reflection(self) -> None:
        if not self.reflection:
            if not self.gain_includes_mismatch:
                refuse(
                    self,
                    "the gain is stated without mismatch, and no match was measured",
                    "give reflection as pairs [frequency_mhz, reflection], or set gain_includes_mismatch to true",
                    "reflection",
                )
            return
        rising(self, "reflection", self.reflection, "[frequency_mhz, reflection]", (1, 20000, "MHz"), "reflection")
        for _, reflection in self.reflection:
            within(self, "reflection: magnitude", reflection, 0, 10, "of the voltage; 1 is total")

    def _check_stack(self) -> None:
        if self.stacked not in STACKS:
            refuse(self, f"{self.stacked} are stacked", "use 1, 2 or 4", "stacked")
        one_of(self, "stack_layout", self.stack_layout, STACK_LAYOUTS)
        within(self, "stack_loss_db", self.stack_loss_db, 0, 20, "dB")
        within(self, "stack_spacing_m", self.stack_spacing_m, 0, 20, "m")
        if self.stacked > 1 and self.stack_spacing_m == 0:
            refuse(self, "is stacked without a spacing", "give stack_spacing_m between neighbours", "stack_spacing_m")
        if self.stack_layout == "square" and self.stacked == 2:
            refuse(self, "is two stacked in a square", "use four, or another stack_layout", "stack_layout")

    def _check_pattern(self) -> None:
        if (self.pattern == "measured") != bool(self.cuts):
            refuse(
                self, "pattern and cuts do not go together", 'give cuts with pattern "measured", and only then', "cuts"
            )
        if self.pattern == "measured":
            name = f'aerial "{self.name}"'
            for cut in self.cuts:
                checked_cut(name, cut.angle_deg, cut.loss_db, frequency_mhz=cut.frequency_mhz)
            checked_pattern(name, self.cuts)
            if self.polarisation is not None:
                self.check_mounting(self.polarisation)
        if self.pattern != "class":
            return
        if self.beamwidth_deg == 360 and self.front_to_back_db != 0:
            refuse(self, "a beamwidth of 360 degrees means round", "set front_to_back_db to 0", "front_to_back_db")
        if self.beamwidth_deg < 360 and self.front_to_back_db <= 3:
            refuse(
                self,
                f"front_to_back_db {self.front_to_back_db:g} leaves no half-power beamwidth",
                'use more than 3 dB, pattern "dipole", or a beamwidth of 360 degrees for a round one',
                "front_to_back_db",
            )
