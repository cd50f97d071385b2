"""Mistakes within a test that show only when its rows are seen together: order, sense of the numbers.

Each check notes its mistakes and drops the rows concerned, so that the next looks at sound rows only.
"""

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

from probsoil._typing import IntArray
from probsoil.laboratory.cells import factor_to_sheet, likely_unit
from probsoil.laboratory.collection import Collection
from probsoil.laboratory.columns import Column
from probsoil.laboratory.grouping import elsewhere, groups
from probsoil.laboratory.profiles import profile_codes
from probsoil.laboratory.relations import PROFILES
from probsoil.laboratory.tables import EMPTY, Table

VOID_RATIO_RISE = 0.005  # a rise under growing load up to this is taken as reading error


def check_tests(collection: Collection) -> None:
    """Find the mistakes within tests, and drop the rows that have one.

    Parameters
    ----------
    collection : Collection
        Checked for relations between tables.
    """
    _out_of_order(collection)
    _void_ratio_rises(collection)
    for table in collection.tables.values():
        _senseless(collection, table)
    _unlike_within_profile(collection)
    _stresses_missing(collection)
    _crushed(collection)
    _overlapping(collection)


def _out_of_order(collection: Collection) -> None:
    tables = collection.tables
    increments, readings, shear = (
        tables[name] for name in ("oedometer increments", "oedometer readings", "triaxial readings")
    )
    _rising(collection, increments, "increment", increments.codes("test"))
    _rising(
        collection,
        readings,
        "time",
        _joint(readings.codes("test"), readings.numbers("increment").astype(np.int64)),
    )
    _rising(collection, shear, "axial strain", shear.codes("test"), strictly=False)
    cone = tables["cone"]
    _rising(collection, cone, "depth", profile_codes(cone, collection.names))


def _rising(
    collection: Collection, table: Table, name: str, codes: IntArray, *, strictly: bool = True
) -> None:
    sizes = np.abs(table.numbers(name))

    def told(row: int, before: int) -> str | None:
        step = sizes[row] - sizes[before]
        if step > 0.0 or (step == 0.0 and not strictly):
            return None
        return f"{name} is out of order: it does not rise from {elsewhere(table, row, before)}"

    rule = _Rule(
        column=name,
        allowed=f"{name} rising from row to row within a test",
        hint="put the rows in the order measured, or mend the number",
    )
    _follow(collection, table, codes, told, rule)


def _void_ratio_rises(collection: Collection) -> None:
    table = collection.tables["oedometer increments"]
    stress, void_ratio = table.numbers("stress"), table.numbers("void ratio")

    def told(row: int, before: int) -> str | None:
        if stress[row] <= stress[before] or void_ratio[row] <= void_ratio[before] + VOID_RATIO_RISE:
            return None
        return (
            f"the void ratio rises under load: {void_ratio[before]:g} at {stress[before]:g} kPa "
            f"({elsewhere(table, row, before)}), {void_ratio[row]:g} at {stress[row]:g} kPa"
        )

    rule = _Rule(
        column="void ratio",
        allowed=f"a void ratio that falls, or rises by no more than {VOID_RATIO_RISE:g}, as the stress grows",
        hint="mend the void ratio or the stress of one of the two rows",
    )
    _follow(collection, table, table.codes("test"), told, rule)


@dataclass(frozen=True, slots=True, kw_only=True)
class _Rule:
    column: str
    allowed: str
    hint: str


def _follow(
    collection: Collection,
    table: Table,
    codes: IntArray,
    told: Callable[[int, int], str | None],
    rule: _Rule,
) -> None:
    """Compare each row with the sound one before it in its group."""
    for group in groups(codes, table.kept()):
        before = int(group[0])
        for row in group[1:].tolist():
            message = told(row, before)
            if message is None:
                before = row
                continue
            collection.fault(table.fault(row, rule.column, message, allowed=rule.allowed, hint=rule.hint))
            table.drop(row)


def _joint(first: IntArray, second: IntArray) -> IntArray:
    """Give one number to each pair of numbers."""
    pairs = np.stack([first, second])
    return np.unique(pairs, axis=1, return_inverse=True)[1].ravel().astype(np.int64)


