"""Our own CSV of transmitters: one row per emission, read row by row, good rows kept, the others told.

| column | needed | holds |
|---|---|---|
| transmitter | yes | name of the mast |
| latitude_deg, longitude_deg | yes | WGS 84, south and west negative |
| ground_amsl_m | no | height of the ground at the mast; empty: from the rasters |
| multiplex | yes | name of what is sent; the same name is the same content |
| channel, raster | or frequency_mhz | channel and the name of its channel raster |
| frequency_mhz, bandwidth_mhz | or channel | centre and width; with both, they must agree |
| system, mode | yes | as in the tables of modes; "mobile" with an empty mode: a mobile network, which only disturbs |
| erp_kw | yes | maximum, relative to a half-wave dipole; "<=10" where only a limit is known |
| polarisation | yes | horizontal, vertical, mixed (or H, V, M) |
| antenna_agl_m | yes | centre of the antenna above the ground |
| pattern_db | no | "round", "unknown", or 36 attenuations [dB]; empty: taken as round, with a flag |
| valid_from, valid_to | no | first and last day on the air |
| on | no | yes or no; empty: yes |
| guard | no | carriers and guard interval, "8K 1/4"; empty: the usual one of the system, with a flag |
| static_delay_us | no | delay against the other masts of its single-frequency network; empty: 0, with a flag |

A mobile network's row needs no raster: its channel is the name of a block (`app/data/mobile_blocks.csv`), or empty
beside frequency_mhz and bandwidth_mhz.
A pattern's attenuations stand every 10° from true north clockwise, separated by spaces.
Separator comma, semicolon or tab; with semicolons or tabs decimals may be written with a comma.
"""

from __future__ import annotations

import re
import unicodedata
from collections import Counter
from dataclasses import asdict, dataclass, replace
from pathlib import Path
from typing import Any

from app.errors import TransmitterFileError
from app.transmitters.cells import Cells
from app.transmitters.csv_text import Refusal, Table, read_table
from app.transmitters.emission_row import Draft, draft_of
from app.transmitters.misplaced import misplaced
from app.transmitters.model import Emission, Multiplex, Transmitter
from app.transmitters.rows import Source
from app.transmitters.store import DEMO_SOURCE, Store

NEEDED = (
    "transmitter", "latitude_deg", "longitude_deg", "multiplex", "system", "mode", "erp_kw", "polarisation",
    "antenna_agl_m",
)  # fmt: skip
COLUMNS = (
    "transmitter", "latitude_deg", "longitude_deg", "ground_amsl_m", "multiplex", "channel", "raster",
    "frequency_mhz", "bandwidth_mhz", "system", "mode", "erp_kw", "polarisation", "antenna_agl_m",
    "pattern_db", "valid_from", "valid_to", "on", "guard", "static_delay_us",
)  # fmt: skip

MOST_ROWS = 500_000
MOST_REFUSED_SHARE = 0.2  # a re-import that refuses more and keeps fewer rows does not replace those stored; our choice
_SAME_MAST_DEG = 0.001  # two rows of one mast may differ by this much, about 100 m
_REFUSALS_SHOWN = 200


@dataclass(frozen=True, slots=True)
class TemplateResult:
    """What a file holds: the good rows as objects, the others with what keeps them out."""

    source: str
    transmitters: tuple[Transmitter, ...]
    emissions: tuple[Emission, ...]
    multiplexes: tuple[Multiplex, ...]
    refused: tuple[Refusal, ...]  # in the order of the lines; a row may be in it more than once
    rows_read: int
    encoding: str
    separator: str
    ignored_columns: tuple[str, ...]

    @property
    def rows_refused(self) -> int:
        """Number of rows with at least one refusal."""
        return len({refusal.line for refusal in self.refused})


