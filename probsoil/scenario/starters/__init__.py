"""Starter scenarios: small files with comments that teach the format."""

from importlib.resources import files

from probsoil.errors import ParameterError

STARTERS: tuple[str, ...] = ("embankment", "footing", "tank")


def starter_text(kind: str) -> str:
    """Return the text of a starter scenario.

    Parameters
    ----------
    kind : str
        One of `STARTERS`.

    Returns
    -------
    text : str
        TOML with comments.

    Raises
    ------
    ParameterError
        If there is no such starter.
    """
    if kind not in STARTERS:
        raise ParameterError(f'there is no starter "{kind}"; choose from: {", ".join(STARTERS)}')
    return files(__name__).joinpath(f"{kind}.toml").read_text(encoding="utf-8")
