"""The record that goes with a result."""

import hashlib
import json
import platform
from datetime import UTC, datetime
from pathlib import Path

import numpy as np

from probsoil.campaign import file_digest, provenance


def test_record_is_json_and_says_what_made_the_numbers() -> None:
    record = provenance(
        {"scenario_file": "bridge.toml", "chunks": 20},
        started=datetime(2026, 3, 1, 8, 30, 15, 123456, tzinfo=UTC),
        seconds={"total": 2.00049, "realisations": np.float64(1.5)},
        workers=2,
        command="probsoil assess bridge.toml",
        packages=("numpy", "a-package-that-is-not-there"),
    )
    assert json.loads(json.dumps(record)) == record
    assert record["packages"] == {"numpy": np.__version__}
    assert record["python"] == platform.python_version()
    assert record["started"] == "2026-03-01T08:30:15+00:00"
    assert record["seconds"] == {"total": 2.0, "realisations": 1.5}
    assert record["scenario_file"] == "bridge.toml"
    assert record["chunks"] == 20
    assert record["workers"] == 2
    assert record["command"] == "probsoil assess bridge.toml"
    assert record["version"]
    assert record["cpu_features"]


def test_digest_is_that_of_the_bytes(tmp_path: Path) -> None:
    (tmp_path / "a").write_bytes(b"clay\r\n")
    assert file_digest(tmp_path / "a") == hashlib.sha256(b"clay\r\n").hexdigest()