@dataclass(frozen=True, slots=True)
class ImportSummary:
    """What an import did, or would do."""

    result: TemplateResult
    added: tuple[str, ...]
    changed: tuple[str, ...]
    gone: tuple[str, ...]
    written: bool

    def document(self) -> dict[str, Any]:
        """Return everything as one JSON document."""
        result = self.result
        return {
            "source": result.source,
            "written": self.written,
            "rows_read": result.rows_read,
            "rows_kept": len(result.emissions),
            "rows_refused": result.rows_refused,
            "transmitters": len(result.transmitters),
            "multiplexes": len(result.multiplexes),
            "added": list(self.added),
            "changed": list(self.changed),
            "gone": list(self.gone),
            "refused": [asdict(refusal) for refusal in result.refused],
            "encoding": result.encoding,
            "separator": result.separator,
            "ignored_columns": list(result.ignored_columns),
        }

    def text(self) -> str:
        """Return counts and refused rows as lines to read."""
        result = self.result
        changes = f"{len(self.added)} added, {len(self.changed)} changed, {len(self.gone)} gone"
        lines = [
            f"{len(result.emissions)} of {result.rows_read} rows kept, {result.rows_refused} refused "
            f"(transmitters: {len(result.transmitters)}, multiplexes: {len(result.multiplexes)})",
            f'source "{result.source}": {changes}' + ("" if self.written else " (dry run: nothing was stored)"),
        ]
        if result.ignored_columns:
            lines.append(f"columns not used: {', '.join(result.ignored_columns)}")
        return "\n".join([*lines, *(str(refusal) for refusal in result.refused)])


def read_template(path: Path) -> TemplateResult:
    """Read a file; its name without the ending is the source of what it holds.

    Raises
    ------
    TransmitterFileError
        The file as a whole cannot be used: no text, empty, no header, a needed column missing, too large.
        Faults of single rows are in the result.
    """
    source = _source_of(path)
    table = read_table(path, COLUMNS)
    _check_columns(path, table)
    decimal_comma = table.separator != "," and any(
        "," in row.cells.get(column, "") for row in table.rows for column in ("latitude_deg", "longitude_deg")
    )
    drafts, refused = [], list(table.refused)
    for row in table.rows:
        cells = Cells(row, decimal_comma)
        draft = draft_of(cells)
        if draft is not None:
            drafts.append(draft)
        refused += cells.refused
    kept = [draft for draft in _in_place(drafts, refused) if draft.emission is not None]
    transmitters, emissions, multiplexes = _joined(kept, source, refused)
    return TemplateResult(
        source=source,
        transmitters=transmitters,
        emissions=emissions,
        multiplexes=multiplexes,
        refused=tuple(sorted(refused, key=lambda refusal: refusal.line)),
        rows_read=len(table.rows) + len(table.refused),
        encoding=table.encoding,
        separator=table.separator,
        ignored_columns=tuple(name for name in table.columns if name not in COLUMNS),
    )


def import_template(path: Path, store: Store, dry_run: bool = False) -> ImportSummary:
    """Read a file and put its good rows in place of what the same file brought before.

    Raises
    ------
    TransmitterFileError
        As read_template; also if no row is good, or if more than a fifth are refused and fewer are good than are
        stored from this source. Nothing is written then. The same file twice is kept twice.
    """
    result = read_template(path)
    told = "\n".join(str(refusal) for refusal in result.refused[:_REFUSALS_SHOWN])
    if not result.emissions:
        raise TransmitterFileError(
            f"{path.name} has no usable row ({result.rows_read} read): "
            + (f"mend these; nothing was changed\n{told}" if told else "add rows under the header")
        )
    stored = next((source.rows_kept for source in store.sources() if source.id == result.source), 0)
    if len(result.emissions) < stored and result.rows_refused > MOST_REFUSED_SHARE * result.rows_read:
        raise TransmitterFileError(
            f"{path.name}: {result.rows_refused} of {result.rows_read} rows are refused, too many to replace "
            f'the {stored} rows stored from source "{result.source}": mend the file, or give it another name; '
            f"nothing was changed\n{told}"
        )
    source = Source(result.source, path.name, rows_refused=result.rows_refused)
    changes = store.replace_source(source, result.transmitters, result.emissions, result.multiplexes, dry_run=dry_run)
    return ImportSummary(result, changes.added, changes.changed, changes.gone, written=not dry_run)


