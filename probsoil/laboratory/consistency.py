"""Related columns that contradict each other: a mistake where that is certain, a remark where it is likely.

What is compared is bound by definition or by equilibrium, so that a slip of unit, sign or reference shows:
the deviator at the start of shear with the consolidation stresses, pore pressures with the effective stress
they leave, void ratios with the initial one, and the dial with the change of void ratio.
"""

from collections.abc import Iterator
from dataclasses import dataclass

import numpy as np

from probsoil._typing import IntArray
from probsoil.laboratory.collection import Collection
from probsoil.laboratory.grouping import groups
from probsoil.laboratory.tables import Table

NO_STRAIN = 1e-4  # [-] up to this axial strain a reading is of the start of shear
CERTAIN = (4.0, 0.1)  # [kPa] and [-] of the axial stress: beyond both a difference is no reading error
DOUBTFUL = (3.0, 0.05)  # [kPa] and [-] of the axial stress
VOID_RATIO_CERTAIN = (0.1, 1.5)  # [-] of the initial one at the first increment; outside, the units differ
SWELLING = 0.02  # [-] of the initial specific volume at the first increment, beyond which it is asked about
LIGHT_LOAD = 100.0  # [kPa] up to which the first increment hardly takes
GREATEST_LOSS = 0.4  # [-] of the void ratio
LEAST_COMPRESSION = 0.1  # [mm] by the void ratios; less is not compared with the dial
DIAL_CERTAIN = 1.5  # [-] times the compression by the void ratios; readings may stop early but not go beyond
DIAL_DOUBTFUL = (0.6, 1.2)
USUAL_TIME = (30.0, 14 * 1440.0)  # [min] for which an increment stands, between quick tests and long creep


@dataclass(frozen=True, slots=True, kw_only=True)
class _Shear:
    """One triaxial test: its row among the specimens, its readings, and the stresses they start from."""

    specimen: int
    rows: IntArray
    test: str
    kind: str
    axial: float
    radial: float

    @property
    def start(self) -> float:
        """Deviator at the end of consolidation [kPa]."""
        return self.axial - self.radial

    def beyond(self, difference: float, bounds: tuple[float, float]) -> bool:
        return difference > max(bounds[0], bounds[1] * self.axial)


def check_related_columns(collection: Collection) -> None:
    """Find columns that contradict each other, and drop the tests in which that is certainly a mistake.

    Parameters
    ----------
    collection : Collection
        Checked within tests.
    """
    for check in (_kind_and_stresses, _start_of_shear, _start_of_pore_pressure, _effective_stress, _sign):
        for shear in _shears(collection):
            check(collection, shear)
    _first_void_ratio(collection)
    _dial_and_void_ratio(collection)
    _time_stood(collection)


def _shears(collection: Collection) -> Iterator[_Shear]:
    table, readings = collection.tables["triaxial specimens"], collection.tables["triaxial readings"]
    codes = readings.codes("test")
    row_of = {int(table.codes("test")[row]): row for row in table.kept().tolist()}
    for rows in groups(codes, readings.kept()):
        specimen = row_of.get(int(codes[rows[0]]))
        if specimen is None or table.text("kind", specimen) == "UU":
            continue
        yield _Shear(
            specimen=specimen,
            rows=rows,
            test=table.text("test", specimen),
            kind=table.text("kind", specimen),
            axial=float(table.numbers("axial stress")[specimen]),
            radial=float(table.numbers("radial stress")[specimen]),
        )


def _asked(collection: Collection, table: Table, row: int, words: str) -> None:
    collection.remark(f"{table.file(row)}, row {table.line(row)}: {words}")


def _kind_and_stresses(collection: Collection, shear: _Shear) -> None:
    if shear.kind.startswith("CI") and shear.beyond(abs(shear.start), DOUBTFUL):
        _asked(
            collection,
            collection.tables["triaxial specimens"],
            shear.specimen,
            f'"{shear.test}" is consolidated isotropically by its kind, {shear.kind}, but under '
            f"{shear.axial:g} and "
            f"{shear.radial:g} kPa by its stresses: is the kind right?",
        )


