"""How far space and time steps move the answer.

The promise: with the default cells and time axis the settlement at every computed time is within
0.5 % of the final settlement of a converged grid. The reference has eight times as many cells and
steps; a grid twice as fine again must move it by less than a quarter of the promise, or it would prove
nothing.
"""

from itertools import pairwise

import numpy as np
import pytest
from ground_cases import AREA, central, clay, refined, sand, scenario, stage

from probsoil.ground.cells import Cells
from probsoil.ground.compression import void_ratio_lost
from probsoil.ground.conductivity import Conductivity, conductivity_from_cv, conductivity_from_permeability
from probsoil.ground.consolidation import ClayState, LoadHistory, consolidate
from probsoil.ground.response import ground_state
from probsoil.ground.site_model import site_model

PROMISE = 0.005
FILL = '[load]\nshape = "area"\nfill_unit_weight = 20\nsubmergence = true'
DRAINS = """[drains]
pattern = "square"
spacing = 0.9
equivalent_diameter = 0.066
smear_ratio = 2
smear_kh_ks = 2
installed = 0
bottom = 6"""
SOFT_K = {"permeability": "{ k = 1e-9, ck = 0.7 }", "void_ratio": 2.2, "lam": 0.4, "kappa": 0.05}

CASES = {
    "thin soft layer between sands": scenario(
        [sand("top", 2.0), clay("soft", 1.2, lam=0.5, void_ratio=2.5), sand("bottom", 3.0)],
        [stage("fill", 0, 0.1, pressure=50)],
        base="drained",
    ),
    "three layers, two stages": scenario(
        [
            clay("crust", 1.5, lam=0.12, kappa=0.02, void_ratio=1.1, preconsolidation="{ stress = 90 }"),
            clay("soft", 5.0, preconsolidation="{ pop = 12 }", **SOFT_K),
            clay(
                "lower", 3.5, lam=0.2, kappa=0.03, preconsolidation="{ ocr = 1.4 }", permeability="{ cv = 3 }"
            ),
        ],
        [stage("first", 0, 0.08, pressure=25), stage("second", 0.5, 0.6, pressure=35)],
        water_table=1.0,
        base="drained",
    ),
    "20 m drained at the top only": scenario(
        [clay("deep", 20.0, permeability="{ cv = 0.8 }")],
        [stage("fill", 0, 0.25, pressure=80)],
        horizon=100,
    ),
    "surcharge taken off": scenario(
        [clay("soft", 6.0, preconsolidation="{ pop = 10 }", **SOFT_K)],
        [
            stage("fill", 0, 0.1, pressure=40),
            stage("surcharge", 0.1, 0.2, pressure=30),
            stage("off", 2.0, 2.05, pressure=-30),
        ],
        base="drained",
    ),
    "thin stiff layer between soft ones": scenario(
        [
            sand("working platform", 0.5),
            clay("upper", 3.0, preconsolidation="{ pop = 5 }", **SOFT_K),
            clay("stiff", 0.3, lam=0.03, kappa=0.01, void_ratio=0.7, permeability="{ k = 2e-11, ck = 0.3 }"),
            clay("lower", 4.0, **SOFT_K),
        ],
        [stage("fill", 0, 0.1, pressure=60)],
        horizon=50,
    ),
    "thin permeable layer between soft ones": scenario(
        [
            clay("upper", 4.0),
            clay("silt", 0.2, lam=0.05, permeability="{ k = 1e-6, ck = 1 }"),
            clay("lower", 4.0),
        ],
        [stage("fill", 0, 0.5, pressure=60)],
    ),
    "constant cv": scenario(
        [clay("soft", 5.0, lam=0.45, preconsolidation="{ pop = 15 }", permeability="{ cv = 1.0 }")],
        [stage("fill", 0, 0.2, pressure=70)],
    ),
    "permeability that falls steeply": scenario(
        [
            clay(
                "soft", 5.0, lam=0.45, preconsolidation="{ pop = 15 }", permeability="{ k = 2e-9, ck = 0.35 }"
            )
        ],
        [stage("fill", 0, 0.2, pressure=70)],
    ),
    "very permeable": scenario(
        [clay("silt", 5.0, lam=0.1, kappa=0.02, permeability="{ k = 1e-6, ck = 1 }")],
        [stage("fill", 0, 1.0, pressure=60), stage("more", 3.0, 3.2, pressure=20)],
    ),
    "overconsolidated throughout": scenario(
        [clay("stiff", 8.0, preconsolidation="{ pop = 120 }", unit_weight=18, permeability="{ cv = 0.3 }")],
        [stage("fill", 0, 0.1, pressure=40)],
        water_table=1.5,
    ),
    "overconsolidated from a flooded ground level": scenario(
        [clay("stiff", 8.0, preconsolidation="{ ocr = 6 }", unit_weight=18, permeability="{ cv = 0.3 }")],
        [stage("fill", 0, 0.1, pressure=40)],
    ),
    "almost sudden load, kink met half-way": scenario(
        [clay("soft", 4.0, preconsolidation="{ pop = 30 }", kappa=0.02)],
        [stage("fill", 0, 0.003, pressure=60)],
        base="drained",
    ),
    "thin clay that yields half-way up a slow ramp": scenario(
        [
            clay(
                "thin",
                0.5,
                kappa=0.025,
                preconsolidation="{ pop = 24 }",
                permeability="{ k = 2.9e-9, ck = 1 }",
            )
        ],
        [stage("fill", 0, 0.3, pressure=40)],
    ),
    "drains close together": scenario(
        [clay("soft", 6.0, kappa=0.03, preconsolidation="{ pop = 40 }", permeability="{ k = 5e-9, ck = 1 }")],
        [stage("fill", 0, 0.3, pressure=40)],
        load=f"{AREA}\n{DRAINS}",
    ),
    "fill that sinks below the water table": scenario(
        [sand("sea bed", 0.5), clay("soft", 6.0, unit_weight=14.5, preconsolidation="{ pop = 4 }", **SOFT_K)],
        [stage("fill", 0, 0.2, height=3.0)],
        load=FILL,
        horizon=60,
    ),
}


