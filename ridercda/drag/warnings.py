"""Every warning a solve can give: its stable code and what it is about. The list is part of the contract."""

from __future__ import annotations

from collections.abc import Mapping
from types import MappingProxyType

WARNING_CODES: Mapping[str, str] = MappingProxyType(
    {
        "rolling-not-separated": "The speeds ridden do not tell drag area and rolling resistance apart.",
        "single-run-setup": "A setup was ridden only once, so its repeatability is taken from experience.",
        "order-confounded": "Setups were ridden in an order that a drift through the day would look like.",
        "run-disagrees": "A run disagrees with its repeats.",
        "run-left-out": "A run could not be used.",
        "spans-left-out": "Parts of runs were left out because nothing in the model explains them.",
        "power-lag": "Power and speed were recorded out of step; power was shifted.",
        "wind-not-modelled": "Headings are unknown, so the wind is not modelled.",
        "wind-unknown": "No wind report; the wind is taken from the rides alone.",
        "slope-wind-confounded": "Slope and steady wind are not told apart.",
        "air-assumed": "Temperature or pressure is assumed, not given.",
        "mass-assumed": "The mass of rider or bike is not given.",
        "circumference": "The wheel circumference is uncertain or was corrected.",
        "one-sided-power": "Power is measured on one side only.",
        "temperature-confounded": "Setups were ridden at different temperatures.",
        "tyres-confounded": "Setups on different tyres: drag area and rolling resistance share the difference.",
        "regression-disagrees": "The published regression on virtual elevation gives another difference.",
        "position": "A remark on where along the venue the runs lie.",
        "gusts-uncertain": "The strength of the gusts is poorly known; absolute values lean on it.",
        "no-baseline": "No setup is marked as the baseline; the first is taken.",
        "no-profile": "Nothing repeats on this road and its altitude is not trusted.",
        "implausible": "A drag area or rolling resistance lies outside what riders and tyres show.",
    }
)
