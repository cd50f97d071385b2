"""What each test in hand observes: which parameters decide it, and by which formula."""

import math
from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass

import numpy as np

from probsoil._typing import FloatArray
from probsoil.ground.undrained_strength import (
    m_from_friction_angle,
    normally_consolidated_strength_ratio,
    plastic_volumetric_ratio,
    undrained_shear_strength,
)
from probsoil.laboratory.observations import TOGETHER
from probsoil.parameters.observations import Model, Observation
from probsoil.scenario import ClayLayer, Scenario
from probsoil.scenario.evidence import error_defaults
from probsoil.scenario.mean_column import (
    RELOADING,
    SECONDS_PER_YEAR,
    VIRGIN,
    WATER_UNIT_WEIGHT,
    MeanColumn,
    mean_column,
    mean_stress,
)
from probsoil.scenario.test_results import TestResult

Values = Mapping[str, FloatArray]
_LN10 = math.log(10.0)
_MODE = "site.mode_factor"  # a vane strength, corrected, is that along a slip surface
_LEAST_STRESS = 1.0  # kPa; in situ, so that ratios to it exist at ground level
_LARGEST_RATIO = 0.999  # of kappa over lambda


@dataclass(frozen=True, slots=True, kw_only=True)
class Unused:
    """A test result that informs nothing.

    Attributes
    ----------
    result : TestResult
        The result.
    reason : str
        Why.
    """

    result: TestResult
    reason: str


@dataclass(frozen=True, slots=True, kw_only=True)
class _Formula:
    """What is measured, from values by address."""

    addresses: tuple[str, ...]
    value: Callable[[Values], FloatArray]
    factor: float | None = None  # where it is the one address times this


def observations_of(scenario: Scenario) -> tuple[tuple[Observation, ...], tuple[Unused, ...]]:
    """Return what the tests in hand observe.

    Parameters
    ----------
    scenario : Scenario
        As read.

    Returns
    -------
    used : tuple of Observation
        In the order of the file.
    unused : tuple of Unused
        Results left out, each with its reason.
    """
    results = scenario.test_results
    column = mean_column(scenario) if results else None
    if column is None:
        return (), ()
    quantities = scenario.quantities()
    given = {one.address for one in quantities}
    fixed = {one.address: one.distribution.expectation for one in quantities if not one.is_uncertain}
    errors = {(one.kind, one.parameter): one for one in scenario.test_errors}
    used: list[Observation] = []
    unused: list[Unused] = []
    for result in results:
        reason = _told_twice(scenario, column, results, result)
        place = _layer_index(scenario, column, result)
        layer = scenario.layers[place]
        if reason is None and not isinstance(layer, ClayLayer):
            reason = f"it was made in {layer.name}, which is no clay"
        if reason is not None or not isinstance(layer, ClayLayer):
            unused.append(Unused(result=result, reason=reason or ""))
            continue
        measured = (result.kind, result.parameter)
        default, own = error_defaults()[measured], errors.get(measured)
        factor = default.factor if own is None or own.factor is None else own.factor
        formula = _Ground(scenario, column, place, layer, result.depth).formula(result, factor)
        addresses = tuple(one for one in formula.addresses if one not in fixed)
        if not given.issuperset(addresses) or not addresses:
            what, left = ", ".join(formula.addresses), "fixed in" if not addresses else "left out of"
            unused.append(Unused(result=result, reason=f"it tells of {what}, {left} the scenario"))
            continue
        plain = formula.factor is not None
        used.append(
            Observation(
                test=result.test,
                kind=result.kind,
                parameter=result.parameter,
                layer=layer.name,
                below_top=result.depth - column.depth[place],
                place=None if result.x is None or result.y is None else (result.x, result.y),
                hole=result.hole,
                value=result.value,
                error=default.error_cov if own is None or own.error_cov is None else own.error_cov,
                bias=default.bias_cov if own is None or own.bias_cov is None else own.bias_cov,
                standard_error=result.standard_error,
                addresses=addresses,
                model=None if plain else _model(formula, addresses, fixed),
                factor=formula.factor if formula.factor is not None else 1.0,
            )
        )
    return tuple(used), tuple(unused)