def settlement(case, refine, at=()):
    site = refined(case, refine, also=at)
    state = ground_state(site, central(case))
    assert state.response.converged.all()
    return site.times, state.response.settlement[0]


@pytest.mark.parametrize("name", CASES)
def test_default_steps_keep_the_promise_at_every_time(name):
    case = CASES[name]
    times, default = settlement(case, 1)
    fine_times, fine = settlement(case, 8, times)
    final = np.abs(fine).max()
    at = np.searchsorted(fine_times, times)
    assert np.array_equal(fine_times[at], times)
    assert np.abs(default - fine[at]).max() <= PROMISE * final


@pytest.mark.parametrize("name", CASES)
def test_the_reference_has_converged(name):
    case = CASES[name]
    times = site_model(case).times
    times_8, fine = settlement(case, 8, times)
    times_16, finer = settlement(case, 16, times)
    change = fine[np.searchsorted(times_8, times)] - finer[np.searchsorted(times_16, times)]
    assert np.abs(change).max() <= 0.25 * PROMISE * np.abs(finer).max()


def even_column(n_cell=24, *, thickness=2.0, yielding=1.0, drained=True):
    """Equal cells of one clay under 30 kPa, and its two laws of flow."""
    every = np.ones((1, n_cell))
    state = ClayState(
        thickness=thickness / n_cell * every,
        stress=30.0 * every,
        yield_stress=30.0 * yielding * every,
        void_ratio=1.5 * every,
        lam=0.3 * every,
        kap=0.05 * every,
    )
    face = np.zeros(n_cell)
    face[0] = float(drained)
    share = np.full(n_cell, 1.0 / n_cell)
    cells = Cells(
        layer=np.zeros(n_cell, dtype=np.int64),
        share=share,
        centre=np.cumsum(share) - 0.5 * share,
        joined=np.arange(n_cell) > 0,
        drained=face,
    )
    log_value, decline = conductivity_from_permeability(0.03 * every, 0.6 * every, state.void_ratio)
    by_k = Conductivity(
        log_value=log_value,
        decline=decline,
        follows=np.zeros(n_cell),
        power=np.ones(n_cell, dtype=np.int64),
    )
    by_cv = Conductivity(
        log_value=conductivity_from_cv(1.5 * every, state.lam, state.void_ratio),
        decline=0.0 * every,
        follows=np.ones(n_cell),
        power=np.full(n_cell, 2, dtype=np.int64),
    )
    return state, cells, {"k": by_k, "cv": by_cv}


