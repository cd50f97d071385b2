"""How fast water moves through clay as it compresses, and out of it to vertical drains."""

from dataclasses import dataclass

import numpy as np

from probsoil._typing import FloatArray, IntArray
from probsoil.ground.constants import WATER_UNIT_WEIGHT


@dataclass(frozen=True, slots=True, eq=False, kw_only=True)
class RadialDrainage:
    """Flow of water to vertical drains, as a sink in every cell they reach.

    Attributes
    ----------
    rate : ndarray, shape (n_sample, n_cell), [1/m2]
        ``8 (kh/kv) / (mu De^2)``, zero where no drain reaches.
    start : float, [years]
        When the drains begin to work.
    """

    rate: FloatArray
    start: float


@dataclass(frozen=True, slots=True, eq=False, kw_only=True)
class Conductivity:
    """How fast water moves, as a function of the state.

    In material coordinates the flow is ``K du/da`` with
    ``ln K = log_value - decline (e0 - e) - follows ln max(s', sp) - power ln(1 + e)``.

    Attributes
    ----------
    log_value : ndarray, shape (n_sample, n_cell), [ln of units that make K m2/(kPa year)]
        See above.
    decline : ndarray, shape (n_sample, n_cell), [-]
        Fall of ln k per unit of void ratio lost, ln(10)/ck; zero where cv is constant.
    follows : ndarray, shape (n_cell,), [-]
        1 where the conductivity falls with the larger of stress and preconsolidation stress.
    power : ndarray of int, shape (n_cell,), [-]
        Power of 1/(1 + e).
    drains : RadialDrainage or None
        Vertical drains besides; a step that ends by their start runs without them.
    """

    log_value: FloatArray
    decline: FloatArray
    follows: FloatArray
    power: IntArray
    drains: RadialDrainage | None = None


def conductivity_from_permeability(
    permeability: FloatArray, change_index: FloatArray, void_ratio: FloatArray
) -> tuple[FloatArray, FloatArray]:
    r"""Return `log_value` and `decline` for a permeability that falls with void ratio.

    Parameters
    ----------
    permeability : ndarray, shape (n_sample, n_cell), [m/year]
        k0, vertical, at the initial void ratio.
    change_index : ndarray, shape (n_sample, n_cell), [-]
        ck, fall of void ratio per tenfold fall of permeability.
    void_ratio : ndarray, shape (n_sample, n_cell), [-]
        Initial void ratio e0.

    Returns
    -------
    log_value, decline : ndarray, shape (n_sample, n_cell), [see Conductivity]
        To be used with ``follows = 0`` and ``power = 1``.

    Notes
    -----
    :math:`k = k_0\,10^{(e - e_0)/c_k}` (Tavenas et al. 1983) and
    :math:`K = (k/\gamma_w)(1 + e_0)/(1 + e)`.

    References
    ----------
    .. [1] F. Tavenas, P. Jean, P. Leblond and S. Leroueil, The permeability of natural soft clays,
       part II, Can. Geotech. J. 20(4), 1983 (from memory, not opened).
    """
    log_value = np.log(permeability / WATER_UNIT_WEIGHT * (1.0 + void_ratio))
    return log_value, np.log(10.0) / change_index


def conductivity_from_cv(coefficient: FloatArray, lam: FloatArray, void_ratio: FloatArray) -> FloatArray:
    r"""Return `log_value` for a constant coefficient of consolidation on the virgin line.

    Parameters
    ----------
    coefficient : ndarray, shape (n_sample, n_cell), [m2/year]
        cv in virgin compression.
    lam : ndarray, shape (n_sample, n_cell), [-]
        Lambda.
    void_ratio : ndarray, shape (n_sample, n_cell), [-]
        Initial void ratio e0.

    Returns
    -------
    log_value : ndarray, shape (n_sample, n_cell), [see Conductivity]
        To be used with ``follows = 1`` and ``power = 2``.

    Notes
    -----
    :math:`k = c_v \gamma_w m_v` with :math:`m_v = \lambda / [(1 + e) \max(\sigma', \sigma'_p)]`:
    below the preconsolidation stress the permeability is that on reaching it. The coefficient in
    recompression is then :math:`c_v (\lambda/\kappa)(\sigma'/\sigma'_p)`: larger than cv close to the
    preconsolidation stress, and smaller than it where the overconsolidation ratio exceeds
    :math:`\lambda/\kappa`.
    """
    return np.asarray(np.log(coefficient * lam * (1.0 + void_ratio)), dtype=np.float64)
