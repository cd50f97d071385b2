"""One element of Modified Cam clay: against rate equations integrated by scipy, closed forms and laws."""

import numpy as np
import pytest
from element_twin import Clay, drained_to_yield, run, softened

from probsoil.errors import ParameterError, ShapeError
from probsoil.ground.cam_clay import (
    CamClay,
    ClayState,
    consolidated_state,
    ellipse_excess,
    isotropic_state,
)
from probsoil.ground.element_paths import (
    earth_pressure_at_rest,
    elastic_slope,
    oedometer_path,
    state_at_rest,
    triaxial_path,
)
from probsoil.ground.undrained_strength import normally_consolidated_strength_ratio

N = 30
STATED = 1e-6  # of the greatest stress: the error the functions state
STRAIN = np.array([0.0, 1e-4, 1e-3, 0.005, 0.01, 0.02, 0.05, 0.1, 0.15, 0.2])


def random_clays() -> CamClay:
    rng = np.random.default_rng(5)
    lam = rng.uniform(0.08, 0.6, N)
    return CamClay(
        lam=lam,
        kap=lam * rng.uniform(0.05, 0.45, N),
        m=rng.uniform(0.7, 1.5, N),
        m_extension=rng.uniform(0.5, 1.1, N),
        poisson=rng.uniform(0.05, 0.4, N),
    )


def random_states(clay: CamClay) -> ClayState:
    """Half wet, half dry of critical, isotropic and not, on the ellipse and inside."""
    rng = np.random.default_rng(6)
    over = np.where(np.arange(N) % 2, rng.uniform(2.5, 20.0, N), rng.uniform(1.0, 2.0, N))
    size = rng.uniform(50.0, 400.0, N)
    over[::6] = 1.0
    mean = size / over
    reach = np.sqrt(mean * (size - mean))
    place = rng.uniform(-0.9, 0.9, N)
    m = np.where(place < 0.0, clay.m_extension, clay.m)
    deviator = np.clip(place * m * reach, -1.3 * mean, 2.6 * mean)
    return ClayState(
        mean_stress=mean, deviator=deviator, void_ratio=rng.uniform(0.8, 3.0, N), yield_size=size
    )


CLAYS = random_clays()
STATES = random_states(CLAYS)


def one_clay(i: int) -> Clay:
    return Clay(*(float(x[i]) for x in (CLAYS.lam, CLAYS.kap, CLAYS.m, CLAYS.m_extension, CLAYS.poisson)))


def one_state(i: int) -> np.ndarray:
    return np.array(
        [STATES.mean_stress[i], STATES.deviator[i], 1.0 + STATES.void_ratio[i], STATES.yield_size[i]]
    )


def compare(path, twin: np.ndarray, i: int) -> None:
    scale = max(twin[:, 0].max(), np.abs(twin[:, 1]).max())
    for column, name in ((0, "mean_stress"), (1, "deviator"), (3, "yield_size")):
        np.testing.assert_allclose(getattr(path, name)[i], twin[:, column], rtol=0.0, atol=STATED * scale)
    np.testing.assert_allclose(path.void_ratio[i], twin[:, 2] - 1.0, rtol=0.0, atol=STATED)


@pytest.mark.parametrize("sign", [1.0, -1.0], ids=["compression", "extension"])
@pytest.mark.parametrize("kind", ["drained", "undrained"])
def test_triaxial_paths_are_those_of_the_rate_equations(kind: str, sign: float) -> None:
    answer = triaxial_path(CLAYS, STATES, sign * STRAIN, drained=kind == "drained")
    assert answer.dry.any()
    assert not answer.dry.all()
    for i in np.flatnonzero(~answer.jumps):
        twin = run(one_clay(i), kind, one_state(i), np.log1p(-sign * STRAIN) * -1.0)
        compare(answer, twin, i)