def _start_of_shear(collection: Collection, shear: _Shear) -> None:
    table, first = collection.tables["triaxial readings"], int(shear.rows[0])
    deviator, strain = float(table.numbers("deviator stress")[first]), table.numbers("axial strain")[first]
    short = abs(deviator - shear.start)
    told = (
        f'"{shear.test}" has a first deviator stress of {deviator:g} kPa, but axial less radial '
        "stress at the end of "
        f"consolidation is {shear.start:g} kPa"
    )
    if shear.rows.size == 1:  # the state at failure alone
        return
    if abs(strain) > NO_STRAIN:
        behind = shear.start - deviator if shear.kind.endswith("C") else deviator - shear.start
        if shear.beyond(behind, DOUBTFUL):
            _asked(collection, table, first, f"{told}: is it counted from the start of shear?")
    elif shear.beyond(short, CERTAIN):
        collection.fault(
            table.fault(
                first,
                "deviator stress",
                told,
                allowed="axial less radial stress, at no strain that at the end of consolidation",
                hint=f"if it is counted from the start of shear, add {shear.start:g} kPa to every "
                "reading; else mend "
                "the stresses of the specimen",
            )
        )
        table.drop(shear.rows)
    elif shear.beyond(short, DOUBTFUL):
        _asked(collection, table, first, told)


def _start_of_pore_pressure(collection: Collection, shear: _Shear) -> None:
    table, first = collection.tables["triaxial readings"], int(shear.rows[0])
    pressure = float(table.numbers("pore pressure change")[first])
    at_start = shear.rows.size > 1 and abs(table.numbers("axial strain")[first]) <= NO_STRAIN
    if "U" in shear.kind and at_start and shear.beyond(abs(pressure), CERTAIN):
        collection.fault(
            table.fault(
                first,
                "pore pressure change",
                f'the pore pressure of "{shear.test}" has changed by {pressure:g} kPa before any strain',
                allowed="the change from the start of shear, none at no strain",
                hint=f"take the back pressure off: {pressure:g} kPa less in every reading",
            )
        )
        table.drop(shear.rows)


def _effective_stress(collection: Collection, shear: _Shear) -> None:
    table = collection.tables["triaxial readings"]
    pore = table.numbers("pore pressure change")[shear.rows] if "U" in shear.kind else 0.0
    deviator = table.numbers("deviator stress")[shear.rows]
    mean = (shear.axial + 2.0 * shear.radial + deviator - shear.start) / 3.0 - pore
    gone = np.isfinite(mean) & (mean <= 0.0)
    if not gone.any():
        return
    row = int(shear.rows[np.argmax(gone)])
    if gone.sum() < np.isfinite(mean).sum():
        _asked(
            collection,
            table,
            row,
            f'readings of "{shear.test}" leave no mean effective stress ({int(gone.sum())} of '
            f"{gone.size}): are the "
            "pore pressures right?",
        )
        return
    drained = "U" not in shear.kind
    collection.fault(
        table.fault(
            row,
            "deviator stress" if drained else "pore pressure change",
            f'no reading of "{shear.test}" leaves a mean effective stress above 0 kPa',
            allowed="less than the mean total stress above that of the start",
            hint="mend the stresses" if drained else "is the back pressure in it? give the change alone",
        )
    )
    table.drop(shear.rows)


def _sign(collection: Collection, shear: _Shear) -> None:
    """Question water that is sucked in from the first reading: even stiff clay first pushes it out."""
    table = collection.tables["triaxial readings"]
    pore = table.numbers("pore pressure change")[shear.rows]
    pore = pore[np.isfinite(pore)]
    if not shear.kind.endswith("UC") or pore.size < 3 or pore.max() > 1.0:
        return
    if shear.beyond(-float(pore.min()), DOUBTFUL):
        _asked(
            collection,
            table,
            int(shear.rows[0]),
            f'the pore pressure of "{shear.test}" falls in compression from its first reading, to '
            f"{pore.min():g} kPa: "
            "is its sign reversed?",
        )


def _row_by_test(table: Table) -> dict[int, int]:
    return {int(table.codes("test")[row]): row for row in table.kept().tolist()}


