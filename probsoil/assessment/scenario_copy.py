"""The scenario beside its results, so that the folder alone is enough to run it again."""

import hashlib
import json
from pathlib import Path

from probsoil.assessment.results_folder import COPY
from probsoil.scenario import Scenario
from probsoil.scenario.evidence_file import EvidenceFile
from probsoil.scenario.positions import places


def copies(source: Path, scenario: Scenario) -> dict[str, bytes]:
    """Return what is to be kept of the files that a scenario was read from.

    Parameters
    ----------
    source : Path
        The scenario file.
    scenario : Scenario
        As read from it.

    Returns
    -------
    files : dict of str to bytes
        The scenario by its name in the results folder, as it stands but for the names of files of test
        results; these beside it, with their rows in base units.
    """
    content = source.read_bytes()
    kept = _evidence_files(scenario)
    if not kept:
        return {COPY: content}
    text = content.decode("utf-8-sig").replace("\r\n", "\n")
    found = places(text)
    for position in sorted(kept, reverse=True):
        start, end = found["evidence", position, "file"].value
        text = f"{text[:start]}{json.dumps(_name(position))}{text[end:]}"
    files = {_name(position): file.text.encode() for position, file in kept.items()}
    return {COPY: text.encode(), **files}


def evidence_digests(scenario: Scenario) -> dict[str, dict[str, str]]:
    """Return the SHA-256 of the files of test results, for the record.

    Parameters
    ----------
    scenario : Scenario
        As read.

    Returns
    -------
    digests : dict
        ``evidence_sha256`` with one digest of the rows by the name of each file; empty without any.
    """
    found = {
        file.name: hashlib.sha256(file.text.encode()).hexdigest()
        for file in _evidence_files(scenario).values()
    }
    return {"evidence_sha256": found} if found else {}


def _evidence_files(scenario: Scenario) -> dict[int, EvidenceFile]:
    return {
        position: one.file
        for position, one in enumerate(scenario.evidence)
        if isinstance(one.file, EvidenceFile)
    }


def _name(position: int) -> str:
    return f"evidence_{position + 1}.csv"
