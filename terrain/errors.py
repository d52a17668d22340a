"""What can go wrong with the ground.

TerrainError
├── CoverageError (LookupError)    no elevation at a place
├── PathError (ValueError)         two places between which there is no path
├── RasterError (ValueError)       a raster that cannot be used as it is
│   └── UnplacedRasterError        a raster without a coordinate system
├── CacheError (OSError)           the cache folder cannot be used
├── SourceError (ValueError)       an entry of tile sources that cannot be followed
└── DownloadError (OSError)        tiles that cannot be fetched or kept
    ├── OfflineError               no server can be reached
    └── DiskError                  the disk is full or not writable
"""


class TerrainError(Exception):
    """Root of the package."""


class CoverageError(TerrainError, LookupError):
    """No elevation at a place: says where and what to add."""


class PathError(TerrainError, ValueError):
    """Two places between which there is no path: out of range, or one and the same."""


class RasterError(TerrainError, ValueError):
    """A raster that cannot be used as it is."""


class UnplacedRasterError(RasterError):
    """A raster that does not say where on Earth it lies."""


class CacheError(TerrainError, OSError):
    """The cache folder cannot be read or written."""


class SourceError(TerrainError, ValueError):
    """A source of tiles that is not known or whose entry cannot be followed."""


class DownloadError(TerrainError, OSError):
    """Tiles that cannot be fetched or kept: says why and what to do."""


class OfflineError(DownloadError):
    """No connection to a server at all."""


class DiskError(DownloadError):
    """The folder of tiles cannot be written, or the disk is full."""
