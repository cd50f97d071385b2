"""Everything a response holds is the same, bit for bit, for a realisation alone and in company."""

from pathlib import Path

import numpy as np
import pytest
from ground_cases import central, clay, sand, scenario, stage

import probsoil
from probsoil.assessment.evaluation import prepare
from probsoil.ground.lanes import LANES
from probsoil.ground.response import respond
from probsoil.ground.rows import row_sum
from probsoil.ground.site_model import site_model

SCENARIOS = Path(__file__).parents[3] / "scenarios"
DRAINS = """
[drains]
pattern = "triangular"
spacing = 1.3
equivalent_diameter = 0.06
bottom = 6.0
installed = 0.1
discharge_capacity = 100
smear_ratio = 2
smear_kh_ks = 3
"""


def demo(name):
    study = prepare(probsoil.read(SCENARIOS / f"{name}.toml"))
    many = study.space.values(study.latent(0))
    return (
        study.site,
        {key: np.asarray(value)[: LANES + 5] for key, value in many.items() if np.ndim(value)},
        many,
    )


def layered(extra="", **keys):
    """Two segments of two clay layers each, with the quantities of each scattered."""
    soft = {"M": None, "phi": 25} | keys
    case = scenario(
        [
            clay("crust", 1.0, preconsolidation="{ stress = 70 }", void_ratio=1.1, lam=0.12, **keys),
            clay("soft", 3.0, preconsolidation="{ pop = 12 }", permeability="{ k = 1e-9, ck = 0.8 }", **soft),
            sand("seam", 0.5),
            clay("upper", 2.0, **keys),
            clay("lower", 2.0, preconsolidation="{ ocr = 1.3 }", **keys),
        ],
        [
            stage("fill", 0, 0.1, pressure=40),
            stage("more", 1.0, 1.1, pressure=20),
            stage("off", 3.0, 3.1, pressure=-15),
        ],
        load='[load]\nshape = "area"\nsubmergence = true\n' + extra,
        base="drained",
    )
    rng = np.random.default_rng(np.random.SeedSequence(11))
    values = central(case)
    scattered = {
        key: float(value) * rng.uniform(0.85, 1.15, LANES + 5)
        for key, value in values.items()
        if key.split(".")[-1]
        in ("thickness", "lambda", "kappa", "pop", "void_ratio", "cv", "k", "unit_weight")
    }
    return site_model(case), scattered, values


CASES = {
    "Heron Flats": lambda: demo("heron_flats"),
    "Marsh Lane": lambda: demo("marsh_lane"),
    "layers": layered,
    "layers with creep": lambda: layered(C_alpha_ratio=0.04),
    "layers with drains and creep": lambda: layered(DRAINS, C_alpha_ratio=0.04, kh_kv=2),
}


@pytest.mark.parametrize("name", CASES)
def test_a_realisation_does_not_depend_on_its_company(name):
    site, scattered, values = CASES[name]()
    among = respond(site, values | scattered)
    for position in (0, 7, LANES, LANES + 4):
        alone = respond(site, values | {key: value[[position]] for key, value in scattered.items()})
        for field in alone.__slots__:
            one, many = getattr(alone, field), getattr(among, field)
            if one.shape == many.shape:  # times, not samples
                assert np.array_equal(one, many)
            else:
                assert one.dtype == many.dtype
                assert one[0].tobytes() == many[position].tobytes(), field


def test_a_row_sum_does_not_depend_on_how_the_rows_lie_in_memory():
    rng = np.random.default_rng(np.random.SeedSequence(12))
    values = rng.standard_normal((40, 61))
    chosen = np.arange(61) % 3 > 0
    total = row_sum(values[:, chosen])
    assert total.shape == (40,)
    assert np.array_equal(total, row_sum(np.asfortranarray(values)[:, chosen]))
    for row in (0, 17, 39):
        assert row_sum(values[[row]][:, chosen])[0] == total[row]
        assert total[row] == pytest.approx(sum(values[row, chosen]), abs=1e-12)
