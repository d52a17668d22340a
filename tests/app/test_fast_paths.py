"""Fast and plain paths of a roof give one answer; what was asked before is kept; numba is never in the way."""

import subprocess
import sys
from concurrent.futures import ThreadPoolExecutor
from dataclasses import replace

import numpy as np
import pytest

from app import kept_paths
from app.assumptions import Assumptions
from app.fast_paths import Line, fast_digests, is_ready, warm_up
from app.paths_to_roof import path_over
from app.planner import assess
from app.request import AssessRequest
from app.roof import Obstacle, Roof
from terrain.cover import Cover
from terrain.mosaic import Ground
from terrain.overlay import Overlay
from terrain.profile import sample_profile
from terrain.raster import declare

ROOF = Roof(44.3, -37.4507, 10.0, "urban", (Obstacle(90.0, 60.0, 18.0, 30.0),))


@pytest.fixture(scope="module")
def answers(demo_world, tmp_path_factory):
    """The demo's answer without and with the fast form."""
    kept_paths.forget()
    plain = assess(AssessRequest(ROOF, now="roof-yagi"), demo_world.store, demo_world.ground)
    kept_paths.forget()
    assert warm_up(demo_world.ground)
    fast = assess(AssessRequest(ROOF, now="roof-yagi"), demo_world.store, demo_world.ground)
    return plain, fast


def test_fast_and_plain_answers_agree(answers):
    plain, fast = answers
    for one, other in zip(plain["emissions"], fast["emissions"], strict=True):
        assert one["path"]["sentence"] == other["path"]["sentence"]
        for name in ("p1546_dbuv_m", "p1812_dbuv_m", "fade_db", "enhancement_db"):
            assert one["field"][name] == pytest.approx(other["field"][name], abs=0.011)  # rounded to 0.01 in the answer
    assert [verdict["answer"] for verdict in plain["verdicts"]] == [verdict["answer"] for verdict in fast["verdicts"]]


def test_requests_at_once_are_safe(answers, demo_world):
    kept_paths.forget()
    assert is_ready(demo_world.ground)

    def ask(number):
        return assess(AssessRequest(ROOF, now="roof-yagi"), demo_world.store, demo_world.ground)["emissions"]

    with ThreadPoolExecutor(4) as pool:
        first, *others = pool.map(ask, range(4))
    assert all(other == first for other in others)


def test_another_roof_or_surroundings_are_not_taken_for_the_same(answers, demo_world):
    def fields(roof):
        emissions = assess(AssessRequest(roof), demo_world.store, demo_world.ground)["emissions"]
        return [one["field"]["used_dbuv_m"] for one in emissions]

    assert fields(Roof(44.3, -37.4507)) != fields(ROOF)
    assert fields(Roof(44.3, -37.4507, 12.0)) != fields(Roof(44.3, -37.4507))


def test_a_question_on_the_command_line_does_not_wait_for_numba():
    imported = "import sys, app.cli, app.planner; print('numba' in sys.modules)"
    done = subprocess.run([sys.executable, "-c", imported], capture_output=True, text=True, check=True)
    assert done.stdout.strip() == "False"


def test_machine_code_goes_to_a_temporary_folder_where_the_cache_is_read_only(tmp_path):
    """A file stands where the cache folder should be: nothing can be written there, whoever asks."""
    (tmp_path / "cache").write_text("")
    code = (
        "import os; from app.fast_paths import keep_machine_code; "
        "keep_machine_code(); print(os.environ['NUMBA_CACHE_DIR'])"
    )
    done = subprocess.run(
        [sys.executable, "-c", code],
        capture_output=True,
        text=True,
        check=True,
        env={"GAINWORTH_CACHE_DIR": str(tmp_path / "cache"), "PATH": "", "PYTHONPATH": ":".join(sys.path)},
    )
    assert "gainworth-" in done.stdout


@pytest.mark.parametrize(("kind", "fast"), [("bare", True), ("surface", False)])
def test_under_land_cover_the_fast_form_answers_over_bare_ground(write_raster, tmp_path, kind, fast):
    """24 m from sample to sample: a surface model as fine as that is left to the plain form."""
    y, x = np.mgrid[0:300, 0:300] / 30
    heights = write_raster((300 + 40 * np.sin(x) * np.cos(1.3 * y)).astype("float32"), pixel=0.00025)
    declare(heights, kind=kind)
    wood = write_raster(np.full((300, 300), 10, "uint8"), name="WorldCover.tif", pixel=0.00025)
    cover = Cover.open([wood], tmp_path / "cache")
    ground = Ground.open([heights], tmp_path / "cache", overlay=Overlay(cover))
    roof, mast = Roof(46.96, 8.05, 10.0), Line(46.99, 8.01, 30.0, ())
    assert warm_up(ground)
    answers = fast_digests(roof, [mast], ground, None)
    assert bool(answers) == fast
    profile = sample_profile(ground, mast.latitude_deg, mast.longitude_deg, roof.latitude_deg, roof.longitude_deg)
    plain = path_over(profile, mast.antenna_agl_m, roof, Assumptions())
    over_fields = path_over(
        replace(profile, ground_amsl_m=profile.bare_amsl_m), mast.antenna_agl_m, roof, Assumptions()
    )
    for one in answers:
        assert one.digest.clearance == pytest.approx(plain.digest.clearance, abs=0.001)
        assert one.digest.actual_edge == pytest.approx(plain.digest.actual_edge, abs=0.001)
        assert one.digest.actual_edge > over_fields.digest.actual_edge + 1  # the wood is in the way
