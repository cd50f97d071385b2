"""The compiled consolidation kernel against the same arithmetic in C (consolidation.c).

Run with ``pytest -m benchmark -s tests/benchmarks/test_kernel_against_c.py``; it needs gcc. The
settlements must agree, which can fail; the times are printed and never fail on a stopwatch.
Both sides take turns, so that what else the machine does slows both, and the ratio is the median
of the ratios of neighbouring runs.
"""

import ctypes
import shutil
import statistics
import subprocess
import time
from pathlib import Path

import numpy as np
import pytest

import probsoil
from probsoil.assessment.evaluation import prepare
from probsoil.ground import conductivity, consolidation
from probsoil.ground._consolidation_arrays import Faces, Loading, Schedule, Soil
from probsoil.ground._consolidation_kernel import consolidate_lanes
from probsoil.ground.cells import graded_cells
from probsoil.ground.constants import SECONDS_PER_YEAR
from probsoil.ground.lanes import LANES
from probsoil.ground.response import respond
from probsoil.ground.time_steps import time_axis

pytestmark = pytest.mark.benchmark
DEMO = Path(__file__).parents[2] / "scenarios" / "heron_flats.toml"
SOURCE = Path(__file__).with_name("consolidation.c")
FLAGS = ("-O3", "-march=native", "-fopenmp-simd", "-shared", "-fPIC")
CHUNK = 1024
TURNS = 9
AGREEMENT = 1e-9  # of each realisation's greatest settlement; both stop iterating by the same test

SIZES = ("n_block", "n_cell", "n_knot", "n_step", "n_slot", "n_segment")
ANSWERS = ("settlement", "recorded", "failed")
KINDS = {"water_weight": ctypes.c_double}  # where it is no array


class Problem(ctypes.Structure):
    """The structure of the same name in C: what the kernel takes, field by field."""

    _fields_ = (
        *((name, ctypes.c_int64) for name in SIZES),
        *((name, ctypes.c_void_p) for name in (*Soil._fields, *Faces._fields)),
        *((f"load_{name}", KINDS.get(name, ctypes.c_void_p)) for name in Loading._fields),
        *((name, ctypes.c_void_p) for name in (*Schedule._fields, *ANSWERS)),
    )


def problem(soil, faces, loading, schedule, answers):
    settlement, recorded, _ = answers
    sizes = (
        soil.thickness.shape[0],
        soil.thickness.shape[1],
        loading.height.shape[1],
        schedule.step.size,
        recorded.shape[1],
        settlement.shape[1],
    )
    given = (*soil, *faces, *loading, *schedule, *answers)
    assert all(one.flags.c_contiguous for one in given if isinstance(one, np.ndarray))
    return Problem(*sizes, *(one.ctypes.data if isinstance(one, np.ndarray) else one for one in given))


@pytest.fixture(scope="module")
def in_c(tmp_path_factory):
    compiler = shutil.which("gcc")
    if compiler is None:
        pytest.fail("this benchmark compiles consolidation.c and needs gcc, which is not on the path")
    library = tmp_path_factory.mktemp("kernel") / "consolidation.so"
    command = [compiler, *FLAGS, f"-DLANES={LANES}", str(SOURCE), "-o", str(library)]
    done = subprocess.run(command, capture_output=True, text=True, check=False)
    if done.returncode:
        pytest.fail(f"gcc could not compile consolidation.c:\n{done.stderr}")
    function = ctypes.CDLL(str(library)).consolidate
    function.argtypes, function.restype = (ctypes.POINTER(Problem),), ctypes.c_int
    return function


def demo():
    """The demo's first chunk: 3 layers of clay, two lifts and a removal, 30 years."""
    study = prepare(probsoil.read(DEMO))
    values = study.space.values(study.latent(0))
    return lambda: respond(study.site, values)


