"""What may be sent: JSON translated to the dataclasses of app. Names are those of the answer's document.

Only the shape is checked here (known names, numbers that are numbers); whether a value is possible is said
by Roof, AssessRequest and the chain itself, so that the command line says the same.
"""

from __future__ import annotations

import math
from base64 import b64decode
from collections.abc import Iterator
from contextlib import contextmanager
from dataclasses import replace
from typing import Annotated, Any, Literal

from pydantic import AfterValidator, BaseModel, ConfigDict, Field, ValidationInfo, model_validator
from pydantic_core import PydanticCustomError

from app.block_query import BlockQuestion
from app.chain.document import chain_from_document
from app.chain.parts import Chain
from app.chain.windows import DEFAULT_STANDARD
from app.cheapest import Wish
from app.errors import AppError, RequestError
from app.kept_readings import readings_of_documents
from app.measured_files import Upload
from app.request import AssessRequest
from app.roof import Obstacle, Roof, Surroundings
from app.sweeps import HEIGHTS_M
from app.transmitters.store import Store

DEEPEST = 12  # of lists and objects inside one another
LONGEST_NAME = 200
MOST_READINGS = 5000


class Strict(BaseModel):
    """Known names only, no text for numbers, no NaN."""

    model_config = ConfigDict(strict=True, extra="forbid", allow_inf_nan=False, frozen=True)

    @model_validator(mode="before")
    @classmethod
    def _known_names(cls, data: Any, info: ValidationInfo) -> Any:
        unknown = [name for name in data if name not in cls.model_fields] if isinstance(data, dict) else []
        if unknown:
            raise PydanticCustomError(
                "unknown_field", "unknown name", {"name": str(unknown[0]), "allowed": ", ".join(cls.model_fields)}
            )
        return data


def _plain_json(value: dict[str, Any]) -> dict[str, Any]:
    """Refuse what JSON, the database or a person could not take back."""

    def walk(node: object, depth: int) -> None:
        if depth > DEEPEST:
            raise PydanticCustomError("plain_value", "too deep", {"allowed": f"at most {DEEPEST} levels"})
        if isinstance(node, float) and not math.isfinite(node):
            raise PydanticCustomError("plain_value", "not finite", {"allowed": "finite numbers"})
        if isinstance(node, dict):
            for inner in node.values():
                walk(inner, depth + 1)
        elif isinstance(node, list):
            for inner in node:
                walk(inner, depth + 1)

    walk(value, 0)
    return value


ReadingDocument = Annotated[dict[str, Any], AfterValidator(_plain_json)]
ChainDocument = Annotated[dict[str, Any], AfterValidator(_plain_json)]
Name = Annotated[str, Field(min_length=1, max_length=LONGEST_NAME)]


class ObstacleIn(Strict):
    """Something near the roof that stands in one direction."""

    bearing_deg: float
    distance_m: float
    height_agl_m: float
    width_m: float
    leaves_m: float = 0.0


class RoofIn(Strict):
    """A receiving place."""

    latitude_deg: float = Field(examples=[0.0])
    longitude_deg: float = Field(examples=[0.0])
    aerial_agl_m: float = 10.0
    surroundings: Surroundings = "mapped"
    obstacles: list[ObstacleIn] = Field([], max_length=360)
    leaves_m: float = 0.0

    def roof(self) -> Roof:
        """Return the roof that app works with."""
        with errors_at("roof"):
            return Roof(
                latitude_deg=self.latitude_deg,
                longitude_deg=self.longitude_deg,
                aerial_agl_m=self.aerial_agl_m,
                surroundings=self.surroundings,
                leaves_m=self.leaves_m,
                obstacles=tuple(Obstacle(**one.model_dump()) for one in self.obstacles),
            )


def _chains(sent: list[Name | ChainDocument] | None) -> tuple[str | Chain, ...] | None:
    """Return names and chains as they were sent; an error says by its place which one is wrong."""
    if sent is None:
        return None
    read: list[str | Chain] = []
    for place, one in enumerate(sent):
        with errors_at(f"chains[{place}]"):
            read.append(one if isinstance(one, str) else chain_from_document(one))
    return tuple(read)


class AssessIn(Strict):
    """The question: a roof, and what to compare there."""

    roof: RoofIn
    chains: list[Name | ChainDocument] | None = Field(None, max_length=50)
    now: Name | None = None
    wanted: list[Name] | None = Field(None, max_length=1000)
    readings: list[ReadingDocument] = Field([], max_length=MOST_READINGS)
    stored_readings: bool = True
    worth_per_multiplex: float | None = None
    reading_cost: float | None = None
    availability_percent: Literal[50, 90, 99] = 99
    reach_km: float = 150.0
    method: Literal["p1812", "p1546", "both"] = "both"
    assumptions: dict[str, float] = {}
    ledgers: list[Name] | None = Field(
        None, max_length=1000, description="emissions whose ledgers are wanted; null: all"
    )

    def request(self, worth_per_multiplex: float | None, reading_cost: float | None, store: Store) -> AssessRequest:
        """Return the question that the planner answers; the arguments stand in for what was not said."""
        roof = self.roof.roof()
        readings, _ = readings_of_documents(list(self.readings), store, roof.latitude_deg, roof.longitude_deg)
        return AssessRequest(
            roof=roof,
            readings=tuple(readings),
            stored_readings=self.stored_readings,
            chains=_chains(self.chains),
            now=self.now,
            wanted=None if self.wanted is None else tuple(self.wanted),
            worth_per_multiplex=worth_per_multiplex if self.worth_per_multiplex is None else self.worth_per_multiplex,
            reading_cost=reading_cost if self.reading_cost is None else self.reading_cost,
            availability_percent=self.availability_percent,
            reach_km=self.reach_km,
            method=self.method,
            assumptions=self.assumptions,
            ledgers=None if self.ledgers is None else frozenset(self.ledgers),
        )