def test_where_softening_outruns_the_strain_the_element_jumps_to_the_branch_beyond() -> None:
    answer = triaxial_path(CLAYS, STATES, STRAIN, drained=True)
    jumping = np.flatnonzero(answer.jumps)
    assert jumping.size >= 3
    assert answer.dry[jumping].all()
    target = -np.log1p(-STRAIN)
    for i in jumping:
        peak, strain = drained_to_yield(one_clay(i), one_state(i))
        after = target > strain
        beyond = softened(one_clay(i), peak, strain, target[after])
        before = run(one_clay(i), "drained", one_state(i), target[~after])
        compare(answer, np.concatenate([before, beyond]), i)


@pytest.mark.parametrize("towards", [4.0, 0.3], ids=["loading", "unloading"])
def test_one_dimensional_paths_are_those_of_the_rate_equations(towards: float) -> None:
    start = STATES.axial_stress
    for i in range(N):
        steps = start[i] * np.geomspace(1.0, towards, 7)[1:]
        clay = CamClay(
            lam=CLAYS.lam[i : i + 1],
            kap=CLAYS.kap[i : i + 1],
            m=CLAYS.m[i : i + 1],
            m_extension=CLAYS.m_extension[i : i + 1],
            poisson=CLAYS.poisson[i : i + 1],
        )
        p, q, v, size = one_state(i)
        state = ClayState(mean_stress=[p], deviator=[q], void_ratio=[v - 1.0], yield_size=[size])
        answer = oedometer_path(clay, state, steps)
        compare(answer, run(one_clay(i), "oedometer", one_state(i), steps), 0)


def clay_of(n: int = 1, *, lam: float = 0.25, kap: float = 0.05, m: float = 0.9, **more: float) -> CamClay:
    return CamClay(lam=np.full(n, lam), kap=np.full(n, kap), m=np.full(n, m), **more)


PATHS = {
    "undrained compression": lambda clay, state: triaxial_path(clay, state, STRAIN, drained=False),
    "drained extension": lambda clay, state: triaxial_path(clay, state, -STRAIN, drained=True),
    "drained compression": lambda clay, state: triaxial_path(clay, state, STRAIN, drained=True),
    "oedometer": lambda clay, state: oedometer_path(
        clay, state, [20.0, 80.0, 700.0, 900.0, 100.0, 30.0, 1200.0]
    ),
}
COLUMNS = (
    "mean_stress",
    "deviator",
    "yield_size",
    "void_ratio",
    "axial_strain",
    "volumetric_strain",
    "dry",
    "jumps",
)


def chosen(rows: np.ndarray) -> tuple[CamClay, ClayState]:
    clay = CamClay(
        **{name: getattr(CLAYS, name)[rows] for name in ("lam", "kap", "m", "m_extension", "poisson")}
    )
    names = ("mean_stress", "deviator", "void_ratio", "yield_size")
    return clay, ClayState(**{name: getattr(STATES, name)[rows] for name in names})


@pytest.mark.parametrize("path", PATHS)
def test_a_realisation_gives_the_same_bits_alone_and_in_a_batch(path: str) -> None:
    together = PATHS[path](CLAYS, STATES)
    for rows in (np.array([3]), np.array([17, 4]), np.arange(5, 12), np.arange(N)[::-1]):
        apart = PATHS[path](*chosen(rows))
        for name in COLUMNS:
            np.testing.assert_array_equal(getattr(apart, name), getattr(together, name)[rows])


@pytest.mark.parametrize("path", PATHS)
def test_the_state_never_leaves_the_ellipse(path: str) -> None:
    answer = PATHS[path](CLAYS, STATES)
    through = answer.mean_stress * CLAYS.ellipse_ratio(answer.deviator / answer.mean_stress)
    assert (through <= answer.yield_size * (1.0 + 1e-9)).all()


