import gzip
import json
import zipfile

import numpy as np
import pytest
import rasterio
from affine import Affine

from terrain.errors import RasterError, UnplacedRasterError
from terrain.raster import declare, open_raster


def whole(path):
    raster = open_raster(path)
    return raster.read(0, 0, raster.grid.rows, raster.grid.columns)


@pytest.fixture
def srtm(tmp_path):
    """Bytes of an .hgt file of 1201 × 1201 big-endian samples: the row number."""
    heights = np.repeat(np.arange(1201), 1201).reshape(1201, 1201)
    heights[5, 7] = -32768
    return heights.astype(">i2").tobytes()


@pytest.mark.parametrize("dtype", ["int16", "uint16", "int32", "uint32", "float32", "float64"])
@pytest.mark.parametrize(
    "layout",
    [{}, {"compress": "deflate", "predictor": 2}, {"tiled": True, "blockxsize": 16, "blockysize": 16}],
)
def test_samples_come_as_they_were_written_in_their_own_type(write_raster, slope, dtype, layout):
    if "predictor" in layout and dtype.startswith("float"):
        layout = layout | {"predictor": 3}
    heights = slope(dtype=dtype)
    read = whole(write_raster(heights, **layout))
    assert read.dtype == dtype
    assert (read == heights).all()


def test_eight_bit_samples_are_widened_so_that_a_void_has_a_value(write_raster):
    heights = np.full((4, 4), 255, dtype="uint8")
    heights[0, 0] = 7
    path = write_raster(heights, nodata=7)
    assert whole(path).dtype == "int16"
    assert whole(path)[1, 1] == 255
    assert whole(path)[0, 0] == open_raster(path).void


@pytest.mark.parametrize(("dtype", "nodata"), [("int16", -32767), ("uint16", 65535), ("float32", -3.4e38)])
def test_declared_voids_are_void(write_raster, slope, dtype, nodata):
    heights = slope(dtype=dtype)
    heights[2, 3] = nodata
    path = write_raster(heights, nodata=nodata)
    missing = whole(path) == open_raster(path).void if dtype != "float32" else np.isnan(whole(path))
    assert np.argwhere(missing).tolist() == [[2, 3]]


@pytest.mark.parametrize("forgotten", [-32768, -9999, 20000])
def test_heights_that_no_ground_has_are_void_even_if_the_file_forgot_to_say_so(write_raster, slope, forgotten):
    heights = slope()
    heights[2, 3] = forgotten
    path = write_raster(heights)
    assert np.argwhere(whole(path) == open_raster(path).void).tolist() == [[2, 3]]


def test_feet_become_metres_by_the_file_s_own_word(write_raster, slope):
    raster = open_raster(write_raster(slope(), unit="ft"))
    assert (raster.scale, raster.offset_m) == (0.3048, 0)


def test_scaled_samples_become_metres(write_raster, slope):
    path = write_raster(slope())
    with rasterio.open(path, "r+") as file:
        file.scales, file.offsets = (0.1,), (-50.0,)
    raster = open_raster(path)
    assert (raster.scale, raster.offset_m) == (0.1, -50)


def test_an_unknown_unit_is_refused_and_names_the_known(write_raster, slope):
    with pytest.raises(RasterError, match='heights in "furlong": use metres or feet'):
        open_raster(write_raster(slope(), unit="furlong"))


def test_a_vertical_part_of_the_system_changes_nothing_horizontally(write_raster, slope):
    plain = open_raster(write_raster(slope(), name="plain.tif"))
    compound = open_raster(write_raster(slope(), name="compound.tif", crs="EPSG:9518"))  # WGS 84 + EGM2008
    assert (compound.grid.west_deg, compound.grid.north_deg) == (plain.grid.west_deg, plain.grid.north_deg)
    assert compound.grid.to_crs is None


def test_a_vertical_part_in_feet_makes_metres(write_raster, slope):
    path = write_raster(slope(), crs="EPSG:4269+6360")  # NAD 83 + NAVD 88 (ftUS)
    assert open_raster(path).scale == pytest.approx(1200 / 3937)