def _senseless(collection: Collection, table: Table) -> None:
    """Question a unit that makes the greatest number of a test absurd."""
    key = "test" if any(column.name == "test" for column in table.layout.columns) else "hole"
    for column in table.layout.columns:
        if column.typical is None:
            continue
        size = np.abs(table.numbers(column.name))
        codes = profile_codes(table, collection.names) if table.layout.name in PROFILES else table.codes(key)
        for group in groups(codes, table.kept()):
            here = size[group]
            if np.isnan(here).all():
                continue
            row = int(group[np.nanargmax(here)])
            if not column.typical[0] <= size[row] <= column.typical[1]:
                _report_senseless(collection, table, column, row, collection.names.text(int(codes[row])))
                table.drop(group)


def _report_senseless(collection: Collection, table: Table, column: Column, row: int, test: str) -> None:
    number, unit = table.written(column.name, row)
    likely = likely_unit(column, number)
    low, high = (
        bound / factor_to_sheet(column, unit or column.unit) for bound in column.typical or (0.0, 0.0)
    )
    collection.fault(
        table.fault(
            row,
            column.name,
            f'the greatest {column.name} of "{test}" is {abs(number):g} {unit}: is the unit right?',
            allowed=f"a greatest {column.name} from {low:g} to {high:g} {unit}",
            hint=f"the numbers look like {likely}; mend the unit"
            if likely
            else "mend the unit or the number",
        )
    )


def _unlike_within_profile(collection: Collection) -> None:
    cone, vane = collection.tables["cone"], collection.tables["vane"]
    ratio = np.nan_to_num(cone.numbers("area ratio"), nan=EMPTY)
    _constant(collection, cone, "area ratio", np.unique(np.append(ratio, EMPTY), return_inverse=True)[1][:-1])
    _constant(collection, vane, "corrected", vane.codes("corrected"))
    for table in (cone, vane):
        _constant(collection, table, "hole", table.codes("hole"))


def _constant(collection: Collection, table: Table, name: str, values: IntArray) -> None:
    """Ask for one value in a profile; empty cells say nothing."""
    for group in groups(profile_codes(table, collection.names), table.kept()):
        told = group[values[group] != EMPTY]
        unlike = told[values[told] != values[told[0]]] if told.size else told
        if unlike.size:
            row = int(unlike[0])
            collection.fault(
                table.fault(
                    row,
                    name,
                    f"{name} is not that of {elsewhere(table, row, int(told[0]))}, of the same profile",
                    allowed=f"one {name} throughout a profile",
                    hint="mend it, or give the profiles names in a column test",
                )
            )
            table.drop(unlike)


def _stresses_missing(collection: Collection) -> None:
    table = collection.tables["triaxial specimens"]
    for row in table.kept().tolist():
        if table.text("kind", row) == "UU":
            continue
        for name in ("axial stress", "radial stress"):
            if np.isnan(table.numbers(name)[row]):
                collection.fault(
                    table.fault(
                        row,
                        name,
                        f"{name} is missing",
                        allowed="both effective stresses at the end of consolidation, but for UU tests",
                        hint="fill it in",
                    )
                )
                table.drop(row)


def _crushed(collection: Collection) -> None:
    table, owner = collection.tables["oedometer readings"], collection.tables["oedometer specimens"]
    height = dict(zip(owner.codes("test").tolist(), owner.numbers("initial height").tolist(), strict=True))
    for group in groups(table.codes("test"), table.kept()):
        size = np.abs(table.numbers("compression")[group])
        row, tall = int(group[np.argmax(size)]), height[int(table.codes("test")[group[0]])]
        if size.max() >= tall:
            collection.fault(
                table.fault(
                    row,
                    "compression",
                    f"the specimen, {tall:g} mm high, cannot be compressed so far: is the unit right?",
                    allowed="less than the initial height",
                    hint="mend the unit or the number",
                )
            )
            table.drop(group)


def _overlapping(collection: Collection) -> None:
    table = collection.tables["strata"]
    top, base = table.numbers("top"), table.numbers("base")
    for group in groups(table.codes("hole"), table.kept()):
        end = -np.inf
        for row in group[np.argsort(top[group], kind="stable")].tolist():
            thin, over = base[row] <= top[row], top[row] < end - 1e-9
            if thin or over:
                what = (
                    "the base is not below the top"
                    if thin
                    else f"the stratum overlaps the one that ends at {end:g} m"
                )
                collection.fault(
                    table.fault(
                        row, "top", what, allowed="strata below each other", hint="mend the top or the base"
                    )
                )
                table.drop(row)
            else:
                end = float(base[row])
