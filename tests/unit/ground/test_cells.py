"""Cells: shares, drained faces, segments between granular layers."""

import numpy as np
import pytest

from probsoil.errors import ParameterError
from probsoil.ground.cells import DEFAULT_CELLS, graded_cells

THICK = np.array([1.0, 2.0, 4.0, 0.3, 3.0])


def cells(is_clay, thickness=THICK, **keys):
    return graded_cells(thickness, np.array(is_clay), **({"base_drained": False} | keys))


@pytest.mark.parametrize("base_drained", [True, False])
def test_shares_fill_every_clay_layer(base_drained):
    found = cells([True, False, True, True, True], base_drained=base_drained)
    for layer in (0, 2, 3, 4):
        mine = found.layer == layer
        assert mine.sum() >= 3
        assert found.share[mine].sum() == pytest.approx(1.0, rel=1e-12)
        tops = np.concatenate([[0.0], np.cumsum(found.share[mine])[:-1]])
        assert found.centre[mine] == pytest.approx(tops + 0.5 * found.share[mine], rel=1e-9)
    assert not (found.layer == 1).any()


def test_granular_layers_drain_both_neighbours_and_part_them():
    found = cells([True, False, True, True, True])
    first, last = 0, np.flatnonzero(found.layer == 0)[-1]
    assert found.drained[[first, last]].tolist() == [1.0, 1.0]  # ground level above, sand below
    second = last + 1
    assert not found.joined[second]
    assert found.drained[second] == 1.0
    assert found.drained[-1] == 0.0  # tight base
    assert found.drained.sum() == 3.0
    assert found.joined.sum() == found.n_cell - 2


def test_base_drains_where_said():
    assert cells([True] * 5, base_drained=True).drained[-1] == 1.0
    assert cells([True] * 5, base_drained=False).drained[-1] == 0.0


def test_sand_at_the_bottom_drains_whatever_the_base_is():
    assert cells([True, True, True, True, False]).drained[-1] == 1.0


def test_cells_are_fine_at_drained_faces_and_grow_inward():
    found = graded_cells(np.array([10.0]), np.array([True]), base_drained=True)
    half = found.n_cell // 2
    assert (np.diff(found.share[:half]) > 0.0).all()
    assert found.share == pytest.approx(found.share[::-1], rel=1e-6)
    one_way = graded_cells(np.array([10.0]), np.array([True]), base_drained=False)
    assert (np.diff(one_way.share) > 0.0).all()


def test_number_of_cells_is_about_what_was_asked():
    for target in (DEFAULT_CELLS, 100, 400):
        assert cells([True] * 5, target=target).n_cell == pytest.approx(target, abs=6)


def test_small_segments_keep_enough_cells():
    found = cells([True, False, True, False, True], thickness=np.array([0.1, 1.0, 40.0, 1.0, 0.1]), target=20)
    for layer in (0, 2, 4):
        assert (found.layer == layer).sum() >= 8


def test_a_profile_without_clay_is_refused():
    with pytest.raises(ParameterError, match="is_clay must be true for at least one layer"):
        cells([False] * 5)
