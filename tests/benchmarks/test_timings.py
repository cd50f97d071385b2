"""Timings of the kernels and of a whole assessment; they print and never fail on a stopwatch.

Run with ``pytest -m benchmark -s tests/benchmarks``. Figures are medians of several runs.
"""

import statistics
import time
from collections.abc import Callable
from concurrent.futures import ThreadPoolExecutor
from pathlib import Path

import pytest

import probsoil
from probsoil.assessment.evaluation import Study, prepare
from probsoil.ground.applied_load import LoadedGround, applied_load
from probsoil.ground.clay_settlement import consolidate_clay
from probsoil.ground.profile import clay_columns, points_in_situ, sample_size, yield_stresses
from probsoil.ground.response import respond

pytestmark = pytest.mark.benchmark
DEMO = Path(__file__).parents[2] / "scenarios" / "heron_flats.toml"
CHUNK = 1024


def median_seconds(work: Callable[[], object], times: int = 7) -> float:
    work()
    took = []
    for _ in range(times):
        start = time.perf_counter()
        work()
        took.append(time.perf_counter() - start)
    return statistics.median(took)


@pytest.fixture(scope="module")
def study() -> Study:
    return prepare(probsoil.read(DEMO))


def test_ground_model_per_realisation(study: Study) -> None:
    values = study.space.values(study.latent(0))
    seconds = median_seconds(lambda: respond(study.site, values))
    print(f"\nground model, one core: {1e6 * seconds / CHUNK:.0f} us a realisation")
    with ThreadPoolExecutor(2) as pool:
        both = median_seconds(lambda: list(pool.map(study, (0, 1, 2, 3))))
    print(f"ground model, two cores: {1e6 * both / (4 * CHUNK):.0f} us a realisation")
    assert respond(study.site, values).converged.all()


def test_consolidation_kernel_per_realisation(study: Study) -> None:
    values = study.space.values(study.latent(0))
    n_sample = sample_size(values)
    points = points_in_situ(study.site, values, n_sample)
    yield_stress, _ = yield_stresses(study.site, values, points)
    clay = points.layer < len(study.site.layers) - 1
    ground = LoadedGround(
        points=points,
        columns=clay_columns(study.site, values, n_sample),
        yield_stress=yield_stress,
        clay=clay,
        load=applied_load(study.site, values, points.depth),
    )
    seconds = median_seconds(lambda: consolidate_clay(study.site, values, ground))
    cells, steps = study.site.cells.n_cell, study.site.times.size - 1
    print(f"\nconsolidation, one core: {1e6 * seconds / CHUNK:.0f} us, {cells} cells, {steps} steps")
    assert n_sample == CHUNK


def test_whole_assessment() -> None:
    scenario = probsoil.read(DEMO)
    seconds = median_seconds(lambda: probsoil.assess(scenario), times=3)
    print(f"\nassessment without the report: {seconds:.1f} s for {scenario.realisations:,} realisations")
    assert scenario.realisations == 20_000
