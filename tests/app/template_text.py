"""Text of a CSV of transmitters, for the tests that read it."""

import csv
import io

from app.transmitters.template import COLUMNS

ROW = {
    "transmitter": "Mast One",
    "latitude_deg": "44.412",
    "longitude_deg": "-36.905",
    "multiplex": "First",
    "channel": "47",
    "raster": "europe-uhf-8",
    "system": "DVB-T2",
    "mode": "256-QAM 2/3",
    "erp_kw": "20",
    "polarisation": "horizontal",
    "antenna_agl_m": "150",
    "pattern_db": "round",
}


PLAIN = {"channel": "", "raster": "", "frequency_mhz": "682"}
MOBILE = {"system": "mobile", "mode": "", "raster": "", "channel": "europe-700-downlink"}


def text_of(*changes, separator=",", columns=COLUMNS):
    """A file with one row per dictionary of changes to ROW."""
    file = io.StringIO()
    writer = csv.DictWriter(file, columns, delimiter=separator, restval="", extrasaction="ignore", lineterminator="\n")
    writer.writeheader()
    for change in changes:
        writer.writerow(ROW | change)
    return file.getvalue()


def only_refusal(result):
    assert len(result.refused) == 1, [str(refusal) for refusal in result.refused]
    return result.refused[0]
