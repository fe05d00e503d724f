"""What is known before the ride files are looked at: every prior that moves a number, in one place.

Values without a source are rules of thumb (common practice); each is wide enough that an informative day overrules
it, and is counted in the intervals.
"""

from __future__ import annotations

from typing import Final

CDA_MEAN: Final = 0.28  # [m^2] only to keep a day that cannot answer finite
CDA_SD: Final = 0.15  # [m^2]
WORKING_SPREAD: Final = 0.01  # relative, between repeats, while the noise is being found
CRR_MEAN: Final = 0.0045  # published bands of smooth to rough roads, 0.003 to 0.006 (from memory)
CRR_SD: Final = 0.0025
TRACK_CRR_MEAN: Final = 0.0022  # published band of tracks, 0.001 to 0.003 (from memory)
TRACK_CRR_SD: Final = 0.0015
CRR_SEPARATED: Final = 0.5  # rolling counts as measured once its error is below this share of the guess's

SPEED_SLOPE_SD: Final = 0.03  # relative fall of CdA when speed doubles, by flow or by effort
POWER_OFFSET_SD: Final = 1.0  # [W] zero offset left after zeroing
POWER_DRIFT_SD: Final = 0.7  # [W/h]
POWER_LAG_SD: Final = 0.5  # [s] left after whole records are shifted
TYRE_WARM_UP_SD: Final = 0.05  # relative, of Crr on the first metres
TYRE_WARM_UP_TIME: Final = 480.0  # [s]
AIR_SPEED_FACTOR_SD: Final = 0.05
AIR_SPEED_FACTOR_BY_SETUP_SD: Final = 0.003  # a position changes the flow the probe sees

WIND_UNKNOWN_SD: Final = 4.0  # [m/s] each component, without a report
WIND_REPORT_SD: Final = 0.7  # [m/s] each component, 1.2 m up, of a report without its own
WIND_REPORT_SHARE: Final = 0.25  # of the reported speed, on top
WIND_DRIFT_SD: Final = 0.6  # [m/s] each component, between runs an hour or more apart
WIND_DRIFT_SHARE: Final = 0.2  # of the reported wind speed, on top
WIND_DRIFT_HOURS: Final = 1.0  # [h]
DRAGGED_AIR_SD: Final = 0.12  # [m/s] air carried round an indoor track
DRAGGED_AIR_DRIFT_SD: Final = 0.02  # [m/s] between runs

SLOPE_SD: Final = 0.10  # of the road's slope
SLOPE_STEP_SD: Final = 0.025  # between knots 40 m apart; grows with the square root of the distance
SLOPE_BEND_SD: Final = 0.004  # of the slope's second difference at knots 40 m apart: roads bend gently
NODE_SPACING: Final = 40.0  # [m]
MOST_NODES: Final = 160
ALTITUDE_SD: Final = 2.0  # [m] of a head unit's altitude profile after averaging, per node
ALTITUDE_DRIFT: Final = 3.0  # [m] slow error of that profile along the venue

GUST_SD: Final = (0.5, 0.9)  # [m/s] median and log standard deviation
GUST_MODEL_SD: Final = (
    0.05  # relative error of the gust strength found, because gusts are no exact such process
)
GUST_TIME: Final = (11.0, 0.6)  # [s]
POWER_NOISE: Final = (0.03, 0.8)  # relative
SPEED_NOISE: Final = (0.03, 1.0)  # [m/s]
AIR_SPEED_NOISE: Final = (0.3, 0.8)  # [m/s]

# Bounds of the noise, in the order gust sd, gust time, power, speed, air speed. Below them no instrument works, and
# what the model leaves out (a profile between its knots, positions half a metre off) would pass for information.
NOISE_LEAST: Final = (0.02, 4.0, 0.015, 0.012, 0.05)
NOISE_START: Final = (
    0.15,
    8.0,
    0.015,
    0.012,
    0.1,
)  # from below: a search from above may settle on gusts of hours
NOISE_MOST: Final = (5.0, 45.0, 0.4, 0.5, 3.0)

# Spread of CdA between repeats of one setup. Median from the 0.66 % reproducibility of CdA in 30 coast-downs:
# R. Candau et al., Med. Sci. Sports Exerc. 31 (1999) 1441, doi:10.1097/00005768-199910000-00013 (abstract).
BETWEEN_RUN: Final = (0.0066, 0.8)  # relative to CdA
CDA_DRIFT_SD: Final = 0.004  # [1/h] relative drift of CdA common to all setups
COAST_DOWN_OFFSET_SD: Final = 0.05  # relative: legs at rest
