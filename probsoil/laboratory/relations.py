"""Mistakes between rows of one table and another: repeats, names used twice, orphans, tests below the hole.

Each check notes its mistakes and drops the rows concerned, so that the next looks at sound rows only.
"""

import numpy as np

from probsoil._typing import IntArray
from probsoil.laboratory.collection import Collection
from probsoil.laboratory.grouping import elsewhere, groups
from probsoil.laboratory.profiles import profile_codes
from probsoil.laboratory.tables import Table

SPECIMENS = ("oedometer specimens", "triaxial specimens")
PROFILES = ("vane", "cone")
_PARENTS = (
    ("oedometer increments", "oedometer specimens"),
    ("oedometer readings", "oedometer specimens"),
    ("triaxial readings", "triaxial specimens"),
)


def check_relations(collection: Collection) -> None:
    """Find the mistakes between tables, and drop the rows that have one.

    Parameters
    ----------
    collection : Collection
        All tables, finished.
    """
    for table in collection.tables.values():
        _repeated(collection, table)
    _shared_names(collection)
    for child, parent in _PARENTS:
        _orphans(collection, child, parent)
    _readings_without_increment(collection)
    for name in (*SPECIMENS, *PROFILES, "plasticity"):
        _below_the_hole(collection, collection.tables[name], "depth")
    _below_the_hole(collection, collection.tables["strata"], "top")


def _keys(table: Table) -> list[IntArray]:
    """Key columns as whole numbers, so that equal cells are equal."""
    keys = []
    for name in table.layout.key:
        if table.layout.column(name).is_text:
            keys.append(table.codes(name))
        else:
            keys.append(np.unique(table.numbers(name), return_inverse=True)[1].astype(np.int64))
    return keys


def _repeated(collection: Collection, table: Table) -> None:
    rows = table.kept()
    if rows.size < 2:
        return
    keys = np.stack(_keys(table))[:, rows]
    order = np.lexsort(keys[::-1])
    same = (keys[:, order[1:]] == keys[:, order[:-1]]).all(axis=0)
    last = table.layout.key[-1]
    first = order[0]
    for here, repeats in zip(order[1:].tolist(), same.tolist(), strict=True):
        if not repeats:
            first = here
            continue
        row = int(rows[here])
        collection.fault(
            table.fault(
                row,
                last,
                f"the row repeats {elsewhere(table, row, int(rows[first]))}",
                allowed=f"one row for each {', '.join(table.layout.key)}",
                hint="remove one of the two",
            )
        )
        table.drop(row)


def _shared_names(collection: Collection) -> None:
    """Names of tests are the site's: an oedometer and a triaxial test of one name would be mixed up."""
    owners: dict[int, str] = {}
    for name in (*SPECIMENS, *PROFILES):
        table = collection.tables[name]
        codes = profile_codes(table, collection.names) if name in PROFILES else table.codes("test")
        for group in groups(codes, table.kept()):
            row = int(group[0])
            code = int(codes[row])
            other = owners.setdefault(code, name)
            if other != name:
                collection.fault(
                    table.fault(
                        row,
                        "test",
                        f'the test "{collection.names.text(code)}" is in the table {other} too',
                        allowed="a name of its own for each test of the site",
                        hint="add the kind of test to the name",
                    )
                )
                table.drop(group)


def _orphans(collection: Collection, child: str, parent: str) -> None:
    table, owner = collection.tables[child], collection.tables[parent]
    rows = table.kept()
    known = np.unique(owner.codes("test")[owner.kept()]) if len(owner) else np.zeros(0, dtype=np.int64)
    lost = rows[~np.isin(table.codes("test")[rows], known)] if rows.size else rows
    dropped = set(owner.codes("test").tolist())  # a mistake of the specimen, told already
    for group in groups(table.codes("test"), lost):
        row = int(group[0])
        name = table.text("test", row)
        table.drop(group)
        if int(table.codes("test")[row]) in dropped or (name,) in owner.refused or not owner.whole:
            continue
        collection.fault(
            table.fault(
                row,
                "test",
                f'no row of the table {parent} has the test "{name}" ({_rows_text(group.size)})',
                allowed="a test that the table of specimens names",
                hint=_nearest(name, owner) or f"add it to the table {parent}",
            )
        )


def _rows_text(count: int) -> str:
    return f"{count} row{'' if count == 1 else 's'} of it"


def _nearest(name: str, owner: Table) -> str | None:
    from difflib import get_close_matches

    near = get_close_matches(name, {owner.text("test", row) for row in owner.kept().tolist()}, n=1)
    return f'did you mean "{near[0]}"?' if near else None


def _readings_without_increment(collection: Collection) -> None:
    table, owner = collection.tables["oedometer readings"], collection.tables["oedometer increments"]
    kept = owner.kept()
    test, number = owner.codes("test"), owner.numbers("increment")
    known = set(zip(test[kept].tolist(), number[kept].tolist(), strict=True))
    dropped = set(zip(test.tolist(), number.tolist(), strict=True))
    pairs = list(zip(table.codes("test").tolist(), table.numbers("increment").tolist(), strict=True))
    told: set[tuple[int, float]] = set()
    for row in table.kept().tolist():
        pair = pairs[row]
        if pair in known:
            continue
        table.drop(row)
        name = table.text("test", row)
        if pair in told | dropped or (name, str(pair[1])) in owner.refused or not owner.whole:
            continue
        told.add(pair)
        collection.fault(
            table.fault(
                row,
                "increment",
                f'the test "{name}" has no increment {pair[1]:g}',
                allowed="an increment that the table oedometer increments names",
                hint="add it there, or mend its number",
            )
        )


def _below_the_hole(collection: Collection, table: Table, name: str) -> None:
    holes = collection.tables["holes"]
    if not len(holes):
        return
    kept = holes.kept()
    final = dict(
        zip(holes.codes("hole")[kept].tolist(), holes.numbers("final depth")[kept].tolist(), strict=True)
    )
    told: set[int] = set()
    codes, depths = table.codes("hole").tolist(), table.numbers(name).tolist()
    for row in table.kept().tolist():
        end = final.get(codes[row])
        if end is None:
            if codes[row] not in told and holes.whole and (table.text("hole", row),) not in holes.refused:
                collection.fault(
                    table.fault(
                        row,
                        "hole",
                        f'no row of the table holes has the hole "{table.text("hole", row)}"',
                        allowed="a hole that the table holes names, where there is such a table",
                        hint="add it there",
                    )
                )
            told.add(codes[row])
            table.drop(row)
        elif depths[row] > end + 1e-9:
            collection.fault(
                table.fault(
                    row,
                    name,
                    f"the {name} is below the hole, which ends at {end:g} m",
                    allowed="a depth within the hole",
                    hint="mend the depth, or the final depth in the table holes",
                )
            )
            table.drop(row)
