"""A ranking as JSON: the contract other programs build on."""

from __future__ import annotations

from collections.abc import Sequence

from ridercda import __version__
from ridercda.drag.estimate import Figure, SolveWarning
from ridercda.report.estimate_json import FORMAT, Json, figure, number, pair, warning
from ridercda.trade.ranking import CourseRanking, SetupRanking


def ranking_json(
    rankings: Sequence[CourseRanking], session_name: str, warnings: Sequence[SolveWarning] = ()
) -> dict[str, Json]:
    """Return rankings as a JSON object; the schema is `report/schema/ranking.json`."""
    return {
        "format": FORMAT,
        "kind": "ranking",
        "program": __version__,
        "session": session_name,
        "confidence": rankings[0].confidence if rankings else None,
        "courses": [_course(ranking) for ranking in rankings],
        "warnings": [warning(w) for w in warnings],
    }


def _course(ranking: CourseRanking) -> dict[str, Json]:
    setups: list[Json] = [_setup(setup) for setup in ranking.setups]
    setups += [
        {
            "id": out.id,
            "rank": None,
            "time": _plain(None),
            "speed": None,
            "saved": figure(None),
            "chance_fastest": None,
            "chance_faster_than_baseline": None,
            "break_even_power": _plain(None),
            "reason": out.reason,
        }
        for out in ranking.unranked
    ]
    return {
        "id": ranking.id,
        "name": ranking.name,
        "distance": number(ranking.distance),
        "power": number(ranking.power),
        "setups": setups,
        "warnings": [{"code": w.code, "message": w.message} for w in ranking.warnings],
    }


def _setup(setup: SetupRanking) -> dict[str, Json]:
    return {
        "id": setup.id,
        "rank": setup.rank,
        "time": _plain(setup.time),
        "speed": number(setup.speed),
        "saved": figure(setup.saved),
        "chance_fastest": number(setup.chance_fastest),
        "chance_faster_than_baseline": number(setup.chance_faster_than_baseline),
        "break_even_power": _plain(setup.break_even_power),
        "reason": None,
    }


def _plain(value: Figure | None) -> dict[str, Json]:
    if value is None:
        return {"value": None, "interval": [None, None]}
    return {"value": number(value.value), "interval": pair(value.interval)}
