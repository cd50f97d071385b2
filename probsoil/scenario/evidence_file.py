"""Test results in a file beside the scenario: comma-separated values, one number in a row."""

import csv
import io
import math
from dataclasses import dataclass, replace
from typing import cast

from probsoil.scenario.slips import Slip, did_you_mean
from probsoil.scenario.test_results import KINDS, PARAMETERS, TestKind, TestParameter, TestResult
from probsoil.scenario.value_files import beside_scenario
from probsoil.units import BASE_UNITS, UnitError, to_base

COLUMNS = (
    "kind",
    "test",
    "hole",
    "x",
    "y",
    "layer",
    "depth",
    "parameter",
    "value",
    "unit",
    "standard_error",
    "flag",
)
"""Header of the file, exactly."""

GREATEST_ROWS = 5_000
GREATEST_SIZE = 5_000_000
_MOST_SHOWN = 20
_LAYOUT = "comma-separated text in UTF-8 with the header " + ",".join(COLUMNS)


@dataclass(frozen=True, slots=True, kw_only=True)
class EvidenceFile:
    """A file of test results, read.

    Attributes
    ----------
    name : str
        Path as written in the scenario.
    rows : tuple of TestResult
        In base units.
    """

    name: str
    rows: tuple[TestResult, ...]

    @property
    def text(self) -> str:
        """The same results as a file again."""
        page = io.StringIO()
        writer = csv.writer(page, lineterminator="\n")
        writer.writerow(COLUMNS)
        for row in self.rows:
            unit = unit_of(row.parameter)
            cells = {"unit": unit, "standard_error": row.standard_error or ""}
            writer.writerow([cells.get(name, _cell(getattr(row, name, None))) for name in COLUMNS])
        return page.getvalue()


def _cell(value: object) -> str:
    return "" if value is None else repr(value) if isinstance(value, float) else str(value)


def unit_of(parameter: TestParameter) -> str:
    """Return the unit that a result is stored in.

    Parameters
    ----------
    parameter : str
        What was measured.

    Returns
    -------
    unit : str
        Base unit, ``-`` for a bare number.
    """
    return BASE_UNITS[PARAMETERS[parameter].kind]


def read_evidence_file(name: str) -> EvidenceFile | list[Slip]:
    """Return the test results in a file.

    Parameters
    ----------
    name : str
        Path, relative to the folder of the scenario.

    Returns
    -------
    file : EvidenceFile or list of Slip
        Every mistake with its row and column.
    """
    rows = beside_scenario(name, greatest_size=GREATEST_SIZE)
    if isinstance(rows, Slip):
        return [replace(rows, path=(), hint=rows.hint or "probsoil interpret writes one from test sheets")]
    header = tuple(cell.strip() for cell in rows[0]) if rows else ()
    if header != COLUMNS:
        return [
            Slip(path=(), message=f"{name} has another header: {','.join(header) or 'none'}", allowed=_LAYOUT)
        ]
    filled = [
        (number, row) for number, row in enumerate(rows[1:], start=2) if any(cell.strip() for cell in row)
    ]
    if not 1 <= len(filled) <= GREATEST_ROWS:
        return [
            Slip(
                path=(),
                message=f"{name} has {len(filled)} rows of results",
                allowed=f"1 to {GREATEST_ROWS:,d}",
            )
        ]
    found: list[TestResult] = []
    slips: list[Slip] = []
    for number, row in filled:
        reader = _RowReader(name, number, row)
        result = reader.result()
        slips += reader.slips
        if result is not None:
            found.append(result)
    if len(slips) > _MOST_SHOWN:
        more = Slip(
            path=(),
            message=f"{name}: {len(slips) - _MOST_SHOWN} more mistakes of the same kind",
            allowed=_LAYOUT,
        )
        slips = [*slips[:_MOST_SHOWN], more]
    return slips or EvidenceFile(name=name, rows=tuple(found))


class _RowReader:
    """One row of the file; every mistake in it is kept."""

    def __init__(self, file: str, number: int, row: list[str]) -> None:
        self.where = f"{file}, row {number}"
        self.slips: list[Slip] = []
        self.cells = dict(zip(COLUMNS, [cell.strip() for cell in row], strict=False))
        if len(row) != len(COLUMNS):
            self._slip("", f"{len(row)} cells", f"{len(COLUMNS)}, as in the header")

    def result(self) -> TestResult | None:
        """Return the result, or None where the row has mistakes."""
        if self.slips:
            return None
        kind = self._choice("kind", KINDS)
        parameter = self._choice("parameter", tuple(PARAMETERS))
        depth = self._number("depth", least=0.0)
        value, error = self._value(parameter)
        place = [self._number(key) if self.cells[key] else None for key in ("x", "y")]
        if (place[0] is None) != (place[1] is None) and not self.slips:
            self._slip("x", "x and y go together", "both or none")
        if self.slips or kind is None or parameter is None or depth is None or value is None:
            return None
        return TestResult(
            kind=cast("TestKind", kind),
            test=self.cells["test"] or f"{kind} at {depth:g} m",
            hole=self.cells["hole"],
            x=place[0],
            y=place[1],
            layer=self.cells["layer"],
            depth=depth,
            parameter=cast("TestParameter", parameter),
            value=value,
            standard_error=error,
            flag=self.cells["flag"],
        )

    def _slip(self, column: str, message: str, allowed: str, hint: str | None = None) -> None:
        at = f', column "{column}"' if column else ""
        self.slips.append(Slip(path=(), message=f"{self.where}{at}: {message}", allowed=allowed, hint=hint))

    def _choice(self, column: str, choices: tuple[str, ...]) -> str | None:
        given = self.cells[column]
        if given in choices:
            return given
        hint = did_you_mean(given, choices) if given else None
        self._slip(column, f'"{given}" is none of the choices', ", ".join(choices), hint)
        return None

    def _number(self, column: str, *, least: float = -math.inf) -> float | None:
        try:
            value = float(self.cells[column])
        except ValueError:
            value = math.nan
        if math.isfinite(value) and value >= least:
            return value
        allowed = "a number" if least == -math.inf else f"a number, {least:g} or more"
        self._slip(column, f'"{self.cells[column]}" will not do', allowed)
        return None

    def _value(self, parameter: str | None) -> tuple[float | None, float]:
        """Return value and standard error in the base unit."""
        value = self._number("value")
        error = self._number("standard_error", least=0.0) if self.cells["standard_error"] else 0.0
        if parameter is None or value is None or error is None:
            return None, 0.0
        what, unit = PARAMETERS[cast("TestParameter", parameter)], self.cells["unit"]
        try:
            bare = what.kind == "number" and unit in ("", "-")
            factor = 1.0 if bare else to_base(f"1 {unit}", what.kind)
        except UnitError as problem:
            self._slip("unit", f'"{unit}": {problem.message}', problem.allowed or "", problem.hint)
            return None, 0.0
        value, error = value * factor, error * factor
        if not what.low < value <= what.high:
            base = unit_of(cast("TestParameter", parameter))
            self._slip(
                "value",
                f"{value:g} {base} is out of range",
                f"above {what.low:g}, at most {what.high:g} {base}",
            )
        return value, error
