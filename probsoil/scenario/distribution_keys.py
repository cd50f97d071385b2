"""Keys of the tables that describe a distribution, and the kinds of what stands under them."""

from typing import Literal

from probsoil.scenario.describing import GREATEST_LOG_SD as GREATEST_LOG_SD
from probsoil.units import Kind

GREATEST_COV = 1.5

_SPREADS = (("mean", "cov"), ("mean", "sd"))
# Keys that settle each distribution; any one of the sets will do.
FORMS: dict[str, tuple[tuple[str, ...], ...]] = {
    "normal": _SPREADS,
    "lognormal": (*_SPREADS, ("median", "log_sd")),
    "uniform": (("low", "high"),),
    "triangular": (("low", "mode", "high"),),
    "truncated_normal": tuple((*keys, "low", "high") for keys in _SPREADS),
    "beta": (*((*keys, "low", "high") for keys in _SPREADS), ("alpha", "beta", "low", "high")),
    "gamma": (*_SPREADS, ("shape", "scale")),
    "gumbel": (*_SPREADS, ("mode", "scale")),
    "discrete": (("values", "probabilities"),),
    "empirical": (("values",), ("file",)),
    "percentiles": (("percent", "values"),),
}
# Keys that may stand besides.
OPTIONS: dict[str, tuple[str, ...]] = {
    "empirical": ("column", "smoothing"),
    "percentiles": ("low", "high", "fit"),
}
SPATIAL_KEYS = ("inherent_cov", "vertical_scale", "horizontal_scale")
SPATIAL_DISTRIBUTIONS = ("normal", "lognormal")
# Kinds of the numbers that do not share the kind of the parameter itself.
NUMBER_KEYS: dict[str, Kind] = {
    "cov": "number",
    "log_sd": "number",
    "alpha": "number",
    "beta": "number",
    "shape": "number",
    "probabilities": "number",
    "percent": "number",
    "inherent_cov": "number",
    "vertical_scale": "length",
    "horizontal_scale": "length",
}
LIST_KEYS = ("values", "probabilities", "percent")
TEXT_KEYS = ("file", "column")
CHOICE_KEYS: dict[str, tuple[str, ...]] = {"smoothing": ("none", "linear"), "fit": ("value", "logarithm")}
Shape = Literal["number", "list", "text", "choice"]


def entry_shape(key: str) -> Shape:
    """Return what stands under a key of a distribution.

    Parameters
    ----------
    key : str
        Key.

    Returns
    -------
    shape : str
        ``number``, ``list``, ``text`` or ``choice``.
    """
    if key in LIST_KEYS:
        return "list"
    if key in TEXT_KEYS:
        return "text"
    return "choice" if key in CHOICE_KEYS else "number"


def settling_keys(name: str) -> tuple[str, ...]:
    """Return the keys of all forms of one distribution.

    Parameters
    ----------
    name : str
        Name of the distribution.

    Returns
    -------
    keys : tuple of str
        Without ``dist`` and what may be left out.
    """
    return tuple(dict.fromkeys(key for form in FORMS[name] for key in form))


def own_keys(name: str) -> tuple[str, ...]:
    """Return the keys that belong to one distribution, those of all its forms and its options.

    Parameters
    ----------
    name : str
        Name of the distribution.

    Returns
    -------
    keys : tuple of str
        Without ``dist`` and the keys of spatial variability.
    """
    return (*settling_keys(name), *OPTIONS.get(name, ()))


def form_text(name: str) -> str:
    """Return in words the sets of keys that settle one distribution.

    Parameters
    ----------
    name : str
        Name of the distribution.

    Returns
    -------
    text : str
        Such as ``mean, cov or mean, sd``.
    """
    return " or ".join(", ".join(form) for form in FORMS[name])
