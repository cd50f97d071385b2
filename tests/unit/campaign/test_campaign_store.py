"""What reaches disk is whole, is of this campaign, or is computed again."""

import errno
import json
import logging
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
    Identity,
    campaign_identity,
    discard_chunks,
    kept_chunks,
    open_store,
    prepare_folder,
    run_campaign,
    write_durably,
)
from probsoil.errors import ResultsError, UnfitFolderError

N = campaign_chunks.N_CHUNKS
OURS, THEIRS = campaign_chunks.OURS, campaign_chunks.named("theirs")


def run(
    store: Path, *, identity: Identity = OURS, resume: bool = False, force: bool = False
) -> tuple[list[bytes], list[int]]:
    """Run the campaign; return the bytes of all chunks, and which were evaluated rather than read."""
    evaluated: list[int] = []

    def evaluate(index: int) -> dict[str, np.ndarray]:
        evaluated.append(index)
        return campaign_chunks.drawn(index)

    results = run_campaign(evaluate, N, identity=identity, workers=2, store=store, resume=resume, force=force)
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
    run(tmp_path / "theirs", identity=THEIRS)
    shutil.copy(tmp_path / "ours" / "chunk-000001.npz", tmp_path / "ours" / "chunk-000002.npz")
    shutil.copy(tmp_path / "theirs" / "chunk-000008.npz", tmp_path / "ours" / "chunk-000008.npz")
    _, evaluated = run(tmp_path / "ours", resume=True)
    assert evaluated == [2, 8]


def contents(folder: Path) -> dict[str, bytes]:
    return {path.name: path.read_bytes() for path in folder.iterdir()}


@pytest.mark.parametrize("resume", [False, True])
def test_chunks_of_another_campaign_are_neither_used_nor_harmed_and_the_differences_are_told(
    tmp_path: Path, resume: bool
) -> None:
    theirs = campaign_identity({"seed": 2, "draws": "sobol", "load.width": 12.0}, the_code="0a")
    ours = campaign_identity({"seed": 1, "draws": "sobol", "load.length": 3.0}, the_code="0b")
    run(tmp_path / "chunks", identity=theirs)
    before = contents(tmp_path / "chunks")
    with pytest.raises(UnfitFolderError, match="12 finished chunks of another run") as caught:
        run_campaign(campaign_chunks.drawn, N, identity=ours, store=tmp_path / "chunks", resume=resume)
    lines = str(caught.value).splitlines()
    assert lines[1:-1] == [
        "  seed was 2, is 1",
        "  load.length was not given, is 3.0",
        "  load.width was 12.0, is not given",
        "  the code has changed",
    ]
    assert "--force" in lines[-1]
    assert contents(tmp_path / "chunks") == before


def test_many_differences_are_counted_rather_than_listed(tmp_path: Path) -> None:
    run(tmp_path / "chunks", identity=campaign_identity({f"x{place}": 1 for place in range(40)}))
    with pytest.raises(UnfitFolderError, match="and 28 more differences"):
        run(tmp_path / "chunks", identity=campaign_identity({f"x{place}": 2 for place in range(40)}))


def test_another_number_of_chunks_is_refused(tmp_path: Path) -> None:
    run(tmp_path / "chunks")
    with pytest.raises(UnfitFolderError, match="the number of chunks was 12, is 13"):
        open_store(tmp_path / "chunks", identity=OURS, n_chunks=13)


@pytest.mark.parametrize("content", [b"", b"{", b"\xff\xfe", b"[1]", b'{"format": 1}'])
@pytest.mark.parametrize("resume", [False, True])
def test_chunks_with_a_senseless_manifest_are_refused(tmp_path: Path, content: bytes, resume: bool) -> None:
    run(tmp_path / "chunks")
    (tmp_path / "chunks" / "manifest.json").write_bytes(content)
    with pytest.raises(UnfitFolderError, match=r"manifest\.json', which says whose they are"):
        open_store(tmp_path / "chunks", identity=OURS, n_chunks=N, resume=resume)


def test_force_removes_chunks_of_another_campaign_and_nothing_else(tmp_path: Path) -> None:
    run(tmp_path, identity=THEIRS)
    (tmp_path / "notes.txt").write_text("mine")
    _, evaluated = run(tmp_path, force=True)
    assert evaluated == list(range(N))
    assert (tmp_path / "notes.txt").read_text() == "mine"
    assert json.loads((tmp_path / "manifest.json").read_text())["stated"] == {"name": "ours"}


def test_same_campaign_is_gone_on_from_without_being_asked_and_this_is_said(
    tmp_path: Path, caplog: pytest.LogCaptureFixture
) -> None:
    whole, _ = run(tmp_path / "chunks")
    (tmp_path / "chunks" / "chunk-000007.npz").unlink()
    caplog.set_level(logging.INFO, "probsoil")
    again, evaluated = run(tmp_path / "chunks", force=True)  # force is for what does not belong there
    assert evaluated == [7]
    assert again == whole
    assert "Going on from 11 of 12 chunks that are finished" in caplog.text
    assert caplog.records[-1].levelname == "NOTICE"


def test_chunk_files_without_a_manifest_are_nobodys(tmp_path: Path) -> None:
    run(tmp_path / "chunks")
    (tmp_path / "chunks" / "manifest.json").unlink()
    assert kept_chunks(tmp_path / "chunks") == 0
    _, evaluated = run(tmp_path / "chunks")
    assert evaluated == list(range(N))


@pytest.mark.parametrize("begun", [False, True])
def test_resume_insists_that_there_is_something_to_go_on_from(tmp_path: Path, begun: bool) -> None:
    if begun:  # interrupted before its first chunk
        open_store(tmp_path / "chunks", identity=OURS, n_chunks=N)
    with pytest.raises(UnfitFolderError, match="holds no finished chunks to go on from"):
        run(tmp_path / "chunks", resume=True)
    assert not list(tmp_path.rglob("chunk-*"))


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
        run_campaign(campaign_chunks.drawn, 1, identity=OURS, store=tmp_path / "taken")
    with pytest.raises(ResultsError, match=r"cannot be written: '.*taken' is a file, not a folder"):
        run_campaign(campaign_chunks.drawn, 1, identity=OURS, store=tmp_path / "taken" / "deeper" / "chunks")


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


def test_folder_in_the_place_of_a_chunk_is_no_chunk(tmp_path: Path) -> None:
    run(tmp_path / "chunks")
    path = tmp_path / "chunks" / "chunk-000004.npz"
    path.unlink()
    path.mkdir()
    assert open_store(tmp_path / "chunks", identity=OURS, n_chunks=N).read(4) is None
    with pytest.raises(ResultsError, match=r"chunk-000004\.npz' cannot be removed"):
        discard_chunks(tmp_path / "chunks")
