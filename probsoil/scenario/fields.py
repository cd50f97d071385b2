"""Types of the numbers in a scenario: what may be written, its range and where the range comes from."""

import re
from abc import ABC, abstractmethod
from dataclasses import dataclass
from typing import Any, Literal, cast

from pydantic import GetCoreSchemaHandler, GetJsonSchemaHandler
from pydantic.json_schema import JsonSchemaValue
from pydantic_core import CoreSchema, core_schema

from probsoil.scenario.distribution_tables import read_distribution
from probsoil.scenario.distributions import BOUNDED, Constant, Distribution
from probsoil.scenario.slips import Slip, refuse
from probsoil.units import BASE_UNITS, Kind, UnitError, allowed_text, to_base, usual_units

Source = Literal["by definition", "common practice"]
GREATEST_SHARE_OUTSIDE = 0.05
FIELD_MARK = "x-field"
RATIO_PATTERN = r"^\s*1\s*/\s*([1-9][0-9]*(?:\.[0-9]+)?)\s*$"


def _unit_text(kind: Kind) -> str:
    return "" if kind == "number" else f" {usual_units(kind)[0]}"


@dataclass(frozen=True, slots=True, kw_only=True)
class Range(ABC):
    """A number of the scenario: what kind of quantity it is and how far it may go.

    Attributes
    ----------
    kind : str
        Kind of quantity, which fixes the unit.
    low, high : float, [base unit]
        Range.
    source : str
        Where the range comes from.
    meaning : str
        What the number is.
    open_low, open_high : bool
        Whether the bound itself is refused.
    """

    kind: Kind
    low: float
    high: float
    source: Source
    meaning: str
    open_low: bool = False
    open_high: bool = False

    @property
    def unit(self) -> str:
        """Base unit."""
        return BASE_UNITS[self.kind]

    @property
    def range_text(self) -> str:
        """Range in words, with where it comes from."""
        unit = _unit_text(self.kind)
        if self.open_low and self.open_high:
            return f"above {self.low:g} and below {self.high:g}{unit} ({self.source})"
        if self.open_low:
            return f"above {self.low:g}, at most {self.high:g}{unit} ({self.source})"
        return f"{self.low:g} to {self.high:g}{unit} ({self.source})"

    def holds(self, value: float) -> bool:
        """Return whether a value is within the range.

        Parameters
        ----------
        value : float, [base unit]
            Value.

        Returns
        -------
        inside : bool
            False for a number that is not finite.
        """
        above = value > self.low if self.open_low else value >= self.low
        below = value < self.high if self.open_high else value <= self.high
        return above and below

    @abstractmethod
    def read(self, raw: object) -> object:
        """Return the value of the field from what stands in the file.

        Parameters
        ----------
        raw : object
            Value from the file.

        Returns
        -------
        value : object
            Number or distribution in the base unit.

        Raises
        ------
        ValidationError
            If the value will not do.
        """

    def _quantity(self, raw: object) -> float:
        if not isinstance(raw, int | float | str):
            refuse([Slip(path=(), message="this is not a number", allowed=allowed_text(self.kind))])
        try:
            return to_base(raw, self.kind)
        except UnitError as error:
            refuse([Slip(path=(), message=error.message, allowed=error.allowed, hint=error.hint)])

    def _outside(self, value: float) -> Slip:
        unit = _unit_text(self.kind)
        what = "too small" if value <= self.low else "too large"
        return Slip(path=(), message=f"{value:.4g}{unit} is {what}", allowed=self.range_text)

    def __get_pydantic_core_schema__(self, _source: Any, _handler: GetCoreSchemaHandler) -> CoreSchema:
        """Let pydantic read the field with this object."""
        return core_schema.no_info_plain_validator_function(self.read)

    def __get_pydantic_json_schema__(
        self, _schema: CoreSchema, _handler: GetJsonSchemaHandler
    ) -> JsonSchemaValue:
        """Let pydantic put the field into the JSON Schema; the range is added in `schema`."""
        return {FIELD_MARK: self}


@dataclass(frozen=True, slots=True, kw_only=True)
class Number(Range):
    """A number of the scenario that is never uncertain."""

    def read(self, raw: object) -> float:
        """Return the number as written, in the base unit.

        Parameters
        ----------
        raw : object
            Value from the file.

        Returns
        -------
        number : float, [base unit]
            Within the range.

        Raises
        ------
        ValidationError
            If the value is not such a number.
        """
        value = self._quantity(raw)
        if not self.holds(value):
            refuse([self._outside(value)])
        return value


@dataclass(frozen=True, slots=True, kw_only=True)
class Ratio(Number):
    """A number that may also be written as one over another, such as ``"1/500"``."""

    def _quantity(self, raw: object) -> float:
        match = re.match(RATIO_PATTERN, raw) if isinstance(raw, str) else None
        if match is not None:
            return 1.0 / float(match[1])
        if isinstance(raw, str):
            allowed = 'a number such as 0.002, or text such as "1/500"'
            refuse([Slip(path=(), message="this is no ratio", allowed=allowed)])
        return Range._quantity(self, raw)


@dataclass(frozen=True, slots=True, kw_only=True)
class Uncertain(Range):
    """A number of the scenario that may be given as a distribution.

    Attributes
    ----------
    symbol : str
        Last part of the parameter's address; the key itself if empty.
    spatial : bool
        Whether variability from point to point makes sense.
    in_series : bool
        Whether the parts of a layer act one after another, as those that water passes through in
        turn: their average is then harmonic.
    of_works : bool
        Whether it says what is built rather than what the ground is like: where it is a plain number, load
        and stages tell it, and it is no parameter.
    """

    symbol: str = ""
    spatial: bool = False
    in_series: bool = False
    of_works: bool = False

    def read(self, raw: object) -> Distribution:
        """Return the distribution as written, in the base unit.

        Parameters
        ----------
        raw : object
            Number, text with a unit, table, or a ready distribution.

        Returns
        -------
        distribution : Distribution
            Within the range, save for a share that may be cut.

        Raises
        ------
        ValidationError
            If the value is no such distribution or leaves its range.
        """
        if isinstance(raw, Distribution):
            distribution = raw
        elif isinstance(raw, dict):
            outcome = read_distribution(cast("dict[str, object]", raw), self.kind, spatial=self.spatial)
            if isinstance(outcome, list):
                refuse(outcome)
            distribution = outcome
        else:
            distribution = Constant(value=self._quantity(raw))
        slip = self._range_slip(distribution)
        if slip is not None:
            refuse([slip])
        return distribution

    def _range_slip(self, distribution: Distribution) -> Slip | None:
        if isinstance(distribution, Constant):
            return None if self.holds(distribution.value) else self._outside(distribution.value)
        share = distribution.probability_outside(self.low, self.high)
        allowed = self.range_text
        if isinstance(distribution, BOUNDED):
            greatest = 0.0
        else:
            greatest = GREATEST_SHARE_OUTSIDE
            allowed += f"; at most {100.0 * greatest:g} % outside, which is cut"
        if share <= greatest:
            return None
        shown = "more than half" if share > 0.5 else f"{100.0 * share:.2g} %"
        message = f"the distribution leaves its physical range: {shown} of its probability lies outside"
        return Slip(path=(), message=message, allowed=allowed)
