"""Two campaigns are the same only if everything their numbers depend on is the same."""

import shutil
import sys
from pathlib import Path

import pytest

import probsoil
from probsoil.campaign import campaign_identity, source_digest
from probsoil.campaign.identity import differences


def test_identity_changes_with_every_value_its_type_and_each_fingerprint() -> None:
    base = campaign_identity({"seed": 1, "draws": "sobol"}, code="a")
    assert base.digest == campaign_identity({"draws": "sobol", "seed": 1}, code="a").digest
    others = {
        campaign_identity({"seed": 2, "draws": "sobol"}, code="a").digest,
        campaign_identity({"seed": 1.0, "draws": "sobol"}, code="a").digest,
        campaign_identity({"seed": 1, "draws": "monte carlo"}, code="a").digest,
        campaign_identity({"seed": 1}, code="a").digest,
        campaign_identity({"seed": 1, "draws": "sobol"}, code="b").digest,
        campaign_identity({"seed": 1, "draws": "sobol"}).digest,
        campaign_identity({"seed": 1, "draws": "sobol", "code": "a"}).digest,
    }
    assert len(others | {base.digest}) == 8


def test_floats_are_told_apart_to_the_last_digit() -> None:
    first, second = campaign_identity({"x": 0.1 + 0.2}), campaign_identity({"x": 0.3})
    assert differences(first.to_dict(), second) == ["x was 0.30000000000000004, is 0.3"]


def test_no_differences_where_there_are_none() -> None:
    identity = campaign_identity({"seed": 1}, the_code="a")
    assert differences(identity.to_dict(), identity) == []


@pytest.fixture
def package(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    """Return the folder of a small package that can be imported."""
    folder = tmp_path / "clayey"
    (folder / "inner").mkdir(parents=True)
    for name in ("__init__.py", "inner/__init__.py", "inner/page.html", "notes.txt"):
        (folder / name).write_text(f"# {name}\n")
    monkeypatch.syspath_prepend(str(tmp_path))
    monkeypatch.delitem(sys.modules, "clayey", raising=False)
    source_digest.cache_clear()
    return folder


def digest_anew() -> str:
    source_digest.cache_clear()
    return source_digest("clayey")


def test_digest_of_the_code_follows_modules_and_templates_only(package: Path) -> None:
    first = digest_anew()
    (package / "notes.txt").write_text("other")
    (package / "__pycache__").mkdir(exist_ok=True)
    (package / "__pycache__" / "x.py").write_text("other")
    assert digest_anew() == first
    seen = {first}
    for name in ("__init__.py", "inner/__init__.py", "inner/page.html"):
        (package / name).write_text("# changed\n")
        seen.add(digest_anew())
    shutil.move(package / "inner" / "page.html", package / "inner" / "sheet.html")
    seen.add(digest_anew())
    (package / "new.py").write_text("")
    seen.add(digest_anew())
    assert len(seen) == 6


def test_digest_of_this_package_reads_its_own_files() -> None:
    source_digest.cache_clear()
    assert len(source_digest()) == 64
    names = {path.suffix for path in Path(probsoil.__file__).parent.rglob("*") if path.is_file()}
    assert {".py", ".html", ".css", ".js"} <= names
