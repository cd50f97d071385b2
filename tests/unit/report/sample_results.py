"""A SYNTHETIC set of results: random numbers in the shape of an assessment, not an answer about any ground.

Counts, probabilities, intervals, curves and quantiles all come from the same random draws, so that whatever
the report sets side by side must agree.
"""

from typing import Any

import numpy as np
from scipy.special import betaincinv, ndtri

N = 20_000
STAGES = (("first lift", 0.0, 0.077), ("second lift", 0.383, 0.46), ("surcharge off", 1.15, 1.169))
PARAMETERS = (
    ("soft clay.lambda", "-", 0.36, 0.043),
    ("soft clay.kappa", "-", 0.05, 0.010),
    ("soft clay.pop", "kPa", 18.0, 5.4),
    ("soft clay.k", "m/s", 1.2e-9, 8.4e-10),
    ("soft clay.thickness", "m", 7.0, 0.6),
    ("site.mode_factor", "-", 0.8, 0.064),
    ("load.fill_unit_weight", "kN/m3", 19.0, 0.76),
    ("model_error.settlement", "-", 1.0, 0.2),
)


def interval(count: int, n: int = N) -> list[float]:
    """Exact binomial interval at 95 %."""
    low = 0.0 if count == 0 else float(betaincinv(count, n - count + 1, 0.025))
    high = 1.0 if count == n else float(betaincinv(count + 1, n - count, 0.975))
    return [low, high]


def quantiles(values: np.ndarray) -> dict[str, Any]:
    levels = ("0.05", "0.25", "0.5", "0.75", "0.95")
    order = np.sort(values)
    found: dict[str, Any] = {}
    for level in levels:
        place = float(level) * (order.size - 1)
        low, high = order[int(np.floor(place))], order[int(np.ceil(place))]
        known = np.isfinite(low) and np.isfinite(high)
        found[level] = float(low + (place - np.floor(place)) * (high - low)) if known else None
    return found


def median_interval(values: np.ndarray) -> list[float | None]:
    """The normal approximation to the ranks will do here."""
    order, half = np.sort(values), 0.98 * np.sqrt(values.size)
    ends = [order[max(0, min(values.size - 1, round(0.5 * values.size + reach)))] for reach in (-half, half)]
    return [float(end) if np.isfinite(end) else None for end in ends]


def unseen(count: int, n: int) -> float | None:
    bound = float(1 - 0.05 ** (1 / n))
    return bound if count == 0 else 1 - bound if count == n else None


def curve(values: np.ndarray, sense: str, threshold: float, step: float) -> dict[str, Any]:
    finite = values[np.isfinite(values)]
    span = (float(finite.min()), float(finite.max()))
    first = int(np.floor((min(span[0], threshold) - threshold) / step))
    last = int(np.ceil((max(span[1], threshold) - threshold) / step))
    thresholds = [round(threshold + step * k, 9) for k in range(first, last + 1)]
    counts = [count_of(values, sense, at) for at in thresholds]
    bounds = [interval(count, values.size) for count in counts]
    return {
        "step": step,
        "threshold": thresholds,
        "exceeding": counts,
        "probability": [count / values.size for count in counts],
        "low": [low for low, _ in bounds],
        "high": [high for _, high in bounds],
    }


def count_of(values: np.ndarray, sense: str, threshold: float) -> int:
    met = values <= threshold if sense == "not more than" else values >= threshold
    return int(np.count_nonzero(~met))


def limit(name: str, values: np.ndarray, threshold: float, step: float, **more: Any) -> dict[str, Any]:
    sense = more.pop("sense", "not more than")
    target = more.pop("target_probability", None)
    count = count_of(values, sense, threshold)
    low, high = interval(count, values.size)
    probability = count / values.size
    verdict = None
    if target is not None:
        verdict = "within target" if high < target else "beyond target" if low > target else "not conclusive"
    inner = 0.0 < probability < 1.0
    cost = more.get("cost_if_exceeded")
    entry = {
        "name": name,
        "quantity": "settlement",
        "unit": "m",
        "sense": sense,
        "threshold": threshold,
        "probability": probability,
        "interval": [low, high],
        "confidence": 0.95,
        "exceeding": count,
        "not_converged": 0,
        "never_reached": int(np.count_nonzero(np.isposinf(values))),
        "reliability_index": float(-ndtri(probability)) if inner else None,
        "reliability_interval": [
            float(-ndtri(high)) if high < 1 else None,
            float(-ndtri(low)) if low > 0 else None,
        ],
        "method": "Monte Carlo, exact binomial interval",
        "model_runs": values.size,
        "unseen_bound": unseen(count, values.size),
        "target_probability": target,
        "verdict": verdict,
        "cost_if_exceeded": None,
        "expected_cost": None if cost is None else cost * probability,
        "expected_cost_interval": None if cost is None else [cost * low, cost * high],
        "summary": {
            "mean": float(values.mean()) if np.isfinite(values).all() else None,
            "sd": float(values.std(ddof=min(1, values.size - 1))) if np.isfinite(values).all() else None,
            "quantiles": quantiles(values),
            "median_interval": median_interval(values),
        },
        "curve": curve(values, sense, threshold, step),
    }
    return entry | more