def _model(formula: _Formula, addresses: tuple[str, ...], fixed: Mapping[str, float]) -> Model:
    """Return a formula as a function of its uncertain parameters alone."""
    still = {one: np.array([fixed[one]]) for one in formula.addresses if one in fixed}

    def model(values: Sequence[FloatArray]) -> FloatArray:
        return formula.value({**still, **dict(zip(addresses, values, strict=True))})

    return model


def _layer_index(scenario: Scenario, column: MeanColumn, result: TestResult) -> int:
    """Return the layer that a test was made in, by its name or else by its depth."""
    names = [layer.name for layer in scenario.layers]
    if result.layer:
        return names.index(result.layer)
    inside = [index for index in range(len(names)) if result.depth <= column.depth[index + 1]]
    return inside[0] if inside else len(names) - 1


def _told_twice(
    scenario: Scenario, column: MeanColumn, results: Sequence[TestResult], result: TestResult
) -> str | None:
    """Say why a result is but another form of one that is used already."""
    place = _layer_index(scenario, column, result)
    beside = [one for one in results if one is not result and one.kind == result.kind]
    if result.kind == "cone" and result.parameter != "q_net":
        same = {(one.hole, one.test) for one in beside if one.parameter == "q_net"}
        if (result.hole, result.test) in same:
            return "the net cone resistance it was made from is used"
        readings = {(one.hole, one.test, one.depth) for one in beside if one.parameter == "su"}
        both = result.parameter == "preconsolidation_stress"
        if both and (result.hole, result.test, result.depth) in readings:
            return "the strength made from the same reading is used"
    strengths = {_layer_index(scenario, column, one) for one in beside if one.parameter == "su"}
    specimens = {one.test for one in beside if one.parameter == "su"}
    again = place in strengths or bool(specimens.intersection(result.test.split(TOGETHER)))
    if result.kind == "triaxial" and result.parameter in ("su_ratio", "Lambda") and again:
        return "the strengths of single specimens in this layer, which it was made from, are used"
    layer = scenario.layers[place]
    if result.kind == "oedometer" and result.parameter in ("cv", "k") and isinstance(layer, ClayLayer):
        wanted = "k" if layer.permeability.cv is None else "cv"
        pair = {(one.test, one.depth) for one in beside if one.parameter == wanted}
        if result.parameter != wanted and (result.test, result.depth) in pair:
            return f"the {wanted} of the same test is used"
    return None


