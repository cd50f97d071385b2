"""The demo site: its files are what the generator writes, and CSV and AGS4 tell the same of each test."""

import numpy as np
import pytest
from marsh_ags import ags_file
from marsh_files import FOLDER, csv_files
from marsh_truth import OEDOMETERS, TRIAXIALS, VANES

from probsoil.laboratory.reading import read_sheets
from probsoil.laboratory.sheets import OedometerSheet, SiteSheets, TriaxialSheet, VaneSheet


@pytest.fixture(scope="module")
def from_csv() -> SiteSheets:
    return read_sheets(FOLDER / "sheets")


@pytest.fixture(scope="module")
def from_ags() -> SiteSheets:
    return read_sheets(FOLDER / "tern_marsh.ags")


def test_files_are_what_the_generator_writes() -> None:
    for name, text in csv_files().items():
        assert (FOLDER / "sheets" / name).read_bytes().decode() == text, name
    assert (FOLDER / "tern_marsh.ags").read_bytes().decode() == ags_file()


def test_site_is_as_large_as_a_small_investigation(from_csv: SiteSheets) -> None:
    assert from_csv.remarks == ()
    counts = [len(kind) for kind in (from_csv.oedometers, from_csv.triaxials, from_csv.vanes, from_csv.cones)]
    assert counts == [len(OEDOMETERS), len(TRIAXIALS), len(VANES), 2] == [12, 6, 3, 2]
    assert sum(any(sheet.time_readings) for sheet in from_csv.oedometers) == 5
    assert sum(path.stat().st_size for path in FOLDER.rglob("*.*") if path.is_file()) < 400_000


def test_every_oedometer_has_a_loop_and_ends_in_unloading(from_csv: SiteSheets) -> None:
    for sheet in from_csv.oedometers:
        assert np.diff(np.sign(np.diff(sheet.stress))).tolist().count(-2.0) == 2  # turned back twice
        assert sheet.stress[-1] < sheet.stress.max() == 800.0
        assert sheet.place.stratum in ("crust", "soft clay", "lower clay")
        assert sheet.place.x is not None


def test_last_reading_in_time_is_the_void_ratio_of_the_increment(from_csv: SiteSheets) -> None:
    for sheet in from_csv.oedometers:
        before = np.concatenate([[sheet.initial_void_ratio], sheet.void_ratio[:-1]])
        for place, timed in enumerate(sheet.time_readings):
            if timed is not None:
                whole = (before[place] - sheet.void_ratio[place]) / (1.0 + sheet.initial_void_ratio) * 20.0
                assert timed.compression[-1] == pytest.approx(whole, abs=0.0005)  # printed to 0.001 mm


def test_ags_file_holds_the_same_oedometers(from_csv: SiteSheets, from_ags: SiteSheets) -> None:
    def told(sheet: OedometerSheet) -> tuple[object, ...]:
        curve = (sheet.stress.tolist(), sheet.void_ratio.tolist(), sheet.initial_void_ratio)
        return sheet.place, curve, np.nan_to_num(sheet.reported_cv).tolist(), sheet.initial_height

    assert [told(sheet) for sheet in from_ags.oedometers] == [told(sheet) for sheet in from_csv.oedometers]


def test_ags_file_holds_the_failure_of_the_same_triaxial_tests(
    from_csv: SiteSheets, from_ags: SiteSheets
) -> None:
    def told(sheet: TriaxialSheet) -> tuple[object, ...]:
        return sheet.place, sheet.kind, sheet.axial_stress, sheet.radial_stress

    assert [told(sheet) for sheet in from_ags.triaxials] == [told(sheet) for sheet in from_csv.triaxials]
    for short, full in zip(from_ags.triaxials, from_csv.triaxials, strict=True):
        top = int(np.argmax(full.deviator))
        assert short.deviator[0] == pytest.approx(full.deviator[top], abs=0.5)  # printed to 1 kPa
        assert short.pore_pressure_change[0] == pytest.approx(full.pore_pressure_change[top], abs=0.5)
        assert short.axial_strain[0] == pytest.approx(full.axial_strain[top], abs=0.0005)  # to 0.1 %


def test_ags_file_holds_the_same_field_tests(from_csv: SiteSheets, from_ags: SiteSheets) -> None:
    def told(sheet: VaneSheet) -> tuple[object, ...]:
        columns = (sheet.depth, sheet.strength, sheet.remoulded, sheet.plasticity_index)
        return sheet.place, sheet.corrected, [np.nan_to_num(column, nan=-1.0).tolist() for column in columns]

    assert [told(sheet) for sheet in from_ags.vanes] == [told(sheet) for sheet in from_csv.vanes]
    for one, other in zip(from_ags.cones, from_csv.cones, strict=True):
        assert (one.place, one.area_ratio) == (other.place, other.area_ratio)
        for name in ("depth", "cone_resistance", "sleeve_friction", "pore_pressure"):
            np.testing.assert_allclose(getattr(one, name), getattr(other, name), rtol=1e-12)


def test_ags_file_is_read_with_remarks_on_nothing_but_what_it_leaves_out(from_ags: SiteSheets) -> None:
    assert from_ags.remarks == ()
