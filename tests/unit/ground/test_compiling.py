"""A kernel kept on disk must not outlive a change to any file that it is made of."""

import ast
import subprocess
import sys
from pathlib import Path

import pytest

from probsoil import ground
from probsoil.ground._compiling import digest, kernel_sources

FOLDER = Path(ground.__file__).parent
KERNELS = [
    path for path in kernel_sources(FOLDER) if "njit" in path.read_text() or "_compiling" in path.read_text()
]


def imported_from_the_room(path):
    """Files of the ground's room that a module imports."""
    nodes = [node for node in ast.walk(ast.parse(path.read_text())) if isinstance(node, ast.ImportFrom)]
    modules = [node.module for node in nodes if node.module and node.module.startswith("probsoil.ground.")]
    return {FOLDER / f"{module.rpartition('.')[2]}.py" for module in modules}


def test_every_file_that_a_kernel_takes_from_is_in_the_digest():
    assert len(KERNELS) >= 5
    sources = set(kernel_sources(FOLDER))
    for kernel in KERNELS:
        assert imported_from_the_room(kernel) <= sources, kernel.name


@pytest.mark.parametrize("changed", ["_one.py", "_two.py", "lanes.py"])
def test_the_digest_follows_every_file(tmp_path, changed):
    for name in ("_one.py", "_two.py", "lanes.py", "other.py"):
        (tmp_path / name).write_text(f"{name} = 1")
    before = digest(kernel_sources(tmp_path))
    assert digest(kernel_sources(tmp_path)) == before
    (tmp_path / "other.py").write_text("no kernel is made of this")
    assert digest(kernel_sources(tmp_path)) == before
    (tmp_path / changed).write_text(f"{changed} = 2")
    assert digest(kernel_sources(tmp_path)) != before


HELPER = "from numba import njit\n\n@njit\ndef helper(x):\n    return x + {added}\n"
KERNEL = (
    "from _compiling import kept\nfrom _helper import helper\n\n@kept\ndef kernel(x):\n    return helper(x)\n"
)


@pytest.mark.slow
def test_a_kept_kernel_sees_the_change_of_a_helper_in_another_file(tmp_path, monkeypatch):
    """The fault that the digest mends: numba looks at the kernel's own file only."""
    monkeypatch.setenv("NUMBA_CACHE_DIR", str(tmp_path / "cache"))
    (tmp_path / "_compiling.py").write_text((FOLDER / "_compiling.py").read_text())
    (tmp_path / "lanes.py").write_text("")
    (tmp_path / "_kernel.py").write_text(KERNEL)

    def answer(added):
        (tmp_path / "_helper.py").write_text(HELPER.format(added=added))
        command = [
            sys.executable,
            "-c",
            "import _kernel as k; print(k.kernel(1), sum(k.kernel.stats.cache_hits.values()))",
        ]
        done = subprocess.run(command, cwd=tmp_path, capture_output=True, text=True, check=True)
        return done.stdout.split()

    assert answer(10) == ["11", "0"]
    assert answer(10) == ["11", "1"]  # taken from disk
    assert answer(20) == ["21", "0"]
