"""Published ranges of scatter, scales of fluctuation and typical values, from a table in the package."""

import csv
import math
import re
from collections.abc import Iterable
from dataclasses import dataclass, fields, replace
from functools import cache
from importlib.resources import files
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    import pandas as pd

TABLE = "published_ranges.csv"
POINT_SCATTER = ("inherent cov", "total cov")
"""Kinds of coefficients of variation that are of single values and not of averages."""
KINDS = (
    *POINT_SCATTER,
    "measurement cov",
    "transformation cov",
    "model factor cov",
    "vertical scale",
    "horizontal scale",
    "value",
)


@dataclass(frozen=True, slots=True, kw_only=True)
class PublishedRange:
    """What one source says of one quantity of one kind of soil.

    Attributes
    ----------
    quantity : str
        What it is a range of, by its key in a scenario where it has one.
    soil : str
        Kind of soil, or of structure for the error of a calculation.
    kind : str
        One of `KINDS`.
    unit : str
        Unit, ``-`` for none.
    low, high : float, [`unit`]
        Range.
    typical : float or None, [`unit`]
        Mean or usual value; None where none is given.
    source : str
        Author, year, place.
    opened : bool
        Whether the source was read when the row was written; otherwise it is recalled.
    note : str
        What else is to be known.
    """

    quantity: str
    soil: str
    kind: str
    unit: str
    low: float
    high: float
    typical: float | None
    source: str
    opened: bool
    note: str

    @property
    def cited(self) -> str:
        """Author and year, with how it is known."""
        found = re.match(r".*?\b(?:19|20)\d\d\b", self.source)
        short = found[0] if found else self.source
        return f"{short} ({'opened' if self.opened else 'recalled, not opened'})"


@dataclass(frozen=True, slots=True, kw_only=True)
class Envelope:
    """All that is published of a quantity, from the least to the greatest.

    Attributes
    ----------
    lowest, highest : PublishedRange
        Rows with the least and the greatest end.
    """

    lowest: PublishedRange
    highest: PublishedRange

    @property
    def low(self) -> float:
        """Least published value, in the unit of the rows, [any]."""
        return self.lowest.low

    @property
    def high(self) -> float:
        """Greatest published value, in the unit of the rows, [any]."""
        return self.highest.high


@dataclass(frozen=True, slots=True, kw_only=True)
class PublishedRanges:
    """All rows of the table.

    Attributes
    ----------
    rows : tuple of PublishedRange
        In the order of the table.
    """

    rows: tuple[PublishedRange, ...]

    def envelope(
        self, quantities: Iterable[str], kinds: Iterable[str], *, without: Iterable[str] = ()
    ) -> Envelope | None:
        """Return what is published of some quantities together.

        Parameters
        ----------
        quantities : iterable of str
            Quantities that count as one.
        kinds : iterable of str
            Kinds that count as one.
        without : iterable of str
            Kinds of soil that are left out.

        Returns
        -------
        envelope : Envelope or None
            None where nothing is.
        """
        wanted, of_kind, left_out = set(quantities), set(kinds), set(without)
        rows = [
            row
            for row in self.rows
            if row.quantity in wanted and row.kind in of_kind and row.soil not in left_out
        ]
        if not rows:
            return None
        return Envelope(
            lowest=min(rows, key=lambda row: row.low), highest=max(rows, key=lambda row: row.high)
        )

    def friction(self, key: str) -> Envelope | None:
        """Return what is published of tan phi' as friction angles or as slopes of the critical state line.

        Parameters
        ----------
        key : str
            ``phi`` for angles [degrees], ``M`` for slopes in compression [-].

        Returns
        -------
        envelope : Envelope or None
            None where nothing is.
        """
        published = self.envelope(("tan_phi",), ("value",))
        if published is None:
            return None
        lowest, highest = (
            replace(row, low=_turned(row.low, key), high=_turned(row.high, key))
            for row in (published.lowest, published.highest)
        )
        return Envelope(lowest=lowest, highest=highest)

    def to_frame(self) -> "pd.DataFrame":
        """Return the table.

        Returns
        -------
        frame : pandas.DataFrame
            One row for each row of the table, columns as in `PublishedRange`.
        """
        import pandas as pd  # deferred: a scenario check never needs it

        names = [one.name for one in fields(PublishedRange)]
        return pd.DataFrame([[getattr(row, name) for name in names] for row in self.rows], columns=names)


def _turned(tangent: float, key: str) -> float:
    angle = math.atan(tangent)
    return math.degrees(angle) if key == "phi" else 6.0 * math.sin(angle) / (3.0 - math.sin(angle))


@cache
def published_ranges() -> PublishedRanges:
    """Return the table of published ranges.

    Returns
    -------
    ranges : PublishedRanges
        Read once.
    """
    text = files("probsoil.scenario").joinpath(TABLE).read_text(encoding="utf-8")
    return PublishedRanges(rows=tuple(_row(entry) for entry in csv.DictReader(text.splitlines())))


def _row(entry: dict[str, str]) -> PublishedRange:
    return PublishedRange(
        quantity=entry["quantity"],
        soil=entry["soil"],
        kind=entry["kind"],
        unit=entry["unit"],
        low=float(entry["low"]),
        high=float(entry["high"]),
        typical=float(entry["typical"]) if entry["typical"] else None,
        source=entry["source"],
        opened=entry["opened"] == "yes",
        note=entry["note"],
    )
