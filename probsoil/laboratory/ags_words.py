"""What the words and paired numbers of single AGS4 rows say in the columns of the layout."""

from collections.abc import Callable, Mapping

Cells = Mapping[str, str]
KINDS = frozenset({"CIUC", "CAUC", "CIUE", "CAUE", "CIDC", "CADC", "UU"})
_EITHER = {"CU": ("CIUC", "CAUC"), "CD": ("CIDC", "CADC")}


def kind_of_triaxial(written: str, cells: Cells) -> str | None:
    """Return the kind of a triaxial test.

    Parameters
    ----------
    written : str
        TRIG_TYPE or TREG_TYPE.
    cells : mapping of str to str
        Row of TRIT or TRET.

    Returns
    -------
    kind : str or None
        None for kinds that are not used, such as several stages on one specimen.
    """
    word = written.upper()
    if word in _EITHER:  # the code leaves open how the specimen was consolidated; its stresses tell
        vertical, radial = _number(cells, "TRET_CVP"), _number(cells, "TRET_CRP")
        return _EITHER[word][vertical is not None and radial is not None and vertical != radial]
    word = "UU" if word == "UUP" else word
    return word if word in KINDS else None


def prepared(group: str, cells: Cells) -> dict[str, str]:
    """Return the cells of a row with what must be computed or put in the words of the layout.

    Parameters
    ----------
    group : str
        Name of the group.
    cells : mapping of str to str
        As read.

    Returns
    -------
    cells : dict of str to str
        By heading.
    """
    change = _CHANGES.get(group)
    return {**cells, **change(cells)} if change else dict(cells)


def _triaxial(cells: Cells) -> dict[str, str]:
    """Pore pressure as a change, void ratio after consolidation, and no stress for both where they differ."""
    end, start = _number(cells, "TRET_PWPF"), _number(cells, "TRET_PWPI")
    changes = {"TRET_PWPF": "" if end is None or start is None else f"{end - start:.10g}"}
    initial, squeezed = _number(cells, "TRET_IVR"), _number(cells, "TRET_VOLM")
    known = initial is not None and squeezed is not None
    changes["TRET_IVR"] = f"{initial - (1.0 + initial) * squeezed / 100.0:.6g}" if known else ""  # type: ignore[operator]
    if cells.get("TREG_TYPE", "").upper().startswith("CA"):
        changes["TRET_CONP"] = ""
    return changes


def _drainage(cells: Cells) -> dict[str, str]:
    words = cells.get("ESCG_DRAG", "").casefold()
    one = any(word in words for word in ("single", "one"))
    both = any(word in words for word in ("double", "two", "both"))
    return {"ESCG_DRAG": "" if one == both else "one face" if one else "both faces"}


def _vane(cells: Cells) -> dict[str, str]:
    """Take a strength as uncorrected where the words say so; the standard has no heading for it."""
    words = f"{cells.get('IVAN_METH', '')} {cells.get('IVAN_REM', '')}".casefold()
    return {"IVAN_METH": "no" if "not corrected" in words or "uncorrected" in words else "", "IVAN_REM": ""}


def _sounding(heading: str) -> Callable[[Cells], dict[str, str]]:
    def named(cells: Cells) -> dict[str, str]:
        push = cells.get(heading, "")
        return {heading: "" if push in ("", "1") else f"{cells.get('LOCA_ID', '')} cone {push}"}

    return named


_CHANGES: dict[str, Callable[[Cells], dict[str, str]]] = {
    "TRET": _triaxial,
    "ESCG": _drainage,
    "IVAN": _vane,
    "SCPT": _sounding("SCPG_TESN"),
    "CPTT": _sounding("CPTG_TESN"),
}


def _number(cells: Cells, heading: str) -> float | None:
    try:
        return float(cells.get(heading, ""))
    except ValueError:
        return None
