"""Test results in hand, written in the scenario or in a file beside it, and the errors of kinds of test."""

import csv
from collections.abc import Iterator
from dataclasses import dataclass, replace
from functools import cache
from importlib import resources
from typing import Annotated, Literal, cast

from pydantic import Field, PlainValidator, WithJsonSchema

from probsoil.scenario.base import Label, Name, Table
from probsoil.scenario.evidence_file import EvidenceFile, read_evidence_file
from probsoil.scenario.fields import Number, Range
from probsoil.scenario.slips import Slip, refuse, unknown_key
from probsoil.scenario.test_results import PARAMETERS, Measured, TestKind, TestParameter, TestResult

_PLACE = 1e7  # m; national grids fit


@dataclass(frozen=True, slots=True, kw_only=True)
class MeasuredNumber(Range):
    """A number that a test gave, alone or with its standard error."""

    def read(self, raw: object) -> Measured:
        """Return the measured number, in the base unit.

        Parameters
        ----------
        raw : object
            Number, text with a unit, or a table of value and standard_error.

        Returns
        -------
        measured : Measured
            Within the range.

        Raises
        ------
        ValidationError
            If it is no such number.
        """
        if isinstance(raw, Measured):
            return raw
        if not isinstance(raw, dict):
            return Measured(value=self._within(raw), standard_error=0.0)
        table = cast("dict[str, object]", raw)
        keys = ("value", "standard_error")
        slips = [unknown_key(key, keys, tuple(table)) for key in table if key not in keys]
        if "value" not in table:
            slips.append(Slip(path=(), message='"value" is missing', allowed=" and ".join(keys)))
        if slips:
            refuse(slips)
        error = self._quantity(table["standard_error"]) if "standard_error" in table else 0.0
        if error < 0.0:
            refuse([Slip(path=("standard_error",), message=f"{error:g} is too small", allowed="0 or more")])
        return Measured(value=self._within(table["value"]), standard_error=error)

    def _within(self, raw: object) -> float:
        value = self._quantity(raw)
        if not self.holds(value):
            refuse([self._outside(value)])
        return value


def _place(meaning: str) -> Number:
    return Number(kind="length", low=-_PLACE, high=_PLACE, source="by definition", meaning=meaning)


def _measured(parameter: TestParameter) -> MeasuredNumber:
    what = PARAMETERS[parameter]
    return MeasuredNumber(
        kind=what.kind,
        low=what.low,
        high=what.high,
        open_low=what.low == 0.0,
        source="common practice",
        meaning=f"{what.meaning}; or {{ value = ..., standard_error = ... }}",
    )


def _file(raw: object) -> EvidenceFile:
    if isinstance(raw, EvidenceFile):
        return raw
    if not isinstance(raw, str) or not raw:
        refuse([Slip(path=(), message="this is not text", allowed="path of a CSV file, beside the scenario")])
    outcome = read_evidence_file(raw)
    if isinstance(outcome, list):
        refuse(outcome)
    return outcome