class _Ground:
    """Formulas of one clay at one depth, the stress in situ at its mean."""

    def __init__(
        self, scenario: Scenario, column: MeanColumn, place: int, layer: ClayLayer, depth: float
    ) -> None:
        top, bottom = column.depth[place : place + 2]
        share = min(max((depth - top) / (bottom - top), 0.0), 1.0)
        effective, excess = mean_stress(scenario, column, place, share)
        self.stress = max(effective - excess, _LEAST_STRESS)
        self.layer, self.name = layer, layer.name

    def formula(self, result: TestResult, factor: float) -> _Formula:
        """Return what a result is made of."""
        made: dict[str, Callable[[], _Formula]] = {
            "lambda": lambda: self._slope(VIRGIN),
            "kappa": lambda: self._slope(RELOADING),
            "preconsolidation_stress": self._preconsolidation,
            "cv": lambda: self._flow("cv"),
            "k": lambda: self._flow("k"),
            "C_alpha_ratio": self._creep,
            "M": self._friction,
            "su": self._strength,
            "su_ratio": self._ratio,
            "Lambda": self._exponent,
            "void_ratio": lambda: self._plain("void_ratio"),
            "q_net": lambda: _times(self._strength(), factor),
        }
        found = made[result.parameter]()
        if result.kind == "vane":
            return _product(found, _Formula(addresses=(_MODE,), value=lambda v: v[_MODE]))
        return found

    def _plain(self, key: str, factor: float = 1.0) -> _Formula:
        address = f"{self.name}.{key}"
        return _Formula(addresses=(address,), value=lambda v: factor * v[address], factor=factor)

    def _slope(self, keys: dict[str, str]) -> _Formula:
        """Return a slope per unit of natural logarithm from the form in which it is given."""
        attribute = next(one for one in keys if getattr(self.layer, one) is not None)
        key = keys[attribute]
        if key in ("lambda", "kappa"):
            return self._plain(key)
        if key in ("Cc", "Cs"):
            return self._plain(key, 1.0 / _LN10)
        strain, void = f"{self.name}.{key}", f"{self.name}.void_ratio"
        return _Formula(addresses=(strain, void), value=lambda v: v[strain] * (1.0 + v[void]) / _LN10)

    def _preconsolidation(self) -> _Formula:
        table = self.layer.preconsolidation
        if table.stress is not None:
            return self._plain("preconsolidation")
        if table.ocr is not None:
            return self._plain("ocr", self.stress)
        address, stress = f"{self.name}.pop", self.stress
        return _Formula(addresses=(address,), value=lambda v: stress + v[address])

    def _yield(self) -> _Formula:
        """Return the preconsolidation stress, never below the stress in situ."""
        found, stress = self._preconsolidation(), self.stress
        return _Formula(addresses=found.addresses, value=lambda v: np.maximum(found.value(v), stress))

    def _flow(self, wanted: str) -> _Formula:
        """Return cv or k, one from the other where the scenario gives the other."""
        given = "k" if self.layer.permeability.cv is None else "cv"
        if given == wanted:
            return self._plain(wanted)
        slope, stress = self._slope(VIRGIN), self._yield()
        own, void = f"{self.name}.{given}", f"{self.name}.void_ratio"

        def ratio(v: Values) -> FloatArray:
            """Permeability [m/s] over coefficient of consolidation [m2/year]."""
            stiff = (1.0 + v[void]) * stress.value(v) / slope.value(v)
            return np.asarray(WATER_UNIT_WEIGHT / stiff / SECONDS_PER_YEAR, dtype=np.float64)

        return _Formula(
            addresses=_merged((own,), (void,), slope.addresses, stress.addresses),
            value=lambda v: v[own] * ratio(v) if wanted == "k" else v[own] / ratio(v),
        )

    def _creep(self) -> _Formula:
        if getattr(self.layer, "C_alpha", None) is not None:
            slope, own = self._slope(VIRGIN), f"{self.name}.C_alpha"
            return _Formula(
                addresses=_merged((own,), slope.addresses),
                value=lambda v: v[own] / (_LN10 * slope.value(v)),
            )
        return self._plain("C_alpha_ratio")

    def _friction(self) -> _Formula:
        if self.layer.M is not None:
            return self._plain("M")
        address = f"{self.name}.phi"
        return _Formula(addresses=(address,), value=lambda v: m_from_friction_angle(v[address]))

    def _exponent(self) -> _Formula:
        if self.layer.strength is not None:
            return self._plain("strength_m")
        virgin, reloading = self._slope(VIRGIN), self._slope(RELOADING)

        def value(v: Values) -> FloatArray:
            slope = virgin.value(v)
            return plastic_volumetric_ratio(slope, np.minimum(reloading.value(v), _LARGEST_RATIO * slope))

        return _Formula(addresses=_merged(virgin.addresses, reloading.addresses), value=value)

    def _ratio(self) -> _Formula:
        if self.layer.strength is not None:
            return self._plain("strength_S")
        friction, exponent = self._friction(), self._exponent()
        return _Formula(
            addresses=_merged(friction.addresses, exponent.addresses),
            value=lambda v: normally_consolidated_strength_ratio(friction.value(v), exponent.value(v)),
        )

    def _strength(self) -> _Formula:
        ratio, exponent, stress, at_rest = self._ratio(), self._exponent(), self._yield(), self.stress
        return _Formula(
            addresses=_merged(ratio.addresses, exponent.addresses, stress.addresses),
            value=lambda v: undrained_shear_strength(
                at_rest, stress.value(v), ratio.value(v), exponent.value(v)
            ),
        )


def _merged(*parts: tuple[str, ...]) -> tuple[str, ...]:
    return tuple(dict.fromkeys(address for part in parts for address in part))


def _times(formula: _Formula, factor: float) -> _Formula:
    return _Formula(addresses=formula.addresses, value=lambda v: factor * formula.value(v))


def _product(first: _Formula, second: _Formula) -> _Formula:
    return _Formula(
        addresses=_merged(first.addresses, second.addresses),
        value=lambda v: first.value(v) * second.value(v),
    )
