"""Whatever the workers, the gaps on disk and the shapes: chunks come in order, bit for bit."""

import tempfile
from pathlib import Path

import numpy as np
from hypothesis import given, settings
from hypothesis import strategies as st
from hypothesis.extra import numpy as hnp
from numpy.typing import NDArray

from probsoil.campaign import campaign_identity, open_store, run_campaign

SOME = campaign_identity({"seed": 3})
DTYPES = st.sampled_from([np.float64, np.int64, np.bool_, np.float32, np.dtype("<U7"), np.dtype(">f8")])


def drawn(index: int) -> dict[str, NDArray[np.generic]]:
    generator = np.random.default_rng(np.random.SeedSequence(3, spawn_key=(0, index)))
    return {"value": generator.lognormal(size=(5, 2)), "index": np.array(index)}


@settings(max_examples=40, deadline=None)
@given(
    n_chunks=st.integers(1, 30),
    workers=st.integers(1, 8),
    lost=st.sets(st.integers(0, 29)),
    damaged=st.sets(st.integers(0, 29)),
)
def test_resumed_campaign_equals_an_uninterrupted_one(
    n_chunks: int, workers: int, lost: set[int], damaged: set[int]
) -> None:
    with tempfile.TemporaryDirectory() as name:
        folder = Path(name)
        store = open_store(folder, identity=SOME, n_chunks=n_chunks)
        for index in set(range(n_chunks)) - lost:
            store.write(index, drawn(index))
            if index in damaged:
                store.path(index).write_bytes(store.path(index).read_bytes()[: 10 * index])
        evaluated = []

        def evaluate(index: int) -> dict[str, NDArray[np.generic]]:
            evaluated.append(index)
            return drawn(index)

        run = run_campaign(evaluate, n_chunks, identity=SOME, workers=workers, store=folder)
        results = list(run)
    assert [index for index, _ in results] == list(range(n_chunks))
    for index, result in results:
        assert {key: array.tobytes() for key, array in result.items()} == {
            key: array.tobytes() for key, array in drawn(index).items()
        }
    assert sorted(evaluated) == sorted((lost | damaged) & set(range(n_chunks)))


@settings(max_examples=60, deadline=None)
@given(
    array=DTYPES.flatmap(
        lambda dtype: hnp.arrays(dtype, hnp.array_shapes(min_dims=0, max_dims=3, min_side=0, max_side=4))
    ),
    key=st.text(
        st.characters(codec="ascii", categories=["L", "N"], include_characters="_. "), min_size=1, max_size=9
    ),
)
def test_array_comes_back_from_disk_as_it_went(array: NDArray[np.generic], key: str) -> None:
    with tempfile.TemporaryDirectory() as name:
        store = open_store(Path(name), identity=SOME, n_chunks=1)
        store.write(0, {key: array})
        found = store.read(0)
    assert found is not None
    assert list(found) == [key]
    assert found[key].dtype == array.dtype
    assert found[key].shape == array.shape
    assert found[key].tobytes() == array.tobytes()


@settings(max_examples=200, deadline=None)
@given(data=st.data())
def test_no_damage_to_a_chunk_file_goes_unnoticed(data: st.DataObject) -> None:
    with tempfile.TemporaryDirectory() as name:
        store = open_store(Path(name), identity=SOME, n_chunks=1)
        store.write(0, drawn(0))
        content = bytearray(store.path(0).read_bytes())
        place = data.draw(st.integers(0, len(content) - 1))
        content[place] ^= data.draw(st.integers(1, 255))
        store.path(0).write_bytes(bytes(content))
        assert store.read(0) is None
