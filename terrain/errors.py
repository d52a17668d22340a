"""What can go wrong with the ground.

TerrainError
├── CoverageError (LookupError)    no elevation at a place
├── PathError (ValueError)         two places between which there is no path
├── RasterError (ValueError)       a raster that cannot be used as it is
│   └── UnplacedRasterError        a raster without a coordinate system
└── CacheError (OSError)           the cache folder cannot be used
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