def template_example() -> str:
    """Return a small valid file with invented names, to start from."""
    first = "First Multiplex,41,europe-uhf-8,,,DVB-T2,256-QAM 2/3"
    second = "Second Multiplex,,,658,8,DVB-T2,256-QAM 2/3"
    to_the_south = "9 9 8 7 6 5 4 3 2 1 0 0 0 0 0 0 0 0 0 0 0 0 0 0 0 0 0 1 2 3 4 5 6 7 8 9"
    rows = (
        ",".join(COLUMNS),
        f"Mast One,44.412,-36.905,182,{first},20,horizontal,150,round,,,yes,32K 1/8,0",
        f"Mast One,44.412,-36.905,182,{second},<=20,horizontal,150,{to_the_south},2026-03-01,,yes,,",
        f"Mast Two,44.287,-37.148,,{first.replace('41', '28')},0.2,V,30,,,2030-12-31,,,",
    )
    return "\n".join(rows) + "\n"


def _source_of(path: Path) -> str:
    source = slug(path.stem)
    if source == DEMO_SOURCE or not source:
        raise TransmitterFileError(
            f'"{path.name}" cannot be the name of a source: give the file a name with letters or digits '
            f'other than "{DEMO_SOURCE}", which is the built-in example'
        )
    return source


def _check_columns(path: Path, table: Table) -> None:
    missing = [column for column in NEEDED if column not in table.columns]
    if "channel" not in table.columns and "frequency_mhz" not in table.columns:
        missing.append("channel (with raster) or frequency_mhz")
    if missing:
        raise TransmitterFileError(
            f"{path.name} has no column {', '.join(missing)}: add it to the header "
            f"(columns found: {', '.join(name for name in table.columns if name)})"
        )
    if len(table.rows) > MOST_ROWS:
        raise TransmitterFileError(
            f"{path.name} has {len(table.rows)} rows, the limit is {MOST_ROWS}: split it into several files"
        )


def _in_place(drafts: list[Draft], refused: list[Refusal]) -> list[Draft]:
    """Drafts whose position fits the others of the file; rows with other faults still count as neighbours."""
    kept = []
    slips = misplaced([d.latitude_deg for d in drafts], [d.longitude_deg for d in drafts])
    for draft, slip in zip(drafts, slips, strict=True):
        if slip is None:
            kept.append(draft)
            continue
        position = f"{draft.latitude_deg:g}, {draft.longitude_deg:g}"
        message = (
            f"position {position} is far from all others of the file: {slip} "
            "Correct it; if it is right, import it in a file of its own"
        )
        refused.append(Refusal(draft.line, "latitude_deg", position, message))
    return kept


