"""Samples in patches: none is lost, each cell lies in one patch, and compiled code finds it there."""

import numpy as np
import pytest

from terrain.cache import ArrayCache
from terrain.kernels import height_at, sample_heights, scratch_for, sheet_arrays
from terrain.mosaic import Ground
from terrain.patches import BLOCK, CELLS_ACROSS, CELLS_DOWN, ROOM, WIDTH, blocks_of, in_rows, laid_out


def numbered(rows, columns):
    return np.arange(rows * columns, dtype=np.float32).reshape(rows, columns)


@pytest.mark.parametrize("shape", [(2, 2), (32, 40), (33, 41), (70, 93)])
def test_samples_come_back_in_rows(shape):
    samples = numbered(*shape)
    patches = np.stack(list(laid_out(samples, -1.0)))
    assert patches.shape == (*blocks_of(*shape), BLOCK, BLOCK, ROOM)
    assert np.array_equal(in_rows(patches, *shape), samples)


def test_every_cell_has_its_four_corners_in_one_patch():
    samples = numbered(70, 93)
    patches = np.stack(list(laid_out(samples, -1.0)))
    for row, column in np.ndindex(69, 92):
        patch_row, patch_column = row // CELLS_DOWN, column // CELLS_ACROSS
        block = patches[patch_row // BLOCK, patch_column // BLOCK]
        patch = block[patch_row % BLOCK, patch_column % BLOCK]
        at = row % CELLS_DOWN * WIDTH + column % CELLS_ACROSS
        corners = patch[[at, at + 1, at + WIDTH, at + WIDTH + 1]]
        assert np.array_equal(corners, samples[row : row + 2, column : column + 2].ravel())


@pytest.mark.parametrize("dtype", ["int16", "float32"])
def test_compiled_code_finds_heights_along_any_line(write_raster, tmp_path, dtype):
    """A plane, which bilinear interpolation keeps: heights are known by hand. 0.001 m: 32-bit floats at 400 m."""
    row, column = np.mgrid[0:300, 0:250]
    ground = Ground.open([write_raster((10 + row + 2 * column).astype(dtype))], tmp_path / "cache")
    (sheet,) = ground.sheets()
    arrays, n = sheet_arrays(sheet), 1100  # longer than a stretch
    scratch, heights, wet = scratch_for(arrays), np.empty(n, np.float32), np.empty(n, bool)
    for ends in (
        (1.5, 298.5, 1.5, 248.5),
        (298.5, 1.5, 40.0, 200.0),
        (150.0, 150.0, 248.0, 2.0),
        (7.0, 290.0, 9.0, 9.0),
    ):
        rows, columns = np.linspace(*ends[:2], 4), np.linspace(*ends[2:], 4)
        assert sample_heights(arrays, rows, columns, scratch, heights, wet) == (True, False)
        # The sheet has a ring of gaps: its row and column 1 are the raster's 0.
        expected = 10 + np.linspace(*ends[:2], n) - 1 + 2 * (np.linspace(*ends[2:], n) - 1)
        np.testing.assert_allclose(heights, expected, atol=1e-3)
        assert height_at(arrays, rows, columns, n, 700) == pytest.approx(expected[700], abs=1e-9)


def test_an_array_kept_in_parts_is_the_whole_one(tmp_path):
    parts = [np.arange(6, dtype=np.int16).reshape(1, 6) + number for number in range(4)]
    kept = ArrayCache(tmp_path).keep_parts("a", (4, 6), np.dtype("int16"), lambda: iter(parts))
    assert np.array_equal(kept, np.concatenate(parts))
    assert np.array_equal(np.load(next(tmp_path.rglob("a.npy"))), kept)
