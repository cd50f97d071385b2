"""Whatever stands in a sheet, interpretation ends with a value that can be used or with a reason."""

import numpy as np
from hypothesis import given, settings
from hypothesis import strategies as st

from probsoil.laboratory.ground_column import assumed_column
from probsoil.laboratory.interpretation import Choices, interpreted_site
from probsoil.laboratory.sheets import (
    ConeSheet,
    OedometerSheet,
    Origin,
    Place,
    SiteSheets,
    TimeReadings,
    TriaxialSheet,
    VaneSheet,
)
from probsoil.laboratory.time_curve import time_curve

PLACE, ORIGIN = Place(hole="B1", depth=4.0), Origin(file="made up", row=1)
SETTINGS = settings(max_examples=60, deadline=None)
loads = st.lists(
    st.floats(0.0, 3000.0) | st.sampled_from([10.0, 20.0, 40.0, 80.0, 160.0, np.nan]), max_size=14
)


def columns(seed: int, n: int, low: float, high: float) -> np.ndarray:
    rng = np.random.default_rng(seed)
    values = rng.uniform(low, high, n)
    return np.where(rng.uniform(size=n) < 0.1, np.nan, values)


def usable(site: SiteSheets) -> None:
    done = interpreted_site(site, choices=Choices(unit_weight=16.0, water_table=1.0, vane_corrected=False))
    for one in done.observations:
        assert np.isfinite(one.value)
        assert one.value > 0.0
        assert one.standard_error is None or (np.isfinite(one.standard_error) and one.standard_error > 0.0)
    assert done.evidence().count("nan") == 0


@SETTINGS
@given(loads, st.integers(0, 2**32 - 1), st.booleans())
def test_any_oedometer_sheet(stress: list[float], seed: int, falling: bool) -> None:
    void_ratio = columns(seed, len(stress), 0.3, 2.0)
    if falling:
        void_ratio = 2.1 - 0.1 * np.log1p(np.nan_to_num(np.array(stress, dtype=float)))
    times = np.array([0.0, 0.1, 0.25, 0.5, 1.0, 2.0, 4.0, 8.0, 15.0, 30.0, 60.0, 120.0, 240.0, 480.0, 1440.0])
    rng = np.random.default_rng(seed)
    readings = tuple(
        TimeReadings(time=times, compression=np.cumsum(rng.uniform(-0.01, 0.1, times.size))) for _ in stress
    )
    sheet = OedometerSheet(
        test="O1",
        place=PLACE,
        origin=ORIGIN,
        initial_void_ratio=2.1,
        initial_height=20.0,
        stress=np.array(stress, dtype=float),
        void_ratio=void_ratio,
        reported_cv=np.full(len(stress), np.nan),
        time_readings=readings,
    )
    usable(SiteSheets(oedometers=(sheet,)))


@SETTINGS
@given(st.integers(0, 2**32 - 1), st.integers(0, 20), st.booleans())
def test_any_readings_in_time(seed: int, n: int, rising: bool) -> None:
    rng = np.random.default_rng(seed)
    time = rng.uniform(0.0, 2000.0, n)
    found = time_curve(
        TimeReadings(time=np.sort(time) if rising else time, compression=columns(seed + 1, n, -0.1, 2.0)),
        10.0,
    )
    assert found.cv is not None or found.remarks
    for one in (found.cv, found.cv_log_time, found.cv_root_time, found.creep):
        assert one is None or (one.value > 0.0 and np.isfinite(one.standard_error))


@SETTINGS
@given(
    st.integers(0, 2**32 - 1),
    st.integers(0, 15),
    st.sampled_from(["CIUC", "CAUC", "CIUE", "CAUE", "CIDC", "CADC", "UU"]),
)
def test_any_triaxial_sheet(seed: int, n: int, kind: str) -> None:
    sheet = TriaxialSheet(
        test="T1",
        place=PLACE,
        origin=ORIGIN,
        kind=kind,  # type: ignore[arg-type]
        axial_stress=float(columns(seed, 1, 1.0, 200.0)[0]),
        radial_stress=60.0,
        initial_void_ratio=np.nan,
        axial_strain=np.sort(columns(seed + 1, n, 0.0, 0.2)),
        deviator=columns(seed + 2, n, -100.0, 200.0),
        pore_pressure_change=columns(seed + 3, n, -20.0, 100.0),
        volumetric_strain=np.full(n, np.nan),
    )
    usable(SiteSheets(triaxials=(sheet,)))


@SETTINGS
@given(st.integers(0, 2**32 - 1), st.integers(1, 60))
def test_any_profile(seed: int, n: int) -> None:
    depth = np.sort(np.random.default_rng(seed).uniform(0.0, 20.0, n))
    cone = ConeSheet(
        test="C1",
        place=PLACE,
        origin=ORIGIN,
        area_ratio=None,
        depth=depth,
        cone_resistance=columns(seed, n, 0.0, 2000.0),
        sleeve_friction=np.full(n, np.nan),
        pore_pressure=columns(seed + 1, n, -20.0, 500.0),
    )
    vane = VaneSheet(
        test="V1",
        place=PLACE,
        origin=ORIGIN,
        corrected=None,
        depth=depth,
        strength=columns(seed + 2, n, 0.5, 80.0),
        remoulded=columns(seed + 3, n, 0.0, 20.0),
        plasticity_index=columns(seed + 4, n, 1.0, 200.0),
    )
    usable(SiteSheets(cones=(cone,), vanes=(vane,)))
    assert assumed_column(16.0, 1.0).stress_at(4.0) is not None