class Evidence(Table):
    """Results of one test, or a file of many.

    Attributes
    ----------
    kind : str or None
        Kind of test.
    layer : str or None
        Layer it was made in.
    depth : float or None, [m]
        Depth below ground level.
    test, hole : str or None
        Names of the test and of the borehole or sounding.
    x, y : float or None, [m]
        Plan position, as of stations.
    file : EvidenceFile or None
        Many tests from a file.
    use_flagged : bool
        Whether rows of the file that carry a flag are used.
    lambda_, kappa, preconsolidation_stress, cv, k, C_alpha_ratio : Measured or None
        Results, [-], [-], [kPa], [m2/year], [m/s], [-].
    M, su, su_ratio, Lambda, void_ratio, q_net : Measured or None
        Results, [-], [kPa], [-], [-], [-], [kPa].
    """

    kind: TestKind | None = Field(default=None, description="kind of test; needed without file")
    layer: Name | None = Field(default=None, description="layer it was made in; needed without file")
    depth: Annotated[
        float | None,
        Number(
            kind="length",
            low=0.0,
            high=200.0,
            source="common practice",
            meaning="depth below ground level; needed without file",
        ),
    ] = None
    test: Label | None = Field(default=None, description="name of the test")
    hole: Label | None = Field(
        default=None, description="borehole or sounding; tests without one count as made in the same"
    )
    x: Annotated[float | None, _place("plan position across, as of stations; with y")] = None
    y: Annotated[float | None, _place("plan position along, as of stations; with x")] = None
    file: Annotated[
        EvidenceFile | None, PlainValidator(_file), WithJsonSchema({"type": "string", "minLength": 1})
    ] = Field(default=None, description="table of test results (CSV), path relative to the scenario")
    use_flagged: bool = Field(default=True, description="whether rows of the file that carry a flag are used")
    lambda_: Annotated[Measured | None, _measured("lambda")] = Field(default=None, alias="lambda")
    kappa: Annotated[Measured | None, _measured("kappa")] = None
    preconsolidation_stress: Annotated[Measured | None, _measured("preconsolidation_stress")] = None
    cv: Annotated[Measured | None, _measured("cv")] = None
    k: Annotated[Measured | None, _measured("k")] = None
    C_alpha_ratio: Annotated[Measured | None, _measured("C_alpha_ratio")] = None
    M: Annotated[Measured | None, _measured("M")] = None
    su: Annotated[Measured | None, _measured("su")] = None
    su_ratio: Annotated[Measured | None, _measured("su_ratio")] = None
    Lambda: Annotated[Measured | None, _measured("Lambda")] = None
    void_ratio: Annotated[Measured | None, _measured("void_ratio")] = None
    q_net: Annotated[Measured | None, _measured("q_net")] = None

    def measured(self) -> Iterator[tuple[TestParameter, Measured]]:
        """Yield what is written in the scenario itself.

        Yields
        ------
        parameter : str
            What was measured.
        number : Measured
            The result.
        """
        for parameter in PARAMETERS:
            number = getattr(self, "lambda_" if parameter == "lambda" else parameter)
            if isinstance(number, Measured):
                yield parameter, number

    def moved(self, origin: tuple[float, float]) -> "Evidence":
        """Return the same results with plan positions from another centre.

        Parameters
        ----------
        origin : tuple of float, [m]
            The other centre, from the present one.

        Returns
        -------
        evidence : Evidence
            Results without a position are left as they are.
        """
        changes: dict[str, object] = {}
        if self.x is not None and self.y is not None:
            changes = {"x": self.x - origin[0], "y": self.y - origin[1]}
        if isinstance(self.file, EvidenceFile):
            changes["file"] = replace(self.file, rows=tuple(row.moved(origin) for row in self.file.rows))
        return self.model_copy(update=changes)

    def results(self, number: int) -> Iterator[TestResult]:
        """Yield every result, flagged rows only where they are used.

        Parameters
        ----------
        number : int, [-]
            Number of this table among those of its kind, from 1, for tests without a name.

        Yields
        ------
        result : TestResult
            One number.
        """
        if isinstance(self.file, EvidenceFile):
            yield from (row for row in self.file.rows if self.use_flagged or not row.flag)
            return
        if self.kind is None or self.layer is None or self.depth is None:
            return
        for parameter, one in self.measured():
            yield TestResult(
                kind=self.kind,
                test=self.test or f"{self.kind} {number}",
                hole=self.hole or "",
                x=self.x,
                y=self.y,
                layer=self.layer,
                depth=self.depth,
                parameter=parameter,
                value=one.value,
                standard_error=one.standard_error,
                flag="",
            )


class TestErrors(Table):
    """Errors of one kind of test, in place of the defaults.

    Attributes
    ----------
    kind, parameter : str
        Kind of test and what it measures.
    error_cov, bias_cov : float or None, [-]
        Coefficient of variation of one measurement, and of what all of the kind have in common.
    factor : float or None, [-]
        Net cone resistance over undrained strength.
    """

    __test__ = False  # not a class of tests

    kind: Literal["oedometer", "triaxial", "vane", "cone"] = Field(description="kind of test")
    parameter: TestParameter = Field(description="what it measures")
    error_cov: Annotated[
        float | None,
        Number(
            kind="number",
            low=1e-3,
            high=10.0,
            source="common practice",
            meaning="error of one measurement, a new one in each, as a coefficient of variation",
        ),
    ] = None
    bias_cov: Annotated[
        float | None,
        Number(
            kind="number",
            low=0.0,
            high=10.0,
            source="common practice",
            meaning="bias that all results of this kind share, as a coefficient of variation",
        ),
    ] = None
    factor: Annotated[
        float | None,
        Number(
            kind="number",
            low=3.0,
            high=40.0,
            source="common practice",
            meaning="net cone resistance / undrained strength (cone, q_net only)",
        ),
    ] = None


@dataclass(frozen=True, slots=True, kw_only=True)
class ErrorDefault:
    """Errors of one kind of test as the package has them.

    Attributes
    ----------
    error_cov, bias_cov : float, [-]
        Coefficients of variation.
    factor : float, [-]
        Of a transformation; 1 for none.
    source : str
        Where they come from.
    opened : bool
        Whether that was opened when the table was made.
    """

    error_cov: float
    bias_cov: float
    factor: float
    source: str
    opened: bool


@cache
def error_defaults() -> dict[tuple[str, str], ErrorDefault]:
    """Return the errors of every kind of test and parameter.

    Returns
    -------
    defaults : dict
        By kind and parameter; what is not in it, a kind of test does not measure.
    """
    text = resources.files("probsoil.scenario").joinpath("test_errors.csv").read_text(encoding="utf-8")
    return {
        (row["kind"], row["parameter"]): ErrorDefault(
            error_cov=float(row["error_cov"]),
            bias_cov=float(row["bias_cov"]),
            factor=float(row["factor"] or 1.0),
            source=row["source"],
            opened=row["opened"] == "yes",
        )
        for row in csv.DictReader(text.splitlines())
    }


def known_parameters(kind: str) -> tuple[str, ...]:
    """Return what a kind of test measures.

    Parameters
    ----------
    kind : str
        Kind of test.

    Returns
    -------
    parameters : tuple of str
        In the order of the table of errors.
    """
    return tuple(parameter for known, parameter in error_defaults() if known == kind)