@pytest.mark.parametrize("path", PATHS)
def test_the_ellipse_grows_wet_of_critical_and_shrinks_dry_of_it(path: str) -> None:
    answer = PATHS[path](CLAYS, STATES)
    size, mean, deviator = (
        np.concatenate([getattr(STATES, name)[:, None], getattr(answer, name)], axis=1)
        for name in ("yield_size", "mean_stress", "deviator")
    )
    growth = np.diff(np.log(size), axis=1)
    share = np.abs(deviator / mean) / CLAYS.slope(deviator)
    wet, dry = share < 1.0 - 1e-6, share > 1.0 + 1e-6
    assert (growth[wet[:, 1:] & wet[:, :-1]] >= -1e-9).all()
    assert (growth[dry[:, 1:] & dry[:, :-1]] <= 1e-9).all()
    assert (growth < -1e-3).any()
    assert (growth > 1e-3).any()


def test_undrained_shear_keeps_the_volume() -> None:
    answer = triaxial_path(CLAYS, STATES, STRAIN, drained=False)
    np.testing.assert_allclose(answer.void_ratio, STATES.void_ratio[:, None] + 0.0 * STRAIN, rtol=1e-14)


def exact_strain(
    ratio: np.ndarray, *, clay: tuple[float, float, float], volume: float, g: float
) -> np.ndarray:
    """Antiderivative of the undrained axial strain after yielding over q/p', in closed form."""
    lam, kap, m = clay
    share = 1.0 - kap / lam
    plastic = share * (np.log(np.abs((m + ratio) / (m - ratio))) - 2.0 * np.arctan(ratio / m)) / m
    elastic = ((1.0 - 2.0 * share) * ratio + 2.0 * share * m * np.arctan(ratio / m)) / (3.0 * g)
    return kap / volume * (plastic + elastic)


def worst_strain(over: float, n_panel: int) -> float:
    """Greatest difference from the closed form, as axial strain, of the undrained path from p' = 100 kPa."""
    lam, kap, m = 0.25, 0.05, 0.9
    clay = clay_of()
    state = isotropic_state(clay, 100.0, over, 1.2)
    g = float(clay.shear_to_bulk[0])
    at_yield = m * np.sqrt(over - 1.0)
    yield_strain = at_yield * 100.0 / (3.0 * g * 2.2 * 100.0 / kap)
    strain = -np.expm1(-yield_strain - np.linspace(0.001, 0.15, 30))
    path = triaxial_path(clay, state, strain, drained=False, n_panel=n_panel)
    ratio = (path.deviator / path.mean_stress)[0]
    form = {"clay": (lam, kap, m), "volume": 2.2, "g": g}
    since = exact_strain(ratio, **form) - exact_strain(np.array(at_yield), **form)
    return float(np.abs(yield_strain + since + np.log1p(-strain)).max())


@pytest.mark.parametrize("over", [1.0, 1.4, 4.0, 25.0])
def test_undrained_strain_is_the_closed_form(over: float) -> None:
    assert worst_strain(over, 80) < 1e-9


@pytest.mark.parametrize("over", [1.4, 4.0])
def test_the_error_falls_with_the_sixth_power_of_the_panels(over: float) -> None:
    coarse, fine = worst_strain(over, 20), worst_strain(over, 40)
    assert coarse > 1e-10  # there is an error to fall
    assert np.log2(coarse / fine) > 5.5


def test_a_path_in_two_parts_is_the_path_in_one() -> None:
    clay = clay_of(2)
    state = isotropic_state(clay, [100.0, 40.0], [1.0, 6.0], 1.2)
    whole = oedometer_path(clay, state, [150.0, 300.0, 600.0])
    first = oedometer_path(clay, state, [150.0, 300.0])
    second = oedometer_path(clay, first.last_state(), [600.0])
    np.testing.assert_allclose(second.mean_stress[:, 0], whole.mean_stress[:, 2], rtol=1e-9)
    np.testing.assert_allclose(second.void_ratio[:, 0], whole.void_ratio[:, 2], rtol=1e-9)


def test_stress_is_driven_in_any_order_and_repeated() -> None:
    clay = clay_of()
    state = state_at_rest(clay, 10.0, 100.0, 1.2)
    order = [20.0, 20.0, 150.0, 60.0, 60.0, 150.0, 300.0]
    path = oedometer_path(clay, state, order)
    np.testing.assert_allclose(path.axial_stress[0], order, rtol=1e-9)
    assert path.void_ratio[0, 0] == pytest.approx(path.void_ratio[0, 1], abs=1e-12)
    assert path.void_ratio[0, 2] == pytest.approx(path.void_ratio[0, 5], abs=1e-9)  # back on the elastic line


