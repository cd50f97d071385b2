"""What results say of limits together and of further runs, as rules for `probsoil.report.validation`."""

from typing import Any

_CHANCE = {
    "probability": "share",
    "interval": "share pair",
    "exceeding": "count",
    "model_runs": "positive count",
    "unseen_bound": ("share", "null"),
    "method": "text",
}
TOGETHER: dict[str, Any] = {
    "any": _CHANCE,
    "all": _CHANCE,
    "number": ["count"],
    "pairs": [
        {
            **dict.fromkeys(("where", "also"), "text"),
            **dict.fromkeys(("where_exceeded", "both_exceeded"), "count"),
            "if_unrelated": "number",
            "conditional": ("share", "null"),
            "interval": "share pair",
        }
    ],
}
PRECISION: dict[str, Any] = {
    "within": "share",
    "time_limit": ("number", "null"),
    "allowed_runs": "count",
    "further_runs": "count",
    "limits": [
        {
            **dict.fromkeys(("limit", "method", "reason"), "text"),
            "probability": "share",
            **dict.fromkeys(("interval", "guaranteed"), "share pair"),
            "unseen_bound": ("share", "null"),
            "reached": ("number", "null"),
            "met": "flag",
            "model_runs": "positive count",
            **dict.fromkeys(("exceeding", "not_converged", "score_runs"), "count"),
            **dict.fromkeys(("score", "verdict"), ("text", "null")),
            "path": [{"runs": "count", "probability": "share", "interval": "share pair"}],
            "warnings": ["text"],
            "surprises": ["object"],
        }
    ],
}
