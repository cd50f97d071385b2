"""From AGS4 groups to tables.

The file is read twice, row by row: first the rows that others take something from (the kind of a triaxial
test, the area ratio of a cone), then the rest. So the order of the groups makes no difference, and what is
kept are numbers, not text.
"""

from dataclasses import dataclass, field
from pathlib import Path

from probsoil.errors import Fault
from probsoil.laboratory.ags import AgsGroup, AgsReader, AgsRow, number_and_prefix
from probsoil.laboratory.ags_groups import (
    ADMINISTRATION,
    DERIVED,
    DERIVED_HEADINGS,
    DISTURBED,
    FILLINGS,
    LENT,
    NOT_FIELD_TESTS,
    PARENT_OF,
    PARENTS,
    SAMPLE,
    SPECIMEN,
    Filling,
)
from probsoil.laboratory.ags_words import kind_of_triaxial, prepared
from probsoil.laboratory.cells import Cell, CellError, Heading, factor_to_sheet
from probsoil.laboratory.collection import Collection, RowReader
from probsoil.laboratory.columns import Column
from probsoil.laboratory.table_files import full_table
from probsoil.laboratory.tables import Source, TooManyRowsError
from probsoil.laboratory.text_files import lines_of

GREATEST_PARENTS = 100_000
_FILLED = frozenset(filling.group for filling in FILLINGS)
_SOUNDINGS = frozenset({"SCPT", "CPTT"})
_UNIT_OF = {"LLPL_PI": "%"}  # the standard gives it no unit and writes per cent


def read_ags(collection: Collection, path: Path, file: str) -> None:
    """Read an AGS4 file.

    Parameters
    ----------
    collection : Collection
        Where rows and mistakes go.
    path : Path
        The file.
    file : str
        As the user named it.
    """
    site = _Site(collection, file)
    first = AgsReader(collection, file, frozenset(PARENTS) | frozenset(DERIVED))
    for row in first.rows(lines_of(collection, path, file)):
        site.take_parent(row)
    if not collection.fatal:
        second = AgsReader(collection, file, _FILLED)
        try:
            for row in second.rows(lines_of(Collection(), path, file)):  # its letters are judged already
                site.take(row)
        except TooManyRowsError as full:
            collection.fault(full_table(file, full))
        site.finish(first, second)


@dataclass(slots=True)
class _Filler:
    """One filling under one head of its group."""

    filling: Filling
    reader: RowReader
    headings: dict[str, list[Heading]]