class ReadingIn(Strict):
    """A reading, or a pasted scan list, and where it was taken."""

    latitude_deg: float
    longitude_deg: float
    reading: ReadingDocument


class AtRoofIn(Strict):
    """A roof and what is asked of its chains."""

    roof: RoofIn
    chains: list[Name | ChainDocument] | None = Field(None, max_length=20)
    wanted: list[Name] | None = Field(None, max_length=1000)
    availability_percent: Literal[50, 90, 99] = 99
    reach_km: float = 150.0
    method: Literal["p1812", "p1546", "both"] = "both"
    assumptions: dict[str, float] = {}

    def assess_request(self) -> AssessRequest:
        """Return the question as `assess` takes it."""
        return AssessRequest(
            roof=self.roof.roof(),
            chains=_chains(self.chains),
            wanted=None if self.wanted is None else tuple(self.wanted),
            availability_percent=self.availability_percent,
            reach_km=self.reach_km,
            method=self.method,
            assumptions=self.assumptions,
        )


class SweepIn(AtRoofIn):
    """What turning, raising or doubling the aerial would change."""

    heights_m: list[float] = Field(list(HEIGHTS_M), max_length=25)


class CheapestIn(AtRoofIn):
    """The cheapest chain that does."""

    outlets: int = 1
    feeder_m: float = 15.0
    labour_price: float = 0.0
    visit_price: float = 0.0
    currency: Name = "EUR"
    worth_per_multiplex: float | None = None

    def assess_request(self) -> AssessRequest:
        """Return the question as `assess` takes it, with what one more multiplex is worth."""
        return replace(super().assess_request(), worth_per_multiplex=self.worth_per_multiplex)

    def wish(self) -> Wish:
        """Return what the chain has to be."""
        return Wish(self.outlets, self.feeder_m, self.labour_price, self.visit_price, self.currency)


class BlockIn(AtRoofIn):
    """A block of flats from four answers; the aerial by its id among stored parts and chains."""

    outlets: int
    layout: Literal["star", "riser"]
    longest_m: float
    shortest_m: float
    aerial: Name
    standard: Name = DEFAULT_STANDARD
    name: Name = "block"

    def question(self) -> BlockQuestion:
        """Return the four answers."""
        return BlockQuestion(
            self.outlets, self.layout, self.longest_m, self.shortest_m, self.aerial, self.standard, self.name
        )


class FileIn(Strict):
    """A file as it is: its bytes in base64, so that any encoding of its text arrives."""

    name: Name
    base64: str

    def upload(self, place: str) -> Upload:
        """Return name and bytes; RequestError if it is no base64."""
        try:
            return Upload(self.name, b64decode(self.base64, validate=True))
        except ValueError as error:
            came = f"{place}.base64 cannot be read: send the bytes of {self.name} in base64"
            raise RequestError(came, field=f"{place}.base64", allowed="base64") from error


class MatchIn(Strict):
    """A sweep of an aerial's terminals, and what hung before it."""

    sweep: FileIn = Field(description="Touchstone, .s1p")
    calibrated: Literal["behind-pad", "before-pad"]
    pad: Literal["none", "minimum-loss", "series-25", "own"] = "none"
    own_pad: FileIn | None = Field(None, description="Touchstone, .s2p, port 1 at the analyser")
    standard_ohm: float | None = Field(None, description="load used in calibration; null: as the file says")
    emissions: list[Name] = Field([], max_length=1000, description="ids of stored emissions whose channels are wanted")
    raster: Name = "europe-uhf-8"
    channels: list[Name] = Field([], max_length=200, description="channels of the raster")


class PatternIn(Strict):
    """A measured pattern."""

    file: FileIn


class SavedRoofIn(Strict):
    """A roof kept under a name, with what the page was asking for it."""

    name: Name
    roof: RoofIn
    now: Name | None = None
    idea: Name | None = None
    second: Name | None = None
    note: str = Field("", max_length=4000)
    landmark: str = Field("", max_length=200)
    chains: list[Name | ChainDocument] | None = Field(None, max_length=50)
    readings: list[ReadingDocument] = Field([], max_length=MOST_READINGS)
    worth_per_multiplex: float | None = None
    reading_cost: float | None = None
    availability_percent: Literal[50, 90, 99] = 99
    reach_km: float = 150.0
    method: Literal["p1812", "p1546", "both"] = "both"
    assumptions: dict[str, float] = {}

    def question(self) -> AssessIn:
        """Return the question that the page asked."""
        asked = {key: value for key, value in self if key in AssessIn.model_fields}
        return AssessIn(**asked)


class SwitchIn(Strict):
    """Whether an emission counts."""

    on: bool


@contextmanager
def errors_at(place: str) -> Iterator[None]:
    """Let an error of app name its field as the request does."""
    try:
        yield
    except AppError as error:
        if error.field:
            error.field = f"{place}.{error.field}"
        raise