def test_hgt_plain_zipped_and_gzipped_are_the_same(tmp_path, srtm):
    (tmp_path / "N49E011.hgt").write_bytes(srtm)
    (tmp_path / "N49E011.hgt.gz").write_bytes(gzip.compress(srtm, 1))
    with zipfile.ZipFile(tmp_path / "N49E011.hgt.zip", "w", zipfile.ZIP_DEFLATED) as archive:
        archive.writestr("N49E011.hgt", srtm)
        archive.writestr("README.txt", "not a raster")
    read = {name: whole(tmp_path / name) for name in ("N49E011.hgt", "N49E011.hgt.gz", "N49E011.hgt.zip")}
    for heights in read.values():
        assert heights[:3, 0].tolist() == [0, 1, 2]
        assert heights[5, 7] == -32768
    raster = open_raster(tmp_path / "N49E011.hgt.gz")
    assert raster.kind == "radar-surface"
    lat, lon = raster.grid.position(np.array([0.0, 1200.0]), np.array([0.0, 1200.0]))
    assert lat == pytest.approx([50, 49], abs=1e-9)
    assert lon == pytest.approx([11, 12], abs=1e-9)
    assert sorted(p.name for p in tmp_path.iterdir()) == sorted(read)


def test_point_samples_stand_half_a_pixel_off_the_corner_like_area_samples(write_raster, slope):
    """GeoTIFF 1.1 (OGC 19-008r4), RasterPixelIsPoint: a tie point names the sample, not its corner."""
    path = write_raster(slope(), west=8.0, north=47.0, AREA_OR_POINT="Point")
    with rasterio.open(path, "r+") as file:
        file.update_tags(AREA_OR_POINT="Point")
    row, column = open_raster(path).grid.index(np.array([46.9995]), np.array([8.0005]))
    assert (row[0], column[0]) == (pytest.approx(0, abs=1e-6), pytest.approx(0, abs=1e-6))


def write_asc(path, body, cell="cellsize 0.001", nodata="NODATA_value -9999"):
    path.write_text(f"ncols 4\nnrows 3\nxllcorner 8\nyllcorner 47\n{cell}\n{nodata}\n{body}\n")
    return path


def test_ascii_grid_is_read_once_its_system_is_declared(tmp_path):
    path = write_asc(tmp_path / "a.asc", "1 2 3 4\n5 6 7 8\n9 10 11.5 -9999")
    declare(path, crs="EPSG:4326")
    heights = whole(path)
    assert heights[:2].tolist() == [[1, 2, 3, 4], [5, 6, 7, 8]]
    assert heights[2, :3].tolist() == [9, 10, 11.5]
    assert np.isnan(heights[2, 3])


def test_ascii_grid_with_decimals_far_behind_keeps_them(tmp_path):
    body = "\n".join(["1 2 3 4"] * 2 + ["5 6 7 8.75"])
    path = write_asc(tmp_path / "a.asc", body)
    declare(path, crs="EPSG:4326")
    assert whole(path)[2, 3] == 8.75


@pytest.mark.parametrize(
    ("body", "message"),
    [
        ("1 2 3 4\n5 6 7", "7 heights where its header says 12: it is cut short"),
        ("1 2 3 4\n5 6 7 8\n9 10 11 x", "'x' among its heights: write plain numbers"),
    ],
)
def test_bad_ascii_grid_says_what_is_wrong(tmp_path, body, message):
    with pytest.raises(RasterError, match=message):
        open_raster(write_asc(tmp_path / "a.asc", body))


def test_text_that_is_no_ascii_grid_says_how_one_begins(tmp_path):
    (tmp_path / "a.asc").write_text("Dear reader,\n")
    with pytest.raises(RasterError, match="must begin with ncols, nrows"):
        open_raster(tmp_path / "a.asc")


def test_a_raster_without_system_is_refused_with_the_command_that_declares_one(write_raster, slope):
    path = write_raster(slope(), crs=None)
    with pytest.raises(UnplacedRasterError, match=f"gainworth terrain add {path} --crs EPSG:4326"):
        open_raster(path)
    declare(path, crs="EPSG:4326")
    assert open_raster(path).crs == "EPSG:4326"


