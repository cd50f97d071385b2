"""A site written as CSV in the documented layout, in any unit, is read with the same numbers."""

import csv
import io
from pathlib import Path

import numpy as np
import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from probsoil.errors import Fault, SheetError
from probsoil.laboratory.columns import TableLayout
from probsoil.laboratory.layout import LAYOUTS
from probsoil.laboratory.reading import read_sheets
from probsoil.laboratory.sheets import SiteSheets
from probsoil.units import tabulated_units

BY_NAME = {layout.name: layout for layout in LAYOUTS}
BLANKS = st.sampled_from(["", " ", "\t"])
NAMES = st.text(st.characters(codec="utf-8", exclude_categories=("C", "Z")), min_size=1, max_size=12).filter(
    lambda name: not name.startswith("#") and '"' not in name
)
PRESSURES = st.sampled_from(sorted(tabulated_units("pressure")))
LENGTHS = st.sampled_from(["m", "cm", "mm", "ft"])


@st.composite
def oedometers(draw: st.DrawFn) -> tuple[dict[str, object], list[float], list[float]]:
    count = draw(st.integers(2, 12))
    steps = draw(st.lists(st.floats(0.05, 1.0), min_size=count, max_size=count))
    stress = (20.0 * np.exp(np.cumsum(steps))).clip(max=2e4).tolist()
    void_ratio = (3.0 - np.cumsum([0.2 * step for step in steps])).tolist()
    specimen = {"depth": draw(st.floats(0.0, 60.0)), "height": draw(st.floats(6.0, 100.0))}
    return specimen, stress, void_ratio


def table(layout: TableLayout, units: dict[str, str], rows: list[dict[str, object]]) -> str:
    columns = [column for column in layout.columns if any(column.name in row for row in rows)]
    text = io.StringIO()
    writer = csv.writer(text, lineterminator="\n")
    writer.writerow(
        [
            f"{column.name} ({units[column.name]})" if column.name in units else column.name
            for column in columns
        ]
    )
    writer.writerows([[row.get(column.name, "") for column in columns] for row in rows])
    return text.getvalue()


@settings(max_examples=60, deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture])
@given(tests=st.dictionaries(NAMES, oedometers(), min_size=1, max_size=4), pressure=PRESSURES, length=LENGTHS)
def test_oedometers_survive_the_way_through_a_file(
    tmp_path: Path,
    tests: dict[str, tuple[dict[str, float], list[float], list[float]]],
    pressure: str,
    length: str,
) -> None:
    kilopascals, metres = tabulated_units("pressure")[pressure], tabulated_units("length")[length]
    specimens = [
        {
            "test": name,
            "hole": f"hole of {name}",
            "depth": specimen["depth"] / metres,
            "initial void ratio": 3.0,
            "initial height": specimen["height"] / metres / 1000.0,
        }
        for name, (specimen, _, _) in tests.items()
    ]
    increments = [
        {"test": name, "increment": number, "stress": stress / kilopascals, "void ratio": void_ratio}
        for name, (_, stresses, void_ratios) in tests.items()
        for number, (stress, void_ratio) in enumerate(zip(stresses, void_ratios, strict=True), 1)
    ]
    units = {"depth": length, "initial height": length, "stress": pressure}
    for name, rows in (("oedometer specimens", specimens), ("oedometer increments", increments)):
        (tmp_path / f"{name}.csv").write_text(table(BY_NAME[name], units, rows), encoding="utf-8", newline="")
    site = read_sheets(tmp_path)
    assert [sheet.test for sheet in site.oedometers] == list(tests)
    for sheet, (specimen, stress, void_ratio) in zip(site.oedometers, tests.values(), strict=True):
        # two conversions, each correct to the last bit but one
        np.testing.assert_allclose(sheet.stress, stress, rtol=1e-14)
        np.testing.assert_array_equal(sheet.void_ratio, void_ratio)  # no unit, no conversion
        np.testing.assert_allclose([sheet.place.depth], [specimen["depth"]], rtol=1e-14)
        np.testing.assert_allclose([sheet.initial_height], [specimen["height"]], rtol=1e-14)


@settings(max_examples=40, deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture])
@given(
    blank=BLANKS,
    end=st.sampled_from(["\n", "\r\n"]),
    delimiter=st.sampled_from([",", ";", "\t"]),
    order=st.permutations(range(3)),
    comments=st.lists(st.integers(0, 8), max_size=4),
)
def test_spelling_of_a_file_makes_no_difference(
    tmp_path: Path, blank: str, end: str, delimiter: str, order: list[int], comments: list[int]
) -> None:
    cells = [["test", "hole", "depth (m)", "initial void ratio", "initial height (mm)"]]
    cells.append(["A", "B1", "2.5", "2.4", "20"])
    (tmp_path / "oedometer specimens.csv").write_text("\n".join(map(",".join, cells)), encoding="utf-8")
    rows = [["increment", "stress (kPa)", "void ratio"]]
    rows += [[str(k), str(12.5 * 2**k), str(2.3 - 0.1 * k)] for k in range(1, 7)]
    blank = "" if delimiter == "\t" else blank
    lines = [
        f"{blank}{delimiter}{blank}".join(["test" if place == 0 else "A", *(row[k] for k in order)])
        for place, row in enumerate(rows)
    ]
    for place in sorted(comments, reverse=True):
        lines.insert(place, "# by the way, nothing")
    path = tmp_path / "oedometer increments.csv"
    path.write_text(end.join(lines), encoding="utf-8", newline="")
    (sheet,) = read_sheets(tmp_path).oedometers
    assert sheet.stress.tolist() == [12.5 * 2**k for k in range(1, 7)]
    assert sheet.void_ratio.tolist() == [float(str(2.3 - 0.1 * k)) for k in range(1, 7)]


@settings(max_examples=150, deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture])
@given(junk=st.binary(max_size=400), name=st.sampled_from(["vane.csv", "site.ags", "cone.xlsx"]))
def test_any_bytes_are_answered_with_mistakes_and_not_with_a_crash(
    tmp_path: Path, junk: bytes, name: str
) -> None:
    (tmp_path / name).write_bytes(junk)
    with pytest.raises(SheetError):
        read_sheets(tmp_path / name, keep_good_rows=True)


@settings(max_examples=150, deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture])
@given(place=st.integers(0, 10_000), put=st.binary(min_size=1, max_size=3), cut=st.integers(0, 6))
def test_demo_file_with_a_slip_is_read_or_refused(tmp_path: Path, place: int, put: bytes, cut: int) -> None:
    demo = Path(__file__).parents[2] / "scenarios" / "tern_marsh" / "tern_marsh.ags"
    text = demo.read_bytes()[:12_000]
    path = tmp_path / "site.ags"
    path.write_bytes(text[:place] + put + text[place + cut :])
    faults: tuple[Fault, ...] = ()
    try:
        site = read_sheets(path)
    except SheetError as refused:
        faults = refused.faults
    else:
        assert isinstance(site, SiteSheets)
    assert all(fault.file == str(path) for fault in faults)
