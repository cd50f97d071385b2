"""From sound tables to test sheets."""

from collections.abc import Iterator
from typing import cast

import numpy as np

from probsoil._typing import FloatArray, IntArray
from probsoil.laboratory.collection import Collection
from probsoil.laboratory.grouping import groups
from probsoil.laboratory.profiles import profile_codes
from probsoil.laboratory.sheets import (
    ConeSheet,
    OedometerSheet,
    Origin,
    Place,
    SiteSheets,
    TimeReadings,
    TriaxialKind,
    TriaxialSheet,
    VaneSheet,
)
from probsoil.laboratory.tables import Table

NEAR = 1.0  # [m] within this an index test speaks for a vane test


def site_sheets(collection: Collection) -> SiteSheets:
    """Return the sheets of all rows in use; what has no readings is left out with a remark.

    Parameters
    ----------
    collection : Collection
        Checked.

    Returns
    -------
    sheets : SiteSheets
        In the order read.
    """
    ground = _Ground(collection)
    oedometers = tuple(_oedometers(collection, ground))
    triaxials = tuple(_triaxials(collection, ground))
    vanes = tuple(_vanes(collection, ground))
    cones = tuple(_cones(collection, ground))
    return SiteSheets(
        oedometers=oedometers,
        triaxials=triaxials,
        vanes=vanes,
        cones=cones,
        remarks=tuple(collection.remarks),
    )


class _Ground:
    """What the tables of the ground say of a hole and a depth."""

    def __init__(self, collection: Collection) -> None:
        holes, self._strata, self._plasticity = (
            collection.tables[name] for name in ("holes", "strata", "plasticity")
        )
        self._position = {
            holes.text("hole", row): (_known(holes.numbers("x")[row]), _known(holes.numbers("y")[row]))
            for row in holes.kept().tolist()
        }

    def place(self, hole: str, depth: float, stratum: str | None = None) -> Place:
        x, y = self._position.get(hole, (None, None))
        return Place(hole=hole, depth=depth, x=x, y=y, stratum=stratum)

    def stratum(self, hole: str, depth: float) -> str | None:
        table = self._strata
        for row in table.kept().tolist():
            top, base = table.numbers("top")[row], table.numbers("base")[row]
            if table.text("hole", row) == hole and top <= depth < base:
                return table.text("stratum", row)
        return None

    def plasticity_index(self, hole: str, depth: float) -> float:
        table = self._plasticity
        rows = [row for row in table.kept().tolist() if table.text("hole", row) == hole]
        distance = [abs(table.numbers("depth")[row] - depth) for row in rows]
        if not rows or min(distance) > NEAR:
            return float("nan")
        return float(table.numbers("plasticity index")[rows[int(np.argmin(distance))]])


def _known(number: float) -> float | None:
    return None if np.isnan(number) else float(number)


def _specimen_place(table: Table, row: int, ground: _Ground) -> Place:
    hole, depth = table.text("hole", row), float(table.numbers("depth")[row])
    return ground.place(hole, depth, table.text("stratum", row) or ground.stratum(hole, depth))


def _origin(table: Table, row: int) -> Origin:
    return Origin(file=table.file(row), row=table.line(row))


def _rows_by_test(table: Table) -> dict[int, IntArray]:
    codes = table.codes("test")
    return {int(codes[group[0]]): group for group in groups(codes, table.kept())}


def _oedometers(collection: Collection, ground: _Ground) -> Iterator[OedometerSheet]:
    table = collection.tables["oedometer specimens"]
    increments = collection.tables["oedometer increments"]
    rows_of = _rows_by_test(increments)
    readings = _time_readings(collection)
    for row in table.kept().tolist():
        code = int(table.codes("test")[row])
        rows = rows_of.get(code)
        if rows is None:
            collection.remark(
                f'{_origin(table, row)}: "{table.text("test", row)}" has no increments; left out'
            )
            continue
        timed = tuple(readings.get((code, float(number))) for number in increments.numbers("increment")[rows])
        yield OedometerSheet(
            test=table.text("test", row),
            place=_specimen_place(table, row, ground),
            origin=_origin(table, row),
            initial_void_ratio=float(table.numbers("initial void ratio")[row]),
            initial_height=float(table.numbers("initial height")[row]),
            two_way=table.text("drainage", row) != "one face",
            stress=increments.numbers("stress")[rows],
            void_ratio=increments.numbers("void ratio")[rows],
            reading_sd=_known(table.numbers("void ratio reading error")[row]) or 0.0,
            time_readings=timed if any(timed) else (),
            reported_preconsolidation=_known(table.numbers("preconsolidation stress")[row]),
            reported_cv=increments.numbers("cv")[rows],
        )


