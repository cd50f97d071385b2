"""Reading a scenario file: every mistake at once, each with its place."""

import tomllib
from pathlib import Path as FilePath
from typing import Any

from pydantic import ValidationError

from probsoil.errors import Fault, ScenarioError
from probsoil.scenario.checks import cross_checks
from probsoil.scenario.faults import faults_of
from probsoil.scenario.mending import mend
from probsoil.scenario.models import Scenario
from probsoil.scenario.partial import partial_scenario
from probsoil.scenario.slips import Slip
from probsoil.scenario.syntax import syntax_fault
from probsoil.scenario.translation import is_absolute, slips_of
from probsoil.scenario.value_files import files_relative_to

GREATEST_SIZE = 2_000_000  # bytes; a scenario is a few kilobytes


def read_scenario(path: str | FilePath, *, evidence: bool = True) -> Scenario:
    """Return the scenario written in a file.

    Parameters
    ----------
    path : str or Path
        A TOML file in UTF-8.
    evidence : bool
        Whether its test results are read too; without them where they are still to be interpreted.

    Returns
    -------
    scenario : Scenario
        Checked in full, numbers in base units.

    Raises
    ------
    ScenarioError
        If the file cannot be read or has mistakes; all of them are listed.
    """
    return parse_scenario(_text_of(FilePath(path), str(path)), file=str(path), evidence=evidence)


def parse_scenario(text: str, *, file: str = "scenario", evidence: bool = True) -> Scenario:
    """Return the scenario written in a TOML text.

    Parameters
    ----------
    text : str
        Text of a scenario file.
    file : str
        Name used in error messages; files the scenario refers to are looked for beside it.
    evidence : bool
        As for `read_scenario`.

    Returns
    -------
    scenario : Scenario
        Checked in full, numbers in base units.

    Raises
    ------
    ScenarioError
        If the text has mistakes; all of them are listed.
    """
    source = text.removeprefix("\ufeff").replace("\r\n", "\n")
    data = _parsed(source, file)
    if not evidence:
        data.pop("evidence", None)
    mended = mend(data)
    slips = list(mended.slips)
    with files_relative_to(FilePath(file).parent):
        try:
            scenario = Scenario.model_validate(mended.data)
        except ValidationError as error:
            slips += mended.as_written(_all_slips(error, mended.data))
    if slips:
        raise ScenarioError(faults_of(slips, data, source, file))
    return scenario


def _text_of(path: FilePath, name: str) -> str:
    try:
        if path.is_dir():
            raise _refusal(name, "this is a folder", "give the scenario file itself")
        if path.stat().st_size > GREATEST_SIZE:
            raise _refusal(name, f"the file is larger than {GREATEST_SIZE} bytes", "is it a scenario?")
        raw = path.read_bytes()
    except FileNotFoundError:
        raise _refusal(name, "there is no such file", _neighbours(path)) from None
    except (OSError, ValueError) as error:
        reason = getattr(error, "strerror", None) or str(error)
        raise _refusal(name, f"the file cannot be read ({reason})", None) from None
    if b"\0" in raw:
        raise _refusal(name, "this is a binary file, not text", "a scenario is a TOML file in UTF-8")
    try:
        return raw.decode("utf-8-sig")
    except UnicodeDecodeError as error:
        line = raw.count(b"\n", 0, error.start) + 1
        message = f"the file is not in UTF-8 (byte {error.start + 1}, line {line})"
        raise ScenarioError(
            [
                Fault(
                    file=name,
                    line=line,
                    message=message,
                    hint="save it as UTF-8 text, or is it a binary file?",
                )
            ]
        ) from None


def _refusal(file: str, message: str, hint: str | None) -> ScenarioError:
    return ScenarioError([Fault(file=file, message=message, hint=hint)])


def _neighbours(path: FilePath) -> str | None:
    from difflib import get_close_matches

    try:
        names = [found.name for found in path.parent.glob("*.toml")]
    except (OSError, ValueError):
        return None
    near = get_close_matches(path.name, names, n=1)
    return f'did you mean "{path.parent / near[0]}"?' if near else None


def _parsed(source: str, file: str) -> dict[str, Any]:
    try:
        data = tomllib.loads(source)
    except tomllib.TOMLDecodeError as error:
        raise ScenarioError([syntax_fault(str(error), source, file)]) from None
    except RecursionError:
        raise _refusal(file, "lists or tables are nested too deeply", None) from None
    except ValueError as error:  # a whole number with thousands of digits
        raise _refusal(file, f"a value cannot be read ({error})", None) from None
    if _beyond_64_bits(data):
        raise _refusal(file, "a whole number is beyond the 64 bits that TOML allows", None)
    if not data:
        raise _refusal(file, "the file is empty", "a starter scenario shows what belongs in one")
    return data


def _beyond_64_bits(value: object) -> bool:
    if isinstance(value, dict):
        return any(_beyond_64_bits(one) for one in value.values())
    if isinstance(value, list):
        return any(_beyond_64_bits(one) for one in value)
    return isinstance(value, int) and not -(2**63) <= value < 2**63


def _all_slips(error: ValidationError, data: dict[str, Any]) -> list[Slip]:
    """Add, to what single keys show, what shows only when the readable ones are seen together."""
    slips = slips_of(error, data)
    if is_absolute(error):
        return slips
    failed = {slip.path for slip in slips if not slip.wanting and not slip.at_key}
    return slips + cross_checks(partial_scenario(data, failed))
