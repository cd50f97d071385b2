"""Checks of the test results in hand and of the errors of kinds of test."""

from collections.abc import Iterator
from typing import Any

from probsoil.scenario.base import UNREAD
from probsoil.scenario.evidence import Evidence, TestErrors, known_parameters
from probsoil.scenario.evidence_file import EvidenceFile
from probsoil.scenario.layers import ClayLayer
from probsoil.scenario.mean_column import MeanColumn, mean_column
from probsoil.scenario.slips import Slip, did_you_mean
from probsoil.scenario.test_results import KINDS, TestResult

GREATEST_RESULTS = 2_000
"""Of all tests together, [-]; what they cost grows with its square."""

BEYOND = 0.25
"""Share of a layer's mean thickness by which a test may lie beyond its mean boundaries, [-]."""


def evidence_slips(scenario: Any) -> list[Slip]:
    """Return what is wrong with the test results and the errors of kinds of test.

    Parameters
    ----------
    scenario : Scenario
        Read in full or in part.

    Returns
    -------
    slips : list of Slip
        Paths start at the top of the scenario.
    """
    if not scenario.evidence and not scenario.test_errors:
        return []
    column = mean_column(scenario)
    slips: list[Slip] = []
    count = 0
    for position, one in enumerate(scenario.evidence):
        if not isinstance(one, Evidence):
            continue
        found = list(_of_file(one) if one.file is not None else _inline(one))
        if not found:
            found = list(_in_ground(scenario, column, one))
        count += len(one.file.rows) if isinstance(one.file, EvidenceFile) else len(list(one.measured()))
        slips += [slip.below(("evidence", position)) for slip in found]
    if count > GREATEST_RESULTS:
        message = f"there are {count:,d} results of tests"
        slips.append(
            Slip(path=("evidence",), message=message, allowed=f"at most {GREATEST_RESULTS:,d} together")
        )
    return slips + list(_error_slips(scenario.test_errors))


def _of_file(one: Evidence) -> Iterator[Slip]:
    for key in ("kind", "layer", "depth", "test", "hole", "x", "y"):
        if getattr(one, key) is not None:
            yield Slip(
                path=(key,),
                message=f"{key} stands in the file",
                allowed="file, with or without use_flagged",
                at_key=True,
            )
    for parameter, _ in one.measured():
        message = f"{parameter} stands in the file"
        yield Slip(
            path=(parameter,), message=message, allowed="file, with or without use_flagged", at_key=True
        )


def _inline(one: Evidence) -> Iterator[Slip]:
    keys = ("kind", "layer", "depth")
    missing = [key for key in keys if getattr(one, key) is None]
    if missing:
        yield Slip(
            path=(),
            message=f"{' and '.join(missing)} {'is' if len(missing) == 1 else 'are'} missing",
            allowed="kind, layer and depth, or file alone",
            wanting=tuple(missing) if len(missing) == 1 else (),
        )
    if (one.x is None) != (one.y is None):
        given = "x" if one.y is None else "y"
        yield Slip(path=(given,), message="x and y go together", allowed="both or none", at_key=True)
    numbers = [attribute for attribute in _NUMBERS if getattr(one, attribute) is not None]
    if not numbers:
        allowed = "one or more of " + ", ".join(
            _NUMBERS.values() if one.kind not in KINDS else known_parameters(one.kind)
        )
        yield Slip(path=(), message="the test has no result", allowed=allowed)
    if one.kind not in KINDS:
        return
    known = known_parameters(one.kind)
    for parameter in (_NUMBERS[attribute] for attribute in numbers):
        if parameter not in known:
            message = f"{_a(one.kind)} test does not give {parameter}"
            yield Slip(path=(parameter,), message=message, allowed=", ".join(known), at_key=True)


_NUMBERS = {
    attribute: info.alias or attribute
    for attribute, info in Evidence.model_fields.items()
    if attribute not in ("kind", "layer", "depth", "test", "hole", "x", "y", "file", "use_flagged")
}


