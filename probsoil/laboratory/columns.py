"""What describes a table a laboratory fills in: its columns, and what each may hold."""

from dataclasses import dataclass
from typing import Literal

from probsoil.unit_tables import Kind

CellKind = Kind | Literal["text", "whole number"]


@dataclass(frozen=True, slots=True, kw_only=True)
class Column:
    """One column of a table.

    Attributes
    ----------
    name : str
        Heading without its unit.
    meaning : str
        What the cell says, for people.
    kind : str
        Kind of quantity, or ``text`` or ``whole number``.
    unit : str
        Unit of the number in a sheet (`probsoil.laboratory.sheets`); empty where there is none.
    usual : str
        Unit a template asks for; that of the sheet where empty.
    bare : bool
        Whether the heading may do without a unit.
    required : bool
        Whether table and row need it.
    positive : bool
        Whether the number must be above 0.
    low, high : float or None, [`unit`]
        Least and greatest number of a cell.
    typical : tuple of float or None, [`unit`]
        Between these lies the greatest absolute value of the column within one test; outside, the unit in
        the heading must be wrong.
    choices : tuple of str
        Words a text may be; empty for any.
    """

    name: str
    meaning: str
    kind: CellKind
    unit: str = ""
    usual: str = ""
    bare: bool = False
    required: bool = True
    positive: bool = False
    low: float | None = None
    high: float | None = None
    typical: tuple[float, float] | None = None
    choices: tuple[str, ...] = ()

    @property
    def is_text(self) -> bool:
        """Whether cells are words."""
        return self.kind == "text"

    @property
    def heading(self) -> str:
        """Heading as a template writes it."""
        return f"{self.name} ({self.usual or self.unit})" if self.unit and not self.bare else self.name


@dataclass(frozen=True, slots=True, kw_only=True)
class TableLayout:
    """One table.

    Attributes
    ----------
    name : str
        What a file or a sheet of a workbook must have in its name.
    about : str
        Group of tables it is written with: ``ground``, ``oedometer``, ``triaxial``, ``vane`` or ``cone``.
    meaning : str
        What a row is.
    columns : tuple of Column
        In the order of the template.
    key : tuple of str
        Columns that together tell one row from all others.
    """

    name: str
    about: str
    meaning: str
    columns: tuple[Column, ...]
    key: tuple[str, ...]

    def column(self, name: str) -> Column:
        """Return the column of that name.

        Parameters
        ----------
        name : str
            Heading without its unit.

        Returns
        -------
        column : Column
            The column.
        """
        return next(column for column in self.columns if column.name == name)
