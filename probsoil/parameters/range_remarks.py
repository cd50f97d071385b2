"""What in a scenario lies outside the published ranges, which is no mistake but deserves a second look."""

import math
from collections.abc import Callable, Iterator
from dataclasses import dataclass

from probsoil.parameters.plain_laws import plain_law
from probsoil.scenario import ClayLayer, Scenario
from probsoil.scenario.distributions import Constant, Distribution, Lognormal, Normal
from probsoil.scenario.mean_column import RELOADING, VIRGIN, mean_column, mean_slope, mean_stress
from probsoil.scenario.published_ranges import POINT_SCATTER, Envelope, published_ranges

TESTS_OF_A_MEAN = 4
"""Independent tests of a layer whose mean leaves half of the scatter of single values unknown, [-]."""

_FRICTION = ("phi", "tan_phi")
_SCATTER = {  # last part of the address: what its scatter is published under
    "unit_weight": ("unit_weight",),
    "void_ratio": ("void_ratio",),
    **dict.fromkeys(VIRGIN.values(), ("compression_index",)),  # of reloading no scatter is published
    **dict.fromkeys(("preconsolidation", "ocr", "pop"), ("preconsolidation",)),
    **dict.fromkeys(("M", "phi"), _FRICTION),
    "cv": ("cv",),
    "k": ("k",),
    "strength_S": ("strength_S",),
}
_SCALES = ("su", "q_t", "q_c", "water_content", "unit_weight", "k")


@dataclass(frozen=True, slots=True)
class _Clay:
    """A layer of clay with its numbers by the last part of their addresses."""

    name: str
    layer: ClayLayer
    given: dict[str, Distribution]
    share_of_yield: float | None  # of the preconsolidation stress that pop makes up; None where not known

    def mean(self, key: str) -> float:
        return self.given[key].expectation


def range_remarks(scenario: Scenario) -> tuple[str, ...]:
    """Return what of the clay in a scenario lies outside the published ranges.

    Parameters
    ----------
    scenario : Scenario
        As read.

    Returns
    -------
    remarks : tuple of str
        One sentence each, with parameter, value, range and source; empty where all is within.

    Notes
    -----
    A coefficient of variation is compared as that of single values: what is not known of the layer's
    mean and the scatter from point to point together, for a preconsolidation stress given as `pop`
    that of the stress it makes at the middle of the layer. It is above the ranges where it exceeds
    the greatest published scatter. A mean may be known better than single values are scattered, so
    it is below only where it is less than half of the least, as four independent tests would leave
    it. Scales of fluctuation are compared with those of any soil property. Numbers that are not
    uncertain have no scatter to compare.
    """
    makers: tuple[Callable[[_Clay], Iterator[str]], ...] = (_scatter, _scales, _values)
    return tuple(text for clay in _clays(scenario) for maker in makers for text in maker(clay))


def _clays(scenario: Scenario) -> Iterator[_Clay]:
    column = mean_column(scenario)
    quantities = scenario.quantities()
    for index, layer in enumerate(scenario.layers):
        if not isinstance(layer, ClayLayer):
            continue
        given = {
            one.address.rpartition(".")[2]: one.distribution
            for one in quantities
            if one.address.rpartition(".")[0] == layer.name
        }
        share = None
        if "pop" in given and column is not None:
            effective, excess = mean_stress(scenario, column, index)
            mean = given["pop"].expectation
            share = mean / (mean + max(effective - excess, 1.0))
        yield _Clay(layer.name, layer, given, share)


def _scatter(clay: _Clay) -> Iterator[str]:
    for key, distribution in clay.given.items():
        envelope = published_ranges().envelope(_SCATTER.get(key, ()), POINT_SCATTER)
        if envelope is not None and not isinstance(distribution, Constant) and distribution.expectation > 0.0:
            yield from _scatter_of(clay, key, distribution, envelope)


def _scatter_of(clay: _Clay, key: str, distribution: Distribution, envelope: Envelope) -> Iterator[str]:
    address = f"{clay.name}.{key}"
    inherent = getattr(distribution, "inherent_cov", 0.0)
    if inherent and key != "pop" and not envelope.low <= inherent <= envelope.high:
        yield _remark(address, "a point-to-point cov", inherent, envelope)
        return
    total, what = _total_cov(distribution), "a cov"
    if key == "pop":
        if clay.share_of_yield is None:
            return
        total, what = clay.share_of_yield * total, "a cov of the preconsolidation stress it makes"
    if total > envelope.high:
        yield _remark(address, what, total, envelope)
    elif total < envelope.low / math.sqrt(TESTS_OF_A_MEAN):
        yield (
            f"{address}: {what} of {total:.3g} is less than half of the least published scatter of single "
            f"values, {envelope.low:.3g} ({envelope.lowest.soil}, {envelope.lowest.cited}); even there it "
            f"would take more than {TESTS_OF_A_MEAN} independent tests to know the mean so well. It may be "
            "right all the same"
        )