def column(drains):
    """Ten metres of clay in three layers and 40 cells, two ramps of load, 30 years."""
    rng = np.random.default_rng(np.random.SeedSequence(7))
    thickness = np.array([2.0, 5.0, 3.0])
    cells = graded_cells(thickness, np.ones(3, dtype=bool), base_drained=True, target=40)
    top = np.concatenate([[0.0], np.cumsum(thickness)])[cells.layer]
    depth = top + cells.centre * thickness[cells.layer]
    shape = (CHUNK, cells.n_cell)

    def scattered(median, log_sd):
        return (np.array(median) * np.exp(log_sd * rng.standard_normal((CHUNK, 3))))[:, cells.layer]

    lam, void_ratio = scattered([0.15, 0.40, 0.25], 0.15), scattered([1.2, 2.0, 1.5], 0.05)
    stress = np.broadcast_to(8.0 + 6.5 * depth, shape)
    state = consolidation.ClayState(
        thickness=np.broadcast_to(cells.share * thickness[cells.layer], shape),
        stress=stress,
        yield_stress=stress * (1.0 + scattered([1.5, 0.25, 0.6], 0.3)),
        void_ratio=void_ratio,
        lam=lam,
        kap=0.15 * lam,
    )
    log_value, decline = conductivity.conductivity_from_permeability(
        scattered([2e-9, 1e-9, 1.5e-9], 0.5) * SECONDS_PER_YEAR, 0.5 * void_ratio, void_ratio
    )
    wells = conductivity.RadialDrainage(rate=np.full(shape, 8.0 * 2.0 / (2.5 * 1.5**2)), start=0.1)
    flow = conductivity.Conductivity(
        log_value=log_value,
        decline=decline,
        follows=np.zeros(cells.n_cell),
        power=np.ones(cells.n_cell, dtype=np.int64),
        drains=wells if drains else None,
    )
    pressure = np.array([0.0, 20.0, 20.0, 45.0, 45.0])
    load = consolidation.LoadHistory(
        time=np.array([0.0, 0.1, 0.5, 0.6, 30.0]), stress=pressure[:, None, None] * np.ones(shape)
    )
    times = time_axis([(0.0, 0.1), (0.5, 0.6)], [30.0], 30.0)
    record = np.array([30.0])
    return lambda: consolidation.consolidate(state, flow, cells, load, times=times, record=record)


CASES = {
    "demo": demo,
    "column": lambda: column(drains=False),
    "column with drains": lambda: column(drains=True),
}


@pytest.mark.parametrize("case", CASES)
def test_same_settlement_and_how_much_time(case, in_c, monkeypatch):
    compute, taken = CASES[case](), []

    def keep(*arguments):
        taken[:] = arguments
        consolidate_lanes(*arguments)

    monkeypatch.setattr(consolidation, "consolidate_lanes", keep)
    compute()
    soil, faces, loading, schedule, *answers = taken
    ours, theirs = ([np.zeros_like(array) for array in answers] for _ in range(2))
    given = problem(soil, faces, loading, schedule, theirs)

    def with_numba():
        ours[0][...] = 0.0
        consolidate_lanes(soil, faces, loading, schedule, *ours)

    def with_c():
        theirs[0][...] = 0.0
        assert in_c(given) == 0

    took = {with_numba: [], with_c: []}
    with_numba(), with_c()
    for _ in range(TURNS):
        for work, seconds in took.items():
            start = time.process_time()
            work()
            seconds.append(time.process_time() - start)
    kernel, c = (1e6 * statistics.median(seconds) / CHUNK for seconds in took.values())
    ratio = statistics.median(a / b for a, b in zip(*took.values(), strict=True))
    print(f"\n{case}, {soil.thickness.shape[1]} cells, {schedule.step.size} steps, {LANES} lanes:")
    print(f"kernel {kernel:.0f} us, C {c:.0f} us a realisation, ratio {ratio:.2f}")

    scale = np.abs(ours[0]).sum(axis=1).max(axis=1)[:, None, None, :]
    assert (scale > 0.01).all()
    np.testing.assert_array_less(np.abs(ours[0] - theirs[0]) / scale, AGREEMENT)
