"""What a grid costs and how far it is from a converged one, side by side; the tables of docs/performance.md.

Run with ``pytest -m benchmark -s tests/benchmarks/test_error_and_time.py``. Times are processor time of one
thread, medians of several runs, and never fail on a stopwatch; the errors can fail.
"""

import os
import statistics
import time
from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest

from probsoil.assessment.evaluation import prepare
from probsoil.ground import consolidation
from probsoil.ground._consolidation_kernel import consolidate_lanes
from probsoil.ground.cells import DEFAULT_CELLS, graded_cells
from probsoil.ground.response import ground_state, respond
from probsoil.ground.site_model import site_model
from probsoil.ground.time_steps import time_axis
from probsoil.scenario import parse_scenario

pytestmark = pytest.mark.benchmark
DEMO = Path(__file__).parents[2] / "scenarios" / "heron_flats.toml"
CHUNK = 1024
TURNS = 7
COMPARED = 64  # realisations whose error is taken
REFERENCE = 16  # times the default cells and steps
PROMISE = 0.5  # per cent of the final settlement, of the default grid

GRIDS = ((16, 1 / 3), (24, 1 / 2), (DEFAULT_CELLS, 1), (2 * DEFAULT_CELLS, 2), (4 * DEFAULT_CELLS, 4))

DRAINS = """
[drains]
pattern = "triangular"
spacing = 1.5
equivalent_diameter = 0.066
smear_ratio = 2.5
smear_kh_ks = 3
bottom = 6.5
installed = "1 week"
"""


def demo(extra="", layer=""):
    """Scenario of the demo, with keys put into every clay layer and a table added at the end."""
    text = DEMO.read_text(encoding="utf-8").replace('soil = "clay"', f'soil = "clay"\n{layer}')
    return parse_scenario(text + extra, file="demo.toml")


def on_grid(site, scenario, cells, refine):
    """Site with another number of cells and of steps that keep all times that something is asked for."""
    wanted = np.intersect1d(site.times, site_model(scenario, refine=2).times)
    restart = [] if site.drains is None else [site.drains.installed]
    ramps = [(stage.start, stage.end) for stage in site.stages]
    layers = site.layers
    return replace(
        site,
        cells=graded_cells(
            np.array([layer.mean_thickness for layer in layers]),
            np.array([layer.is_clay for layer in layers]),
            base_drained=site.base_drained,
            target=cells,
        ),
        times=time_axis(ramps, wanted, site.horizon, restart=restart, refine=refine),
    )


def microseconds(*works):
    """Median processor time of each work for a realisation; they take turns, so that all are slowed alike."""
    took = [[] for _ in works]
    for work in works:
        work()
    for _ in range(TURNS):
        for work, seconds in zip(works, took, strict=True):
            start = time.thread_time()
            work()
            seconds.append(time.thread_time() - start)
    return [1e6 * statistics.median(seconds) / CHUNK for seconds in took]


def kernel_of(site, values, monkeypatch):
    """The kernel's part of a chunk as a function without arguments."""
    taken = []

    def keep(*arguments):
        taken[:] = arguments
        consolidate_lanes(*arguments)

    with monkeypatch.context() as patch:
        patch.setattr(consolidation, "consolidate_lanes", keep)
        respond(site, values)
    settlement = taken[4]

    def kernel():
        settlement[...] = 0.0
        consolidate_lanes(*taken)

    return kernel


def test_error_and_time_of_grids(monkeypatch):
    scenario = demo()
    study = prepare(scenario)
    values = study.space.values(study.latent(0))
    some = {key: value[:COMPARED] if np.ndim(value) else value for key, value in values.items()}
    sites = [on_grid(study.site, scenario, cells, refine) for cells, refine in GRIDS]
    finest = on_grid(study.site, scenario, REFERENCE * DEFAULT_CELLS, REFERENCE)
    finest = replace(finest, times=np.unique(np.concatenate([finest.times, *(site.times for site in sites)])))
    exact = ground_state(finest, some).consolidation.settlement
    print(f"\nload on the machine {os.getloadavg()[0]:.1f}, {os.cpu_count()} processors")
    print("| cells, steps | error: greatest, median | kernel | whole chunk |")
    coarser = np.inf
    for (cells, refine), site in zip(GRIDS, sites, strict=True):
        settled = ground_state(site, some).consolidation.settlement
        off = np.abs(settled - exact[:, np.searchsorted(finest.times, site.times)]).max(axis=1)
        error = 100.0 * off / exact[:, -1]
        kernel, chunk = microseconds(
            kernel_of(site, values, monkeypatch), lambda site=site: replace(study, site=site)(0)
        )
        size = f"{site.cells.n_cell}, {site.times.size - 1}"
        print(f"| {size} | {error.max():.2f}, {np.median(error):.2f} % | {kernel:.0f} | {chunk:.0f} |")
        if cells == DEFAULT_CELLS and refine == 1:
            assert np.array_equal(site.times, study.site.times)
        if cells >= DEFAULT_CELLS:
            assert error.max() <= PROMISE
            assert error.max() < coarser
        coarser = error.max()


CASES = {
    "as it is": (demo, True),
    "without slip circles": (demo, False),
    "with vertical drains": (lambda: demo(DRAINS, "kh_kv = 2"), True),
    "with secondary compression": (lambda: demo(layer="C_alpha_ratio = 0.04"), True),
    "with both": (lambda: demo(DRAINS, "kh_kv = 2\nC_alpha_ratio = 0.04"), True),
}


def test_time_of_parts(monkeypatch):
    print(f"\nload on the machine {os.getloadavg()[0]:.1f}, {os.cpu_count()} processors")
    print("| Heron Flats | cells, steps | kernel | ground's answer in full |")
    for name, (make, slips) in CASES.items():
        study = prepare(make())
        site = study.site
        if not slips:
            site = replace(site, slip_times=np.zeros(0), families=(), layouts=())
        values = study.space.values(study.latent(0))
        kernel, chunk = microseconds(
            kernel_of(site, values, monkeypatch), lambda site=site, values=values: respond(site, values)
        )
        assert respond(site, values).converged.all()
        size = f"{site.cells.n_cell}, {site.times.size - 1}"
        print(f"| {name} | {size} | {kernel:.0f} | {chunk:.0f} |")
