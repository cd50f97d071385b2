"""What reaches disk is whole, is of this campaign, or is computed again."""

import errno
import json
import os
import shutil
import subprocess
import sys
from collections import namedtuple
from pathlib import Path

import campaign_chunks
import numpy as np
import pytest

from probsoil.campaign import (
    campaign_identity,
    discard_chunks,
    open_store,
    prepare_folder,
    run_campaign,
    write_durably,
)
from probsoil.errors import ResultsError

N = campaign_chunks.N_CHUNKS


def run(store: Path, *, identity: str = "ours", resume: bool = False) -> tuple[list[bytes], list[int]]:
    """Run the campaign; return the bytes of all chunks, and which were evaluated rather than read."""
    evaluated: list[int] = []

    def evaluate(index: int) -> dict[str, np.ndarray]:
        evaluated.append(index)
        return campaign_chunks.drawn(index)

    results = run_campaign(evaluate, N, identity=identity, workers=2, store=store, resume=resume)
    return [result["value"].tobytes() + result["over"].tobytes() for _, result in results], sorted(evaluated)


def test_chunk_file_opens_with_numpy_alone_and_is_the_same_each_time(tmp_path: Path) -> None:
    run(tmp_path / "one")
    run(tmp_path / "two")
    with np.load(tmp_path / "one" / "chunk-000003.npz", allow_pickle=False) as archive:
        np.testing.assert_array_equal(archive["value"], campaign_chunks.drawn(3)["value"])
        assert archive["over"].dtype == np.bool_
        assert archive["index"].shape == ()
    same = [(tmp_path / name / "chunk-000003.npz").read_bytes() for name in ("one", "two")]
    assert same[0] == same[1]


def test_resume_evaluates_only_what_is_missing(tmp_path: Path) -> None:
    whole, evaluated = run(tmp_path / "chunks")
    assert evaluated == list(range(N))
    for index in (2, 7):
        (tmp_path / "chunks" / f"chunk-{index:06d}.npz").unlink()
    again, evaluated = run(tmp_path / "chunks", resume=True)
    assert evaluated == [2, 7]
    assert again == whole


