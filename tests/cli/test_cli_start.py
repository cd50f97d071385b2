"""What is imported at start, and the program as a process."""

import subprocess
import sys
from pathlib import Path

import pytest

import probsoil
from probsoil.cli import main
from probsoil.errors import ScenarioError

HEAVY = ("numpy", "scipy", "pandas", "numba", "matplotlib", "pint", "jinja2")
LIST_HEAVY = f"import sys; print([name for name in {HEAVY!r} if name in sys.modules])"


def python(*arguments: str) -> subprocess.CompletedProcess[str]:
    root = Path(__file__).parents[2]
    return subprocess.run([sys.executable, *arguments], capture_output=True, text=True, check=False, cwd=root)


@pytest.mark.parametrize(
    "start",
    [
        "import probsoil",
        "import probsoil.cli",
        "from probsoil.cli import main; main(['--help'])",
        "from probsoil.cli import main; main(['assess', '--help'])",
        "from probsoil.cli import main; main(['--version'])",
        "from probsoil.cli import main; main(['assess', '--nonsense'])",
    ],
)
def test_start_imports_nothing_heavy(start: str) -> None:
    done = python("-c", f"{start}\n{LIST_HEAVY}")
    assert done.returncode == 0, done.stderr
    assert done.stdout.splitlines()[-1] == "[]"


def test_import_alone_brings_no_command_line() -> None:
    done = python("-c", "import probsoil, sys; print([n for n in ('typer', 'rich') if n in sys.modules])")
    assert done.stdout.strip() == "[]"


def test_names_are_there_when_asked_for() -> None:
    for name in probsoil.__all__:
        assert getattr(probsoil, name) is not None
    assert set(probsoil.__all__) <= set(dir(probsoil))
    assert probsoil.ScenarioError is ScenarioError
    assert probsoil.read.__name__ == "read_scenario"
    with pytest.raises(AttributeError, match="module 'probsoil' has no attribute 'reed'"):
        probsoil.reed  # noqa: B018


def test_process_returns_the_code_and_splits_its_streams(tmp_path: Path) -> None:
    (tmp_path / "bad.toml").write_text("format = 1\nsede = 4\n")
    done = python("-m", "probsoil", "check", str(tmp_path / "bad.toml"))
    assert done.returncode == 2
    assert done.stdout == ""
    assert "sede" in done.stderr
    assert "Traceback" not in done.stderr


def test_odd_characters_survive_a_narrow_encoding(tmp_path: Path) -> None:
    root = Path(__file__).parents[2]
    text = (root / "probsoil" / "scenario" / "starters" / "embankment.toml").read_text(encoding="utf-8")
    first = next(line for line in text.splitlines() if line.startswith("title"))
    path = tmp_path / "odd.toml"
    path.write_text(text.replace(first, 'title = "Škofja → Loka"'), encoding="utf-8")
    done = subprocess.run(
        [sys.executable, "-m", "probsoil", "check", str(path)],
        capture_output=True,
        check=False,
        cwd=root,
        env={"PYTHONIOENCODING": "ascii", "PATH": ""},
    )
    assert done.returncode == 0, done.stderr
    assert rb"\u0160kofja \u2192 Loka" in done.stdout


@pytest.mark.parametrize("shell", ["bash", "zsh", "fish"])
def test_shell_completion_script(shell: str, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setenv("_PROBSOIL_COMPLETE", f"source_{shell}")
    done = python("-m", "probsoil")
    assert done.returncode == 0, done.stderr
    assert "_PROBSOIL_COMPLETE" in done.stdout


def test_interrupt_wrapped_by_compiled_code_is_told_as_such(
    monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    def stop() -> None:
        raise KeyboardInterrupt

    def compiling(*_: object, **__: object) -> None:
        try:
            stop()
        except KeyboardInterrupt:
            raise RuntimeError("no compiled object yet") from None

    monkeypatch.setattr("probsoil.scenario.scenario_schema", compiling)
    assert main(["schema"]) == 1
    assert "Interrupted; nothing is kept." in capsys.readouterr().err
