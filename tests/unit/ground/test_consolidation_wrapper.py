"""What the consolidation wrapper refuses, and how realisations travel in lanes."""

import numpy as np
import pytest
from test_discretisation import even_column, ramp

from probsoil.errors import ParameterError, ShapeError
from probsoil.ground.consolidation import ClayState, LoadHistory, consolidate
from probsoil.ground.lanes import LANES, Lanes

TIMES = np.array([0.0, 0.5, 1.0])


def run(*, state=None, load=None, times=TIMES, record=TIMES[-1:], n_cell=24):
    column, cells, laws = even_column(n_cell)
    state = column if state is None else state
    load = ramp(column, 60.0) if load is None else load
    return consolidate(state, laws["k"], cells, load, times=times, record=record)


def changed(**changes):
    state, _, _ = even_column()
    return ClayState(**({name: getattr(state, name) for name in state.__slots__} | changes))


def test_the_unchanged_case_runs():
    result = run()
    assert result.converged.all()
    assert result.settlement.shape == (1, 3)
    assert result.settlement[0, 0] == 0.0
    assert result.stress.shape == result.yield_stress.shape == (1, 1, 24)


def test_nothing_recorded_is_allowed():
    assert run(record=np.zeros(0)).stress.shape == (1, 0, 24)


EVERY = np.ones((1, 24))


@pytest.mark.parametrize(
    ("arguments", "error", "message"),
    [
        ({"state": changed(lam=np.ones((1, 5)))}, ShapeError, r"state.lam: shape \(1, 5\) is not"),
        ({"state": even_column(10)[0]}, ShapeError, "state has 10 cells, cells has 24"),
        ({"state": changed(stress=0.0 * EVERY)}, ParameterError, "state.stress must be finite and above 0"),
        ({"state": changed(void_ratio=np.nan * EVERY)}, ParameterError, "state.void_ratio must be finite"),
        ({"state": changed(kap=0.0 * EVERY)}, ParameterError, "state.kap must be finite and above 0"),
        (
            {"state": changed(yield_stress=10.0 * EVERY)},
            ParameterError,
            "yield_stress must not be below stress",
        ),
        ({"state": changed(kap=0.4 * EVERY)}, ParameterError, "nor lam below kap"),
        ({"load": ramp(even_column(10)[0], 60.0)}, ShapeError, "load.stress: shape"),
        ({"times": np.array([0.0])}, ParameterError, "times must rise"),
        ({"times": np.array([0.0, 0.6, 0.5, 1.0])}, ParameterError, "times must rise"),
        ({"times": np.array([0.1, 1.0])}, ParameterError, "times must start with the first load knot"),
        ({"times": np.array([0.0, 1.0, 1.5]), "record": np.array([1.5])}, ParameterError, "end by the last"),
        (
            {"load": ramp(even_column()[0], 60.0, end=0.3)},
            ParameterError,
            "every load knot up to the end must be among times",
        ),
        ({"record": np.array([0.7])}, ParameterError, "every recorded time must be among times"),
        (
            {"record": np.array([0.0])},
            ParameterError,
            "every recorded time must be among times, after the first",
        ),
    ],
)
def test_wrong_arguments_are_refused(arguments, error, message):
    with pytest.raises(error, match=message):
        run(**arguments)


def test_load_is_linear_between_knots():
    """Two knots more on the straight line change nothing but rounding."""
    times = np.linspace(0.0, 1.0, 21)
    plain = run(times=times)
    knots = times[[0, 5, 12, 20]]
    stress = 60.0 * knots[:, None, None] * np.ones((1, 24))
    history = LoadHistory(time=knots, stress=stress)
    assert run(times=times, load=history).settlement == pytest.approx(plain.settlement, rel=1e-9)


@pytest.mark.parametrize("n_sample", [1, LANES - 1, LANES, LANES + 1, 3 * LANES])
def test_packing_and_unpacking_are_inverse(n_sample):
    lanes = Lanes(n_sample)
    values = np.arange(n_sample * 5, dtype=float).reshape(n_sample, 5)
    blocks = lanes.pack(values)
    assert blocks.shape == (-(-n_sample // LANES), 5, LANES)
    assert np.array_equal(lanes.unpack(blocks), values)
    # the padding repeats the last realisation, so it can never be a harder problem than the real ones
    assert np.array_equal(blocks[-1, :, -1], values[-1])
