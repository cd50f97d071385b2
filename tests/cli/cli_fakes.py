"""Stand-ins for the calculation, so that the command line is tested apart from it."""

import json
import types
from collections.abc import Callable
from pathlib import Path
from typing import Any

import pandas as pd

from probsoil.assessment import claimed_folder


def results() -> dict[str, Any]:
    """Return the parts of a result that the terminal shows; names hold what could pass for markup."""
    return {
        "format": 1,
        "kind": "assess",
        "title": "Trial [bold]embankment[/bold]",
        "seed": 7,
        "realisations": 2000,
        "draws": "monte carlo",
        "confidence": 0.95,
        "limits": [
            {
                "name": "residual [m]",
                "quantity": "settlement",
                "unit": "m",
                "sense": "not more than",
                "threshold": 0.1,
                "time": {"between": [1.2, 30.0]},
                "time_text": "between 1.2 and 30 years",
                "probability": 0.124,
                "interval": [0.1098, 0.1393],
                "confidence": 0.95,
                "exceeding": 248,
                "model_runs": 2000,
                "target_probability": 0.05,
                "verdict": "beyond target",
                "curve": None,
            },
            {
                "name": "slip",
                "quantity": "slip_safety",
                "unit": "-",
                "sense": "not less than",
                "threshold": 1.0,
                "time": {"least_over_stages": True},
                "time_text": "over the stages",
                "probability": 0.0,
                "interval": [0.0, 0.001843],
                "confidence": 0.95,
                "exceeding": 0,
                "model_runs": 2000,
                "target_probability": None,
                "verdict": None,
                "curve": None,
            },
        ],
        "drivers": [
            driver(name, share, rank)  # the rank need not follow the share
            for name, share, rank in (("a", 0.1, 2), ("b", 0.5, 3), ("c", 0.05, None), ("d", 0.35, 1))
        ],
        "driver_quality": [
            {"limit": "residual [m]", "ranked_by": "spread", "note": None},
            {"limit": "slip", "ranked_by": "spread", "note": "nothing exceeded, so nothing can be ranked"},
        ],
        "warnings": [
            {
                "code": "kappa_lowered",
                "message": "realisations in which kappa was lowered",
                "share": 0.03,
                "share_of": "all realisations",
            },
            {
                "code": "grid",
                "message": "settlement on a finer grid differs",
                "share": 0.008,
                "share_of": "the final settlement",
            },
            {"code": "remark", "message": "look at this again", "share": None, "share_of": None},
        ],
    }


def driver(name: str, share: float, rank: int | None) -> dict[str, Any]:
    return {
        "limit": "residual [m]",
        "parameter": f"soft clay.{name}",
        "rank": rank,
        "spread_elasticity": 0.1 if rank is None else 1.0 / rank,
        "spread_interval": [0.05, 0.15] if rank is None else [0.8 / rank, 1.2 / rank],
        "mean_elasticity": 0.3,
        "mean_interval": [0.2, 0.4],
        "spread_clear": rank is not None,
        "mean_clear": False,
        "share": share,
        "share_interval": [share - 0.04, share + 0.04],
        "direction": "raises" if share > 0.2 else "unclear",
    }


SHEET = {
    "at": "mean",
    "tests": 0,
    "times": [0.0, 1.0, 30.0],
    "settlement": [0.0, 0.1234, 0.4567],
    "final_settlement": 0.5012,
    "layers": [
        {
            "name": "soft clay",
            "soil": "clay",
            "top": 0.0,
            "bottom": 7.25,
            "initial_stress": 30.06,
            "preconsolidation": 48.0,
            "stress_increase": 55.5,
            "void_ratio": 1.9,
            "strain": 0.0712,
            "settlement": 0.5012,
        },
        {
            "name": "sand",
            "soil": "granular",
            "top": 7.25,
            "bottom": 9.0,
            "initial_stress": 60.0,
            "preconsolidation": None,
            "stress_increase": 50.0,
            "void_ratio": None,
            "strain": 0.001,
            "settlement": 0.002,
        },
    ],
    "strength": [
        {"depth": 3.5, "layer": "soft clay", "before": 12.34, "at_end_of_stage": {"first lift": 15.67}}
    ],
    "slip_safety": {"first lift": 1.234},
    "values": {"soft clay.lambda": 0.36},
}


class Sheet:
    """A finished sheet."""

    def to_dict(self) -> dict[str, Any]:
        return SHEET

    def to_frame(self) -> pd.DataFrame:
        return pd.DataFrame(SHEET["layers"])


class Calculation(types.ModuleType):
    """Stands in for `probsoil.assessment`; remembers how it was called.

    Attributes
    ----------
    calls : list of dict
        Keyword arguments of each call.
    ending : exception, callable or None
        What ends a call, or what is done in its course.
    """

    def __init__(self) -> None:
        super().__init__("probsoil.assessment")
        self.calls: list[dict[str, Any]] = []
        self.ending: BaseException | Callable[[], None] | None = None
        self.claimed_folder = claimed_folder  # what may be written where is no calculation

    def assess(self, scenario: Any, *, out: Path, progress: Any, **options: Any) -> Any:
        self.calls.append({"title": scenario.title, "out": out, "progress": progress, **options})
        out.mkdir(parents=True, exist_ok=True)
        if progress is not None:
            for done in range(3):
                progress("realisations", done, 2)
        self._end()
        (out / "results.json").write_text(json.dumps(results()))
        return types.SimpleNamespace(results=results(), folder=out)

    def sheet(
        self, scenario: Any, at: str = "mean", station: str | None = None, *, load: str | None = None
    ) -> Sheet:
        there = {} if station is None else {"station": station}
        there |= {} if load is None else {"load": load}
        self.calls.append({"title": scenario.title, "at": at} | there)
        self._end()
        return Sheet()

    def _end(self) -> None:
        if isinstance(self.ending, BaseException):
            raise self.ending
        if self.ending is not None:
            self.ending()
