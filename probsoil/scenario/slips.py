"""One mistake as found by a check, before its place in the file is known."""

from collections.abc import Collection, Sequence
from dataclasses import dataclass, replace
from difflib import get_close_matches
from typing import NoReturn

from pydantic_core import InitErrorDetails, PydanticCustomError, ValidationError

Path = tuple[str | int, ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class Slip:
    """A mistake at a path of the scenario's data.

    Attributes
    ----------
    path : tuple of str or int, [-]
        Keys and list positions (from 0) that lead to the mistake.
    message : str
        What is wrong.
    allowed : str or None
        The rule.
    hint : str or None
        Remedy.
    at_key : bool
        Whether the key, rather than its value, is to be pointed at.
    meant : str or None
        For an unknown key, the known one that was probably meant.
    wanting : tuple of str
        For something missing, the keys any of which would do.
    """

    path: Path
    message: str
    allowed: str | None = None
    hint: str | None = None
    at_key: bool = False
    meant: str | None = None
    wanting: tuple[str, ...] = ()

    def below(self, path: Path) -> "Slip":
        """Return the same slip with a path put in front of its own.

        Parameters
        ----------
        path : tuple of str or int, [-]
            Path of the table the slip was found in.

        Returns
        -------
        slip : Slip
            Slip with the joined path.
        """
        return replace(self, path=path + self.path)


def nearest(given: str, choices: Sequence[str]) -> str | None:
    """Return the choice most like what was given, case overlooked.

    Parameters
    ----------
    given : str
        What was written.
    choices : sequence of str
        What may be written.

    Returns
    -------
    choice : str or None
        None where nothing is near.
    """
    by_lower = {choice.lower(): choice for choice in reversed(choices)}
    found = get_close_matches(given.lower(), list(by_lower), n=1, cutoff=0.6)
    return by_lower[found[0]] if found else None


def did_you_mean(given: str, choices: Sequence[str]) -> str | None:
    """Return a hint that names the choice most like what was given.

    Parameters
    ----------
    given : str
        What was written.
    choices : sequence of str
        What may be written.

    Returns
    -------
    hint : str or None
        None where nothing is near.
    """
    choice = nearest(given, choices)
    return f'did you mean "{choice}"?' if choice else None


def unknown_key(key: str, choices: Sequence[str], given: Collection[str] = ()) -> Slip:
    """Return the slip of a key that its table does not know.

    Parameters
    ----------
    key : str
        Key as written.
    choices : sequence of str
        Keys that may stand there.
    given : collection of str
        Those of them that are there already; they are marked, and not taken to be what was meant.

    Returns
    -------
    slip : Slip
        With the nearest key as a hint, where one is near.
    """
    free = [choice for choice in choices if choice not in given]
    return Slip(
        path=(key,),
        message=f'unknown key "{key}"',
        allowed=", ".join(f"{choice} (given)" if choice in given else choice for choice in choices),
        hint=did_you_mean(key, free),
        at_key=True,
        meant=nearest(key, free),
    )


def refuse(slips: Sequence[Slip], *, absolute: bool = False) -> NoReturn:
    """Raise slips in the form that pydantic merges with its own errors.

    Parameters
    ----------
    slips : sequence of Slip
        At least one.
    absolute : bool
        Whether the paths start at the top of the scenario.

    Raises
    ------
    ValidationError
        Always.
    """
    details = [
        InitErrorDetails(
            type=PydanticCustomError(
                "slip", "{message}", {"message": slip.message, "slip": slip, "absolute": absolute}
            ),
            loc=slip.path,
            input=None,
        )
        for slip in slips
    ]
    raise ValidationError.from_exception_data("scenario", details)
