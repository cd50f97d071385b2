"""The documents keep up with the program: generated tables, links, commands, the list of checks."""

import contextlib
import io
import re
import tomllib
from pathlib import Path

import pytest

from probsoil.scenario import read_scenario

ROOT = Path(__file__).parents[2]
PAGES = [*ROOT.glob("*.md"), *(ROOT / "docs").rglob("*.md")]
LINK = re.compile(r"\]\(([^)#\s]+)(?:#[^)]*)?\)")


def page(name: str) -> str:
    return (ROOT / name).read_text(encoding="utf-8")


@pytest.mark.parametrize(
    "name", ["docs/scenario_reference.md", "docs/published_ranges.md", "docs/laboratory_tables.md"]
)
def test_generated_tables_are_what_the_program_says(name: str) -> None:
    text = page(name)
    generator = text.split("```python\n")[-1].split("```")[0]
    printed = io.StringIO()
    with contextlib.redirect_stdout(printed):
        exec(compile(generator, name, "exec"), {})  # our own page
    between = re.search(r"<!-- generated: begin -->\n(.*?)<!-- generated: end -->", text, re.DOTALL)
    assert between is not None
    assert between.group(1).strip() == printed.getvalue().strip()


@pytest.mark.parametrize("path", PAGES, ids=lambda path: path.name)
def test_links_lead_somewhere(path: Path) -> None:
    for target in LINK.findall(path.read_text(encoding="utf-8")):
        if "://" not in target:
            assert (path.parent / target).exists(), f"{path.name} links to {target}"


def test_every_published_check_is_in_the_table_of_checks() -> None:
    table = page("docs/verification.md")
    tests = sorted(path.name for path in (ROOT / "tests" / "published").glob("test_*.py"))
    assert tests
    assert [name for name in tests if name not in table] == []


def test_readme_commands_name_demos_that_exist() -> None:
    commands = re.findall(r"^python3 -m venv.*$", page("README.md"), re.MULTILINE)
    assert len(commands) == 2
    demo = re.search(r"assess (\S+)", commands[0])
    assert demo is not None
    assert (ROOT / demo.group(1)).exists()
    assert "&& .venv/bin/pytest" in commands[1]


@pytest.mark.parametrize("path", sorted((ROOT / "scenarios").rglob("*.toml")), ids=lambda path: path.stem)
def test_every_scenario_of_the_repository_is_sound(path: Path) -> None:
    # what is still to be interpreted is not in the repository; tests/cli/test_cli_tests_to_chances.py does it
    assert read_scenario(path, evidence="interpreted/evidence.csv" not in path.read_text()).limits


def test_change_log_is_headed_by_what_is_not_released() -> None:
    headings = re.findall(r"^## (.+)$", page("docs/changelog.md"), re.MULTILINE)
    assert headings[0] == "Unreleased"


def test_dependencies_the_program_imports_are_declared() -> None:
    declared = tomllib.loads(page("pyproject.toml"))["project"]["dependencies"]
    names = {re.split(r"[<>=!~ ]", entry)[0].replace("-", "_") for entry in declared}
    imported = {
        found
        for path in (ROOT / "probsoil").rglob("*.py")
        for found in re.findall(r"^\s*(?:from|import) (\w+)", path.read_text(encoding="utf-8"), re.MULTILINE)
    }
    others = {"numpy", "scipy", "pandas", "matplotlib", "numba", "pydantic", "pint", "typer", "rich"}
    others |= {"jinja2", "python_calamine", "chaospy", "SALib"}
    assert names == others
    assert others <= imported