def test_declaring_a_kind_keeps_the_declared_system(write_raster, slope):
    path = write_raster(slope(), crs=None)
    declare(path, crs="EPSG:4326")
    declare(path, kind="bare")
    raster = open_raster(path)
    assert (raster.kind, raster.crs) == ("bare", "EPSG:4326")


def test_a_geotiff_is_a_surface_unless_declared_otherwise(write_raster, slope):
    assert open_raster(write_raster(slope())).kind == "surface"


@pytest.mark.parametrize(
    ("said", "message"),
    [
        ({"crs": "EPSG:1"}, 'lie in "EPSG:1", which is not known: write for example EPSG:4326'),
        ({"kind": "dtm"}, 'declared as "dtm": use surface, radar-surface, bare'),
    ],
)
def test_a_wrong_declaration_is_refused_and_changes_nothing(write_raster, slope, said, message):
    path = write_raster(slope())
    declare(path, kind="bare")
    with pytest.raises(RasterError, match=message):
        declare(path, **said)
    assert open_raster(path).kind == "bare"


def test_declaring_what_is_not_there_says_so(tmp_path):
    with pytest.raises(RasterError, match="is not a file"):
        declare(tmp_path / "none.tif", crs="EPSG:4326")


def test_a_damaged_sidecar_says_what_to_write(write_raster, slope):
    path = write_raster(slope())
    path.with_name(path.name + ".gainworth.toml").write_text("crs EPSG")
    with pytest.raises(RasterError, match='write lines such as crs = "EPSG:4326", or delete it'):
        open_raster(path)


def test_metres_declared_as_degrees_are_no_place_on_earth(write_raster, slope):
    path = write_raster(slope(), crs=None, transform=Affine(250, 0, 598250, 0, -250, 5193000))
    declare(path, crs="EPSG:4326")
    with pytest.raises(RasterError, match=r"no place on Earth in EPSG:4326.*--crs EPSG:NUMBER"):
        open_raster(path)


def test_a_raster_with_system_but_without_place_is_refused(write_raster, slope):
    with pytest.warns(rasterio.errors.NotGeoreferencedWarning):
        path = write_raster(slope(), transform=Affine.identity())
    with pytest.raises(RasterError, match="not where in it the samples lie"):
        open_raster(path)


@pytest.mark.parametrize(
    ("name", "content"),
    [("a.tif", b""), ("a.tif", b"hello"), ("N49E011.hgt", b"x" * 1000), ("a.tif", None), ("notes.docx", b"hello")],
)
def test_what_is_no_raster_is_refused(tmp_path, name, content):
    path = tmp_path / name
    if content is not None:
        path.write_bytes(content)
    with pytest.raises(RasterError, match=r"is empty or not a file|no raster we can read|cut short or no \.hgt tile"):
        open_raster(path)


@pytest.mark.parametrize("share", [0.3, 0.9])
@pytest.mark.parametrize("compress", ["deflate", "none"])
def test_a_geotiff_cut_short_is_refused(write_raster, share, compress):
    noise = np.random.default_rng(1).integers(0, 1000, (300, 300)).astype("int16")
    path = write_raster(noise, compress=compress)
    content = path.read_bytes()
    path.write_bytes(content[: int(share * len(content))])
    with pytest.raises(RasterError, match="cut short"):
        open_raster(path)


