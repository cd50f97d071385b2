"""Observed numbers outside what has been published for clays: flagged with the range, not left out."""

from collections.abc import Sequence
from dataclasses import replace

from probsoil.laboratory.observations import Observation
from probsoil.scenario.published_ranges import Envelope, published_ranges

_PUBLISHED_AS = {
    "lambda": ("lambda",),
    "Lambda": ("Lambda", "strength_m"),
    "su_ratio": ("strength_S",),
    "cv": ("cv",),
    "C_alpha_ratio": ("C_alpha_ratio",),
}
_NO_CLAY = ("granular",)


def unusual_flagged(observations: Sequence[Observation]) -> list[Observation]:
    """Flag numbers that lie outside the published ranges.

    Parameters
    ----------
    observations : sequence of Observation
        Of the whole site.

    Returns
    -------
    observations : list of Observation
        The same, in the same order.

    Notes
    -----
    M is compared with published friction angles, kappa as kappa/lambda with the lambda of its own test. Of
    strengths, preconsolidation stresses, resistances and void ratios nothing is published that holds at any
    depth.
    """
    lambdas = {one.test: one.value for one in observations if one.parameter == "lambda"}
    return [_flagged(one, lambdas.get(one.test)) for one in observations]


def _flagged(one: Observation, virgin: float | None) -> Observation:
    name, value, unit, envelope = one.parameter, one.value, one.unit, _envelope(one.parameter)
    if name == "kappa" and virgin is not None and virgin > 0.0:
        name, value = "kappa/lambda", value / virgin
        envelope = published_ranges().envelope(("kappa_lambda",), ("value",))
    if envelope is None or envelope.low <= value <= envelope.high:
        return one
    end, row = ("least", envelope.lowest) if value < envelope.low else ("greatest", envelope.highest)
    words = (
        f"{name} of {value:.3g} is outside what is published, {envelope.low:.3g} to {envelope.high:.3g}"
        f"{'' if unit == '-' else f' {unit}'} (the {end}: {row.soil}, {row.cited})"
    )
    return replace(one, flag="; ".join(part for part in (one.flag, words) if part))


def _envelope(parameter: str) -> Envelope | None:
    if parameter == "M":
        return published_ranges().friction("M")
    return published_ranges().envelope(_PUBLISHED_AS.get(parameter, ()), ("value",), without=_NO_CLAY)