def _joined(
    drafts: list[Draft], source: str, refused: list[Refusal]
) -> tuple[tuple[Transmitter, ...], tuple[Emission, ...], tuple[Multiplex, ...]]:
    """Masts, emissions and multiplexes with their ids; contradictions and repetitions are refused."""
    masts: dict[str, tuple[Transmitter, int]] = {}
    multiplexes: dict[str, Multiplex] = {}
    taken: dict[tuple[float, float, float], list[tuple[Emission, int]]] = {}
    emissions: list[Emission] = []
    for draft in drafts:
        key = f"{source}:{slug(draft.transmitter)}"
        mast, line = masts.get(key, (None, draft.line))
        if mast is None:
            mast = Transmitter(
                key, draft.transmitter, draft.latitude_deg, draft.longitude_deg, draft.ground_amsl_m, source
            )
        elif contradiction := _contradiction(draft, mast, line):
            refused.append(contradiction)
            continue
        elif mast.ground_amsl_m is None:
            mast = replace(mast, ground_amsl_m=draft.ground_amsl_m)
        assert draft.emission is not None
        multiplex = Multiplex(f"{source}:{slug(draft.multiplex)}", draft.multiplex)
        emission = replace(draft.emission, transmitter_id=key, multiplex_id=multiplex.id)
        place = (round(mast.latitude_deg, 4), round(mast.longitude_deg, 4), round(emission.frequency_mhz, 2))
        if repetition := _repetition(draft, emission, taken.setdefault(place, [])):
            refused.append(repetition)
            continue
        taken[place].append((emission, draft.line))
        masts[key] = (mast, line)
        multiplexes.setdefault(multiplex.id, multiplex)
        emissions.append(emission)
    numbered = _with_ids(emissions, source)
    return tuple(mast for mast, _ in masts.values()), numbered, tuple(multiplexes.values())


def _contradiction(draft: Draft, mast: Transmitter, line: int) -> Refusal | None:
    """Refuse a row that puts a known mast elsewhere or on other ground."""
    lat_off = abs(draft.latitude_deg - mast.latitude_deg)
    lon_off = abs(draft.longitude_deg - mast.longitude_deg)
    if max(lat_off, min(lon_off, 360 - lon_off)) > _SAME_MAST_DEG:
        position = f"{draft.latitude_deg:g}, {draft.longitude_deg:g}"
        message = (
            f'transmitter "{draft.transmitter}" stands at {position} here and at {mast.latitude_deg:g}, '
            f"{mast.longitude_deg:g} in line {line}: correct one, or give the masts two names"
        )
        return Refusal(draft.line, "transmitter", draft.transmitter, message)
    known, stated = mast.ground_amsl_m, draft.ground_amsl_m
    if known is not None and stated is not None and abs(known - stated) > 1:
        message = (
            f'ground_amsl_m is {stated:g} and was {known:g} for "{draft.transmitter}" before: '
            "one mast has one height of its ground"
        )
        return Refusal(draft.line, "ground_amsl_m", f"{stated:g}", message)
    return None


def _repetition(draft: Draft, emission: Emission, taken: list[tuple[Emission, int]]) -> Refusal | None:
    """Refuse what the same place radiates already on the same frequency at the same time."""
    for other, line in taken:
        apart = other.multiplex_id != emission.multiplex_id and other.polarisation != emission.polarisation
        if apart or not _overlap(emission, other):
            continue
        what = f"{emission.frequency_mhz:g} MHz"
        message = (
            f'transmitter "{draft.transmitter}" radiates {what} already in line {line}: '
            "remove one of the rows, or give them valid_from and valid_to that do not overlap"
        )
        return Refusal(draft.line, "frequency_mhz", what, message)
    return None


def _overlap(one: Emission, other: Emission) -> bool:
    starts = [e.valid_from.toordinal() if e.valid_from else 0 for e in (one, other)]
    ends = [e.valid_to.toordinal() if e.valid_to else 10**7 for e in (one, other)]
    return max(starts) <= min(ends)


def _with_ids(emissions: list[Emission], source: str) -> tuple[Emission, ...]:
    """Give each emission an id that a later import of the same rows gives again."""
    plain = [f"{e.transmitter_id}:{e.multiplex_id.removeprefix(source + ':')}:{e.frequency_mhz:g}" for e in emissions]
    often = Counter(plain)
    return tuple(
        replace(e, id=key if often[key] == 1 else f"{key}:{e.valid_from}")
        for e, key in zip(emissions, plain, strict=True)
    )


def slug(name: str) -> str:
    """Name as part of an id: letters and digits of any script in lower case, the rest one dash each."""
    return re.sub(r"[\W_]+", "-", unicodedata.normalize("NFC", name).casefold()).strip("-")