@dataclass(slots=True)
class _Site:
    collection: Collection
    file: str
    parents: dict[str, dict[tuple[str, ...], AgsRow]] = field(
        default_factory=lambda: {group: {} for group in PARENTS}
    )
    fillers: dict[int, list[_Filler]] = field(default_factory=dict)
    heads: list[AgsGroup] = field(default_factory=list)  # keeps their ids from being used again
    owners: dict[str, str] = field(default_factory=dict)
    derived: dict[str, tuple[int, int]] = field(default_factory=dict)  # first line and number of rows
    poor: dict[tuple[str, ...], str] = field(default_factory=dict)  # samples, and why
    told: set[tuple[str, ...]] = field(default_factory=set)

    def take_parent(self, row: AgsRow) -> None:
        name = row.group.name
        if name in DERIVED:
            first, count = self.derived.get(name, (row.line, 0))
            self.derived[name] = first, count + 1
            return
        rows = self.parents[name]
        key = _key(row.cells, PARENTS[name])
        if len(rows) >= GREATEST_PARENTS and key not in rows:
            self._once(row, f"more than {GREATEST_PARENTS:,d} rows of {name}", "full", name)
            return
        rows.setdefault(key, row)
        if name == "SAMP":
            self._judge_sample(row)

    def _judge_sample(self, row: AgsRow) -> None:
        kind, quality = row.cells.get("SAMP_TYPE", "").upper(), row.cells.get("SAMP_CLSS", "")
        if kind in DISTURBED or quality[:1] in ("3", "4", "5"):
            self.poor[_key(row.cells, SAMPLE)] = f"type {kind}, class {quality or 'not given'}"

    def take(self, row: AgsRow) -> None:
        cells = row.cells
        lent: dict[str, Heading] = {}
        group = row.group.name
        if group in PARENT_OF:
            answer = self._lent(row)
            if answer is None:
                return
            cells, lent = answer
        if not self._in_its_place(row):
            return
        cells = prepared(group, cells)
        for filler in self._fillers_of(row.group):
            filler.reader.take(row.line, self._cells(row, cells, filler, lent))

    def _lent(self, row: AgsRow) -> tuple[dict[str, str], dict[str, Heading]] | None:
        """Add what the parent says; None where the row is not to be used."""
        group = row.group.name
        owner = PARENT_OF[group]
        parent = self.parents[owner].get(_key(row.cells, PARENTS[owner]))
        if parent is None:
            if group in LENT:  # others are found out when tables are compared
                self._orphan(row, owner)
                return None
            return row.cells, {}
        for heading, kinds in NOT_FIELD_TESTS.get(group, {}).items():
            if parent.cells.get(heading, "").upper() in kinds:
                self._unused(parent, f"{heading} {parent.cells[heading]} is no test that is used")
                return None
        cells, lent = dict(row.cells), {}
        for heading in LENT.get(group, ()):
            cells[heading] = parent.cells.get(heading, "")
            lent[heading] = _heading(parent.group, heading, 1.0)
            if heading.endswith("_TYPE"):
                kind = kind_of_triaxial(cells[heading], row.cells)
                if kind is None:
                    self._unused(parent, f"{heading} {cells[heading]} is no kind that is used")
                    return None
                cells[heading] = kind
        return cells, lent

    def _unused(self, row: AgsRow, why: str) -> None:
        self.collection.remark(f"{self.file}, row {row.line}: {why}; left out")

    def _orphan(self, row: AgsRow, owner: str) -> None:
        key = _key(row.cells, PARENTS[owner])
        message = f"no row of {owner} goes with this row of {row.group.name}: {' '.join(filter(None, key))}"
        self._once(row, message, owner, *key, hint=f"add it to the group {owner}, or mend the key")

    def _once(self, row: AgsRow, message: str, *about: str, hint: str | None = None) -> None:
        if about not in self.told:
            self.told.add(about)
            self.collection.fault(
                Fault(
                    file=self.file,
                    line=row.line,
                    column=2,
                    key=row.group.headings[0],
                    message=message,
                    given=row.cells.get(row.group.headings[0]),
                    allowed="rows of the standard's groups joined by their key headings",
                    hint=hint,
                )
            )

    def _in_its_place(self, row: AgsRow) -> bool:
        """Pass a sounding once, whichever of the two cone groups it is in; look at the sample of a test."""
        group = row.group.name
        if group in _SOUNDINGS:
            sounding = "/".join(_key(row.cells, PARENTS[PARENT_OF[group]]))
            owner = self.owners.setdefault(sounding, group)
            if owner != group:
                self.collection.remark(f"{self.file}: {group} of {sounding} is not read, {owner} has it too")
            return owner == group
        if group in ("CONG", "ESCG", "TRIT", "TRET") and self.parents["SAMP"]:
            self._look_at_sample(row)
        return True

    def _look_at_sample(self, row: AgsRow) -> None:
        key = _key(row.cells, SAMPLE)
        if key not in self.parents["SAMP"]:
            self._once(
                row,
                f"no row of SAMP goes with this row of {row.group.name}: {' '.join(filter(None, key))}",
                "SAMP",
                *key,
                hint="add the sample to the group SAMP, or mend the key",
            )
        if key in self.poor:
            self.collection.remark(
                f"{self.file}, row {row.line}: {row.group.name} of a disturbed sample ({self.poor[key]})"
            )

    def _fillers_of(self, group: AgsGroup) -> list[_Filler]:
        if id(group) not in self.fillers:
            self.heads.append(group)
            made = [self._filler(filling, group) for filling in FILLINGS if filling.group == group.name]
            self.fillers[id(group)] = [filler for filler in made if filler is not None]
            computed = [heading for heading in group.headings if heading in DERIVED_HEADINGS]
            if computed:
                self.collection.remark(
                    f"{self.file}, row {group.line}: {', '.join(computed)} not used (derived values)"
                )
        return self.fillers[id(group)]

    def _filler(self, filling: Filling, group: AgsGroup) -> _Filler | None:
        table = self.collection.tables[filling.table]
        headings: dict[str, list[Heading]] = {}
        sound = True
        for name, sources in filling.cells.items():
            column = table.layout.column(name)
            found = [heading for heading in sources if heading in group.headings]
            headings[name] = [
                made for made in (self._made(group, heading, column) for heading in found) if made
            ]
            sound = sound and len(headings[name]) == len(found)
            lent = any(heading in LENT.get(group.name, ()) for heading in sources)
            if column.required and not found and not lent:
                sound = False
                self._missing(group, sources)
        if not sound:
            table.whole = False
            return None
        shown = {name: found[0] for name, found in headings.items() if found}
        if filling.suffix:
            shown["test"] = _heading(group, "LOCA_ID", 1.0)
        return _Filler(
            filling=filling,
            reader=RowReader(self.collection, table, Source(file=self.file, headings=shown)),
            headings=headings,
        )

    def _made(self, group: AgsGroup, heading: str, column: Column) -> Heading | None:
        made = _heading(group, heading, 1.0)
        try:
            return _heading(group, heading, factor_to_sheet(column, made.unit))
        except CellError as error:
            self.collection.fault(
                Fault(
                    file=self.file,
                    line=group.line + 1,
                    column=made.position,
                    key=heading,
                    message=error.message,
                    given=made.unit or None,
                    allowed=error.allowed,
                    hint="mend the UNIT row" if error.hint is None else error.hint,
                )
            )
            return None

    def _missing(self, group: AgsGroup, sources: tuple[str, ...]) -> None:
        self.collection.fault(
            Fault(
                file=self.file,
                line=group.line,
                key=sources[0],
                message=f"the heading is missing in the group {group.name}",
                allowed=" or ".join(sources),
                hint="ask the laboratory for a complete file",
            )
        )

    def _cells(
        self, row: AgsRow, cells: dict[str, str], filler: _Filler, lent: dict[str, Heading]
    ) -> dict[str, tuple[Cell, Heading]]:
        table = self.collection.tables[filler.filling.table].layout
        taken: dict[str, tuple[Cell, Heading]] = {}
        if filler.filling.suffix:
            taken["test"] = _test_name(cells, filler.filling.suffix), _heading(row.group, "LOCA_ID", 1.0)
        for name, headings in filler.headings.items():
            known = [*headings, *(lent[source] for source in filler.filling.cells[name] if source in lent)]
            if not known:
                continue
            heading = next((one for one in known if cells.get(one.text)), known[0])
            cell = cells.get(heading.text, "")
            taken[name] = (cell if table.column(name).is_text else self._number(row, heading, cell)), heading
        return taken

    def _number(self, row: AgsRow, heading: Heading, cell: str) -> str:
        number, prefix = number_and_prefix(cell)
        if prefix:
            meaning = "assumed by its maker" if prefix == "#" else "a bound, not a reading"
            self.collection.remark(
                f'{self.file}, row {row.line}: {heading.text} "{cell}" is read as {number} ({meaning})'
            )
        return number

    def finish(self, first: AgsReader, second: AgsReader) -> None:
        for filling in FILLINGS:
            owners = {filling.group, PARENT_OF.get(filling.group, "")}
            if owners & (first.broken | second.broken):
                self.collection.tables[filling.table].whole = False
        for name, (line, count) in self.derived.items():
            rows = f"{count} row{'' if count == 1 else 's'}"
            self.collection.remark(f"{self.file}, row {line}: {name} ({rows}) not used: {DERIVED[name]}")
        known = _FILLED | frozenset(PARENTS) | frozenset(DERIVED) | ADMINISTRATION
        others = [name for name in first.met if name and name not in known]
        if others:
            self.collection.remark(f"{self.file}: groups not read: {', '.join(others)}")