def test_a_specimen_loaded_again_at_rest_yields_at_the_preconsolidation_stress() -> None:
    clay = clay_of()
    state = state_at_rest(clay, 25.0, 100.0, 1.2)
    path = oedometer_path(clay, state, [50.0, 99.9, 100.1, 200.0])
    size = path.yield_size[0] / state.yield_size[0]
    assert size[1] == pytest.approx(1.0, abs=1e-12)
    assert size[2] == pytest.approx(1.001, rel=1e-6)
    assert size[3] == pytest.approx(2.0, rel=1e-6)


def test_unloaded_far_the_specimen_yields_in_extension_and_softens() -> None:
    clay = clay_of()
    state = state_at_rest(clay, 5.0, 100.0, 1.2)
    assert state.deviator[0] < 0.0
    assert ellipse_excess(clay, state)[0] == pytest.approx(0.0, abs=1e-9)
    fresh = state_at_rest(clay, 50.0, 100.0, 1.2)
    assert state.yield_size[0] < fresh.yield_size[0]


def test_without_overconsolidation_the_specimen_is_on_the_line_at_rest() -> None:
    clay = clay_of()
    state = state_at_rest(clay, 80.0, 20.0, 1.2)
    assert state.radial_stress[0] / state.axial_stress[0] == pytest.approx(earth_pressure_at_rest(clay)[0])
    assert ellipse_excess(clay, state)[0] == pytest.approx(0.0, abs=1e-12)


def test_where_the_radial_stress_would_vanish_there_is_no_answer_and_others_go_on() -> None:
    clay = CamClay(lam=[0.2, 0.2], kap=[0.01, 0.04], m=[1.4, 1.0], poisson=[0.45, 0.3])
    state = state_at_rest(clay, [1e-3, 20.0], 500.0, 1.0)
    assert np.isnan(state.mean_stress[0])
    assert state.mean_stress[1] > 0.0
    path = oedometer_path(clay, state, [30.0, 600.0, 20.0])
    assert np.isnan(path.void_ratio[0]).all()
    assert np.isfinite(path.void_ratio[1]).all()


def test_the_slope_of_one_dimensional_swelling_is_the_one_asked_for() -> None:
    swelling, lam = np.array([0.03, 0.05, 0.1, 0.02]), np.array([0.25, 0.3, 0.3, 0.6])
    kap = elastic_slope(swelling, lam, [0.9, 1.2, 1.0, 1.3])
    assert (kap > swelling).all()
    clay = CamClay(lam=lam, kap=kap, m=[0.9, 1.2, 1.0, 1.3])
    path = oedometer_path(clay, state_at_rest(clay, 100.0, 100.0, 1.5), [25.0])
    np.testing.assert_allclose((path.void_ratio[:, 0] - 1.5) / np.log(4.0), swelling, rtol=1e-9)


def test_no_kappa_below_lambda_gives_too_steep_a_swelling() -> None:
    assert np.isnan(elastic_slope([0.28], [0.3], [1.0])).all()


def test_history_at_rest_gives_the_strength_of_the_forecast() -> None:
    """With Jaky's ratio: Wroth's ratio for K0-consolidated clay, which the forecast uses."""
    clay = clay_of(m=0.9)
    state = consolidated_state(clay, (60.0, 60.0 * 0.6086), 60.0, 1.2)
    sine = 3.0 * 0.9 / 6.9
    state = consolidated_state(clay, (60.0, 60.0 * (1.0 - sine)), 60.0, 1.2)
    path = triaxial_path(clay, state, [0.5], drained=False)
    ratio = normally_consolidated_strength_ratio(0.9, 0.8)
    assert path.deviator[0, 0] / 2.0 / 60.0 == pytest.approx(float(ratio), rel=1e-9)


