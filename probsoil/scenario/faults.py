"""From slips to faults: each given its line, its column and its key as a user reads it."""

from collections.abc import Sequence
from typing import Any

from probsoil.errors import Fault
from probsoil.scenario.positions import Place, places
from probsoil.scenario.slips import Path, Slip

_LONGEST_GIVEN = 80
_SINGULAR = {"layers": "layer", "further_loads": "load", "stages": "stage", "limits": "limit"}


def faults_of(slips: Sequence[Slip], data: dict[str, Any], text: str, file: str) -> list[Fault]:
    """Return every slip with its place in the file, in the order of the file.

    Parameters
    ----------
    slips : sequence of Slip
        Paths start at the top of the scenario.
    data : dict
        Parsed file.
    text : str
        Text of the file.
    file : str
        File as the user named it.

    Returns
    -------
    faults : list of Fault
        Without repeats; what has no place of its own comes first.
    """
    found = places(text)
    faults = dict.fromkeys(_fault(slip, data, text, file, found) for slip in slips)
    return sorted(faults, key=lambda fault: (fault.line or 0, fault.column or 0))


def key_text(path: Path, data: Any) -> str:
    """Return a path as a user reads it.

    Parameters
    ----------
    path : tuple of str or int, [-]
        List positions from 0.
    data : dict
        Parsed file, for the names of list items.

    Returns
    -------
    text : str
        Such as ``layers[2].lambda.mean (layer "soft clay")``.
    """
    text, note = "", ""
    for part in path:
        text += f"[{part + 1}]" if isinstance(part, int) else f".{part}" if text else part
    if len(path) >= 2 and path[0] in _SINGULAR:
        items = data.get(path[0])
        item = items[path[1]] if isinstance(items, list) and isinstance(path[1], int) else None
        name = item.get("name") if isinstance(item, dict) else None
        if isinstance(name, str) and name:
            note = f' ({_SINGULAR[path[0]]} "{name}")'
    return text + note


def _fault(slip: Slip, data: dict[str, Any], text: str, file: str, found: dict[Path, Place]) -> Fault:
    key = key_text((*slip.path, *slip.wanting) if len(slip.wanting) == 1 else slip.path, data)
    place = next(
        (found[slip.path[:depth]] for depth in range(len(slip.path), 0, -1) if slip.path[:depth] in found),
        None,
    )
    if place is None:
        return Fault(file=file, key=key, message=slip.message, allowed=slip.allowed, hint=slip.hint)
    points_at_value = slip.path in found and not slip.at_key
    start, end = place.value if points_at_value else place.key
    line_start = text.rfind("\n", 0, start) + 1
    excerpt = text[line_start:].split("\n", 1)[0]
    column = start - line_start + 1
    return Fault(
        file=file,
        line=text.count("\n", 0, start) + 1,
        column=column,
        key=key,
        message=slip.message,
        given=_shortened(text[start:end]) if points_at_value and place.value != place.key else None,
        allowed=slip.allowed,
        hint=slip.hint,
        excerpt=excerpt,
        span=(column, min(end - start, len(excerpt) - column + 1)),
    )


def _shortened(given: str) -> str:
    line = " ".join(given.split())
    return line if len(line) <= _LONGEST_GIVEN else line[: _LONGEST_GIVEN - 3] + "..."