def _heading(group: AgsGroup, heading: str, factor: float) -> Heading:
    place = group.headings.index(heading) if heading in group.headings else 0
    unit = group.units[place] if heading in group.headings else ""
    # the first cell of a row is the word DATA
    return Heading(position=place + 2, text=heading, unit=unit or _UNIT_OF.get(heading, ""), factor=factor)


def _key(cells: dict[str, str], headings: tuple[str, ...]) -> tuple[str, ...]:
    """Key cells, numbers in one spelling, so that 2.5 and 2.50 are the same depth."""
    return tuple(_one_spelling(cells.get(heading, "")) for heading in headings)


def _one_spelling(text: str) -> str:
    try:
        return f"{float(text):g}"
    except ValueError:
        return text


def _test_name(cells: dict[str, str], suffix: str) -> str:
    *_, reference, depth = _key(cells, SPECIMEN)
    sample = cells.get("SAMP_REF") or cells.get("SAMP_ID", "")
    specimen = "-".join(part for part in (sample, reference) if part)
    depth = depth or _one_spelling(cells.get("SAMP_TOP", ""))
    stage = cells.get("TRIT_TESN") or cells.get("TRET_TESN") or "1"
    parts = (cells.get("LOCA_ID", ""), f"{depth} m", specimen, suffix, "" if stage == "1" else stage)
    return " ".join(part for part in parts if part)
