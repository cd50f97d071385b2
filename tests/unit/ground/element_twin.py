"""Twin of the element: Modified Cam clay as rate equations, integrated by scipy with tight tolerance.

Written from the textbook statement (elastic moduli, associated flow, hardening by plastic volume), driven by
the axial strain; it knows nothing of the reduction to one stress ratio that the package uses.
"""

from dataclasses import dataclass

import numpy as np
from scipy.integrate import solve_ivp

TIGHT = {"rtol": 1e-10, "atol": 1e-12, "method": "DOP853"}


@dataclass(frozen=True)
class Clay:
    lam: float
    kap: float
    m: float
    m_extension: float
    poisson: float

    def slope(self, q: float) -> float:
        return self.m if q >= 0.0 else self.m_extension


def outside(clay: Clay, state: np.ndarray) -> float:
    p, q, _, size = state
    return float(q * q / clay.slope(q) ** 2 - p * (size - p))


def stiffness(clay: Clay, state: np.ndarray, *, plastic: bool) -> tuple[np.ndarray, np.ndarray]:
    """Matrix from (volumetric, shear) strain to (p, q), and what of the strain is plastic volume."""
    p, q, v, size = state
    bulk = v * p / clay.kap
    shear = 3.0 * bulk * (1.0 - 2.0 * clay.poisson) / (2.0 * (1.0 + clay.poisson))
    elastic = np.diag([bulk, 3.0 * shear])
    if not plastic:
        return elastic, np.zeros(2)
    normal = np.array([2.0 * p - size, 2.0 * q / clay.slope(q) ** 2])
    hardening = p * v * size / (clay.lam - clay.kap) * normal[0]
    through = elastic @ normal
    multiplier = through / (hardening + normal @ through)
    return elastic - np.outer(through, multiplier), normal[0] * multiplier


def rates(clay: Clay, path: str, sign: float, *, plastic: bool):
    def rate(_: float, state: np.ndarray) -> np.ndarray:
        matrix, into_volume = stiffness(clay, state, plastic=plastic)
        # axial strain a and radial strain r: volumetric a + 2 r, shear 2/3 (a - r)
        axial, radial = np.array([1.0, 2.0 / 3.0]), np.array([2.0, -2.0 / 3.0])
        if path == "undrained":
            sideways = -0.5
        elif path == "oedometer":
            sideways = 0.0
        else:  # the radial stress p - q/3 stays
            held = np.array([1.0, -1.0 / 3.0]) @ matrix
            sideways = -(held @ axial) / (held @ radial)
        strain = sign * (axial + sideways * radial)
        p_rate, q_rate = matrix @ strain
        volume = state[2]
        size_rate = volume * state[3] / (clay.lam - clay.kap) * (into_volume @ strain)
        return np.array([p_rate, q_rate, -volume * strain[0], size_rate])

    return rate


def run(clay: Clay, path: str, state: np.ndarray, targets: np.ndarray) -> np.ndarray:
    """States at log axial strains (drained, undrained), or at axial stresses (oedometer, one direction).

    Strain is the time of the integration. An oedometer stops when the axial stress first meets a target.
    """
    if path == "oedometer":
        sign = 1.0 if targets[-1] >= state[0] + state[1] / 1.5 else -1.0
    else:
        sign = 1.0 if targets[-1] >= 0.0 else -1.0
    now, since, found = np.array(state, dtype=float), 0.0, []
    plastic = starts_plastic(clay, path, now, sign)
    for target in targets:
        while True:
            now, since, plastic, done = leg(clay, path, sign, now, since, plastic, target)
            if done:
                break
        found.append(now)
    return np.array(found)


def starts_plastic(clay: Clay, path: str, state: np.ndarray, sign: float) -> bool:
    if outside(clay, state) < -1e-9 * state[3] ** 2:
        return False
    p_rate, q_rate = rates(clay, path, sign, plastic=False)(0.0, state)[:2]
    normal = np.array([2.0 * state[0] - state[3], 2.0 * state[1] / clay.slope(state[1]) ** 2])
    return bool(normal @ np.array([p_rate, q_rate]) > 0.0)


def leg(clay, path, sign, now, since, plastic, target):
    """Integrate to the target or to yielding, whichever is first."""

    def yields(_, state):
        return outside(clay, state)

    def arrives(_, state):
        return sign * (state[0] + state[1] / 1.5 - target)

    yields.terminal, yields.direction = True, 1.0
    arrives.terminal, arrives.direction = True, 1.0
    oedometer = path == "oedometer"
    if oedometer and arrives(0.0, now) >= 0.0:
        return now, since, plastic, True
    end = 1e2 if oedometer else abs(target)
    if end <= since:
        return now, since, plastic, True
    events = ([] if plastic else [yields]) + ([arrives] if oedometer else [])
    answer = solve_ivp(rates(clay, path, sign, plastic=plastic), (since, end), now, events=events, **TIGHT)
    assert answer.success, answer.message
    yielded = not plastic and answer.t_events[0].size > 0
    return answer.y[:, -1], answer.t[-1], plastic or yielded, not yielded


def softened(clay: Clay, state: np.ndarray, strain: float, targets: np.ndarray) -> np.ndarray:
    """States of drained compression after yielding, where strain turns back before it grows again.

    Plastic flow is the time here, so that neither strain nor stress has to rise. `strain` is the axial one
    at the yield point `state`; a target counts where the strain next rises to it.
    """

    def rate(_: float, now: np.ndarray) -> np.ndarray:
        p, q, v, size, _ = now
        normal = np.array([2.0 * p - size, 2.0 * q / clay.slope(q) ** 2])
        scale = np.hypot(*normal)
        normal /= scale
        size_rate = v * size / (clay.lam - clay.kap) * normal[0]
        p_rate = p * size_rate / scale / (normal[0] + 3.0 * normal[1])
        bulk = v * p / clay.kap
        shear = 3.0 * bulk * (1.0 - 2.0 * clay.poisson) / (2.0 * (1.0 + clay.poisson))
        volumetric = p_rate / bulk + normal[0]
        axial = volumetric / 3.0 + p_rate / shear + normal[1]
        return np.array([p_rate, 3.0 * p_rate, -v * volumetric, size_rate, axial])

    now, found = np.array([*state, strain]), []
    for target in targets:

        def rises(_, at, target=target):
            return at[4] - target

        rises.terminal, rises.direction = True, 1.0
        answer = solve_ivp(rate, (0.0, 10.0), now, events=[rises], **TIGHT)
        assert answer.t_events[0].size == 1
        now = answer.y[:, -1]
        found.append(now[:4])
    return np.array(found)


def drained_to_yield(clay: Clay, state: np.ndarray) -> tuple[np.ndarray, float]:
    """Yield point of drained compression, and the axial strain there."""

    def yields(_, now):
        return outside(clay, now)

    yields.terminal, yields.direction = True, 1.0
    elastic = rates(clay, "drained", 1.0, plastic=False)
    answer = solve_ivp(elastic, (0.0, 5.0), np.array(state, dtype=float), events=[yields], **TIGHT)
    return answer.y[:, -1], float(answer.t[-1])