def _total_cov(distribution: Distribution) -> float:
    """Coefficient of variation of single values [-]."""
    if isinstance(distribution, Normal | Lognormal):
        known = (
            distribution.cov if isinstance(distribution, Lognormal) else distribution.sd / distribution.mean
        )
        return math.hypot(known, distribution.inherent_cov)
    law = plain_law(distribution)
    return law.sd / law.mean


def _scales(clay: _Clay) -> Iterator[str]:
    for key, distribution in clay.given.items():
        for kind in ("vertical", "horizontal"):
            value = getattr(distribution, f"{kind}_scale", None)
            envelope = published_ranges().envelope(_SCALES, (f"{kind} scale",))
            if value is not None and envelope is not None and not envelope.low <= value <= envelope.high:
                yield _remark(f"{clay.name}.{key}", f"a {kind} scale of fluctuation", value, envelope, " m")


def _values(clay: _Clay) -> Iterator[str]:
    for key, what, value, envelope in _compared(clay):
        if envelope is not None and not envelope.low <= value <= envelope.high:
            yield _remark(f"{clay.name}.{key}", what, value, envelope, _UNITS.get(key, ""))


_UNITS = {"unit_weight": " kN/m3", "phi": " degrees"}


def _published(*quantities: str, without: tuple[str, ...] = ()) -> Envelope | None:
    return published_ranges().envelope(quantities, ("value",), without=without)


def _compared(clay: _Clay) -> Iterator[tuple[str, str, float, Envelope | None]]:
    """Yield key, words, value at the means and published range of what has a usual value."""
    yield "unit_weight", "a mean unit weight", clay.mean("unit_weight"), _published("unit_weight")
    virgin, reloading = mean_slope(clay.layer, VIRGIN), mean_slope(clay.layer, RELOADING)
    if virgin is not None:
        yield virgin[0], "a mean lambda", virgin[1], _published("lambda")
    if virgin is not None and reloading is not None:
        ratio = reloading[1] / virgin[1]
        what = f"kappa/lambda at the means (Lambda = 1 - kappa/lambda = {1.0 - ratio:.3g})"
        yield reloading[0], what, ratio, _published("kappa_lambda")
    yield from _friction(clay)
    yield from _flow(clay)
    for key, what in (("strength_S", "a mean S"), ("strength_m", "a mean m")):
        if key in clay.given:
            yield key, what, clay.mean(key), _published(key)
    for key in ("C_alpha_ratio", "C_alpha"):
        if key in clay.given and virgin is not None:
            index = 1.0 if key == "C_alpha_ratio" else virgin[1] * math.log(10.0)
            published = _published("C_alpha_ratio", without=("granular",))
            yield key, "C_alpha/Cc at the means", clay.mean(key) / index, published


def _friction(clay: _Clay) -> Iterator[tuple[str, str, float, Envelope | None]]:
    for key, what in (("phi", "a mean friction angle"), ("M", "a mean M")):
        if key in clay.given:
            yield key, what, clay.mean(key), published_ranges().friction(key)


def _flow(clay: _Clay) -> Iterator[tuple[str, str, float, Envelope | None]]:
    if "ck" in clay.given:
        yield "ck", "ck/e0 at the means", clay.mean("ck") / clay.mean("void_ratio"), _published("ck_e0")
    yield "kh_kv", "a mean kh/kv", clay.mean("kh_kv"), _published("kh_kv")


def _remark(address: str, what: str, value: float, envelope: Envelope, unit: str = "") -> str:
    below = value < envelope.low
    row, end = (envelope.lowest, "least") if below else (envelope.highest, "greatest")
    return (
        f"{address}: {what} of {value:.3g}{unit} lies {'below' if below else 'above'} what is published, "
        f"{envelope.low:.3g} to {envelope.high:.3g}{unit}; the {end} is of {row.soil}, {row.cited}. It may "
        "be right all the same"
    )