def sample(seed: int = 7, n: int = N) -> dict[str, Any]:
    """The whole dictionary, three limits of three quantities."""
    rng = np.random.default_rng(np.random.SeedSequence(seed))
    final = rng.lognormal(np.log(0.62), 0.22, n)
    residual = final * rng.beta(3.0, 30.0, n)
    safety = rng.lognormal(np.log(1.42), 0.11, n)
    years = np.where(rng.random(n) < 0.004, np.inf, rng.lognormal(np.log(0.8), 0.45, n))
    limits = [
        limit(
            "residual settlement", residual, 0.10, 0.001, time={"between": [1.169, 30.0]},
            time_text="between 1.17 and 30 years", target_probability=0.05, cost_if_exceeded=900e3,
        ),
        limit(
            "settlement in all", final, 0.90, 0.005, time={"at": 30.0}, time_text="at 30 years",
            target_probability=0.05,
        ),
        limit(
            "slip while filling", safety, 1.0, 0.01, sense="not less than", quantity="slip_safety", unit="-",
            time={"least_over_stages": True}, time_text="least over the stages", target_probability=1e-3,
            cost_if_exceeded=2.5e6,
        ),
        limit(
            "ready to pave", years, 2.0, 0.02, quantity="time_to_consolidation", unit="years",
            time={"degree": 0.9}, time_text="90 % consolidation",
        ),
    ]  # fmt: skip
    return {
        "format": 1,
        "kind": "assess",
        "title": "Synthetic example: invented numbers",
        "seed": seed,
        "realisations": n,
        "draws": "monte carlo",
        "confidence": 0.95,
        "currency": "EUR",
        "limits": limits,
        "settlement": settlement(rng, final),
        "slip": slip(rng, safety),
        "drivers": [row for entry in limits for row in drivers(rng, entry)],
        "driver_quality": [
            {
                "limit": entry["name"],
                "ranked_by": ranked_by(entry),
                "exceeding": entry["exceeding"],
                "r_squared": 0.93 - 0.05 * k,
                "note": None,
            }
            for k, entry in enumerate(limits)
        ],
        "ground": ground(),
        "parameters": [parameter(rng, *row) for row in PARAMETERS],
        "dependence": [
            {
                "between": ["soft clay.lambda", "soft clay.kappa"],
                "rank_correlation": 0.6,
                "latent_correlation": 0.618,
            }
        ],
        "discretisation": {
            "realisations": 8,
            "cells": 48,
            "steps": 310,
            "settlement_error": 0.0011,
            "settlement_error_share": 0.0021,
            "slip_error_share": 0.006,
        },
        "warnings": [
            {
                "code": "floor",
                "message": "The preconsolidation stress of crust is at its floor.",
                "share": 0.013,
            },
            {"code": "note", "message": "No test results were given.", "share": None},
        ],
        "assumptions": [
            "Vertical strain and vertical flow only.",
            "Pore water pressure is hydrostatic at the start.",
        ],
        "cautions": [
            "Drained, long-term stability is outside this assessment.",
            "The ground is taken as level.",
        ],
        "provenance": provenance(),
    }


def settlement(rng: np.random.Generator, final: np.ndarray) -> dict[str, Any]:
    times = [
        0.0,
        *np.round(np.linspace(0.02, 1.3, 33), 4).tolist(),
        *np.round(np.geomspace(1.5, 30, 24), 4).tolist(),
    ]
    pace = rng.lognormal(np.log(0.9), 0.35, final.size)
    curves = [final * (1.0 - np.exp(-((time / pace) ** 0.8))) for time in times]
    rows = [quantiles(curve) for curve in curves]
    return {
        "station": "centreline",
        "times": times,
        "mean": [float(curve.mean()) for curve in curves],
        "quantiles": {level: [row[level] for row in rows] for level in rows[0]},
        "realisations": final.size,
        "stages": [{"name": name, "start": start, "end": end} for name, start, end in STAGES],
        "final": {"mean": float(final.mean()), "quantiles": quantiles(final)},
    }


def slip(rng: np.random.Generator, safety: np.ndarray) -> list[dict[str, Any]]:
    rows = []
    for (name, _, end), height, shift in zip(STAGES, (1.5, 3.0, 2.2), (0.6, 0.0, 0.75), strict=True):
        values = safety + shift + 0.02 * rng.standard_normal(safety.size)
        rows.append(
            {
                "stage": name,
                "time": end,
                "fill_height": height,
                "mean": float(values.mean()),
                "quantiles": quantiles(values),
                "probability_below_one": float(np.mean(values < 1.0)),
                "interval_below_one": interval(int(np.count_nonzero(values < 1.0)), values.size),
            }
        )
    return rows


def ranked_by(entry: dict[str, Any]) -> str:
    return "mean" if 0.3 <= entry["probability"] <= 0.7 else "spread"