def test_stresses_beyond_the_history_are_normally_consolidated() -> None:
    clay = clay_of()
    state = consolidated_state(clay, (200.0, 200.0), 60.0, 1.2)
    assert state.yield_size[0] == pytest.approx(200.0)
    given = consolidated_state(clay, (50.0, 50.0), 100.0, 1.2, k0=1.0)
    assert given.yield_size[0] == pytest.approx(100.0)


def test_frame_has_a_row_per_realisation_and_point() -> None:
    clay = clay_of(2)
    path = triaxial_path(clay, isotropic_state(clay, 100.0, 1.0, 1.2), [0.01, 0.02, 0.03], drained=False)
    frame = path.to_frame()
    assert len(frame) == 6
    assert list(frame["realisation"]) == [0, 0, 0, 1, 1, 1]
    np.testing.assert_array_equal(frame["deviator"][3:], path.deviator[1])


@pytest.mark.parametrize(
    ("change", "message"),
    [
        ({"lam": -0.2}, "lam must be finite and above 0"),
        ({"kap": 0.3}, "kap must be below lam"),
        ({"m": 3.0}, "m must be below 3; got 3"),
        ({"m_extension": 1.6}, "m_extension must be below 1.5; got 1.6"),
        ({"poisson": 0.5}, "poisson must be below 0.5; got 0.5"),
        ({"poisson": -0.1}, "poisson must be finite and at least 0"),
    ],
)
def test_parameters_out_of_range_are_refused(change: dict[str, float], message: str) -> None:
    with pytest.raises(ParameterError, match=message):
        clay_of(**change)


def test_numbers_of_realisations_must_agree() -> None:
    with pytest.raises(ShapeError, match=r"one value per realisation each; got lam \(3,\)"):
        CamClay(lam=[0.2] * 3, kap=[0.05] * 2, m=0.9)
    with pytest.raises(ShapeError, match=r"lam must have shape \(n,\)"):
        CamClay(lam=[[0.2]], kap=0.05, m=0.9)
    with pytest.raises(ShapeError, match="state: 3 realisations; the clay has 2"):
        triaxial_path(clay_of(2), isotropic_state(clay_of(3), 100.0, 1.0, 1.0), [0.1], drained=True)


@pytest.mark.parametrize(
    ("strain", "error", "message"),
    [
        ([-0.1, 0.1], ParameterError, "axial_strain must not change its sign"),
        ([0.1, 1.0], ParameterError, "axial_strain must be below 1; got 1"),
        ([], ShapeError, r"axial_strain must have shape \(n_point,\); got \(0,\)"),
    ],
)
def test_strains_out_of_range_are_refused(strain: list[float], error: type[Exception], message: str) -> None:
    clay = clay_of()
    with pytest.raises(error, match=message):
        triaxial_path(clay, isotropic_state(clay, 100.0, 1.0, 1.0), strain, drained=False)


def test_states_out_of_range_are_refused() -> None:
    clay = clay_of()
    with pytest.raises(ParameterError, match="yield_size must not be below"):
        triaxial_path(
            clay,
            ClayState(mean_stress=[100.0], deviator=[50.0], void_ratio=[1.0], yield_size=[101.0]),
            [0.1],
            drained=False,
        )
    for deviator, name in ((40.0, "radial_stress"), (-20.0, "axial_stress")):
        state = ClayState(mean_stress=[10.0], deviator=[deviator], void_ratio=[1.0], yield_size=[1000.0])
        with pytest.raises(ParameterError, match=f"{name} of a state must be above 0"):
            oedometer_path(clay, state, [20.0])
    with pytest.raises(ShapeError, match=r"axial_stress must have shape \(n_point,\)"):
        oedometer_path(clay, isotropic_state(clay, 10.0, 1.0, 1.0), [])
    with pytest.raises(ParameterError, match="mean_stress must be finite and above 0"):
        ClayState(mean_stress=[-1.0], deviator=[0.0], void_ratio=[1.0], yield_size=[10.0])
