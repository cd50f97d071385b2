"""Unknown keys, found first and mended in a copy, so that what stands under them is checked as well."""

from dataclasses import dataclass, field, replace
from typing import Any

from pydantic import BaseModel

from probsoil.scenario.later import LATER_KEYS, NOT_YET
from probsoil.scenario.models import Scenario
from probsoil.scenario.slips import Path, Slip, did_you_mean, nearest, unknown_key
from probsoil.scenario.structure import CHOICES, LISTS, inner_table, keys_of, member


@dataclass(slots=True)
class Mended:
    """Data in which every key is known.

    Attributes
    ----------
    data : dict
        Copy of the parsed file; a mistyped key has its right name, other unknown keys are gone.
    slips : list of Slip
        One for every unknown key, and for every mistyped choice that was mended.
    written : dict of path to str
        What stands in the file for a key that was renamed.
    """

    data: dict[str, Any] = field(default_factory=dict)
    slips: list[Slip] = field(default_factory=list)
    written: dict[Path, str] = field(default_factory=dict)

    def as_written(self, slips: list[Slip]) -> list[Slip]:
        """Return slips of the mended data with the paths of the file.

        Parameters
        ----------
        slips : list of Slip
            Paths in the mended data.

        Returns
        -------
        slips : list of Slip
            A renamed key that only proves one too many is left out: it was a guess.
        """
        kept = [slip for slip in slips if not (slip.at_key and slip.path in self.written)]
        return [replace(slip, path=self.path_as_written(slip.path)) for slip in kept]

    def path_as_written(self, path: Path) -> Path:
        """Return a path of the mended data as it stands in the file.

        Parameters
        ----------
        path : tuple of str or int, [-]
            Path in the mended data.

        Returns
        -------
        path : tuple of str or int, [-]
            Path in the file.
        """
        return tuple(self.written.get(path[: depth + 1], part) for depth, part in enumerate(path))


def mend(data: dict[str, Any]) -> Mended:
    """Return a copy of parsed data in which every key is known.

    Parameters
    ----------
    data : dict
        Parsed file.

    Returns
    -------
    mended : Mended
        Without slips where nothing was amiss.
    """
    mended = Mended()
    mended.data = _table(Scenario, data, (), mended)
    # Slips were found along mended paths; a table above them may have been renamed.
    mended.slips = [replace(slip, path=mended.path_as_written(slip.path)) for slip in mended.slips]
    return mended


def _table(model: type[BaseModel], raw: dict[str, Any], path: Path, mended: Mended) -> dict[str, Any]:
    known = keys_of(model)
    copy: dict[str, Any] = {}
    # Right keys first, so that a mistyped one is matched only with what is still free.
    for key in sorted(raw, key=lambda key: key not in known):
        name: str | None = key
        if key not in known:
            slip = _unknown(key, model, raw, path)
            mended.slips.append(slip)
            name = slip.meant if slip.meant not in copy else None
            if name is not None:
                mended.written[(*path, name)] = key
        if name is not None:
            # One table under a mistyped header, such as [layer], stands for a list of one.
            alone = name != key and model is Scenario and name in LISTS and isinstance(raw[key], dict)
            value = [raw[key]] if alone else raw[key]
            copy[name] = _value(model, name, value, (*path, name), mended)
    return copy


def _value(model: type[BaseModel], key: str, raw: Any, path: Path, mended: Mended) -> Any:
    if model is Scenario and key in LISTS:
        if not isinstance(raw, list):
            return raw
        return [_item(key, item, (*path, position), mended) for position, item in enumerate(raw)]
    if model is Scenario and key in CHOICES:
        return _item(key, raw, path, mended)
    table = inner_table(model, key)
    return _table(table, raw, path, mended) if table is not None and isinstance(raw, dict) else raw


def _item(key: str, raw: Any, path: Path, mended: Mended) -> Any:
    if not isinstance(raw, dict):
        return raw
    raw = _with_choice_mended(key, raw, path, mended)
    model = member(key, raw)
    return raw if model is None else _table(model, raw, path, mended)


def _with_choice_mended(key: str, raw: dict[str, Any], path: Path, mended: Mended) -> dict[str, Any]:
    if key not in CHOICES:
        return raw
    tag, models = CHOICES[key]
    value = raw.get(tag)
    if not isinstance(value, str) or value in models:
        return raw
    meant = nearest(value, list(models))
    if meant is None:
        return raw
    allowed = "one of " + ", ".join(models)
    hint = did_you_mean(value, list(models))
    mended.slips.append(Slip(path=(*path, tag), message=f"unknown {tag}", allowed=allowed, hint=hint))
    return {**raw, tag: meant}


def _unknown(key: str, model: type[BaseModel], raw: dict[str, Any], path: Path) -> Slip:
    whole = (*path, key)
    top = str(path[0]) if path else ""
    if key in LATER_KEYS.get(top, ()):
        return Slip(path=whole, message=f'"{key}" is {NOT_YET}', hint="take it out of the file", at_key=True)
    slip = unknown_key(key, list(keys_of(model)), raw).below(path)
    if model is Scenario and f"{key}s" in LISTS:
        return replace(slip, hint=f"did you mean [[{key}s]]?")
    if top in CHOICES and model in CHOICES[top][1].values():
        tag, models = CHOICES[top]
        if any(key in keys_of(other) for other in models.values()):
            return replace(slip, message=f'"{key}" does not go with {tag} = "{raw[tag]}"')
    return slip
