"""Fast and plain paths of a roof give one answer; what was asked before is kept; numba is never in the way."""

import subprocess
import sys
from concurrent.futures import ThreadPoolExecutor

import pytest

from app import kept_paths
from app.fast_paths import is_ready, warm_up
from app.planner import assess
from app.request import AssessRequest
from app.roof import Obstacle, Roof

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