def drivers(rng: np.random.Generator, entry: dict[str, Any]) -> list[dict[str, Any]]:
    """Falling importance; the last parameter's spread makes the rarer outcome rarer still."""
    sizes = np.sort(rng.exponential(0.6, len(PARAMETERS)))[::-1]
    half = 0.35 * max(0.2, 1.0 / max(1, entry["exceeding"]) ** 0.25)
    shares = sizes / sizes.sum()
    by_mean, rarer = ranked_by(entry) == "mean", -1 if entry["probability"] > 0.5 else 1
    rows = []
    for place, (name, _, _, _) in enumerate(PARAMETERS):
        size, share = float(sizes[place]), float(shares[place])
        last = place == len(PARAMETERS) - 1
        spread = rarer * (0.05 * size if by_mean else -3.0 * half if last else size)
        mean = (1 if place % 3 else -1) * 0.8 * size
        clear = {key: abs(value) > 1.4 * half for key, value in (("spread", spread), ("mean", mean))}
        ranked = clear["mean"] if by_mean else clear["spread"] and not last
        rows.append(
            {
                "limit": entry["name"],
                "parameter": name,
                "rank": place + 1 if ranked else None,
                "spread_elasticity": spread,
                "spread_interval": [spread - half, spread + half],
                "spread_clear": clear["spread"],
                "mean_elasticity": mean,
                "mean_interval": [mean - half, mean + half],
                "mean_clear": clear["mean"],
                "share": share,
                "share_interval": [max(0.0, share - 0.03), share + 0.03],
                "direction": "unclear" if abs(mean) < half else "raises" if mean > 0 else "lowers",
            }
        )
    return rows


def parameter(rng: np.random.Generator, name: str, unit: str, mean: float, sd: float) -> dict[str, Any]:
    log_sd = float(np.sqrt(np.log1p((sd / mean) ** 2)))
    values = mean * np.exp(log_sd * rng.standard_normal(2000) - 0.5 * log_sd**2)
    p05, p50, p95 = (float(np.quantile(values, level)) for level in (0.05, 0.5, 0.95))
    return {
        "name": name, "unit": unit, "meaning": name.split(".")[1].replace("_", " "), "text": "lognormal",
        "mean": mean, "sd": sd, "p05": p05, "p50": p50, "p95": p95,
        "cut_share": 0.0004 if name.endswith("kappa") else 0.0, "low": 0.0, "high": None,
    }  # fmt: skip


def ground() -> dict[str, Any]:
    depth = np.round(np.linspace(0.0, 11.5, 47), 3)
    initial = 17.5 * np.minimum(depth, 1.0) + 6.4 * np.maximum(depth - 1.0, 0.0)
    layers = [
        ("crust", "clay", 0.0, 1.5, [("λ", "compression index, natural", "0.12, cov 0.20", "-")]),
        ("soft clay", "clay", 1.5, 8.5, [("λ", "compression index, natural", "0.36, cov 0.12", "-"),
                                         ("k", "permeability", "1.2 × 10⁻⁹, cov 0.7", "m/s")]),
        ("sand", "granular", 8.5, 11.5, [("φ", "friction angle", "33", "degrees")]),
    ]  # fmt: skip
    keys = ("symbol", "meaning", "text", "unit")
    changes = (("1.5 m of fill", 1.5), ("1.5 m of fill", 3.0), ("0.8 m taken off", 2.2))
    return {
        "water_table": "1 m",
        "base": "drained",
        "layers": [
            {
                "name": name, "soil": soil, "top": top, "bottom": bottom,
                "properties": [dict(zip(keys, row, strict=True)) for row in rows],
            }
            for name, soil, top, bottom, rows in layers
        ],
        "load": {"shape": "embankment", "text": "crest 12 m wide, side slopes 1 in 2"},
        "stages": [
            {
                "name": name, "start": start, "end": end, "change_text": change,
                "height_after": after, "pressure_after": None,
            }
            for (name, start, end), (change, after) in zip(STAGES, changes, strict=True)
        ],
        "profile": {
            "depth": depth.tolist(),
            "initial_stress": initial.tolist(),
            "preconsolidation": np.maximum(initial + 18.0, np.where(depth < 1.5, 90.0, 0.0)).tolist(),
            "final_stress": (initial + 42.0 * np.exp(-depth / 40.0)).tolist(),
        },
    }  # fmt: skip


def provenance() -> dict[str, Any]:
    return {
        "version": "0.0.0",
        "scenario_file": "synthetic.toml",
        "scenario_sha256": "0123456789abcdef" * 4,
        "packages": {"numpy": "2.0.0", "scipy": "1.13.0"},
        "python": "3.11.0",
        "platform": "synthetic",
        "cpu_features": ["AVX2", "FMA3"],
        "started": "2026-01-01T00:00:00+00:00",
        "seconds": {"total": 12.5, "realisations": 10.1},
        "workers": 2,
        "command": "probsoil assess synthetic.toml",
        "chunks": 20,
    }