def _time_readings(collection: Collection) -> dict[tuple[int, float], TimeReadings]:
    table = collection.tables["oedometer readings"]
    time, compression = table.numbers("time"), table.numbers("compression")
    number = table.numbers("increment")
    readings = {}
    for code, rows in _rows_by_test(table).items():
        for increment in np.unique(number[rows]).tolist():
            own = rows[number[rows] == increment]
            readings[code, increment] = TimeReadings(time=time[own], compression=compression[own])
    return readings


def _triaxials(collection: Collection, ground: _Ground) -> Iterator[TriaxialSheet]:
    table, readings = collection.tables["triaxial specimens"], collection.tables["triaxial readings"]
    rows_of = _rows_by_test(readings)
    for row in table.kept().tolist():
        rows = rows_of.get(int(table.codes("test")[row]))
        if rows is None:
            collection.remark(f'{_origin(table, row)}: "{table.text("test", row)}" has no readings; left out')
            continue
        yield TriaxialSheet(
            test=table.text("test", row),
            place=_specimen_place(table, row, ground),
            origin=_origin(table, row),
            kind=cast(TriaxialKind, table.text("kind", row)),
            axial_stress=float(table.numbers("axial stress")[row]),
            radial_stress=float(table.numbers("radial stress")[row]),
            initial_void_ratio=float(table.numbers("void ratio")[row]),
            axial_strain=readings.numbers("axial strain")[rows],
            deviator=readings.numbers("deviator stress")[rows],
            pore_pressure_change=readings.numbers("pore pressure change")[rows],
            volumetric_strain=readings.numbers("volumetric strain")[rows],
        )


def _profiles(collection: Collection, name: str) -> Iterator[tuple[str, IntArray]]:
    """Name and rows of each profile, by depth, in the order read."""
    table = collection.tables[name]
    codes = profile_codes(table, collection.names)
    depth = table.numbers("depth")
    for rows in groups(codes, table.kept()):
        yield collection.names.text(int(codes[rows[0]])), rows[np.argsort(depth[rows], kind="stable")]


def _vanes(collection: Collection, ground: _Ground) -> Iterator[VaneSheet]:
    table = collection.tables["vane"]
    for test, rows in _profiles(collection, "vane"):
        first = int(rows[0])
        hole = table.text("hole", first)
        depth = table.numbers("depth")[rows]
        yield VaneSheet(
            test=test,
            place=ground.place(hole, float(depth[0])),
            origin=_origin(table, int(rows.min())),
            corrected=_corrected(table, rows),
            depth=depth,
            strength=table.numbers("strength")[rows],
            remoulded=table.numbers("remoulded strength")[rows],
            plasticity_index=_plasticity(table, rows, hole, ground),
        )


def _corrected(table: Table, rows: IntArray) -> bool | None:
    words = {table.text("corrected", row) for row in rows.tolist()}
    return True if "yes" in words else False if "no" in words else None


def _first_known(numbers: FloatArray) -> float | None:
    known = numbers[~np.isnan(numbers)]
    return float(known[0]) if known.size else None


def _plasticity(table: Table, rows: IntArray, hole: str, ground: _Ground) -> FloatArray:
    given = table.numbers("plasticity index")[rows]
    found = [ground.plasticity_index(hole, depth) for depth in table.numbers("depth")[rows].tolist()]
    return np.where(np.isnan(given), found, given)


def _cones(collection: Collection, ground: _Ground) -> Iterator[ConeSheet]:
    table = collection.tables["cone"]
    for test, rows in _profiles(collection, "cone"):
        first = int(rows[0])
        depth = table.numbers("depth")[rows]
        yield ConeSheet(
            test=test,
            place=ground.place(table.text("hole", first), float(depth[0])),
            origin=_origin(table, first),
            area_ratio=_first_known(table.numbers("area ratio")[rows]),
            depth=depth,
            cone_resistance=table.numbers("cone resistance")[rows],
            sleeve_friction=table.numbers("sleeve friction")[rows],
            pore_pressure=table.numbers("pore pressure")[rows],
        )
