"""An estimate as JSON: the contract other programs build on. SI, angles in degrees, never NaN."""

from __future__ import annotations

import math
from collections.abc import Mapping

from ridercda import __version__
from ridercda.drag.estimate import Estimate, Figure, SolveWarning

FORMAT = 1

Json = None | bool | int | float | str | list["Json"] | dict[str, "Json"]


def estimate_json(estimate: Estimate, session_name: str) -> dict[str, Json]:
    """Return an estimate as a JSON object; the schema is `report/schema/estimate.json`."""
    return {
        "format": FORMAT,
        "kind": "estimate",
        "program": __version__,
        "session": session_name,
        "method": estimate.method,
        "confidence": estimate.confidence,
        "air_density": number(estimate.air_density),
        "reference_speed": number(estimate.reference_speed),
        "setups": [
            {"id": s.id, "runs": s.runs, "cda": figure(s.cda), "reason": s.reason or None}
            for s in estimate.setups
        ],
        "tyres": [{"id": t.id, "crr": figure(t.crr), "reason": t.reason or None} for t in estimate.tyres],
        "parameters": list(estimate.parameters),
        "covariance": [[number(v) for v in row] for row in estimate.covariance.tolist()],
        "between_run_sd": number(estimate.between_run_sd),
        "gust": {
            "sd": number(estimate.gust.sd if estimate.gust else None),
            "time": number(estimate.gust.time if estimate.gust else None),
        },
        "differences": [
            {
                "setup": d.setup,
                "against": d.against,
                "degrees_of_freedom": number(d.cda.degrees_of_freedom if d.cda else None),
                "verdict": d.verdict.value if d.verdict else None,
                "chance_lower": number(d.chance_lower),
                "detectable": number(d.detectable),
                "cda": figure(d.cda),
                "joint_interval": pair(d.joint_interval),
                "variance_shares": shares(d.variance_shares),
                "reason": d.reason or None,
            }
            for d in estimate.differences
        ],
        "runs": [
            {
                "id": r.id,
                "setup": r.setup,
                "ride": r.ride,
                "start": number(r.start),
                "end": number(r.end),
                "laps": r.laps,
                "power": number(r.power),
                "speed": number(r.speed),
                "air_density": number(r.air_density),
                "wind_speed": number(r.wind_speed),
                "wind_from": number(None if r.wind_from is None else math.degrees(r.wind_from)),
                "excluded": r.excluded or None,
                "cda": figure(r.cda),
                "against_repeats": number(r.against_repeats),
            }
            for r in estimate.runs
        ],
        "warnings": [warning(w) for w in estimate.warnings],
    }


def figure(value: Figure | None) -> dict[str, Json]:
    """Return a figure as an object; nulls inside where there is none."""
    if value is None:
        return {"value": None, "standard_error": None, "interval": [None, None]}
    return {
        "value": number(value.value),
        "standard_error": number(value.standard_error),
        "interval": pair(value.interval),
    }


def pair(interval: tuple[float, float] | None) -> list[Json]:
    """Return an interval as a list of two numbers or nulls."""
    return [None, None] if interval is None else [number(interval[0]), number(interval[1])]


def number(value: float | None) -> float | None:
    """Return a finite number, else None."""
    return float(value) if value is not None and math.isfinite(value) else None


def shares(values: Mapping[str, float]) -> dict[str, Json]:
    """Return variance shares as an object."""
    return {name: number(value) for name, value in values.items()}


def warning(value: SolveWarning) -> dict[str, Json]:
    """Return a warning as an object."""
    return {"code": value.code, "message": value.message}