def _first_void_ratio(collection: Collection) -> None:
    owner, table = collection.tables["oedometer specimens"], collection.tables["oedometer increments"]
    row_of, codes, void_ratio = _row_by_test(owner), table.codes("test"), table.numbers("void ratio")
    for rows in groups(codes, table.kept()):
        first = int(rows[0])
        specimen = row_of.get(int(codes[first]))
        if specimen is None:
            continue
        initial, found = float(owner.numbers("initial void ratio")[specimen]), float(void_ratio[first])
        told = (
            f'the first increment of "{table.text("test", first)}" has a void ratio of {found:g}, but it was '
            f"{initial:g} before loading"
        )
        if not VOID_RATIO_CERTAIN[0] <= found / initial <= VOID_RATIO_CERTAIN[1]:
            collection.fault(
                table.fault(
                    first,
                    "void ratio",
                    told,
                    allowed="void ratios in the unit of the initial void ratio",
                    hint="is one of the two in %? mend the unit in its heading",
                )
            )
            table.drop(rows)
        elif found > initial + SWELLING * (1.0 + initial) or (
            table.numbers("stress")[first] <= LIGHT_LOAD and found < (1.0 - GREATEST_LOSS) * initial
        ):
            _asked(collection, table, first, f"{told}: are both right?")


def _dial_and_void_ratio(collection: Collection) -> None:
    table = collection.tables["oedometer readings"]
    expected, codes = _compressions(collection), table.codes("test")
    number, dial = table.numbers("increment"), table.numbers("compression")
    for rows in groups(codes, table.kept()):
        ends = rows[np.append(np.flatnonzero(np.diff(number[rows])), rows.size - 1)]
        compared = [
            (abs(dial[row] / by_void_ratio), row, by_void_ratio)
            for row in ends.tolist()
            if abs(by_void_ratio := expected.get((int(codes[row]), float(number[row])), 0.0))
            >= LEAST_COMPRESSION
        ]
        if compared:
            # one increment may have its own story; the middle one speaks for the test
            _compare(collection, rows, *sorted(compared)[len(compared) // 2])


def _compressions(collection: Collection) -> dict[tuple[int, float], float]:
    """Compression of each increment by the void ratios [mm], where the one before it is known."""
    owner, table = collection.tables["oedometer specimens"], collection.tables["oedometer increments"]
    row_of, codes = _row_by_test(owner), table.codes("test")
    number, void_ratio = table.numbers("increment"), table.numbers("void ratio")
    found = {}
    for rows in groups(codes, table.kept()):
        code = int(codes[rows[0]])
        if code not in row_of:
            continue
        initial = float(owner.numbers("initial void ratio")[row_of[code]])
        solids = float(owner.numbers("initial height")[row_of[code]]) / (1.0 + initial)
        before = (0.0, initial)
        for row in rows.tolist():
            now = (float(number[row]), float(void_ratio[row]))
            if now[0] == before[0] + 1.0:
                found[code, now[0]] = (before[1] - now[1]) * solids
            before = now
    return found


def _compare(collection: Collection, rows: IntArray, ratio: float, row: int, by_void_ratio: float) -> None:
    table = collection.tables["oedometer readings"]
    told = (
        f'increment {table.numbers("increment")[row]:g} of "{table.text("test", row)}" compresses the '
        "specimen by "
        f"{abs(table.numbers('compression')[row]):.3g} mm by the dial, but by "
        f"{abs(by_void_ratio):.3g} mm by its "
        "void ratios"
    )
    if ratio > DIAL_CERTAIN:
        collection.fault(
            table.fault(
                row,
                "compression",
                told,
                allowed="the change of void ratio times initial height over 1 + initial void ratio",
                hint="is the compression in mm and since the reading before the increment? are "
                "height and void "
                "ratios right?",
            )
        )
        table.drop(rows)
    elif not DIAL_DOUBTFUL[0] <= ratio <= DIAL_DOUBTFUL[1]:
        _asked(collection, table, row, f"{told}: are both right?")


def _time_stood(collection: Collection) -> None:
    table = collection.tables["oedometer readings"]
    codes, number, time = table.codes("test"), table.numbers("increment"), table.numbers("time")
    for rows in groups(codes, table.kept()):
        longest = [float(time[rows[number[rows] == one]].max()) for one in np.unique(number[rows])]
        usual = float(np.median(longest))
        if not USUAL_TIME[0] <= usual <= USUAL_TIME[1]:
            _asked(
                collection,
                table,
                int(rows[0]),
                f'increments of "{table.text("test", int(rows[0]))}" are read for {usual:.3g} min: is '
                "the unit of "
                "time right?",
            )
