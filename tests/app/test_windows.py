import numpy as np
import pytest

from app.chain.windows import ADJACENT_DB, SPREAD_DB, adjacent_step_db, level_window, spread_db, standards
from app.errors import ModeError
from app.systems import systems


def test_mode_that_the_standard_leaves_out_moves_with_its_cn():
    """From 64-QAM 2/3 (raw 13.8 dB, 39 dB(µV)) to 256-QAM 2/3 (18.1 dB): 43.3 dB(µV); the ceiling stays."""
    window = level_window("DVB-T2", "256-QAM 2/3")
    assert window.lowest_dbuv == pytest.approx(39 + 18.1 - 13.8)
    assert window.highest_dbuv == 74
    assert "for 256-QAM 2/3 by its C/N from the modes listed" in window.source


def test_needier_modes_of_a_system_never_have_a_wider_window():
    for system in ("DVB-T", "DVB-T2"):
        (found,) = (one for one in systems() if one.name == system)
        for modulation in ("QPSK", "16-QAM", "64-QAM"):
            rates = [mode.name for mode in found.modes if mode.name.startswith(f"{modulation} ")]
            lowest = [level_window(system, mode).lowest_dbuv for mode in rates]
            assert lowest == sorted(lowest)


def test_outside_the_window_has_a_sign():
    window = level_window("DVB-T", "64-QAM 2/3")
    assert window.outside_db([40, 45, 60, 74, 77]).tolist() == [-5, 0, 0, 0, 3]
    assert np.isnan(window.outside_db(np.nan))


def test_system_that_the_standard_does_not_know_has_no_window():
    assert level_window("ATSC 1.0", "8-VSB") is None
    assert level_window("ATSC 1.0", "8-VSB", "north-america").highest_dbuv == 103.8


def test_every_window_is_one():
    for standard in standards():
        for system in systems():
            for mode in system.modes:
                window = level_window(system.name, mode.name, standard)
                assert window is None or window.lowest_dbuv < window.highest_dbuv


def test_unknown_standard_lists_the_known_ones():
    with pytest.raises(ModeError, match='standard "moon" is not known: use en-60728-1, germany, spain'):
        level_window("DVB-T", "64-QAM 2/3", "moon")


def test_spread_is_strongest_over_weakest():
    assert spread_db([50, np.nan, 63, 55]) == 13 > SPREAD_DB
    assert spread_db([np.nan, 50]) == 0


def test_step_counts_between_channels_that_touch_only():
    """Channels 21, 22 and 24: only the first two touch; a second emission on 22 is no neighbour of the first."""
    frequency = [474.0, 482.0, 482.0, 498.0]
    assert adjacent_step_db([60, 53, 66, 90], frequency, 8.0) == 7 > ADJACENT_DB
    assert adjacent_step_db([60, np.nan, np.nan, 90], frequency, 8.0) == 0


def test_neighbours_of_different_width_touch_too():
    assert adjacent_step_db([60, 50], [690.0, 694.75], [8.0, 1.5]) == 10