def _a(kind: str) -> str:
    return f"an {kind}" if kind[0] in "aeio" else f"a {kind}"


def _in_ground(scenario: Any, column: MeanColumn | None, one: Evidence) -> Iterator[Slip]:
    """Look whether tests lie in clay of this scenario."""
    if isinstance(one.file, EvidenceFile):
        shown: set[str] = set()
        for row in one.file.rows:
            for message, allowed, hint in _place_faults(scenario, column, row):
                text = f"{one.file.name}, {row.test}, {row.parameter} at {row.depth:g} m: {message}"
                if text not in shown:
                    shown.add(text)
                    yield Slip(path=("file",), message=text, allowed=allowed, hint=hint)
        return
    parts: tuple[object, ...] = (one.kind, one.layer, one.depth)
    if UNREAD in parts:
        return
    first = next(one.results(1), None)
    for message, allowed, hint in () if first is None else _place_faults(scenario, column, first):
        key = "layer" if hint is not None or "depth" not in message else "depth"
        yield Slip(path=(key,), message=message, allowed=allowed, hint=hint)


def _place_faults(
    scenario: Any, column: MeanColumn | None, row: TestResult
) -> Iterator[tuple[str, str, str | None]]:
    known = known_parameters(row.kind)
    if row.parameter not in known:
        yield f"{_a(row.kind)} test does not give {row.parameter}", ", ".join(known), None
    layers = [layer for layer in scenario.layers if layer is not UNREAD]
    if column is None or len(layers) < len(scenario.layers):
        return
    names = [layer.name for layer in layers]
    if row.layer and row.layer not in names:
        yield f'there is no layer "{row.layer}"', ", ".join(map(str, names)), did_you_mean(row.layer, names)
        return
    if not row.layer:
        if row.depth > column.depth[-1]:
            yield f"depth {row.depth:g} m is below the last layer", f"0 to {column.depth[-1]:.4g} m", None
        return
    index = names.index(row.layer)
    if not isinstance(layers[index], ClayLayer):
        clays = ", ".join(str(layer.name) for layer in layers if isinstance(layer, ClayLayer))
        yield (
            f'"{row.layer}" is no clay, and tests of other soils inform nothing here',
            clays or "no layer",
            None,
        )
        return
    top, bottom = column.depth[index : index + 2]
    margin = BEYOND * (bottom - top)
    if not top - margin <= row.depth <= bottom + margin:
        where = f"from {top:.4g} to {bottom:.4g} m on average"
        message = f'depth {row.depth:g} m is not in "{row.layer}", which goes {where}'
        yield message, f"{max(top - margin, 0.0):.4g} to {bottom + margin:.4g} m", None


def _error_slips(tables: Any) -> Iterator[Slip]:
    seen: dict[tuple[str, str], int] = {}
    for position, one in enumerate(tables):
        parts: tuple[object, ...] = (getattr(one, "kind", UNREAD), getattr(one, "parameter", UNREAD))
        if not isinstance(one, TestErrors) or UNREAD in parts:
            continue
        path = ("test_errors", position)
        if one.parameter not in known_parameters(one.kind):
            message, allowed = (
                f"{_a(one.kind)} test does not give {one.parameter}",
                ", ".join(known_parameters(one.kind)),
            )
            yield Slip(path=(*path, "parameter"), message=message, allowed=allowed)
        if (one.kind, one.parameter) in seen:
            message = f"test_errors {seen[one.kind, one.parameter] + 1} already gives the errors of these"
            yield Slip(path=(*path, "parameter"), message=message, allowed="each kind and parameter once")
        seen.setdefault((one.kind, one.parameter), position)
        if one.error_cov is None and one.bias_cov is None and one.factor is None:
            yield Slip(path=path, message="no error is given", allowed="error_cov, bias_cov or both")
        if one.factor is not None and (one.kind, one.parameter) != ("cone", "q_net"):
            yield Slip(
                path=(*path, "factor"),
                message="factor does not go with these",
                allowed="cone, q_net",
                at_key=True,
            )
