"""Finite strain with a closed form: a thin layer whose coefficient of consolidation is constant.

Source: R. E. Gibson, G. L. England and M. J. L. Hussey, The theory of one-dimensional consolidation
of saturated clays, Geotechnique 17(3), 1967 (from memory, not opened). Without self-weight and with
their coefficient cF = -k/[gw (1 + e)] ds'/de constant, void ratio obeys the linear diffusion
equation in the material coordinate, whatever the strain: the degree of settlement is Terzaghi's
with T = cF t/Hz^2 and Hz = H0/(1 + e0) the height of solids.

How the kernel's law of flow gives it. With a the depth before loading and w the void ratio lost,

    1/(1 + e0) dw/dt = d/da [K du/da],    ds' = -du  at each time under a uniform load.

On the virgin line ds' = (s'/lambda) dw, so the flux is -(K s'/lambda) dw/da and it is linear in w as
soon as K s' is constant. The kernel has

    ln K = log_value - decline w - follows ln max(s', sp) - power ln(1 + e)

and s' = s0 exp(w/lambda), so K s' is constant with power = 0 and either

- follows = 0 and decline = 1/lambda (then K s' = s0 exp(log_value)), or
- follows = 1 and decline = 0        (then K s' = exp(log_value)).

In both, w_t = D w_aa with D = (1 + e0) K s'/lambda, and cF = D/(1 + e0)^2. The two go through
different lines of the kernel, at the drained face above all.
"""

import numpy as np
import pytest
from reference_solutions import DEFAULT_ALLOWANCE, FINE_ALLOWANCE, SUDDEN, clay_column, degree_uniform, loaded

from probsoil.ground.conductivity import Conductivity

STRESS, VOID_RATIO, LAMBDA, HEIGHT = 20.0, 3.0, 1.1, 2.0
TIMES = np.array([0.005, 0.02, 0.05, 0.1, 0.2, 0.3, 0.5, 0.848, 1.2])  # as time factors


def law(column, form):
    """Either law of flow, such that D = HEIGHT^2 and the time is the time factor."""
    constant = HEIGHT**2 * LAMBDA / (1.0 + VOID_RATIO)  # K s'
    shape = (1, column.n_cell)
    by_stress = form == "stress"
    return Conductivity(
        log_value=np.full(shape, np.log(constant if by_stress else constant / STRESS)),
        decline=np.full(shape, 0.0 if by_stress else 1.0 / LAMBDA),
        follows=np.full(column.n_cell, float(by_stress)),
        power=np.zeros(column.n_cell, dtype=np.int64),
    )


@pytest.mark.parametrize(("grid", "allowance"), [(1, DEFAULT_ALLOWANCE), (4, FINE_ALLOWANCE)])
@pytest.mark.parametrize("form", ["stress", "void ratio"])
@pytest.mark.parametrize("ratio", [1.2, 3.0, 4.0])
def test_degree_of_settlement_is_terzaghis_at_any_strain(form, ratio, grid, allowance):
    column = clay_column((HEIGHT,), stress=STRESS, void_ratio=VOID_RATIO, lam=(LAMBDA,), grid=grid)
    settled, _ = loaded(
        column, law(column, form), (ratio - 1.0) * STRESS, end=SUDDEN, wanted=TIMES, grid=grid
    )
    final = HEIGHT * LAMBDA / (1.0 + VOID_RATIO) * np.log(ratio)
    if ratio >= 3.0:
        assert final / HEIGHT > 0.30  # a strain that no small-strain theory could pass over
    assert settled / final == pytest.approx(degree_uniform(TIMES), abs=allowance)
