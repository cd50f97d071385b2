"""The demo site from its sheets to evidence, held to the truth its sheets were drawn from.

Of 36 intervals of 90 % one expects 32.4 to hold the truth, give or take 1.8; 28 were asked for beforehand.
Width was bounded beforehand too: mean relative standard error at most 6 % for the virgin slope, 15 % for that
of unloading, 10 % for the preconsolidation stress.
"""

from pathlib import Path

import marsh_truth as truth
import numpy as np
import pytest

import probsoil
from probsoil.laboratory.interpretation import Interpretation

FOLDER = Path(__file__).parents[3] / "scenarios" / "tern_marsh"


@pytest.fixture(scope="module")
def done() -> Interpretation:
    return probsoil.interpret([FOLDER / "sheets"], layers=FOLDER / "tern_marsh.toml")


@pytest.fixture(scope="module")
def specimens() -> dict[str, truth.Specimen]:
    """Draw the truth again as the sheets did: the first stream is that of the ground."""
    streams = iter(np.random.SeedSequence(truth.SEED).spawn(40)[1:])
    drawn = {}
    for hole, sample, depth, _ in truth.OEDOMETERS:
        made = truth.specimen(np.random.default_rng(next(streams)), hole, sample, depth)
        drawn[f"{hole}-{sample} oedometer"] = made
    return drawn


def test_intervals_hold_the_truth_of_the_specimens(
    done: Interpretation, specimens: dict[str, truth.Specimen]
) -> None:
    assert len(done.oedometers) == len(specimens) == 12
    hits = []
    widths = []
    for result in done.oedometers:
        made = specimens[result.sheet.test]
        for found, true in (
            (result.lam, made.lam),
            (result.kappa, made.kappa),
            (result.preconsolidation, made.preconsolidation),
        ):
            assert found is not None
            assert found.value == pytest.approx(true, rel=0.25)
            hits.append(abs(found.value - true) <= 1.645 * found.standard_error)
            widths.append(found.relative_error)
    assert sum(hits) >= 28, sum(hits)
    assert np.all(np.reshape(widths, (12, 3)).mean(axis=0) <= [0.06, 0.15, 0.10])


def test_every_test_is_in_the_layer_it_was_taken_from(
    done: Interpretation, specimens: dict[str, truth.Specimen]
) -> None:
    layers = {one.test: one.layer for one in done.observations if one.kind == "oedometer"}
    assert layers == {name: made.clay.name for name, made in specimens.items()}


def test_the_open_standard_gives_the_same_evidence(done: Interpretation) -> None:
    # left aside is what it has no readings for: cv, creep, correction of the vane; M is that at failure
    both = {"lambda", "kappa", "preconsolidation_stress", "void_ratio", "M", "q_net"}
    other = probsoil.interpret([FOLDER / "tern_marsh.ags"], layers=FOLDER / "tern_marsh.toml")
    theirs_whole = other.observations
    ours, theirs = (
        sorted(
            (row.parameter, row.layer, round(row.depth, 2), row.value)
            for row in one.observations
            if row.parameter in both
        )
        for one in (done, other)
    )
    assert len(ours) == 4 * 12 + 6 + 6
    assert [one[:3] for one in ours] == [one[:3] for one in theirs]
    off = {name: 0.0 for name in both}
    for mine, other in zip(ours, theirs, strict=True):
        off[mine[0]] = max(off[mine[0]], abs(mine[3] / other[3] - 1.0))
    assert off.pop("M") < 0.05  # failure of the file is at the largest deviator
    off.pop("preconsolidation_stress")  # files round void ratios differently, which moves it within its error
    errors = {
        row.test: row.standard_error
        for row in done.observations
        if row.parameter == "preconsolidation_stress"
    }
    for row in theirs_whole:
        if row.parameter == "preconsolidation_stress":
            mine = next(
                one
                for one in done.observations
                if one.parameter == row.parameter
                and one.layer == row.layer
                and round(one.depth, 2) == round(row.depth, 2)
            )
            assert abs(mine.value - row.value) < errors[mine.test]
    assert max(off.values()) < 0.02
