"""Back-check of every oedometer and triaxial test of a site with the parameters of its layer."""

from dataclasses import dataclass

import numpy as np

from probsoil._typing import FloatArray
from probsoil.assessment.back_check import BackCheck, BackCheckOptions, back_check
from probsoil.assessment.specimen_parameters import SpecimenParameters
from probsoil.errors import ParameterError
from probsoil.laboratory.ground_column import GroundColumn
from probsoil.laboratory.interpretation import Interpretation, ground_of
from probsoil.laboratory.oedometer import OedometerResult
from probsoil.laboratory.regression import Estimate
from probsoil.laboratory.triaxial import TriaxialResult

USUAL_SCATTER = np.array([0.15, 0.25, 0.06, 0.20])
"""Standard deviation of the logarithm from specimen to specimen [-] that few tests are judged with."""
USUAL_WEIGHT = 3.0
"""Number of tests [-] that it counts for."""
_USUAL_M = 1.0  # phi' of 25 degrees, where no triaxial test tells; barely felt by an oedometer
_UNKNOWN_M = 0.15
_NONE = np.zeros(0)


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class SiteBackChecks:
    """Back-checks of a site.

    Attributes
    ----------
    checks : tuple of BackCheck
        Oedometer tests, then triaxial tests, in the order read.
    layers : tuple of str
        Layer of each.
    remarks : tuple of str
        Tests that could not be checked, and why.
    """

    checks: tuple[BackCheck, ...] = ()
    layers: tuple[str, ...] = ()
    remarks: tuple[str, ...] = ()


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class _Layer:
    """Logarithms of what the tests of one layer gave, one row per oedometer and one number per triaxial.

    Not a number where a test did not give it, or gave it with a flag.
    """

    name: str
    oedometers: tuple[str, ...]
    compression: FloatArray
    triaxials: tuple[str, ...]
    friction: FloatArray
    void_ratio: float | None
    relative: bool  # whether preconsolidation stresses are those over the stress in situ


def site_back_checks(
    interpretation: Interpretation, options: BackCheckOptions | None = None
) -> SiteBackChecks:
    """Run every oedometer and triaxial test of a site again with the parameters of its layer.

    Parameters
    ----------
    interpretation : Interpretation
        The tests and what they gave; flagged numbers are left out of the parameters, and so is the specimen
        checked, where others of its layer are left to tell them; the source of the parameters says which.
    options : BackCheckOptions or None
        How to run them; None for the usual.

    Returns
    -------
    found : SiteBackChecks
        The checks, and remarks for tests that cannot be run again.
    """
    results: list[OedometerResult | TriaxialResult] = [*interpretation.oedometers, *interpretation.triaxials]
    column = interpretation.column
    names = [ground_of(one.sheet.place.depth, one.sheet.place, column) for one in results]
    doubtful = {(one.test, one.parameter) for one in interpretation.observations if one.flag}
    layers = {
        name: _layer(name, [one for one, at in zip(results, names, strict=True) if at == name], doubtful)
        for name in dict.fromkeys(names)
    }
    checks, of, remarks = [], [], []
    for number, (one, name) in enumerate(zip(results, names, strict=True)):
        layer = layers[name]
        try:
            elsewhere = np.concatenate(
                [_NONE, *(other.friction for other in layers.values() if other is not layer)]
            )
            parameters = _parameters(layer, one.sheet.test, elsewhere, _stress(layer, one, column))
            done = back_check(
                one.sheet, parameters, void_ratio=layer.void_ratio, options=options, number=number
            )
        except ParameterError as error:
            remarks.append(f"{one.sheet.origin}: no back-check: {error}")
        else:
            checks.append(done)
            of.append(name)
    return SiteBackChecks(checks=tuple(checks), layers=tuple(of), remarks=tuple(remarks))


def _stress(layer: _Layer, result: OedometerResult | TriaxialResult, column: GroundColumn | None) -> float:
    """Effective vertical stress in situ where preconsolidation is in proportion to it; else 1."""
    if not layer.relative or column is None:
        return 1.0
    found = column.stress_at(result.sheet.place.depth)
    if found is None:
        raise ParameterError(f"{result.sheet.test}: the stress in situ is not known at its depth")
    return found


