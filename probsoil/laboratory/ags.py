"""The AGS4 standard's file form, read tolerantly: groups of headings, units and rows, each with its line.

Any line ends, either usual encoding, decimals and words of any style pass; a row is refused only where it
cannot be told which cell belongs to which heading. What the headings mean is not known here.
"""

import csv
import re
from collections.abc import Iterable, Iterator
from dataclasses import dataclass

from probsoil.errors import Fault
from probsoil.laboratory.collection import Collection

_PREFIX = re.compile(r"\s*([<>#]=?|[<>]#)\s*")
_WORDS = ("GROUP", "HEADING", "UNIT", "TYPE", "DATA")


@dataclass(frozen=True, slots=True, kw_only=True)
class AgsGroup:
    """The head of a group.

    Attributes
    ----------
    name : str
        Such as ``CONG``.
    line : int, [-]
        Line of its headings.
    headings, units, types : tuple of str
        As written; units and types padded with empty text to the number of headings.
    """

    name: str
    line: int
    headings: tuple[str, ...]
    units: tuple[str, ...]
    types: tuple[str, ...] = ()


@dataclass(frozen=True, slots=True, kw_only=True)
class AgsRow:
    """A row of data.

    Attributes
    ----------
    group : AgsGroup
        Its group.
    line : int, [-]
        Where it stands, counted from 1.
    cells : dict of str to str
        By heading, trimmed.
    """

    group: AgsGroup
    line: int
    cells: dict[str, str]


def number_and_prefix(text: str) -> tuple[str, str]:
    """Return the number of a cell apart from what the standard lets stand before it.

    Parameters
    ----------
    text : str
        Such as ``<5`` or ``#2.70``.

    Returns
    -------
    number : str
        What follows.
    prefix : str
        ``<``, ``>``, ``#`` or several; empty where there is none.
    """
    match = _PREFIX.match(text)
    return (text[match.end() :].strip(), match[1]) if match else (text, "")


class AgsReader:
    """Gives the rows of data of a file.

    Parameters
    ----------
    collection : Collection
        Where mistakes go.
    file : str
        As the user named it.
    wanted : frozenset of str or None
        Groups to be read; the rows of others are passed over unread. None for all.

    Attributes
    ----------
    met : dict of str to int, [-]
        Line of each group met.
    broken : set of str
        Groups whose rows could not be read.
    """

    def __init__(self, collection: Collection, file: str, wanted: frozenset[str] | None = None) -> None:
        self.met: dict[str, int] = {}
        self.broken: set[str] = set()
        self._collection = collection
        self._file = file
        self._wanted = wanted
        self._name: str | None = None
        self._skip = True
        self._headings: tuple[str, ...] = ()
        self._heading_line = 0
        self._units: tuple[str, ...] | None = None
        self._types: tuple[str, ...] = ()
        self._group: AgsGroup | None = None

    def rows(self, lines: Iterable[tuple[int, str]]) -> Iterator[AgsRow]:
        """Give the rows of data of the groups wanted.

        Parameters
        ----------
        lines : iterable of tuple
            Line numbers and lines.

        Yields
        ------
        row : AgsRow
            In the order of the file.
        """
        for number, line in lines:
            row = self._take(number, line)
            if row is not None:
                yield row

    def _take(self, number: int, line: str) -> AgsRow | None:
        if self._skip and not line.lstrip(' "')[:5].upper().startswith("GROUP"):
            self._stray(number, line)
            return None
        if not line.strip():
            return None
        cells = self._cells_of(number, line)
        if not cells:
            return None
        word = cells[0].upper()
        if word == "DATA":
            return self._data(number, cells[1:])
        self._head(number, word, tuple(cells[1:]))
        return None

    def _stray(self, number: int, line: str) -> None:
        if self._name is None and line.strip():
            self._name = ""  # told once
            self._fault(number, "the line belongs to no group", allowed='"GROUP" before anything else')

    def _cells_of(self, number: int, line: str) -> list[str]:
        try:
            return [cell.strip() for cell in next(csv.reader([line], skipinitialspace=True, strict=True))]
        except csv.Error as error:
            self._fault(
                number,
                f"the line cannot be parted into cells ({error})",
                allowed="cells in quotes parted by commas; a quote within a cell written twice",
            )
            return []

    def _head(self, number: int, word: str, cells: tuple[str, ...]) -> None:
        if word == "GROUP":
            self._name = cells[0].upper() if cells else ""
            self.met.setdefault(self._name, number)
            self._skip = self._wanted is not None and self._name not in self._wanted
            self._headings, self._units, self._types, self._group = (), None, (), None
        elif word == "HEADING":
            self._headings, self._heading_line = tuple(cell.upper() for cell in cells), number
            self._report_twice(number)
        elif word == "UNIT":
            self._units = cells
        elif word == "TYPE":
            self._types = cells
        else:
            self._fault(number, f'the line begins with "{word[:20]}"', allowed=f"one of {', '.join(_WORDS)}")

    def _report_twice(self, number: int) -> None:
        for heading in dict.fromkeys(self._headings):
            if heading and self._headings.count(heading) > 1:
                self._fault(number, f"the heading {heading} is there twice", allowed="each heading once")

    def _data(self, number: int, cells: list[str]) -> AgsRow | None:
        if self._group is None:
            self._group = self._begun(number)
        group = self._group
        if group is None:
            return None
        if len(cells) != len(group.headings):
            self._fault(
                number,
                f"the row has {len(cells)} cells and the group {group.name} {len(group.headings)} headings",
                allowed="a cell for each heading",
                hint="is a cell missing, or a comma outside quotes?",
            )
            return None
        return AgsRow(group=group, line=number, cells=dict(zip(group.headings, cells, strict=True)))

    def _begun(self, number: int) -> AgsGroup | None:
        """Close the head of a group at its first row; without headings or units its rows mean nothing."""
        for missing, word in ((not self._headings, "HEADING"), (self._units is None, "UNIT")):
            if missing:
                self._fault(
                    number,
                    f"the group {self._name} has no {word} row; its rows are not read",
                    allowed="HEADING, UNIT and TYPE rows before the first row of data",
                )
                self._skip = True
                self.broken.add(self._name or "")
                return None
        size = len(self._headings)
        return AgsGroup(
            name=self._name or "",
            line=self._heading_line,
            headings=self._headings,
            units=((*(self._units or ()), *("",) * size))[:size],
            types=((*self._types, *("",) * size))[:size],
        )

    def _fault(self, line: int, message: str, *, allowed: str, hint: str | None = None) -> None:
        self._collection.fault(Fault(file=self._file, line=line, message=message, allowed=allowed, hint=hint))
