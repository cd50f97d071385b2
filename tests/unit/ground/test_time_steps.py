"""The time axis: what must be on it, and how steps grow."""

import numpy as np
import pytest

from probsoil.errors import ParameterError
from probsoil.ground.time_steps import GROWTH, time_axis

RAMPS = [(0.0, 0.1), (0.5, 0.55), (2.0, 3.0)]
WANTED = [0.0501, 0.7, 1.0, 7.3, 20.0]


def test_holds_every_wanted_time_and_every_kink_exactly():
    times = time_axis(RAMPS, WANTED, 30.0)
    assert times[0] == 0.0
    assert times[-1] == 30.0
    assert set(WANTED) | {t for ramp in RAMPS for t in ramp} <= set(times.tolist())
    assert (np.diff(times) > 0.0).all()


def test_starts_short_after_every_kink_and_then_grows():
    times = time_axis(RAMPS, [], 30.0)
    for start, end in RAMPS:
        for kink in (start, end):
            first = np.diff(times)[np.searchsorted(times, kink)]
            assert first <= 0.0625 * (end - start) * 1.001
    steps = np.diff(times[times >= 3.0])
    # the last but one may have given way to the horizon; elsewhere the factor is the same throughout
    assert steps[1:-1] / steps[:-2] == pytest.approx(GROWTH, rel=1e-6)


def test_a_ramp_has_a_dozen_steps_of_growing_length():
    times = time_axis(RAMPS, [], 30.0)
    for start, end in RAMPS:
        steps = np.diff(times[(times >= start) & (times <= end)])
        assert steps.size == 12
        assert (np.diff(steps) > 0.0).all()
        assert steps.max() < 0.11 * (end - start)


def test_refining_shortens_steps_everywhere():
    coarse, fine = (time_axis(RAMPS, WANTED, 30.0, refine=n) for n in (1, 4))
    assert fine.size > 2.5 * coarse.size
    middle = 0.5 * (coarse[1:] + coarse[:-1])
    longest = np.diff(fine)[np.searchsorted(fine, middle) - 1]
    assert (longest <= 0.75 * np.diff(coarse)).mean() > 0.8


def test_a_free_time_gives_way_to_a_wanted_one_close_by():
    times = time_axis([(0.0, 1.0)], [], 10.0)
    wanted = times[-3] + 0.01 * (times[-2] - times[-3])
    moved = time_axis([(0.0, 1.0)], [wanted], 10.0)
    assert wanted in moved
    assert times[-3] not in moved


def test_first_stage_may_start_later():
    times = time_axis([(1.0, 1.5)], [], 4.0)
    assert {0.0, 1.0, 1.5, 4.0} <= set(times.tolist())


@pytest.mark.parametrize(
    ("ramps", "wanted"), [([(0.0, 5.0)], []), ([(0.0, 1.0)], [4.5]), ([(0.0, 1.0)], [-0.1])]
)
def test_times_outside_the_axis_are_refused(ramps, wanted):
    with pytest.raises(ParameterError, match="from 0 to the horizon of 4 years"):
        time_axis(ramps, wanted, 4.0)