def cut(data: bytes) -> bytes:
    return data[: len(data) // 2]


def emptied(data: bytes) -> bytes:  # noqa: ARG001
    return b""


def one_bit_turned(data: bytes) -> bytes:
    middle = len(data) // 2
    return data[:middle] + bytes([data[middle] ^ 1]) + data[middle + 1 :]


def guard_turned(data: bytes) -> bytes:
    return data[:-1] + bytes([data[-1] ^ 1])


@pytest.mark.parametrize("damage", [cut, emptied, one_bit_turned, guard_turned])
def test_damaged_chunk_is_noticed_and_computed_again(tmp_path: Path, damage: object) -> None:
    whole, _ = run(tmp_path / "chunks")
    path = tmp_path / "chunks" / "chunk-000004.npz"
    path.write_bytes(damage(path.read_bytes()))  # type: ignore[operator]
    again, evaluated = run(tmp_path / "chunks", resume=True)
    assert evaluated == [4]
    assert again == whole


def test_chunk_under_another_number_or_of_another_campaign_is_not_taken(tmp_path: Path) -> None:
    run(tmp_path / "ours")
    run(tmp_path / "theirs", identity="theirs")
    shutil.copy(tmp_path / "ours" / "chunk-000001.npz", tmp_path / "ours" / "chunk-000002.npz")
    shutil.copy(tmp_path / "theirs" / "chunk-000008.npz", tmp_path / "ours" / "chunk-000008.npz")
    _, evaluated = run(tmp_path / "ours", resume=True)
    assert evaluated == [2, 8]


def test_resume_of_another_campaign_is_refused_naming_both_and_harms_nothing(tmp_path: Path) -> None:
    ours = campaign_identity("clay", seed=1, realisations=100)
    theirs = campaign_identity("clay", seed=2, realisations=100)
    run(tmp_path / "chunks", identity=theirs)
    before = sorted(path.read_bytes() for path in (tmp_path / "chunks").iterdir())
    with pytest.raises(ResultsError, match="of another campaign and cannot be resumed") as caught:
        run_campaign(
            campaign_chunks.drawn, N, identity=ours, workers=1, store=tmp_path / "chunks", resume=True
        )
    assert "(seed 1, realisations 100)" in str(caught.value)
    assert "(seed 2, realisations 100)" in str(caught.value)
    assert sorted(path.read_bytes() for path in (tmp_path / "chunks").iterdir()) == before


def test_resume_with_another_number_of_chunks_is_refused(tmp_path: Path) -> None:
    run(tmp_path / "chunks")
    with pytest.raises(ResultsError, match=r"12 chunks, ours\n.*13 chunks, ours"):
        open_store(tmp_path / "chunks", identity="ours", n_chunks=13, resume=True)


@pytest.mark.parametrize("content", [b"", b"{", b"\xff\xfe", b"[1]"])
def test_resume_with_a_senseless_manifest_is_refused(tmp_path: Path, content: bytes) -> None:
    run(tmp_path / "chunks")
    (tmp_path / "chunks" / "manifest.json").write_bytes(content)
    with pytest.raises(ResultsError, match="name another folder"):
        open_store(tmp_path / "chunks", identity="ours", n_chunks=N, resume=True)


def test_start_anew_removes_old_chunks_and_nothing_else(tmp_path: Path) -> None:
    run(tmp_path, identity="old")
    (tmp_path / "notes.txt").write_text("mine")
    _, evaluated = run(tmp_path, identity="new")
    assert evaluated == list(range(N))
    assert (tmp_path / "notes.txt").read_text() == "mine"
    assert json.loads((tmp_path / "manifest.json").read_text())["identity"] == "new"


def test_resume_where_nothing_was_begun_begins(tmp_path: Path) -> None:
    _, evaluated = run(tmp_path / "chunks", resume=True)
    assert evaluated == list(range(N))


def test_discarded_folder_is_gone_unless_something_else_is_in_it(tmp_path: Path) -> None:
    for name in ("clean", "shared"):
        run(tmp_path / name)
    (tmp_path / "shared" / "notes.txt").write_text("mine")
    for name in ("clean", "shared", "never made"):
        discard_chunks(tmp_path / name)
    assert [path.name for path in tmp_path.rglob("*")] == ["shared", "notes.txt"]


def test_file_where_the_folder_should_be(tmp_path: Path) -> None:
    (tmp_path / "taken").write_text("")
    with pytest.raises(ResultsError, match=r"'.*taken' cannot be written: it is a file, not a folder"):
        run_campaign(campaign_chunks.drawn, 1, identity="a", store=tmp_path / "taken")
    with pytest.raises(ResultsError, match=r"cannot be written: '.*taken' is a file, not a folder"):
        run_campaign(campaign_chunks.drawn, 1, identity="a", store=tmp_path / "taken" / "deeper" / "chunks")


def test_folder_that_takes_no_file_is_refused_before_any_work() -> None:
    if not Path("/proc/self").is_dir():
        pytest.skip("needs a file system that nobody can write to")
    with pytest.raises(ResultsError, match="folder '/proc/self/chunks' cannot be written"):
        prepare_folder(Path("/proc/self/chunks"))


FULL_DISK = """
import resource, sys
from pathlib import Path
from probsoil.campaign import prepare_folder, write_durably
from probsoil.errors import ResultsError
folder = Path(sys.argv[1])
prepare_folder(folder)
resource.setrlimit(resource.RLIMIT_FSIZE, (1000, 1000))
for work in (lambda: prepare_folder(folder), lambda: write_durably(folder / "x", bytes(5000))):
    try:
        work()
    except ResultsError as fault:
        print(fault)
"""


def test_file_that_the_system_does_not_let_grow_is_reported_and_leaves_no_part(tmp_path: Path) -> None:
    pytest.importorskip("resource")
    done = subprocess.run(
        [sys.executable, "-c", FULL_DISK, str(tmp_path)], capture_output=True, text=True, check=True
    )
    reason = os.strerror(errno.EFBIG)
    assert done.stdout.count(f"cannot be written: {reason}") == 2
    assert list(tmp_path.iterdir()) == []


def test_full_disk_is_foreseen_at_the_first_chunk(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    usage = namedtuple("usage", "free")
    monkeypatch.setattr(shutil, "disk_usage", lambda folder: usage(free=5000))  # noqa: ARG005
    with pytest.raises(ResultsError, match=r"no room for the chunks in .*: 0\.0 MB needed, 0\.0 MB free"):
        run(tmp_path / "chunks")
    monkeypatch.setattr(shutil, "disk_usage", lambda folder: usage(free=10**9))  # noqa: ARG005
    assert len(run(tmp_path / "chunks")[0]) == N


def test_failed_write_leaves_the_old_file(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    path = tmp_path / "results.json"
    write_durably(path, b"old")

    def full(descriptor: int) -> None:  # noqa: ARG001
        raise OSError(errno.ENOSPC, os.strerror(errno.ENOSPC))

    monkeypatch.setattr(os, "fsync", full)
    with pytest.raises(ResultsError, match=f"results.json' cannot be written: {os.strerror(errno.ENOSPC)}"):
        write_durably(path, b"new")
    assert path.read_bytes() == b"old"
    assert [entry.name for entry in tmp_path.iterdir()] == ["results.json"]


def test_identity_changes_with_content_and_with_each_setting() -> None:
    base = campaign_identity("a = 1", seed=1, draws="sobol")
    assert base == campaign_identity(b"a = 1", seed=1, draws="sobol")
    others = {
        campaign_identity("a = 2", seed=1, draws="sobol"),
        campaign_identity("a = 1", seed=2, draws="sobol"),
        campaign_identity("a = 1", seed=1, draws="monte carlo"),
        campaign_identity("a = 1", seed=1),
        campaign_identity("a = 1", seed="1", draws="sobol"),
    }
    assert len(others | {base}) == 6


def test_folder_in_the_place_of_a_chunk_is_no_chunk(tmp_path: Path) -> None:
    run(tmp_path / "chunks")
    path = tmp_path / "chunks" / "chunk-000004.npz"
    path.unlink()
    path.mkdir()
    assert open_store(tmp_path / "chunks", identity="ours", n_chunks=N, resume=True).read(4) is None
    with pytest.raises(ResultsError, match=r"chunk-000004\.npz' cannot be removed"):
        discard_chunks(tmp_path / "chunks")
