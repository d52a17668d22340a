"""Browser libraries that come as files inside installed packages.

They are never imported and never copied: /vendor/NAME gives the file out of its package, and only the
files listed here can be asked for. The SHA-256 is that of the file we looked at; a test compares them.
"""

from __future__ import annotations

from dataclasses import dataclass
from importlib import metadata
from pathlib import Path


@dataclass(frozen=True, slots=True)
class Asset:
    """One file that the page may load."""

    name: str  # below /vendor/
    package: str  # distribution that carries it
    path: str  # inside the distribution
    media_type: str
    licence: str
    sha256: str

    @property
    def file(self) -> Path:
        """Where the installed file lies."""
        return Path(str(metadata.distribution(self.package).locate_file(self.path)))

    @property
    def version(self) -> str:
        """Version of the package that carries it."""
        return metadata.version(self.package)


JAVASCRIPT, CSS = "text/javascript; charset=utf-8", "text/css; charset=utf-8"

ASSETS: dict[str, Asset] = {
    asset.name: asset
    for asset in (
        Asset(
            "maplibre-gl.js",
            "maplibre",
            "maplibre/srcjs/maplibre-gl.js",
            JAVASCRIPT,
            "BSD-3-Clause",
            "e380deae560bc5d182be4124a1b9cdd5086304b0cb82c92a5af23d018aa81015",
        ),
        Asset(
            "maplibre-gl.css",
            "maplibre",
            "maplibre/srcjs/maplibre-gl.css",
            CSS,
            "BSD-3-Clause",
            "792ac997dcf6ae6f643eb4e2dee4630c85e7056526bd8fb85ffe83c67d6c41b4",
        ),
        Asset(
            "leaflet.js",
            "django-js-lib-leaflet",
            "js_lib_leaflet/static/js_lib_leaflet/leaflet.js",
            JAVASCRIPT,
            "BSD-2-Clause",
            "db49d009c841f5ca34a888c96511ae936fd9f5533e90d8b2c4d57596f4e5641a",
        ),
        Asset(
            "leaflet.css",
            "django-js-lib-leaflet",
            "js_lib_leaflet/static/js_lib_leaflet/leaflet.css",
            CSS,
            "BSD-2-Clause",
            "a7837102824184820dfa198d1ebcd109ff6d0ff9a2672a074b9a1b4d147d04c6",
        ),
    )
}