@pytest.mark.parametrize("suffix", ["", ".gz", ".zip"])
def test_an_hgt_file_cut_short_is_refused(tmp_path, srtm, suffix):
    path = tmp_path / f"N49E011.hgt{suffix}"
    content = srtm
    if suffix == ".gz":
        content = gzip.compress(srtm, 1)
    if suffix == ".zip":
        with zipfile.ZipFile(path, "w") as archive:
            archive.writestr("N49E011.hgt", srtm)
        content = path.read_bytes()
    path.write_bytes(content[: len(content) // 2])
    with pytest.raises(RasterError, match="cut short"):
        open_raster(path)


@pytest.mark.parametrize("suffix", [".gz", ".zip"])
def test_damage_inside_a_packed_tile_is_said_when_it_is_read(tmp_path, srtm, suffix):
    path = tmp_path / f"N49E011.hgt{suffix}"
    if suffix == ".gz":
        path.write_bytes(gzip.compress(srtm, 1))
    else:
        with zipfile.ZipFile(path, "w", zipfile.ZIP_DEFLATED) as archive:
            archive.writestr("N49E011.hgt", srtm)
    content = bytearray(path.read_bytes())
    content[len(content) // 2] ^= 0xFF
    path.write_bytes(content)
    raster = open_raster(path)
    with pytest.raises(RasterError, match="is damaged"):
        raster.read(0, 0, 10, 10)


def test_an_hgt_file_with_another_name_says_how_to_name_it(tmp_path, srtm):
    (tmp_path / "hills.hgt").write_bytes(srtm)
    with pytest.raises(RasterError, match="named by their south-west corner, such as N49E011"):
        open_raster(tmp_path / "hills.hgt")


def test_a_zip_of_several_rasters_is_refused(tmp_path, srtm):
    with zipfile.ZipFile(tmp_path / "two.zip", "w", zipfile.ZIP_DEFLATED) as archive:
        archive.writestr("N49E011.hgt", srtm)
        archive.writestr("N49E012.hgt", srtm)
    with pytest.raises(RasterError, match=r"holds 2 \.hgt tiles: give zip files with one each"):
        open_raster(tmp_path / "two.zip")


def test_a_picture_is_refused(tmp_path, write_raster, slope):
    path = write_raster(np.zeros((4, 4), dtype="uint8"), photometric="palette")
    with rasterio.open(path, "r+") as file:
        file.write_colormap(1, {0: (1, 2, 3)})
    with pytest.raises(RasterError, match="a colour table: give an elevation raster with one band"):
        open_raster(path)
    path = tmp_path / "rgb.tif"
    with rasterio.open(
        path, "w", driver="GTiff", height=4, width=4, count=3, dtype="uint8", crs="EPSG:4326",
        transform=Affine(0.1, 0, 8, 0, -0.1, 47),
    ) as file:  # fmt: skip
        file.write(np.zeros((3, 4, 4), dtype="uint8"))
    with pytest.raises(RasterError, match="3 bands: give an elevation raster with one band"):
        open_raster(path)


def test_complex_numbers_are_refused(write_raster):
    with pytest.raises(RasterError, match="complex64 samples: use whole numbers or floats"):
        open_raster(write_raster(np.zeros((4, 4), dtype="complex64")))


def test_one_row_is_too_few(write_raster):
    with pytest.raises(RasterError, match="1 × 5 samples: at least 2 × 2"):
        open_raster(write_raster(np.zeros((1, 5), dtype="int16")))


def test_damage_in_the_middle_is_said_when_it_is_read(write_raster):
    noise = np.random.default_rng(1).integers(0, 1000, (300, 300)).astype("int16")
    path = write_raster(noise, compress="deflate", tiled=True, blockxsize=64, blockysize=64)
    content = bytearray(path.read_bytes())
    content[len(content) // 2 : len(content) // 2 + 20_000] = np.random.default_rng(2).bytes(20_000)
    path.write_bytes(content)
    raster = open_raster(path)
    with pytest.raises(RasterError, match="damaged or cut short near row"):
        raster.read(0, 0, 300, 300)


def test_content_hash_follows_the_content_and_not_the_name(write_raster, slope):
    one = open_raster(write_raster(slope(), name="one.tif"))
    two = open_raster(write_raster(slope(), name="two.tif"))
    other = open_raster(write_raster(slope() + np.int16(1), name="other.tif"))
    assert one.content == two.content != other.content


def test_sidecar_is_plain_toml_beside_the_raster(write_raster, slope):
    sidecar = declare(write_raster(slope()), crs="EPSG:4326", kind="bare")
    assert sidecar.name == "ground.tif.gainworth.toml"
    assert sidecar.read_text() == f'crs = {json.dumps("EPSG:4326")}\nkind = "bare"\n'