def _layer(
    name: str, results: list[OedometerResult | TriaxialResult], doubtful: set[tuple[str, str]]
) -> _Layer:
    oedometers = [one for one in results if isinstance(one, OedometerResult)]
    triaxials = [one for one in results if isinstance(one, TriaxialResult)]
    relative = all(one.in_situ_stress is not None for one in oedometers)
    rows = []
    for one in oedometers:
        found = {"lambda": one.lam, "kappa": one.kappa, "preconsolidation_stress": one.preconsolidation}
        row = [_log(one.sheet.test, key, value, doubtful) for key, value in found.items()]
        base = one.in_situ_stress if relative and one.in_situ_stress is not None else 1.0
        rows.append([row[0], row[1], row[2] - np.log(base)])
    friction = np.array([_log(one.sheet.test, "M", one.slope_at_failure, doubtful) for one in triaxials])
    void_ratios = [one.sheet.initial_void_ratio for one in oedometers]
    return _Layer(
        name=name,
        oedometers=tuple(one.sheet.test for one in oedometers),
        compression=np.array(rows).reshape(-1, 3),
        triaxials=tuple(one.sheet.test for one in triaxials),
        friction=friction,
        void_ratio=float(np.mean(void_ratios)) if void_ratios else None,
        relative=relative,
    )


def _log(test: str, parameter: str, found: Estimate | None, doubtful: set[tuple[str, str]]) -> float:
    usable = found is not None and found.value > 0.0 and (test, parameter) not in doubtful
    return float(np.log(found.value)) if usable and found is not None else float("nan")


def _parameters(layer: _Layer, test: str, elsewhere: FloatArray, stress: float) -> SpecimenParameters:
    """Parameters of another specimen of the layer: mean of the tests, their scatter judged with the usual."""
    if not np.isfinite(layer.compression).any(axis=0).all():
        raise ParameterError(
            f"no oedometer test of {layer.name or 'the same ground'} gives lambda, kappa and "
            "preconsolidation stress without doubt"
        )
    compression, oedometers = _others(layer.compression, layer.oedometers, test, "oedometer")
    friction, friction_of = _friction(layer, test, elsewhere)
    columns = [compression[:, 0], compression[:, 1], friction, compression[:, 2]]
    known = [column[np.isfinite(column)] for column in columns]
    usual = USUAL_SCATTER.copy()
    if not known[2].size:
        known[2], usual[2] = np.array([np.log(_USUAL_M)]), _UNKNOWN_M
    log_mean = np.array([column.mean() for column in known])
    log_sd = np.array([_scatter(column, one) for column, one in zip(known, usual, strict=True)])
    log_mean[3] += np.log(stress)
    return SpecimenParameters(
        log_mean=log_mean,
        log_sd=log_sd,
        correlation=_correlation(compression),
        source=f"{layer.name or 'all ground'}: {oedometers}; {friction_of}",
    )


def _friction(layer: _Layer, test: str, elsewhere: FloatArray) -> tuple[FloatArray, str]:
    """Return M of the layer's other tests, and in words where it is from."""
    if np.isfinite(layer.friction).any():
        found, words = _others(layer.friction[:, None], layer.triaxials, test, "triaxial")
        return found[:, 0], f"M of {words}"
    number = int(np.isfinite(elsewhere).sum())
    if number:
        return elsewhere, f"M of {_counted(number, 'triaxial')} of other ground, for want of one here"
    return elsewhere, f"M taken as {_USUAL_M:.1f}, no triaxial test tells it"


def _others(values: FloatArray, tests: tuple[str, ...], test: str, kind: str) -> tuple[FloatArray, str]:
    """Leave a test out where the others tell every column; return what is used, and whose it is in words."""
    known = np.isfinite(values)
    own = np.array([name == test for name in tests])
    used = int(known.any(axis=1).sum())
    if not known[own].any():
        return values, _counted(used, kind)
    others = values[~own]
    if not known[~own].any(axis=0).all():
        among = "the one checked itself" if used == 1 else "the one checked among them, as it alone tells all"
        return values, f"{_counted(used, kind)}, {among}"
    return others, f"{_counted(used - 1, kind)}, the one checked left out"


def _counted(number: int, kind: str) -> str:
    return f"{number} {kind} test{'' if number == 1 else 's'}"


def _scatter(values: FloatArray, usual: float) -> float:
    """Return the standard deviation of another specimen about the mean of these."""
    squares = USUAL_WEIGHT * usual**2 + float(((values - values.mean()) ** 2).sum())
    return float(np.sqrt(squares / (USUAL_WEIGHT + values.size - 1.0) * (1.0 + 1.0 / values.size)))


def _correlation(compression: FloatArray) -> FloatArray:
    """Correlation of lambda, kappa and preconsolidation among the tests, drawn to none where they are few."""
    whole = compression[np.isfinite(compression).all(axis=1)]
    usual = USUAL_SCATTER[[0, 1, 3]]
    sums = USUAL_WEIGHT * np.diag(usual**2)
    if len(whole) > 1:
        apart = whole - whole.mean(axis=0)
        sums = sums + np.einsum("ni,nj->ij", apart, apart)
    root = np.sqrt(np.diag(sums))
    full = np.eye(4)
    full[np.ix_([0, 1, 3], [0, 1, 3])] = sums / np.outer(root, root)
    return full