def ramp(state, added, *, end=1.0, horizon=1.0):
    """Load that rises to `added` at `end` and stays."""
    time = np.unique([0.0, end, horizon])
    return LoadHistory(
        time=time,
        stress=np.stack([min(t / end, 1.0) * np.broadcast_to(added, state.stress.shape) for t in time]),
    )


@pytest.mark.parametrize("flow", ["k", "cv"])
def test_second_order_in_time(flow):
    """Halving the steps divides the error by four where no kink is crossed (a band of a fifth).

    Taken while the error is well above what the iteration leaves: a relative 1e-4 of stress at one
    step, hence about a millionth of the settlement.
    """
    state, cells, laws = even_column()
    load = ramp(state, 60.0)

    def at_quarters(n_step):
        times = np.linspace(0.0, 1.0, n_step + 1)
        result = consolidate(state, laws[flow], cells, load, times=times, record=times[-1:])
        return result.settlement[0, n_step // 4 :: n_step // 4]

    exact = at_quarters(4096)
    errors = [np.abs(at_quarters(n_step) - exact).max() for n_step in (8, 16, 32)]
    assert errors[-1] > 5e-6 * exact[-1]
    for coarse, fine in pairwise(errors):
        assert coarse / fine == pytest.approx(4.0, rel=0.2)


@pytest.mark.parametrize("flow", ["k", "cv"])
def test_second_order_in_space(flow):
    """Halving equal cells divides the error by about four once the early gradients have spread."""
    times = np.concatenate([[0.0], np.linspace(0.2, 2.0, 200)])

    def last(n_cell):
        state, cells, laws = even_column(n_cell)
        load = ramp(state, 60.0, end=0.2, horizon=2.0)
        result = consolidate(state, laws[flow], cells, load, times=times, record=times[-1:])
        return result.settlement[0, -1]

    values = [last(n_cell) for n_cell in (16, 32, 64, 128)]
    changes = np.abs(np.diff(values))
    assert changes[:-1] / changes[1:] == pytest.approx(4.0, rel=0.25)


@pytest.mark.parametrize("flow", ["k", "cv"])
def test_settlement_is_the_sum_over_cells(flow):
    """No water is lost between cells: the settlement marched is that of the final state of each cell."""
    state, cells, laws = even_column(yielding=1.4)
    load = LoadHistory(
        time=np.array([0.0, 0.1, 0.5, 0.6, 3.0]),
        stress=np.array([0.0, 80.0, 80.0, 20.0, 20.0])[:, None, None] * np.ones((1, 24)),
    )
    times = np.unique(np.concatenate([np.linspace(0.0, 3.0, 61), load.time]))
    record = times[[5, 20, -1]]
    result = consolidate(state, laws[flow], cells, load, times=times, record=record)
    for slot, time in enumerate(record):
        lost = void_ratio_lost(
            result.stress[0, slot],
            result.yield_stress[0, slot],
            initial_stress=state.stress[0],
            initial_yield_stress=state.yield_stress[0],
            slopes=(state.lam[0], state.kap[0]),
        )
        total = (state.thickness[0] / (1.0 + state.void_ratio[0]) * lost).sum()
        marched = result.settlement[0, np.searchsorted(times, time)]
        assert marched == pytest.approx(total, rel=1e-12)


@pytest.mark.parametrize("flow", ["k", "cv"])
def test_water_that_cannot_leave_only_moves(flow):
    """With no drained face a load that varies with depth shifts water between cells and settles nothing.

    Each of the 2 x 60 solutions stops when the stress changes by less than 1e-4, which leaves an error
    of a void ratio below lambda/2 x 1e-8, a total below 2 x 60 x 0.3/2 x 1e-8 x 2 m/2.5 = 1.4e-7 m.
    """
    state, cells, laws = even_column(drained=False)
    added = np.linspace(0.0, 60.0, cells.n_cell)[None, :]
    times = np.linspace(0.0, 1.0, 61)
    result = consolidate(state, laws[flow], cells, ramp(state, added), times=times, record=times[-1:])
    assert result.converged.all()
    assert np.abs(result.settlement).max() < 1.5e-7
    moved = result.stress[0, 0] - state.stress[0]
    assert moved.min() < -1.0
    assert moved.max() > 1.0
